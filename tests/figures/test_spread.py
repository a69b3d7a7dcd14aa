"""Samples, exact limits, windows and shares of a spread, as a reader of the picture sees them."""

from __future__ import annotations

from functools import cache
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.figures import THEMES, WindowedSpread, contributions, spread
from hystkit.figures.contributions import KINDS, MOST_ROWS, ContributionsPicture
from hystkit.figures.graduation import Scale
from hystkit.figures.spread import SpreadPicture
from hystkit.figures.spread_key import measurand_places, span_text
from tests.benchmarks.spread import design as cut_out
from tests.figures.samples import Thermistor
from tests.figures.seen import faults, lines, pixels, texts

SAMPLES = 4096
WIDTHS = [360, 700, 1400]


def vent() -> hk.Design:
    """A greenhouse vent, whose sensor falls with the temperature."""
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {n: hk.Part(v, tol=0.01) for n, v in (("R_T", "22k1"), ("R_B", "21k"), ("R_F", "220k"))}
        | {"R_PU": "4k7"},
        supply=hk.Supply(5.0, tol=0.01),
        device=hk.Device(drop_low=0.2),
        signal=hk.signals.SensorDivider(hk.signals.Ntc("10k", 3950), "10k", span=(-10, 45)),
    )


def sensed() -> hk.Design:
    """The same with tolerances of the sensor, whose divider shares a loose supply."""
    sensor = hk.signals.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    signal = hk.signals.SensorDivider(sensor, hk.Part("10k", tol=0.01), span=(-10, 45))
    return vent().with_signal(signal).with_supply(tol="5 %")


@cache
def found(name: str) -> hk.Spread:
    designs = {
        "tank": header_tank(),
        "cut-out": cut_out(),
        "vent": vent(),
        "sensed": sensed(),
        "exact": header_tank().with_parts(
            **{n: hk.Part(p.value) for n, p in header_tank().parts.items()}
        ),
        "wide": header_tank().with_parts(
            **{n: hk.Part(p.value, tol=0.5) for n, p in header_tank().parts.items()}
        ),
        "close": header_tank().with_parts(R_F=hk.Part(100e6, tol=0.01)),
        "fails": header_tank().with_levels(
            V_OH=hk.Part(0.05, tol=0.5), V_OL=hk.Part(0.04, tol=0.5)
        ),
    }
    return hk.spread(designs[name], samples=SAMPLES)


NAMES = ("tank", "cut-out", "vent", "sensed", "exact", "wide", "close", "fails")


def said(picture: Any) -> set[str]:
    return {text for text, _ in texts(picture)}


def place(picture: SpreadPicture, gid: str) -> tuple[float, float]:
    """Left and right end of what has that name [px]."""
    (one,) = lines(picture, gid)
    return one[0], one[2]


def volts(picture: SpreadPicture, px: float) -> float:
    scale = picture._across
    return scale.low + (px - scale.start) / (scale.end - scale.start) * (scale.high - scale.low)


ends = st.none() | st.floats(-2, 8)


@st.composite
def windows(draw: Any) -> tuple[float | None, float | None] | None:
    if draw(st.booleans()):
        return None
    low, high = draw(ends), draw(ends)
    return (high, low) if low is not None and high is not None and high < low else (low, high)


@pytest.mark.parametrize("width", WIDTHS)
@settings(max_examples=15)
@given(name=st.sampled_from(NAMES), upper=windows(), lower=windows())
def test_no_label_overlaps_or_is_cut(width: int, name: str, upper: Any, lower: Any) -> None:
    assert faults(spread(found(name), upper=upper, lower=lower, width_px=width)) == []


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", NAMES)
def test_no_label_of_the_shares_overlaps_or_is_cut(width: int, name: str) -> None:
    assert faults(contributions(found(name), width_px=width)) == []


@pytest.mark.parametrize("theme", THEMES)
def test_trips_differ_in_colour_and_in_line(theme: str) -> None:
    picture = spread(found("tank"), theme=theme)
    upper, lower = picture._outlines["upper"], picture._outlines["lower"]
    assert upper.get_color() == THEMES[theme].upper
    assert lower.get_color() == THEMES[theme].lower
    assert lower.is_dashed()
    assert not upper.is_dashed()


@pytest.mark.parametrize("trip", ["upper", "lower"])
def test_brackets_stand_at_the_exact_limits(trip: str) -> None:
    picture = spread(found("tank"), width_px=1400)
    left, right = place(picture, f"limits {trip}")
    low, high = found("tank").extremes[trip]
    assert volts(picture, left) == pytest.approx(low, abs=1e-9)
    assert volts(picture, right) == pytest.approx(high, abs=1e-9)
    assert f"exact limits {span_text(low, high)}" in said(picture)


@pytest.mark.parametrize("trip", ["upper", "lower"])
def test_the_samples_stand_where_they_are(trip: str) -> None:
    picture = spread(found("cut-out"), width_px=1400)
    (fill,) = picture.figure.findobj(lambda artist: artist.get_gid() == f"samples {trip}")
    x, y = fill.get_xy()[:-1].T
    bar = float(np.diff(x).max())
    values = found("cut-out").samples[trip]
    assert volts(picture, x.min()) == pytest.approx(values.min(), abs=volts_of(picture, bar))
    assert volts(picture, x.max()) == pytest.approx(values.max(), abs=volts_of(picture, bar))
    # Where half of the area lies, half of the samples lie.
    heights, widths = picture._bottom - y[1:-1:2], np.diff(x[::2])
    below = np.cumsum(heights * widths)
    middle = x[2::2][np.searchsorted(below, below[-1] / 2)]
    assert volts(picture, middle) == pytest.approx(np.median(values), abs=volts_of(picture, bar))


def volts_of(picture: SpreadPicture, px: float) -> float:
    return volts(picture, px) - volts(picture, 0.0)


def test_both_trips_share_one_scale_of_heights() -> None:
    picture = spread(found("tank"), width_px=1400)
    areas = {}
    for trip in ("upper", "lower"):
        x, y = picture._fills[trip].get_xy()[:-1].T
        areas[trip] = float(np.sum((picture._bottom - y[1:-1:2]) * np.diff(x[::2])))
    assert areas["upper"] == pytest.approx(areas["lower"], rel=1e-9)


def test_windows_are_shaded_and_the_yield_is_written() -> None:
    tank = found("tank")
    middle = float(np.median(tank.samples["upper"]))
    picture = spread(tank, upper=(middle, 3.0), lower=(None, 3.0))
    left, right = place(picture, "window upper")
    assert volts(picture, left) == pytest.approx(middle)
    assert volts(picture, right) == pytest.approx(3.0)
    share = tank.yield_within(upper=(middle, 3.0), lower=(None, 3.0))
    shown = said(picture)
    assert f"yield {100 * share.value:.4g} %" in shown
    assert f"window {span_text(middle, 3.0)}: ! not always held" in shown
    assert "window up to 3 V: ✓ always held" in shown
    assert f"({100 * share.low:.4g} % to {100 * share.high:.4g} %, 95 % confidence)" in shown


def test_without_a_window_no_yield_is_claimed() -> None:
    shown = said(spread(found("tank")))
    assert not any("yield" in text or "window" in text for text in shown)


def test_limits_and_yield_with_the_signal_are_written_below_those_in_volts() -> None:
    one = found("sensed")
    upper = float(hk.trip_points(one.design).upper)
    picture = spread(one, upper=(upper - 0.05, upper + 0.05))
    shown = said(picture)
    for trip in ("upper", "lower"):
        low, high = one.measurand.extremes[one.measurand.ends[trip]]
        assert f"{low:.4g} to {high:.4g} °C with the signal" in shown
        assert f"{low:.4g} to {high:.4g} °C with the signal" in picture.alt
    share = one.measurand.yield_at(upper=(upper - 0.05, upper + 0.05))
    assert f"with the signal {100 * share.value:.4g} %" in shown
    assert not any("with the signal" in text for text in said(spread(found("tank"))))


def test_shares_are_those_in_the_measurand() -> None:
    one = found("sensed")
    picture = contributions(one)
    assert {"R_25", "B", "R_X"} <= set(picture._names)
    assert "in °C" in said(picture)
    # The lower trip is the warmer one of a sensor that falls.
    bars = {name: picture._bars["lower", name].get_width() for name in picture._names}
    for name, share in one.measurand.contributions["high"].items():
        assert bars[name] / picture._room == pytest.approx(share, abs=1e-9)


def test_a_share_below_one_is_never_written_as_all() -> None:
    many = hk.spread(header_tank(), samples=200_000)
    picture = spread(many, upper=(None, float(np.sort(many.samples["upper"])[-2])))
    share = picture._data.share
    assert share is not None
    assert share.passed == 199_999
    assert "yield 100 %" not in said(picture)


def test_where_not_all_combinations_switch_it_says_so() -> None:
    picture = spread(found("fails"), width_px=1400)
    assert any(text.startswith("no limits: not everywhere") for text in said(picture))
    assert "not everywhere" in picture.alt


@pytest.mark.parametrize("decreasing", [False, True])
def test_the_measurand_stands_at_its_volts(decreasing: bool) -> None:
    signal: Any = Thermistor() if decreasing else hk.signals.Linear(per_unit=1.2, span=(0, 2))
    scale = Scale(1.0, 3.0, 10.0, 500.0)
    _, places = measurand_places(scale, signal)
    assert len(places) >= 2
    for quantity, x in places.items():
        assert x == pytest.approx(scale.px(float(signal.volts(quantity))))
        assert 10 <= x <= 500


def test_a_moving_window_redraws_no_background() -> None:
    picture = SpreadPicture()
    tank, seen = found("tank"), hk.levels(header_tank())
    for edge in (2.25, 2.26, 2.27):
        picture.update(WindowedSpread(tank, seen, (edge, 2.32)))
        picture.png()
    assert picture.full_redraws == 1


@pytest.mark.parametrize("name", ["tank", "cut-out", "fails"])
def test_moved_and_drawn_afresh_look_the_same(name: str) -> None:
    picture = SpreadPicture("light", 700)
    for other in ("exact", name):
        one = found(other)
        picture.update(WindowedSpread(one, hk.levels(one.design), (2.2, 2.4), None))
        moved = pixels(picture.png(1)).astype(int)
    afresh = pixels(picture.full_png(1)).astype(int)
    assert np.abs(moved - afresh).max() <= 2
    shares = contributions(found(name), width_px=700)
    assert np.abs(pixels(shares.png(1)).astype(int) - pixels(shares.full_png(1))).max() <= 2


@pytest.mark.parametrize("kind", KINDS)
def test_bars_are_as_long_as_their_shares(kind: str) -> None:
    tank = found("tank")
    picture = contributions(tank)
    lengths = {n: picture._bars[kind, n].get_width() for n in tank.box.quantities}
    whole = sum(lengths.values())
    for name, share in tank.contributions[kind].items():
        assert lengths[name] / whole == pytest.approx(share, abs=1e-9)


def test_many_quantities_are_gathered_in_others() -> None:
    picture = contributions(found("cut-out"))
    assert len(found("cut-out").box.quantities) > MOST_ROWS == len(picture._names)
    for kind in KINDS:
        whole = sum(picture._bars[kind, name].get_width() for name in picture._names)
        assert whole == pytest.approx(picture._room)


def test_shares_are_told_in_words() -> None:
    alt = contributions(found("tank")).alt
    name, share = next(iter(found("tank").contributions["upper"].items()))
    assert alt.startswith(f"Shares in the variance in m: upper from {name} {share:.0%}")
    assert contributions(found("exact")).alt == "Nothing is uncertain."
    assert any("nothing is uncertain" in text for text in said(contributions(found("exact"))))


def test_bars_keep_their_places_as_values_change() -> None:
    picture = ContributionsPicture()
    for value in ("82k", "100k", "470k"):
        picture.update(hk.spread(header_tank().with_parts(R_F=hk.Part(value, tol=0.01))))
        picture.png()
    assert picture.full_redraws == 1

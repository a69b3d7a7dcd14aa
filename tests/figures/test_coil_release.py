"""Clamps of a coil: peak against release time."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from matplotlib.lines import Line2D

import hystkit as hk
from hystkit.figures import THEMES, CoilReleasePicture, coil_release
from hystkit.figures.coil_release import CLAMP_MARKS, Releases
from tests.figures.seen import faults, pixels, texts

#: Values from memory, typical of the trade.
RELAY = hk.drives.Coil("360", inductance="0.7", voltage=12)
NPN = hk.drives.Transistor(beta=100, v_ce_max=45)
CLAMPS = (
    hk.drives.Diode(),
    hk.drives.DiodeAndResistor("360"),
    hk.drives.DiodeAndZener(15),
    hk.drives.DiodeAndZener(40),
    hk.drives.ClampAtSwitch(36),
)


def drawn(picture: CoilReleasePicture, name: str) -> tuple[Any, Any]:
    (found,) = (a for a in picture.figure.findobj(Line2D) if a.get_gid() == name)
    x, y = (np.asarray(part, dtype=float) for part in found.get_data())
    return x, y


def points(picture: CoilReleasePicture) -> list[tuple[float, float]]:
    """Places of the marks within the area, in the order of the clamps."""
    right, left = drawn(picture, "supply")[0].max(), drawn(picture, "supply")[0].min()
    marked = [a for a in picture.figure.findobj(Line2D) if a.get_marker() not in ("None", "")]
    places = [[float(np.asarray(part)[0]) for part in a.get_data()] for a in marked]
    bottom = max(drawn(picture, "supply")[1]) + 40
    return [(x, y) for x, y in places if left <= x <= right and y <= bottom]


@st.composite
def releases(draw: Any) -> Releases:
    supply = draw(st.sampled_from([3.0, 5.0, 12.0, 24.0, 230.0]))
    coil = hk.drives.Coil(
        draw(st.floats(10, 10e3)), inductance=draw(st.floats(1e-3, 20)),
        voltage=hk.Part(supply, tol=draw(st.sampled_from([0.0, 0.1]))),
    )  # fmt: skip
    volts = st.floats(0.5, 10).map(lambda share: share * supply)
    clamp = st.one_of(
        st.just(hk.drives.Diode()),
        volts.map(hk.drives.DiodeAndZener),
        volts.map(lambda v: hk.drives.ClampAtSwitch(1.2 * supply + v)),
        st.floats(0.1, 5).map(lambda k: hk.drives.DiodeAndResistor(k * coil.resistance.value)),
    )
    clamps = draw(st.lists(clamp, min_size=1, max_size=len(CLAMP_MARKS)))
    rated = draw(st.none() | volts.map(lambda v: 1.2 * supply + v))
    switch = None if rated is None else hk.drives.Transistor(beta=100, v_ce_max=rated)
    return Releases(coil, tuple(clamps), switch)


@pytest.mark.parametrize("width", [340, 639, 640, 1400])
@settings(max_examples=25, deadline=None)
@given(data=releases())
def test_no_label_overlaps_or_is_cut(width: int, data: Releases) -> None:
    picture = coil_release(data.coil, data.clamps, switch=data.switch, width_px=width)
    assert faults(picture) == []


@pytest.mark.parametrize("scale", [1, 2])
@pytest.mark.parametrize("theme", THEMES)
def test_blitted_and_full_redraw_agree_pixel_by_pixel(theme: str, scale: int) -> None:
    picture = coil_release(RELAY, CLAMPS, switch=NPN, theme=theme, width_px=700)
    picture.png(scale)
    other = (*CLAMPS[:3], hk.drives.DiodeAndZener(38), CLAMPS[4])
    weaker = hk.drives.Transistor(beta=100, v_ce_max=50)
    picture.update(Releases(RELAY, other, weaker))
    blitted = pixels(picture.png(scale))
    afresh = coil_release(RELAY, other, switch=weaker, theme=theme, width_px=700)
    assert np.array_equal(blitted, pixels(picture.full_png(scale)))
    assert np.array_equal(blitted, pixels(afresh.full_png(scale)))


def test_points_lie_where_the_circuit_puts_them() -> None:
    """Peak by Kirchhoff; time of a constant voltage V by (L/R) ln((I0 + V/R)/(I1 + V/R))."""
    picture = coil_release(RELAY, CLAMPS, switch=NPN)
    found = points(picture)
    assert len(found) == len(CLAMPS)
    level = {name: drawn(picture, name)[1][0] for name in ("supply", "rated")}
    per_volt = (level["rated"] - level["supply"]) / (45.0 - 12.0)
    peaks = [12.0 + (y - level["supply"]) / per_volt for _, y in found]
    # The resistor carries the coil's 33.3 mA at first: 360 Ohm x 33.3 mA = 12 V.
    assert peaks == pytest.approx([12.7, 24.7, 27.7, 52.7, 36.0], abs=1e-6)
    current, left = 12 / 360, 0.1 * 12 / 360
    times = [
        0.7 / 360 * np.log((current + volts / 360) / (left + volts / 360))
        for volts in (0.7, 15.7, 40.7, 24.0)
    ]
    places = [found[n][0] for n in (0, 2, 3, 4)]
    origin = drawn(picture, "supply")[0].min()
    assert np.array(places) - origin == pytest.approx(
        np.array(times) * (places[0] - origin) / times[0], rel=1e-6
    )


def test_clamps_of_constant_voltage_lie_on_the_curve() -> None:
    picture = coil_release(RELAY, CLAMPS)
    x, y = drawn(picture, "curve")
    off = [abs(np.interp(px, x[::-1], y[::-1]) - py) for px, py in points(picture)]
    assert max(off[n] for n in (0, 2, 3, 4)) < 0.5
    assert off[1] > 5, "a resistor lets go more slowly than its peak would allow"


@pytest.mark.parametrize("theme", THEMES)
def test_a_peak_beyond_the_rating_is_marked_by_sign_and_colour(theme: str) -> None:
    shown = [text for text, _ in texts(coil_release(RELAY, CLAMPS, switch=NPN, theme=theme))]
    assert [text for text in shown if text.startswith("!")] == ["! diode and 40 V Zener diode"]
    # By hand: 24 V across the coil, t = L/R ln(100/70), 36 V times (L I0 - 24 V t0)/R of charge.
    assert {"rated 45 V", "supply 12 V", "36 V, 694 µs, 441 µJ"} <= set(shown)
    without = [text for text, _ in texts(coil_release(RELAY, CLAMPS, theme=theme))]
    assert not [text for text in without if text.startswith(("!", "rated"))]


def test_alt_tells_all_numbers() -> None:
    picture = coil_release(RELAY, CLAMPS[:2], switch=NPN)
    # By hand: 0.7 V times 53.9 uC; 0.972 ms times ln(34.31/4.31); the rest of 389 uJ in the coil.
    assert picture.alt == (
        "Peak on the switch and release time from a supply of 12 V, the switch is rated 45 V: "
        "diode: 12.7 V, 3.69 ms, 37.7 µJ; diode and 360 Ω: 24.7 V, 2.02 ms, 205 µJ."
    )


@pytest.mark.parametrize("count", [0, len(CLAMP_MARKS) + 1])
def test_what_cannot_be_told_apart_is_refused(count: int) -> None:
    with pytest.raises(hk.InputError, match="1 to 8"):
        coil_release(RELAY, [hk.drives.Diode()] * count)

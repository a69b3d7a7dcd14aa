"""A plant between its trips, as a reader of the picture sees it."""

from __future__ import annotations

import math
from functools import cache
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.figures import THEMES, CyclePicture, cycle
from hystkit.figures.cycle_axes import duration, time_unit
from tests.figures.seen import faults, pixels, texts

WIDTHS = [340, 560, 700, 1400]

#: Of the header tank: on at 0.80 m, off at 1.41 m.
LAGGED = hk.TwoLag(600, 60, on_level=4, off_level=-1.5, dead_time=20)
PLANTS: dict[str, Any] = {
    "tank": hk.Integrating(0.002, -0.001),
    "lagged": LAGGED,
    "lag": hk.FirstOrder(600, 4, -1.5),
    "stays on": hk.TwoLag(600, 60, 1.3, -1.5),
    "stays off": hk.TwoLag(600, 60, 4, 1.2, dead_time=20),
    "wrong way": hk.Integrating(-0.002, 0.001),
    "stays": hk.FirstOrder(600, 1.3, 1.2),
}


@cache
def found(name: str) -> hk.Cycling:
    if name == "start":
        steps = [(3600, -3), (4200, 3)]
        return hk.cycling(header_tank(), LAGGED, start=0, until=7200, disturbances=steps)
    if name == "volts":
        return hk.cycling(header_tank().with_signal(None), LAGGED)
    if name == "falling":
        return hk.cycling(vent(), hk.TwoLag(900, 60, 15, 40), load="low")
    if name == "out of reach":
        beyond = vent().with_levels(V_PU=24).with_parts(R_F="10k")
        return hk.cycling(beyond, LAGGED)
    if name == "narrow":
        return hk.cycling(header_tank().with_parts(R_F="100M"), hk.FirstOrder(600, 2, 0))
    return hk.cycling(header_tank(), PLANTS[name])


NAMES = (*PLANTS, "start", "volts", "falling", "out of reach", "narrow")


def vent() -> hk.Design:
    """A greenhouse vent, whose sensor falls with the temperature."""
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k", "R_PU": "4k7"}
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        parts,
        device=hk.Device(drop_low=0.2),
        supply=5.0,
        signal=hk.signals.SensorDivider(hk.signals.Ntc("10k", 3950), "10k", span=(-10, 45)),
    )


def said(picture: CyclePicture) -> set[str]:
    return {text for text, _ in texts(picture)}


def place(picture: CyclePicture, time: float, value: float) -> tuple[float, float]:
    """Where a time and a process value stand on the page [px]."""
    frame = picture._frame
    return frame.across.px(time), frame.up.px(value)


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", NAMES)
def test_no_label_overlaps_or_is_cut(width: int, name: str) -> None:
    assert faults(cycle(found(name), width_px=width)) == []


@pytest.mark.parametrize("width", [340, 700])
@settings(max_examples=20)
@given(
    tau=st.floats(1e-2, 1e6),
    lag=st.floats(0.001, 1),
    levels=st.tuples(st.floats(0.9, 40), st.floats(-40, 1.3)),
    dead=st.floats(0, 0.5),
    volts=st.booleans(),
    start=st.none() | st.floats(-2, 4),
)
def test_no_label_overlaps_at_any_setting(
    width: int,
    tau: float,
    lag: float,
    levels: tuple[float, float],
    dead: float,
    volts: bool,
    start: float | None,
) -> None:
    plant = hk.TwoLag(tau, lag * tau, *levels, dead_time=dead * tau)
    design = header_tank().with_signal(None) if volts else header_tank()
    picture = cycle(hk.cycling(design, plant, start=start), width_px=width)
    assert faults(picture) == []


@pytest.mark.parametrize("theme", THEMES)
def test_trips_differ_in_colour_line_and_marker(theme: str) -> None:
    picture = cycle(found("lagged"), theme=theme)
    upper, lower = picture._lines["upper"], picture._lines["lower"]
    assert (upper.get_color(), lower.get_color()) == (THEMES[theme].upper, THEMES[theme].lower)
    assert lower.is_dashed()
    assert not upper.is_dashed()
    markers = {trip: picture._switches[trip].get_marker() for trip in ("upper", "lower")}
    assert markers == {"upper": "^", "lower": "v"}
    assert picture._sensed.is_dashed()
    assert not picture._process.is_dashed()


@pytest.mark.parametrize("name", ["lagged", "falling"])
def test_trips_are_named_by_what_the_load_does_there(name: str) -> None:
    data = found(name)
    shown = said(cycle(data))
    trips = hk.trip_points(vent() if name == "falling" else header_tank())
    on_at, off_at = trips.measurand.switching(data.load)
    assert any(text.startswith(f"on at {on_at:.1f}"[:8]) for text in shown)
    assert any(text.startswith(f"off at {off_at:.1f}"[:9]) for text in shown)
    assert {f"upper  {float(trips.upper):.4g} V", f"lower  {float(trips.lower):.4g} V"} <= shown


def test_commands_stand_on_the_trips_and_turns_at_the_true_extremes() -> None:
    data = found("lagged")
    picture = cycle(data, width_px=1400)
    for does, trip in zip(("on", "off"), data.edges, strict=True):
        x, y = picture._switches[trip].get_data()
        assert len(x) >= 2
        assert y == pytest.approx([place(picture, 0, data.trips[trip])[1]] * len(x), abs=0.01), does
    _, turns = picture._turns.get_data()
    ends = [place(picture, 0, float(end))[1] for end in (data.cycle.high, data.cycle.low)]
    assert min(turns) == pytest.approx(ends[0], abs=0.01)
    assert max(turns) == pytest.approx(ends[1], abs=0.01)


def test_the_strip_has_the_times_of_the_cycle() -> None:
    data = found("tank")
    picture = cycle(data, width_px=1400)
    per_second = place(picture, 1, 1)[0] - place(picture, 0, 1)[0]
    spans = [ends[1][0] - ends[0][0] for ends in picture._on.get_segments()]
    gaps = [ends[1][0] - ends[0][0] for ends in picture._off.get_segments()]
    assert spans[1] / per_second == pytest.approx(float(data.cycle.on_time))
    assert gaps[0] / per_second == pytest.approx(float(data.cycle.off_time))


def test_the_waveform_is_that_of_the_run() -> None:
    data = found("start")
    picture = cycle(data, width_px=1400)
    frame = picture._frame
    times = np.linspace(0, data.length, 97)
    run = hk.simulate(
        LAGGED, *(data.trips[name] for name in data.edges), start=0, until=7200,
        disturbances=[(3600, -3), (4200, 3)],
    )  # fmt: skip
    for line, values in ((picture._process, run.sampled(times).process),
                         (picture._sensed, run.sampled(times).sensed)):  # fmt: skip
        drawn = np.interp(frame.across.px(times), *line.get_data())
        assert np.abs(drawn - frame.up.px(values)).max() < 0.5


def test_values_are_written_with_their_units() -> None:
    shown = said(cycle(found("tank")))
    # Band of 0.604 m, filled at 2 mm/s and drained at 1 mm/s.
    assert {"on 5.03 min", "off 10.1 min", "period 15.1 min", "33.3 % on"} <= shown
    assert {"on at 0.801 m", "off at 1.405 m", "highest 1.405 m", "lowest 0.801 m"} <= shown
    assert {"level / m", "time / min", "3.97 starts/h"} <= shown


def test_a_plant_without_sensor_lag_is_one_line() -> None:
    assert not {"process", "sensed"} & said(cycle(found("lag")))
    assert {"process", "sensed"} <= said(cycle(found("lagged")))


@pytest.mark.parametrize("name", ["stays on", "stays off", "wrong way", "stays", "out of reach"])
def test_where_it_does_not_cycle_it_says_which_way(name: str) -> None:
    data = found(name)
    picture = cycle(data, width_px=1400)
    assert not data.cycles
    assert f"! {data.message}" in said(picture)
    assert data.message in picture.alt
    assert not any("starts/h" in text or "% on" in text for text in said(picture))


@pytest.mark.parametrize(("name", "on"), [("stays on", True), ("stays off", False)])
def test_a_stuck_plant_is_drawn_until_it_rests(name: str, on: bool) -> None:
    data = found(name)
    picture = cycle(data)
    levels = {"stays on": 1.3, "stays off": 1.2}
    _, y = picture._process.get_data()
    assert y[-1] == pytest.approx(place(picture, 0, levels[name])[1], abs=3)
    assert data.phases[-1].on == on


def test_disturbances_are_marked() -> None:
    picture = cycle(found("start"), width_px=1400)
    at = [ends[0][0] for ends in picture._steps.get_segments()]
    assert at == pytest.approx([place(picture, time, 0)[0] for time in (3600, 4200)])
    assert "disturbance" in said(picture)
    assert "disturbance" not in said(cycle(found("lagged")))


def test_it_is_told_in_words() -> None:
    alt = cycle(found("lagged")).alt
    high, low = float(found("lagged").cycle.high), float(found("lagged").cycle.low)
    assert f"highest {high:.3f} m" in alt
    assert f"lowest {low:.3f} m" in alt
    assert "starts/h" in alt
    assert "on at 0.801 m, off at 1.405 m" in alt


@pytest.mark.parametrize("name", NAMES)
def test_moved_and_drawn_afresh_look_the_same(name: str) -> None:
    picture = CyclePicture("light", 700)
    for other in ("lagged", "start", name):
        picture.update(found(other))
        moved = pixels(picture.png(1)).astype(int)
    afresh = pixels(picture.full_png(1)).astype(int)
    assert np.abs(moved - afresh).max() <= 2


def test_a_small_move_redraws_no_background() -> None:
    picture = CyclePicture()
    for tau in (600, 601, 602):
        plant = hk.TwoLag(tau, 60, on_level=4, off_level=-1.5, dead_time=20)
        picture.update(hk.cycling(header_tank(), plant))
        picture.png()
    assert picture.full_redraws == 1


@pytest.mark.parametrize(
    ("length", "unit"), [(0.05, "ms"), (120, "s"), (8000, "min"), (30000, "h"), (1e6, "d")]
)
def test_time_has_a_fitting_unit(length: float, unit: str) -> None:
    assert time_unit(length)[1] == unit


@given(time=st.floats(1e-6, 1e8))
def test_a_duration_reads_back_to_three_digits(time: float) -> None:
    number, unit = duration(time).split()
    factor = {"µs": 1e-6, "ms": 1e-3, "s": 1, "min": 60, "h": 3600, "d": 86400}[unit]
    assert float(number) * factor == pytest.approx(time, rel=6e-3)
    assert duration(math.nan) == "—"

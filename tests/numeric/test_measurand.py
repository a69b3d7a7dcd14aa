"""Trips in the measurand: which edge switches a load on, against the output over a slow sweep."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.numeric.measurand import load_edges
from tests.circuit.strategies import VARIANTS, designs

STAGES = st.sampled_from(VARIANTS)


@given(designs(STAGES), st.sampled_from([-1.0, 1.0]), st.sampled_from(["high", "low"]))
def test_a_load_switches_where_the_output_does_over_a_sweep(
    design: hk.Design, slope: float, load: str
) -> None:
    trips = hk.trip_points(design)
    if not trips.ok:
        return
    # Zero volts stand for the quantity 100; the sensor rises or falls.
    design = design.with_signal(hk.signals.Linear(slope, -100 * slope, span=(0, 200)))
    found = hk.trip_points(design).measurand
    assert found is not None
    on_at, off_at = found.switching(load)
    assert {on_at, off_at} == {found.low, found.high}
    low, high = found.low - found.width, found.high + found.width
    for first, last in ((low, high), (high, low)):
        quantity = np.linspace(first, last, 401)
        swept = hk.response(design, np.arange(401.0), slope * (quantity - 100))
        (time,) = swept.switches
        before, after = swept.output[0], swept.output[-1]
        goes_on = (after > before) == (load == "high")
        switched_at = np.interp(time, np.arange(401.0), quantity)
        assert switched_at == pytest.approx(on_at if goes_on else off_at, rel=1e-9)


@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
@pytest.mark.parametrize("slope", [1.0, -1.0])
def test_levels_tell_the_same_state_on_either_side(sense: str, slope: float) -> None:
    parts = {"R_T": "30k", "R_B": "30k", "R_F": "300k"} | (
        {} if sense == "inverting" else {"R_I": "30k"}
    )
    signal = hk.signals.Linear(slope, 0 if slope > 0 else 5, span=(0, 5), unit="m", name="level")
    design = hk.Design(hk.Stage(sense), parts, supply=5.0, signal=signal)
    trips = hk.trip_points(design)
    found = trips.measurand
    assert found is not None
    # Beyond the trip at which it goes high the output is high, whichever way the sensor goes.
    beyond = found.low - 0.1 if found.high_at == "low" else found.high + 0.1
    volts = float(signal.volts(beyond))
    output = hk.response(design, np.array([0.0, 1.0]), np.array([volts, volts])).output[0]
    assert output == pytest.approx(hk.levels(design).output_high, abs=0.05)
    # Common practice: an inverting stage behind a rising sensor runs a pump that fills a tank.
    fills = (sense == "inverting") == (slope > 0)
    assert (found.high_at == "low") is fills
    assert found.switching() == ((found.low, found.high) if fills else (found.high, found.low))
    assert found.switching(load="low") == found.switching()[::-1]


def test_views_say_at_which_end_the_output_goes_high() -> None:
    stage = hk.Stage("inverting")
    parts = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
    rises = ("lower trip point; the output goes high here",
             "upper trip point; the output goes low here")  # fmt: skip
    for slope, zero, low_and_high in ((1.2, 0.6, rises), (-1.2, 3.0, rises[::-1])):
        signal = hk.signals.Linear(slope, zero, span=(0, 2), unit="m", name="level")
        found = hk.trip_points(hk.Design(stage, parts, supply=5.0, signal=signal))
        lines = str(found.measurand).splitlines()
        for line, end, told in zip(lines, ("low", "high"), low_and_high, strict=False):
            assert line.startswith(f"level, {end} ")
            assert line.endswith(told)
            assert told in found._repr_html_()


def test_arrays_stay_arrays() -> None:
    signal = hk.signals.Linear(-0.5, 5, span=(0, 10))
    parts = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
    design = hk.Design(hk.Stage("inverting"), parts, supply=5.0, signal=signal)
    found = hk.trip_points(design, R_F=[100e3, -1.0, 200e3]).measurand
    assert found is not None
    switching = found.switching()
    assert switching.on_at.shape == switching.off_at.shape == (3,)
    np.testing.assert_array_equal(np.isnan(switching.on_at), [False, True, False])
    assert np.nanmin(switching.on_at - switching.off_at) > 0


@pytest.mark.parametrize("load", ["hihg", "", None])
def test_an_unknown_output_state_is_refused(load: Any) -> None:
    with pytest.raises(hk.UnknownNameError) as caught:
        load_edges("inverting", load)
    assert "high, low" in caught.value.faults[0].have

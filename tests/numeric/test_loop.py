"""The switching loop: both paths against the oracle, point by point."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given

import hystkit as hk
from hystkit.numeric.operating import operating_point
from tests.circuit.strategies import designs
from tests.numeric import nodal
from tests.numeric.test_levels import vent


@given(designs())
def test_both_paths_run_through_the_oracle(design: hk.Design) -> None:
    loop = hk.loop(design)
    if not loop.levels.ok:
        return
    low, high = loop.axis
    inverting = design.stage.sense == "inverting"
    for path, ends, trip, before in (
        (loop.rising, (low, high), loop.levels.upper, "high" if inverting else "low"),
        (loop.falling, (high, low), loop.levels.lower, "low" if inverting else "high"),
    ):
        signal, output = path
        assert signal.tolist() == [ends[0], trip, trip, ends[1]]
        after = {"high": "low", "low": "high"}[before]
        for state, part in ((before, slice(0, 2)), (after, slice(2, 4))):
            oracle = nodal.voltages(
                design.elements, design.stage.output, state, design.values, signal[part].mean()
            )["out"]
            # Straight between its corners: the oracle half-way is the mean of the ends.
            scale = 1e-9 * (1 + np.abs(signal).max())
            assert output[part].mean() == pytest.approx(oracle.item(), rel=1e-9, abs=scale)


@given(designs())
def test_the_axis_shows_everything(design: hk.Design) -> None:
    loop = hk.loop(design)
    low, high = loop.axis
    found = loop.levels
    shown = [found.v_ee, found.v_cc, *(found.signal_span or ())]
    if found.ok:
        shown += [found.upper, found.lower]
    assert math.isfinite(low)
    assert all(low <= each <= high for each in shown)


def test_the_step_at_a_trip_is_the_swing_of_the_output() -> None:
    loop = hk.loop(vent())
    signal, output = loop.rising
    assert signal[1] == loop.levels.upper
    assert (output[1], output[2]) == (pytest.approx(loop.levels.output_high), pytest.approx(0.2))
    _, back = loop.falling
    assert (back[1], back[2]) == (pytest.approx(0.2), pytest.approx(output[0], abs=0.1))


def test_a_design_that_cannot_switch_has_no_path() -> None:
    loop = hk.loop(vent(levels={"V_L": -100}))
    assert loop.axis == (0.0, 5.0)
    assert np.isnan(loop.rising[0][1])


def test_results_that_hold_arrays_can_be_compared() -> None:
    design = vent()
    stage, time = design.stage, np.linspace(0.0, 1.0, 5)
    makers = (
        lambda: hk.loop(design),
        lambda: hk.response(design, time, 5 * time),
        lambda: operating_point(stage, "high", design.values, time),
    )
    for make in makers:
        one, other = make(), make()
        # numpy does not say whether two arrays are equal: such a result equals itself only.
        assert (one == one, one == other) == (True, False)

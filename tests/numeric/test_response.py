"""What the output does over time, against a switch that is stepped sample by sample."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.numeric.response import SHAPES, above_band
from tests.circuit.strategies import designs
from tests.numeric import nodal
from tests.numeric.test_levels import vent


def stepped(
    signal: np.ndarray[tuple[int], np.dtype[np.float64]], upper: float, lower: float
) -> list[bool]:
    """The same switch as one writes it first: one sample after the other."""
    above = bool(signal[0] > (upper + lower) / 2)
    states = []
    for value in signal:
        if value >= upper:
            above = True
        elif value <= lower:
            above = False
        states.append(above)
    return states


@given(st.lists(st.floats(-3, 3), min_size=1, max_size=40), st.floats(-2, 1), st.floats(0.1, 2))
def test_the_band_remembers(samples: list[float], lower: float, width: float) -> None:
    signal = np.array(samples)
    assert above_band(signal, lower + width, lower).tolist() == stepped(
        signal, lower + width, lower
    )


@given(designs(), st.integers(0, 2**32 - 1))
def test_the_output_is_that_of_the_oracle_in_its_state(design: hk.Design, seed: int) -> None:
    found = hk.levels(design)
    if not found.ok:
        return
    random = np.random.default_rng(seed)
    signal = random.uniform(found.lower - found.width, found.upper + found.width, 60)
    response = hk.response(design, np.arange(60.0), signal)
    above = np.array(stepped(signal, found.upper, found.lower))
    high_above = design.stage.sense == "non-inverting"
    oracle = {
        state: nodal.voltages(
            design.elements,
            design.stage.output,
            state,
            {name: np.full(60, value) for name, value in design.values.items()},
            signal,
        )["out"]
        for state in ("high", "low")
    }
    wanted = np.where(above == high_above, oracle["high"], oracle["low"])
    scale = 1e-9 * (1 + np.abs(signal).max())
    np.testing.assert_allclose(response.output, wanted, rtol=1e-9, atol=scale)
    assert response.switches.size == np.count_nonzero(np.diff(above.astype(int)))


@pytest.mark.parametrize("points", [11, 2001])
def test_a_ramp_switches_where_it_meets_the_trip(points: int) -> None:
    design = vent()
    found = hk.levels(design)
    time = np.linspace(0, 2, points)
    up = hk.response(design, time, 2.5 * time)
    assert up.switches == pytest.approx([found.upper / 2.5], rel=1e-12)
    down = hk.response(design, time, 5 - 2.5 * time)
    assert down.switches == pytest.approx([(5 - found.lower) / 2.5], rel=1e-12)


def test_a_triangle_switches_twice_a_period() -> None:
    design = vent()
    time, signal = hk.sweep(design, "triangle", cycles=3, period=0.5)
    response = hk.response(design, time, signal)
    assert response.switches.size == 6
    assert np.diff(response.switches[::2]) == pytest.approx(0.5)
    low, high = signal.min(), signal.max()
    rise = 2 * (high - low) / 0.5
    found = response.levels
    assert response.switches[:2] == pytest.approx(
        [(found.upper - low) / rise, 0.5 - (found.lower - low) / rise]
    )


def test_a_signal_inside_the_band_starts_from_the_nearer_end() -> None:
    design = vent()
    found = hk.levels(design)
    for share, state in ((0.4, "high"), (0.6, "low")):
        inside = np.full(3, found.lower + share * found.width)
        response = hk.response(design, [0, 1, 2], inside)
        assert response.switches.size == 0
        wanted = {"high": found.output_high, "low": found.output_low}[state]
        assert response.output == pytest.approx(np.full(3, wanted), abs=0.05)


@pytest.mark.parametrize("shape", SHAPES)
def test_a_sweep_runs_through_everything_the_loop_shows(shape: str) -> None:
    design = vent(signal=hk.signals.Linear(-1, 8, span=(0, 10)))
    time, signal = hk.sweep(design, shape, cycles=2, period=3.0, points=1201)
    assert (time[0], time[-1]) == (0.0, 3.0 if shape == "ramp" else 6.0)
    assert (signal.min(), signal.max()) == pytest.approx(hk.loop(design).axis)
    assert np.all(np.diff(time) > 0)
    assert signal[0] == signal.min()


def test_a_shape_that_there_is_not() -> None:
    with pytest.raises(hk.UnknownNameError) as caught:
        hk.sweep(vent(), "triangel")
    assert caught.value.faults[0].remedy == "triangle"


@pytest.mark.parametrize(
    ("time", "signal", "problem"),
    [
        ([0, 1], [0, 1, 2], "time and signal do not fit each other"),
        ([0], [0], "time and signal do not fit each other"),
        ([[0, 1]], [[0, 1]], "time and signal do not fit each other"),
        ([0, 1, 1], [0, 1, 2], "time does not rise"),
        ([0, 2, 1], [0, 1, 2], "time does not rise"),
        ([0, np.nan, 1], [0, 1, 2], "time does not rise"),
        ([0, 1, 2], [0, np.nan, 2], "the signal is not finite"),
    ],
)
def test_arrays_that_do_not_fit(time: object, signal: object, problem: str) -> None:
    with pytest.raises(hk.InputError, match=problem):
        hk.response(vent(), time, signal)  # type: ignore[arg-type]


def test_a_design_that_cannot_switch_has_no_output() -> None:
    response = hk.response(vent(levels={"V_L": -100}), [0, 1], [0, 5])
    assert np.isnan(response.output).all()
    assert response.switches.size == 0

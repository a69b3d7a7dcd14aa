"""The joint simulation: it hunts where the margin is negative, and nowhere else."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.load_step.crossing import first_crossing
from tests.circuit.strategies import designs
from tests.numeric import nodal


def cutout() -> hk.Design:
    stage = hk.Stage("non-inverting", reference="source")
    parts = {"R_I": "220k", "R_G": "57k6", "R_F": "909k"}
    return hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5})


LOADS, GROUNDS = st.sampled_from(["high", "low"]), st.sampled_from(["stage", "load"])
RESISTANCE = st.just(0.0) | st.floats(0, 0.5)


@settings(max_examples=300, deadline=None)
@given(
    design=designs(), current=st.floats(-10, 10),
    resistances=st.tuples(RESISTANCE, RESISTANCE, RESISTANCE),
    relaxation=st.just(0.0) | st.floats(-1, 1), tau=st.just(0.0) | st.floats(1e-3, 10),
    load=LOADS, sensor_ground=GROUNDS,
)  # fmt: skip
def test_it_hunts_exactly_where_the_margin_is_negative(
    design: hk.Design, current: float, resistances: tuple[float, ...], relaxation: float,
    tau: float, load: str, sensor_ground: str,
) -> None:  # fmt: skip
    supply, ground, source = resistances
    found = hk.load_step(
        design, current, supply_resistance=supply, ground_resistance=ground,
        source_resistance=source, relaxation=relaxation, load=load, sensor_ground=sensor_ground,
    )  # fmt: skip
    assume(np.isfinite(found.margin))
    assume(abs(found.margin) > 1e-6 * max(1.0, abs(float(found.on_at))))
    run = found.hunt(relaxation_time=tau)
    assert run.hunts == (found.margin < 0)
    if found.margin > 0:
        assert run.complete
        assert run.changes == (1, 1)
        assert list(run.states) == [True, False]
        assert np.isnan(run.period)


@settings(max_examples=60, deadline=None)
@given(sag=st.floats(0, 3), rise=st.floats(-1, 1), tau=st.floats(0, 5), load=LOADS, ground=GROUNDS)
def test_ratiometric_sensors_hunt_by_their_margin_too(
    sag: float, rise: float, tau: float, load: str, ground: str
) -> None:
    wiper = hk.signals.Potentiometer("10k", span=(0, 90), unit="°", name="vane")
    parts = {"R_T": "22k", "R_B": "22k", "R_F": "220k"}
    vane = hk.Design(hk.Stage("inverting"), parts, supply=5.0, signal=wiper)
    found = hk.load_step(vane, 1.0, supply_resistance=sag, ground_resistance=0.1,
                         relaxation=rise, load=load, sensor_ground=ground)  # fmt: skip
    assume(abs(found.margin) > 1e-6)
    # Both edges agree on the sign, though a share of V_CC scales them.
    assert (found.margin_on > 0) == (found.margin_off > 0)
    assert found.hunt(relaxation_time=tau).hunts == (found.margin < 0)


@pytest.mark.parametrize(("current", "load"), [(9.0, "low"), (35.0, "high"), (35.0, "low")])
def test_against_fine_steps_on_the_node_equations(current: float, load: str) -> None:
    """Steps of fixed length; at each the inputs are compared by modified nodal analysis."""
    design, resistance, tau, delay = cutout(), 0.035, 0.4, 0.05
    current = current if load == "high" else -current
    relaxation = 0.6 if load == "high" else -0.6
    found = hk.load_step(design, current, source_resistance=resistance, relaxation=relaxation,
                         supply_resistance=0.002, load=load)  # fmt: skip
    run = found.hunt(slope=0.4, relaxation_time=tau, delay=delay)
    step = 1e-3
    start = run.sampled(2).signal[0]
    rising = run.slope > 0
    on, creep, pending, changes = False, 0.0, [], []
    is_loaded = False
    for n in range(int(run.turned_at / step)):
        time = n * step
        while pending and pending[0][0] <= time:
            is_loaded = pending.pop(0)[1]
        creep += (is_loaded - creep) * -np.expm1(-step / tau)
        seen = start + (0.4 if rising else -0.4) * time - relaxation * creep
        seen -= is_loaded * current * resistance
        values = dict(design.values)
        for name in ("V_CC", "V_OH"):
            values[name] -= is_loaded * current * 0.002
        state = load if on else ("low" if load == "high" else "high")
        at = nodal.unknowns(design.elements, "push-pull", state, values, seen)
        above = bool(at["plus"][0] > at["minus"][0])
        if above != (state == "high"):
            on = not on
            pending.append((time + delay, on))
            changes.append(time)
    there = run.times[run.times <= run.turned_at]
    assert len(changes) == len(there)
    # Each change comes up to a step late, and moves those after it.
    assert np.all(np.abs(there - changes) <= 3 * step * np.arange(1, len(there) + 1))
    assert run.hunts == (len(changes) > 1) == (found.margin < 0)


def test_hunting_at_the_pace_of_the_load() -> None:
    """A step alone, no relaxation: on and off in turns, one delay each."""
    found = hk.load_step(cutout(), 40.0, source_resistance="35m")
    run = found.hunt(delay="20m")
    assert run.hunts
    assert run.complete
    assert run.period == pytest.approx(0.04, rel=1e-9)
    zone = -float(found.margin) / run.slope
    assert run.changes[0] == pytest.approx(zone / 0.02, abs=3)


def test_samples_tell_what_the_stage_sees() -> None:
    found = hk.load_step(cutout(), 9.0, source_resistance="35m", relaxation=0.5)
    run = found.hunt(relaxation_time=5.0, delay=0.1)
    seen = run.sampled(4001)
    assert seen.time[-1] == run.ended_at
    off = ~seen.load
    first_off = off & (seen.time < run.times[0])
    np.testing.assert_allclose(seen.seen[first_off], seen.signal[first_off])
    # Long after the load came on, all of its effect is there.
    late = seen.load & (seen.time > run.times[0] + 60) & (seen.time < run.times[1])
    np.testing.assert_allclose(seen.seen[late], seen.signal[late] - 0.815, atol=1e-5)
    np.testing.assert_allclose(np.unique(seen.trip[off & seen.on]), found.without.lower)
    assert seen.signal[0] == pytest.approx(seen.signal[-1])
    # Released when what it sees is down at the lower trip.
    last = np.searchsorted(seen.time, run.times[-1]) - 1
    assert seen.seen[last] == pytest.approx(float(found.during.lower), abs=2e-3)


def test_too_many_changes_end_the_simulation() -> None:
    found = hk.load_step(cutout(), 40.0, source_resistance="35m")
    run = found.hunt(slope=1e-6, most=10)
    assert not run.complete
    assert run.hunts
    assert run.times.size == 10
    assert "not simulated" in run.to_text()


def test_a_fast_signal_runs_past_the_effect() -> None:
    """Hunting needs a signal that is slow against the relaxation; a fast one switches once."""
    found = hk.load_step(cutout(), 9.0, source_resistance="35m", relaxation=1.2)
    assert found.margin < 0
    assert not found.hunt(slope=10.0, relaxation_time=20.0).hunts
    assert found.hunt(relaxation_time=20.0).hunts


def test_a_relaxation_without_time_constant_comes_after_the_step() -> None:
    """Opposed to the step it comes too late, however fast it is."""
    found = hk.load_step(cutout(), 10.0, source_resistance=0.15, relaxation=-1.0)
    assert found.margin < 0
    assert found.hunt().hunts
    assert found.hunt(relaxation_time=1e-6).hunts


@settings(max_examples=200)
@given(a=st.floats(-5, 5), b=st.floats(-5, 5), c=st.floats(-5, 5), tau=st.floats(0.01, 10))
def test_first_crossing_is_the_first(a: float, b: float, c: float, tau: float) -> None:
    time = np.linspace(0, 8, 4001)
    level = a + b * time + c * np.exp(-time / tau)
    found = first_crossing(a, b, c, tau, 8.0)
    sampled = np.flatnonzero(level >= 1e-9)
    if found is None:
        assert level.max() < 1e-9
        return
    assert np.all(level[time < found - 1e-9] < 1e-9)
    assert a + b * found + c * np.exp(-found / tau) == pytest.approx(max(a + c, 0), abs=1e-9)
    if sampled.size:
        assert found <= time[sampled[0]] + 1e-9


def test_refusals() -> None:
    found = hk.load_step(cutout(), 9.0, source_resistance="35m")
    with pytest.raises(hk.InputError) as caught:
        found.hunt(slope=-1.0, relaxation_time="5 V", delay=0, most=1)
    assert len(caught.value.faults) == 4
    wrong: Any = hk.load_step(cutout(), [9.0, 10.0], source_resistance="35m")
    with pytest.raises(hk.InputError, match="no single stage"):
        wrong.hunt()
    with pytest.raises(hk.InputError, match="no single stage"):
        hk.load_step(cutout(), 100.0, supply_resistance=0.1).hunt()

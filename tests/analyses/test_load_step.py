"""What a load does to its stage: shifts and margins against the nodal oracle and by hand."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.load_step.result import Holds
from tests.numeric import nodal
from tests.numeric.circuits import a_design

STAGES = hk.Stage.all()
LOADS = ("high", "low")


def cutout(signal: Any = None) -> hk.Design:
    """Scenario of our own: a field station's battery cut-out, 11.44 V and 12.65 V."""
    stage = hk.Stage("non-inverting", reference="source")
    parts = {"R_I": "220k", "R_G": "57k6", "R_F": "909k"}
    return hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5}, signal=signal)


def test_battery_cut_out() -> None:
    """9 A through 35 mOhm and 0.5 V of relaxation: 0.815 V of the width of 1.21 V, 0.40 V left."""
    found = hk.load_step(cutout(), "9 A", source_resistance="35m", relaxation="500m")
    assert found.width == pytest.approx(1.21, abs=5e-3)
    assert found.signal_shift == pytest.approx(-(9 * 0.035 + 0.5), rel=1e-12)
    assert found.threshold_shift == 0
    assert found.closing == pytest.approx(0.815, rel=1e-12)
    assert found.margin == pytest.approx(0.40, abs=6e-3)
    assert found.ok
    assert not found.harmless
    assert found.on_at == pytest.approx(12.65, abs=5e-3)
    # It opens at 11.44 V under load, which is this much at rest.
    assert found.off_at == pytest.approx(11.44 + 0.815, abs=5e-3)


def test_charger_of_the_same_battery() -> None:
    """On at the lower trip, a charger lifts the signal back towards the upper one."""
    stage = hk.Stage("inverting", reference="source")
    parts = {"R_R": "10k", "R_F": "90k"}
    charger = hk.Design(stage, parts, supply=10.0, levels={"V_REF": 5.0})
    lifted = hk.load_step(charger, -2.0, source_resistance=0.2)
    assert lifted.signal_shift == pytest.approx(0.4)
    assert lifted.margin == pytest.approx(float(lifted.width) - 0.4)
    # A load on in the same state sinks the signal further: harmless, and told.
    sunk = hk.load_step(charger, 2.0, source_resistance=0.2)
    assert sunk.harmless
    assert sunk.margin == pytest.approx(float(sunk.width) + 0.4)
    assert "does not drive the stage back" in sunk.message


@pytest.mark.parametrize("load", LOADS)
@pytest.mark.parametrize("stage", STAGES, ids=lambda s: s.title)
def test_without_resistance_the_margin_is_the_width(stage: hk.Stage, load: str) -> None:
    found = hk.load_step(a_design(stage), 20.0, load=load)
    assert found.margin == found.margin_on == found.margin_off == found.width
    assert found.closing == 0
    noisy = hk.load_step(a_design(stage), 20.0, load=load, noise_rms=0.01, sigmas=5)
    assert noisy.margin == pytest.approx(float(found.width) - 0.05, rel=1e-12)


@pytest.mark.parametrize("sensor_ground", ["stage", "load"])
@pytest.mark.parametrize("load", LOADS)
@pytest.mark.parametrize("stage", STAGES, ids=lambda s: s.title)
def test_shifts_against_the_node_equations(stage: hk.Stage, load: str, sensor_ground: str) -> None:
    """The trips under load come from modified nodal analysis with the rails that are left."""
    device = hk.Device(drop_high=0.3, drop_low=0.2, r_low=50.0, leakage=1e-6)
    design = a_design(stage, device=device)
    current, supply, ground, source = 2.0, 0.11, 0.07, 0.05
    found = hk.load_step(
        design, current, supply_resistance=supply, ground_resistance=ground,
        source_resistance=source, load=load, sensor_ground=sensor_ground,
    )  # fmt: skip
    # Written out here once more: what follows the rails, as the stage's own ground sees them.
    falls = {"V_CC": current * (supply + ground), "V_EE": current * ground}
    falls |= {"V_PU": falls["V_CC"], "V_OH": falls["V_CC"]}
    falls["V_OL"] = falls["V_EE"] if stage.supply == "split" else 0.0
    loaded = {n: v - falls.get(n, 0.0) for n, v in design.values.items()}
    back_state = load  # the trip that turns the stage back leaves the state of the load
    first_state = "low" if load == "high" else "high"
    on_at = nodal.trip(design.elements, stage.output, first_state, design.values).item()
    back = [nodal.trip(design.elements, stage.output, back_state, values).item()
            for values in (design.values, loaded)]  # fmt: skip
    shift = -current * (source + (ground if sensor_ground == "load" else 0.0))
    assert found.on_at == pytest.approx(on_at, rel=1e-9, abs=1e-12)
    assert found.signal_shift == pytest.approx(shift, rel=1e-9)
    assert found.threshold_shift == pytest.approx(back[1] - back[0], rel=1e-8, abs=1e-10)
    left = abs(on_at - back[0]) - np.sign(on_at - back[0]) * (back[1] - back[0] - shift)
    assert found.margin_on == pytest.approx(left, rel=1e-8, abs=1e-10)
    assert found.margin_off == pytest.approx(left, rel=1e-8, abs=1e-10)


@given(sag=st.floats(0.0, 3.0), load=st.sampled_from(LOADS))
def test_a_ratiometric_sensor_cancels_the_supply(sag: float, load: str) -> None:
    """Thresholds and sensor are shares of V_CC: the measurand sees nothing of its fall."""
    sensor = hk.signals.SensorDivider(
        hk.signals.Ntc("10k", b=3950), "10k", span=(-20, 60), unit="°C", name="air"
    )
    parts = {"R_T": "22k1", "R_B": "21k0", "R_F": "220k"}
    vent = hk.Design(hk.Stage("inverting"), parts, supply=5.0, signal=sensor)
    found = hk.load_step(vent, 1.0, supply_resistance=sag, load=load)
    still = hk.load_step(vent, 1.0, load=load)
    assert found.margin_off == pytest.approx(float(still.width), rel=1e-9)
    assert found.margin_on == pytest.approx(float(still.width) * (1 - sag / 5), rel=1e-9)
    assert found.measurand is not None
    assert still.measurand is not None
    assert found.measurand.off_at == pytest.approx(float(still.measurand.off_at), rel=1e-9)
    # With a sensor of its own supply, the same fall moves the band past it.
    own = vent.with_signal(hk.signals.Linear(0.05, span=(0, 60), unit="°C", name="air"))
    moved = hk.load_step(own, 1.0, supply_resistance=sag, load=load)
    assert moved.threshold_shift == pytest.approx(found.threshold_shift)
    assert moved.signal_shift == 0


def test_a_battery_behind_an_attenuator() -> None:
    """The fall counts ahead of the attenuator; the margin in volts of the battery stays."""
    stage = hk.Stage("non-inverting", reference="source")
    parts = {"R_I": "10k", "R_F": "470k"}
    attenuated = hk.Design(
        stage, parts, supply=5.0, levels={"V_REF": 2.5},
        signal=hk.signals.Attenuator("300k", "100k", span=(8, 15), name="battery"),
    )  # fmt: skip
    found = hk.load_step(attenuated, 3.0, source_resistance="50m", relaxation=0.02)
    assert found.signal_shift == pytest.approx(-(0.15 + 0.02) / 4, rel=1e-12)
    assert found.measurand is not None
    assert found.measurand.margin == pytest.approx(4 * float(found.margin), rel=1e-12)
    assert found.measurand.on_at == pytest.approx(4 * float(found.on_at), rel=1e-12)
    direct = hk.load_step(cutout(hk.signals.Linear(1.0, span=(9, 15), unit="V")), 9, relaxation=0.5)
    assert direct.signal_shift == pytest.approx(-0.5)
    # A sensor of anything else gives way at its own terminals.
    level = attenuated.with_signal(hk.signals.Linear(0.1, span=(0, 50), unit="°C"))
    assert hk.load_step(level, 3.0, source_resistance=0.05).signal_shift == pytest.approx(-0.15)


def test_ground_rise_of_the_stage_or_of_the_sensor() -> None:
    """10 A in 5 mOhm lift the stage by 50 mV: a sensor on its ground rises along."""
    stage = hk.Stage("inverting", reference="source")
    parts = {"R_R": "10k", "R_F": "990k"}
    design = hk.Design(stage, parts, supply=hk.Supply(5.0), levels={"V_REF": 2.5, "V_OH": 5.0})
    near = hk.load_step(design, 10.0, ground_resistance="5m", load="low")
    far = hk.load_step(design, 10.0, ground_resistance="5m", load="low", sensor_ground="load")
    # Levels that are given do not follow the rail, so that only the sensor is left to move.
    assert near.signal_shift == near.threshold_shift == 0
    assert far.signal_shift == pytest.approx(-0.05)
    assert far.width == pytest.approx(0.05)
    assert far.margin == pytest.approx(0.0, abs=1e-12)


def test_relaxation_against_the_step_counts_at_its_worst() -> None:
    """The step alone turns the stage back before the relaxation would undo it."""
    found = hk.load_step(cutout(), 10.0, source_resistance=0.15, relaxation=-1.0)
    assert found.signal_shift == pytest.approx(-1.5)
    assert found.margin_on == pytest.approx(float(found.width) - 1.5)
    assert found.margin_off == pytest.approx(float(found.width) - 1.5)
    assert found.status == Holds.HUNTS


@settings(max_examples=40)
@given(
    stage=st.sampled_from(STAGES), load=st.sampled_from(LOADS), current=st.floats(-10, 10),
    relaxation=st.floats(-1, 1), r=st.tuples(*[st.floats(0, 0.1)] * 3),
    sensor_ground=st.sampled_from(["stage", "load"]),
)  # fmt: skip
def test_the_margin_is_width_less_closing(
    stage: hk.Stage, load: str, current: float, relaxation: float, r: tuple[float, ...],
    sensor_ground: str,
) -> None:  # fmt: skip
    found = hk.load_step(
        a_design(stage), current, supply_resistance=r[0], ground_resistance=r[1],
        source_resistance=r[2], relaxation=relaxation, load=load, sensor_ground=sensor_ground,
    )  # fmt: skip
    rises = found.without.upper == found.on_at
    apart = found.threshold_shift - found.signal_shift
    assert found.margin_on == pytest.approx(found.width - (apart if rises else -apart))
    # Without a ratiometric sensor both edges tell the same.
    assert found.margin_off == pytest.approx(found.margin_on, abs=1e-9)


def test_arrays_are_scalars_side_by_side() -> None:
    currents, resistances = np.array([1.0, 9.0, 40.0]), np.array([[0.01], [0.035]])
    found = hk.load_step(cutout(), currents, source_resistance=resistances, noise_rms=0.01)
    assert found.margin.shape == found.status.shape == (2, 3)
    for row, column in np.ndindex(2, 3):
        one = hk.load_step(cutout(), currents[column],
                           source_resistance=resistances[row, 0], noise_rms=0.01)  # fmt: skip
        assert found.margin[row, column] == pytest.approx(float(one.margin))
        assert found.status[row, column] == one.status
    assert found.message.startswith("5 of 6 hold")
    assert "5" in found.to_text()


def test_status_of_each_kind() -> None:
    found = hk.load_step(cutout(), [1.0, 34.0, 60.0], source_resistance="35m", noise_rms="10m")
    assert list(found.status) == [Holds.OK, Holds.NOISE, Holds.HUNTS]
    assert list(found.ok) == [True, False, False]
    ones = [
        hk.load_step(cutout(), amperes, source_resistance="35m", noise_rms="10m").message
        for amperes in (1.0, 34.0, 60.0)
    ]
    assert [text.split(",")[0].split(":")[0] for text in ones] == ["holds", "may hunt", "hunts"]


def test_a_supply_that_breaks_down_has_no_trips() -> None:
    found = hk.load_step(cutout(), [1.0, 100.0], supply_resistance=0.1)
    assert list(found.status) == [Holds.OK, Holds.NO_TRIPS]
    assert np.isnan(found.margin[1])
    pot = cutout(hk.signals.Potentiometer("10k", span=(0, 90), unit="°"))
    broken = hk.load_step(pot, 100.0, supply_resistance=0.1)
    assert broken.status == Holds.NO_TRIPS
    assert np.isnan(broken.off_at)
    unknown = hk.load_step(cutout(), [1.0, np.nan], source_resistance=0.1)
    assert list(unknown.status) == [Holds.OK, Holds.NO_TRIPS]


def test_an_element_below_zero_stops_nothing() -> None:
    found = hk.load_step(cutout(), 9.0, source_resistance=[35e-3, -1, np.nan], relaxation=0.5)
    alone = hk.load_step(cutout(), 9.0, source_resistance="35m", relaxation=0.5)
    assert found.margin[0] == pytest.approx(alone.margin)
    assert np.isnan(found.margin[1:]).all()
    assert list(found.status) == [Holds.OK, Holds.NO_TRIPS, Holds.NO_TRIPS]


def test_refusals_come_together() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.load_step(
            "cutout", "9 V", supply_resistance=-1, source_resistance=["x"], load="on",  # type: ignore[arg-type, list-item]
            sensor_ground="earth", noise_rms=[0.1, 0.2], sigmas=[1, 2, 3],
        )  # fmt: skip
    problems = [fault.problem for fault in caught.value.faults]
    assert problems == [
        "design is not a Design.",
        "current is not in A.",
        "supply_resistance is negative.",
        "source_resistance is not a number.",
        "there is no output state 'on' here.",
        "there is no ground of a sensor 'earth' here.",
        "these arrays do not broadcast.",
    ]

"""A sensor and a stage on one supply: what cancels, and what breaks it."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.signals import Signal
from tests.circuit.signals.strategies import sensors, spans
from tests.circuit.strategies import within

S = hk.signals
SUPPLIES = np.linspace(3.0, 15.0, 49)
STAGES = [
    hk.Stage("inverting"),
    hk.Stage("non-inverting"),
    hk.Stage("inverting", output="open-collector"),
]
PARTS = {
    "R_T": "22k1",
    "R_B": "21k0",
    "R_F": "220k",
    "R_PU": "4k7",
    "R_I": "10k",
    "R_1": "10k",
    "R_2": "12k",
}
VENT = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-20, 60))


def designed(stage: hk.Stage, signal: Signal, **device: Any) -> hk.Design:
    parts = {name: PARTS[name] for name in stage.required}
    return hk.Design(stage, parts, supply=5.0, device=hk.Device(**device), signal=signal)


def moves(design: hk.Design, **overrides: Any) -> float:
    """Largest move of a trip in the measurand while the supply goes through its range."""
    fixed = hk.trip_points(design).measurand
    swept = hk.trip_points(design, V_CC=SUPPLIES, **overrides).measurand
    assert fixed is not None
    assert swept is not None
    assert swept.low.shape == SUPPLIES.shape
    return float(
        max(
            np.max(np.abs(swept.low - fixed.low) / abs(fixed.low)),
            np.max(np.abs(swept.high - fixed.high) / abs(fixed.high)),
        )
    )


@pytest.mark.parametrize("stage", STAGES, ids=str)
@pytest.mark.parametrize("where", ["bottom", "top"])
def test_the_supply_cancels_where_all_follow_it(stage: hk.Stage, where: str) -> None:
    signal = S.SensorDivider(S.Ntc("10k", 3950), "10k", where, span=(-20, 60))
    assert moves(designed(stage, signal)) < 1e-12
    assert moves(designed(stage, S.Potentiometer("10k", span=(10, 90)))) < 1e-12


@given(sensors().flatmap(lambda sensor: st.tuples(st.just(sensor), spans(sensor))), within(0.5, 2))
def test_it_cancels_for_every_sensor(given_sensor: tuple[Any, Any], share: float) -> None:
    sensor, span = given_sensor
    other = share * float(sensor.resistance(sum(span) / 2))
    design = designed(STAGES[0], S.SensorDivider(sensor, other, span=span))
    here = hk.trip_points(design)
    there = hk.trip_points(design.with_supply(v_cc=11.0))
    assert there.upper / here.upper == pytest.approx(11 / 5, rel=1e-12)
    assert here.measurand is not None
    assert there.measurand is not None
    for end in ("low", "high"):
        assert getattr(there.measurand, end) == pytest.approx(
            getattr(here.measurand, end), rel=1e-10, abs=1e-9, nan_ok=True
        )


def test_head_room_of_the_output_breaks_it() -> None:
    design = designed(STAGES[2], VENT, drop_low=0.2)
    assert moves(design) > 1e-3


def test_an_excitation_of_its_own_breaks_it() -> None:
    signal = S.SensorDivider(S.Ntc("10k", 3950), "10k", excitation=5.0, span=(-20, 60))
    swept = hk.trip_points(designed(STAGES[0], signal), V_CC=np.array([4.5, 5.0])).measurand
    assert swept is not None
    assert abs(np.ptp(swept.low)) > 3


def test_a_reference_of_its_own_breaks_it() -> None:
    stage = hk.Stage("inverting", reference="source")
    design = hk.Design(
        stage, {"R_R": "10k", "R_F": "220k"}, supply=5.0, levels={"V_REF": 2.5}, signal=VENT
    )
    assert moves(design) > 0.01


def test_greenhouse_vent() -> None:
    """Opens at 28.1 °C and closes at 24.0 °C, worked by hand from the node equation."""
    design = hk.Design(
        STAGES[2],
        {name: PARTS[name] for name in STAGES[2].required},
        supply=5.0,
        device=hk.Device(drop_low=0.2),
        signal=VENT,
    )
    found = hk.trip_points(design).measurand
    assert found is not None
    assert found.low_is == "upper"  # the voltage falls as it gets warmer
    assert round(found.high, 1) == 28.1
    assert round(found.low, 1) == 24.0
    conductance = 1 / 22.1 + 1 / 21.0
    upper = (5 / 22.1 + 5 / 224.7) / (conductance + 1 / 224.7)
    lower = (5 / 22.1 + 0.2 / 220) / (conductance + 1 / 220)
    for volts, celsius in ((upper, found.low), (lower, found.high)):
        kelvin = 1 / (np.log(volts / (5 - volts)) / 3950 + 1 / 298.15)
        assert celsius == pytest.approx(kelvin - 273.15, abs=1e-9)
    assert found.width == pytest.approx(found.high - found.low)

"""Trips with the signal's own source resistance: fixed points, closed form, independent solver."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.numeric.source import has_resistance, with_source
from tests.numeric import nodal

S = hk.signals
VALUES = {
    "R_T": 22.1e3,
    "R_B": 21e3,
    "R_R": 10e3,
    "R_I": 33e3,
    "R_F": 220e3,
    "R_PU": 4.7e3,
}
DEVICE = hk.Device(drop_low=0.1, offset=2e-3, bias_plus=2e-7, bias_minus=3e-7, r_low=30, r_high=50)
THERMISTOR = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-30, 90))
SIGNALS = {
    "thermistor": THERMISTOR,
    "thermistor of its own": S.SensorDivider(
        S.Ntc("10k", 3950), "10k", "top", excitation=5.0, span=(-30, 90)
    ),
    "track": S.Potentiometer("47k", span=(0, 100), unit="%", name="opening"),
    "battery": S.Attenuator("100k", "100k", span=(0, 20)),
    "driven": S.DrivenSensor(S.Ntc("10k", 3950), 250e-6, span=(-30, 90)),
    "loop": S.CurrentLoop(150, span=(0, 2)),
}


def designed(stage: hk.Stage, signal: Any, **changes: Any) -> hk.Design:
    levels = {"V_REF": 2.4} if stage.reference == "source" else {}
    return hk.Design(
        stage,
        {name: VALUES[name] for name in stage.required},
        supply=hk.Supply(5.0, -5.0) if stage.supply == "split" else 5.0,
        device=DEVICE,
        levels=levels,
        signal=signal,
        **changes,
    )


def source_at(signal: Any, volts: float) -> float:
    """Resistance of the source at a voltage; at the end of the span for voltages beyond it."""
    ends = sorted(float(signal.volts(end)) for end in signal.span)
    return float(signal.source_resistance(signal.quantity(float(np.clip(volts, *ends)))))


def by_iteration(design: hk.Design) -> tuple[float, float]:
    """Each trip by letting volts and resistance follow each other, gently, until nothing moves."""
    fitted, found = with_source(design), []
    for trip in ("upper", "lower"):
        ohms = 1e3
        for _ in range(80):
            volts = float(getattr(hk.trip_points(fitted, R_S=max(ohms, 1e-9)), trip))
            ohms += 0.5 * (source_at(design.signal, volts) - ohms)
        found.append(volts)
    return found[0], found[1]


@pytest.mark.parametrize("name", SIGNALS)
@pytest.mark.parametrize("stage", hk.Stage.all(), ids=lambda stage: stage.title)
def test_volts_and_resistance_agree_at_each_trip(stage: hk.Stage, name: str) -> None:
    design = designed(stage, SIGNALS[name])
    found = hk.trips_at_source(design)
    assert (found.upper, found.lower) == pytest.approx(by_iteration(design), rel=1e-12, abs=1e-12)
    assert found.width == pytest.approx(found.upper - found.lower, rel=1e-12)
    assert found.status == 0
    # And an independent solver finds the same with the resistances that the source has there.
    fitted = with_source(design)
    falls = {"high": "upper", "low": "lower"}
    if stage.sense == "non-inverting":
        falls = {"low": "upper", "high": "lower"}
    for state, trip in falls.items():
        volts = float(getattr(found, trip))
        values = {**fitted.values, "R_S": max(source_at(design.signal, volts), 1e-9)}
        again = nodal.trip(fitted.elements, stage.output, state, values)
        assert volts == pytest.approx(float(again[0]), rel=1e-9)


@settings(max_examples=30)
@given(
    track=st.floats(1e3, 200e3),
    r_i=st.floats(5e3, 100e3),
    ratio=st.floats(0.05, 0.4),
    reference=st.floats(1.5, 3.5),
)
def test_a_track_has_a_closed_form(
    track: float, r_i: float, ratio: float, reference: float
) -> None:
    r_f = r_i / ratio
    design = hk.Design(
        hk.Stage("non-inverting", reference="source"),
        {"R_I": r_i, "R_F": r_f},
        supply=5.0,
        levels={"V_REF": reference},
        signal=S.Potentiometer(track, span=(0, 1)),
    )
    found = hk.trips_at_source(design)
    for trip, output in (("upper", 0.0), ("lower", 5.0)):
        # 5 x = X + (R_I + track x (1 - x)) (X - V_O) / R_F, for the position x of the wiper.
        slope = (reference - output) / r_f
        roots = np.roots([-track * slope, track * slope - 5.0, reference + r_i * slope])
        places = [x.real for x in roots if abs(x.imag) < 1e-12 and 0 < x.real < 1]
        if len(places) == 1:
            assert getattr(found, trip) == pytest.approx(5 * places[0], rel=1e-10)


def test_a_resistance_that_the_design_gives_is_replaced() -> None:
    design = designed(hk.Stage("non-inverting"), THERMISTOR)
    bare, fitted = hk.trips_at_source(design), hk.trips_at_source(design.with_parts(R_S="1k"))
    assert fitted.upper == pytest.approx(bare.upper, rel=1e-14)
    assert fitted.lower == pytest.approx(bare.lower, rel=1e-14)


@pytest.mark.parametrize("signal", [None, S.Linear(0.5, span=(0, 10))])
def test_a_source_without_resistance_leaves_the_design_as_it_is(signal: Any) -> None:
    design = designed(hk.Stage("non-inverting"), signal).with_parts(R_S="5k")
    found, stated = hk.trips_at_source(design), hk.trip_points(design)
    assert (found.upper, found.lower) == (stated.upper, stated.lower)
    assert not has_resistance(S.Linear(0.5, span=(0, 10)))
    assert has_resistance(THERMISTOR.at(5.0))


def test_beyond_the_span_the_source_is_as_at_its_end() -> None:
    narrow = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(23, 24))
    design = designed(hk.Stage("non-inverting"), narrow)
    found = hk.trips_at_source(design)
    fitted = with_source(design)
    # The upper trip is a colder one than 23 °C, the lower one warmer than 24 °C.
    ends = {"upper": 23.0, "lower": 24.0}
    for trip, end in ends.items():
        ohms = float(design.signal.source_resistance(end))
        expected = float(getattr(hk.trip_points(fitted, R_S=ohms), trip))
        assert getattr(found, trip) == pytest.approx(expected, rel=1e-12)


def test_arrays_broadcast_and_the_supply_is_shared() -> None:
    design = designed(hk.Stage("non-inverting"), THERMISTOR)
    supplies, feedback = np.array([4.0, 5.0, 6.0]), np.array([[150e3], [np.nan], [300e3]])
    found = hk.trips_at_source(design, V_CC=supplies, R_F=feedback)
    assert found.upper.shape == (3, 3)
    assert np.all(np.isnan(found.upper[1]))
    assert np.all(found.status[1] != 0)
    for row, column in ((0, 0), (2, 2)):
        one = hk.trips_at_source(
            design.with_parts(R_F=float(feedback[row, 0])).with_supply(v_cc=supplies[column])
        )
        assert found.upper[row, column] == pytest.approx(one.upper, rel=1e-12)
        assert found.lower[row, column] == pytest.approx(one.lower, rel=1e-12)


def test_a_wiper_at_its_end_has_no_resistance() -> None:
    # The upper trip stands at 5 V, where the wiper meets the end of its track.
    design = hk.Design(
        hk.Stage("non-inverting", reference="source"),
        {"R_I": "10k", "R_F": "10k"},
        supply=5.0,
        levels={"V_REF": 2.5},
        signal=S.Potentiometer("10k", span=(0, 1)),
    )
    found = hk.trips_at_source(design)
    assert (found.upper, found.lower) == pytest.approx((5.0, 0.0), abs=1e-9)


@pytest.mark.parametrize("taken", ["source1", "tap"])
def test_in_a_circuit_of_ones_own_all_of_it_is_behind_the_source(taken: str) -> None:
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_1", "signal", taken),
            hk.Resistor("R_3", taken, "plus"),
            hk.Resistor("R_4", "signal", "ground"),
            hk.Resistor("R_2", "out", "plus"),
            hk.Wire("minus", "ref"),
        ]
    )
    parts = {"R_1": "10k", "R_2": "100k", "R_3": "12k", "R_4": "220k"}
    design = hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.2}, signal=SIGNALS["track"])
    found = hk.trips_at_source(design)
    assert (found.upper, found.lower) == pytest.approx(by_iteration(design), rel=1e-12)
    fitted = with_source(design)
    assert len({node for e in fitted.elements for node in e.nodes}) == 1 + len(
        {node for e in design.elements for node in e.nodes}
    )
    # The shunt loads the source as well.
    without = hk.trip_points(design)
    assert found.width > without.width


def test_the_source_resistance_is_not_for_the_caller_to_say() -> None:
    with pytest.raises(hk.InputError, match="not given here, but found"):
        hk.trips_at_source(designed(hk.Stage("inverting"), THERMISTOR), R_S="1k")


def test_a_stage_that_does_not_switch_says_so() -> None:
    design = designed(hk.Stage("non-inverting"), THERMISTOR)
    found = hk.trips_at_source(design, V_OL=[0.1, 6.0])
    assert np.isnan(found.upper).tolist() == np.isnan(found.lower).tolist() == [False, True]
    assert found.status.tolist() == hk.trip_points(design, V_OL=[0.1, 6.0]).status.tolist()

"""Source resistance, and what a signal reads when its sensor is open or shorted."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given

import hystkit as hk
from hystkit.circuit.signals import Signal
from tests.circuit.signals.strategies import any_signals
from tests.circuit.strategies import within

S = hk.signals
NTC = S.Ntc("10k", 3950)


def divided(where: str, excitation: Any = None) -> Signal:
    return S.SensorDivider(NTC, "10k", where, excitation, span=(-20, 60)).at(5.0)


@pytest.mark.parametrize(
    ("signal", "opened", "shorted"),
    [
        (divided("bottom"), 5.0, 0.0),
        (divided("top"), 0.0, 5.0),
        (divided("bottom", "2.5 V"), 2.5, 0.0),
        (divided("top", "2.5 V"), 0.0, 2.5),
        (S.DrivenSensor(NTC, "0.1 mA", span=(0, 50)), None, 0.0),
        (S.DrivenSensor(NTC, "0.1 mA", compliance="4 V", span=(0, 50)), 4.0, 0.0),
        (S.CurrentLoop(150, span=(0, 2)), 0.0, None),
        (S.CurrentLoop(150, span=(0, 2), loop_limit="30 mA"), 0.0, 4.5),
        (S.Attenuator("30k", "10k", span=(0, 16)), 0.0, 0.0),
        (S.Potentiometer("10k", span=(0, 1)).at(5.0), None, 0.0),
        (S.Linear(1, span=(0, 1)), None, None),
        (S.MeasuredTable((0, 1), (0, 1)), None, None),
        (S.Function(np.exp, span=(0, 1)), None, None),
    ],
)
def test_open_and_short(signal: Signal, opened: float | None, shorted: float | None) -> None:
    assert signal.on_open == pytest.approx(opened)
    assert signal.on_short == pytest.approx(shorted)


@pytest.mark.parametrize(("sensor", "cold_when"), [(NTC, "open"), (S.Rtd(), "short")])
@pytest.mark.parametrize("where", ["bottom", "top"])
def test_a_fault_reads_as_one_extreme_in_either_arm(
    sensor: Any, cold_when: str, where: str
) -> None:
    signal = S.SensorDivider(sensor, "1k", where, span=(-20, 60)).at(5.0)
    readings = {"open": signal.on_open, "short": signal.on_short}
    cold, hot = (float(signal.volts(end)) for end in signal.span)
    at_cold = readings.pop(cold_when)
    (at_hot,) = readings.values()
    assert abs(at_cold - cold) < abs(at_cold - hot)
    assert abs(at_hot - hot) < abs(at_hot - cold)


@given(any_signals(), within(0, 1))
def test_source_resistance_is_that_of_the_circuit(signal: Signal, share: float) -> None:
    quantity = signal.span[0] * (1 - share) + signal.span[1] * share
    found = float(signal.source_resistance(quantity))
    assert found == pytest.approx(expected(signal, quantity), rel=1e-9, abs=1e-9)


def expected(signal: Any, quantity: float) -> float:
    """Open-circuit voltage over short-circuit current, by the parts of each circuit."""
    volts = float(signal.volts(quantity))
    match signal:
        case S.SensorDivider():
            across = 5.0 if signal.excitation is None else signal.excitation.value
            sensor = float(signal.sensor.resistance(quantity))
            top = signal.other.value if signal.sensor_at == "bottom" else sensor
            return volts / (across / top)
        case S.DrivenSensor():
            return volts / signal.current
        case S.CurrentLoop():
            low, high = signal.span
            return volts / (4e-3 + 16e-3 * (quantity - low) / (high - low))
        case S.Attenuator():
            # At zero volts the quotient says nothing: take it at one volt.
            return float(signal.volts(1.0)) / (1.0 / signal.top.value)
        case S.Potentiometer():
            across = 5.0 if signal.excitation is None else signal.excitation.value
            upper_part = signal.total.value * (1 - volts / across)
            return volts / (across / upper_part) if upper_part else 0.0
    return 0.0


def test_a_loop_at_its_ends() -> None:
    level = S.CurrentLoop(150, span=(0, 2), unit="m")
    assert level.volts(np.array([0.0, 2.0])) == pytest.approx([0.6, 3.0])
    low, nominal, high = S.CurrentLoop(hk.Part(150, tol="1 %"), span=(0, 2)).parameters["R_X"]
    assert (low, nominal, high) == pytest.approx((148.5, 150, 151.5))


def test_tolerances_of_each_kind_reach_the_voltage() -> None:
    """One hand-worked shift for each parameter."""
    loop = S.CurrentLoop(100, span=(0, 10), error="0.5 %")
    assert loop.parameters["loop_error"] == (-0.005, 0.0, 0.005)
    assert loop.volts(5.0, loop_error=0.005) - loop.volts(5.0) == pytest.approx(0.005 * 1.6)
    pot = S.Potentiometer("10k", 2.0, span=(0, 90), linearity="1 %")
    assert pot.volts(45.0, track_error=0.01) == pytest.approx(1.02)
    assert pot.source_resistance(45.0) == pytest.approx(2500)
    line = S.Linear(0.01, "500 mV", span=(0, 100), slope_tol="2 %", zero_error="10 mV")
    assert line.volts(50.0, slope=line.parameters["slope"].high) == pytest.approx(1.01)
    assert line.parameters["zero"] == pytest.approx((0.49, 0.5, 0.51))
    table = S.MeasuredTable((0, 1), (1, 2), error=0.1)
    assert table.volts(0.5, table_error=0.1) == pytest.approx(1.6)
    driven = S.DrivenSensor(S.Rtd(), "1 mA", "1 %", span=(0, 100))
    assert driven.volts(0.0, I_X=driven.parameters["I_X"].low) == pytest.approx(0.099)
    falling = S.Linear(-0.01, span=(0, 1), slope_tol="10 %").parameters["slope"]
    assert (falling.low, falling.high) == pytest.approx((-0.011, -0.009))

"""What describes no signal is refused: every fault, what was found, and what to do."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

import hystkit as hk

# What is given here is of the wrong type on purpose.
S: Any = hk.signals
NTC = S.Ntc("10k", 3950)
RANGE = {"span": (0.0, 1.0)}

# What is built -> the problems that it has, all of them.
REFUSED: list[tuple[Callable[[], Any], tuple[str, ...]]] = [
    (
        lambda: S.Linear(0, "x", span=(1, 0), slope_tol=2, zero_error="y"),
        ("at_zero", "not an interval", "zero_error", "slope_tol is outside", "slope of zero"),
    ),
    (
        lambda: S.CurrentLoop("x", span=(1, 0), error=-0.1, loop_limit="0 mA"),
        ("burden", "not an interval", "error is outside", "loop_limit is not positive"),
    ),
    (lambda: S.CurrentLoop(-150, span=(0, 1)), ("burden is not positive",)),
    (lambda: S.CurrentLoop(hk.Part(0), span=(0, 1)), ("burden is not positive",)),
    (
        lambda: S.Attenuator(0, hk.Part(-1), span=(0,)),
        ("top is not positive", "bottom is not positive", "not an interval"),
    ),
    (
        lambda: S.Potentiometer("1 V", "1 Ω", span="01", linearity=1),
        ("total", "excitation", "not an interval", "linearity is outside"),
    ),
    (lambda: S.Potentiometer("10k", 0, **RANGE), ("excitation of a sensor is zero",)),
    # A part remembers the unit that its text carried.
    (lambda: S.CurrentLoop(hk.Part("2.5 V"), span=(0, 1)), ("burden is not in Ω",)),
    (
        lambda: S.Attenuator(hk.Part("5 V"), hk.Part("1 V", tol="1 %"), span=(0, 10)),
        ("top is not in Ω", "bottom is not in Ω"),
    ),
    (
        lambda: S.Potentiometer(hk.Part("5 V"), hk.Part("4.7 kΩ"), **RANGE),
        ("total is not in Ω", "excitation is not in V"),
    ),
    (
        lambda: S.SensorDivider(
            NTC, hk.Part("1 V"), excitation=hk.Part("10 kΩ", tol=0.01), span=(0, 50)
        ),
        ("other is not in Ω", "excitation is not in V"),
    ),
    (lambda: S.Potentiometer("10k", hk.Part(0), **RANGE), ("excitation of a sensor is zero",)),
    (
        lambda: S.SensorDivider(NTC, "-10k", "left", "x", span=(0, 50)),
        ("other is not positive", "excitation", "neither arm"),
    ),
    (lambda: S.SensorDivider(10e3, "10k", span=(0, 1)), ("not a resistive sensor",)),
    (
        lambda: S.SensorDivider(S.Rtd(), "1k", span=(-250, 100)),
        ("no resistance at an end of the span",),
    ),
    (lambda: S.DrivenSensor(NTC, "1 mA", span=(-300, 0)), ("no resistance at an end of the span",)),
    (
        lambda: S.DrivenSensor(S.ResistanceTable((0, 1, 2), (1, 2, 3)), "1 mA", span=(0, 3)),
        ("no resistance at an end of the span",),
    ),
    (
        lambda: S.DrivenSensor(NTC, 0, "x", "-1 V", span=(0, 50)),
        ("current is not positive", "current_tol", "compliance is not positive"),
    ),
    (
        lambda: S.Ntc("x", -1, 1.5, -0.1),
        ("r25 is not", "b is not positive", "r25_tol is outside", "b_tol is outside"),
    ),
    (lambda: S.NtcCoefficients(1e-3, 0, 1e-7, 1), ("do not describe an NTC", "tol is outside")),
    (lambda: S.NtcCoefficients("x", float("nan"), 1e-7), ("a is not", "b is not")),
    (lambda: S.Rtd("x", "D"), ("r0 is not a number", "no tolerance class 'D'")),
    (lambda: S.Rtd(0), ("r0 is not positive",)),
    (lambda: S.ResistanceTable((0, 1), (1, 2)), ("not the table of a resistive sensor",)),
    (lambda: S.ResistanceTable((0, 1, 2), (1, 3, 2)), ("not the table of a resistive sensor",)),
    (lambda: S.ResistanceTable((0, 1, 2), (0, 1, 2)), ("not the table of a resistive sensor",)),
    (lambda: S.ResistanceTable((0, 2, 1), (1, 2, 3)), ("not the table of a resistive sensor",)),
    (
        lambda: S.ResistanceTable((0, "x", 2), (1, 2, float("inf")), "x"),
        ("quantities[1]", "ohms[2]", "tol"),
    ),
    (lambda: S.MeasuredTable((0, 1, 2), (0, 1)), ("cannot be read both ways",)),
    (lambda: S.MeasuredTable((0,), (0,)), ("cannot be read both ways",)),
    (lambda: S.MeasuredTable((0, 0), (0, 1)), ("cannot be read both ways",)),
    (lambda: S.MeasuredTable((0, 1), (1, 1)), ("cannot be read both ways",)),
    (lambda: S.MeasuredTable(5, "12"), ("cannot be read both ways",)),
    (
        lambda: S.MeasuredTable((0, None), ("1 A", 2), error="x"),
        ("quantities[1]", "voltages[0]", "error"),
    ),
    (lambda: S.Function(np.cos, span=(-1, 1)), ("cannot be read back",)),
    (lambda: S.Function(lambda q: 1.0, span=(0, 1)), ("cannot be read back",)),
    (lambda: S.Function(np.log, span=(1, 0)), ("not an interval",)),
    (lambda: S.Function(float, span=(0, 1)), ("cannot be evaluated over the span",)),
    (lambda: S.Function(5, span=(0, 1)), ("cannot be evaluated over the span",)),
    (lambda: S.Function(np.exp, np.sqrt, span=(0, 1)), ("does not undo",)),
    (lambda: S.Function(np.exp, lambda v: v[:2], span=(0, 1)), ("does not undo",)),
]


@pytest.mark.parametrize(("build", "problems"), REFUSED)
def test_every_fault_is_named_at_once(build: Callable[[], Any], problems: tuple[str, ...]) -> None:
    with pytest.raises(hk.SignalError) as caught:
        build()
    faults = caught.value.faults
    assert len(faults) == len(problems), str(caught.value)
    for problem in problems:
        assert [f for f in faults if problem in f.problem], f"{problem} is not in {caught.value}"


@pytest.mark.parametrize(("build", "problems"), REFUSED)
def test_every_fault_says_what_was_found_and_what_to_do(
    build: Callable[[], Any], problems: tuple[str, ...]
) -> None:
    with pytest.raises(hk.SignalError) as caught:
        build()
    assert problems
    for fault in caught.value.faults:
        assert fault.asked or fault.have
        # An unknown name without a near one has the list of all names instead.
        assert fault.remedy or ", " in fault.have


def test_an_unknown_parameter_is_named_with_the_nearest() -> None:
    signal = S.SensorDivider(NTC, "10k", span=(0, 50), v_cc=5.0)
    for call in (signal.volts, signal.quantity, signal.source_resistance):
        with pytest.raises(hk.SignalError) as caught:
            call(1.0, R_Y=1.0, v_cc=5.0)
        assert len(caught.value.faults) == 2
        assert "have    R_25, B, R_X, V_CC" in str(caught.value).replace("       have", "have")
        assert "V_CC" in caught.value.faults[1].remedy


def test_texts_with_units_are_read() -> None:
    assert S.Rtd("1 kΩ").r0 == 1000
    assert S.CurrentLoop(hk.Part("150 Ω", tol="1 %"), span=(0, 1)).burden == hk.Part(150, tol=0.01)
    assert S.Potentiometer("10k", hk.Part("5 V"), **RANGE).excitation == hk.Part(5)
    assert S.DrivenSensor(S.Rtd(), "1 mA", "J", "5 V", span=(0, 1)).current_tol == 0.05
    assert S.CurrentLoop("R47", span=("-1", "2.5")).span == (-1, 2.5)
    assert S.ResistanceTable((0, 50, 100), ("32k65", "3k6", 680)).ohms == (32650, 3600, 680)
    assert S.MeasuredTable(np.arange(3), ("0 V", "500 mV", 1)).voltages == (0, 0.5, 1)

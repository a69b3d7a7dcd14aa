"""From the measured quantity to volts and back."""

from __future__ import annotations

import copy
import pickle
from typing import Any

import numpy as np
import pytest
from hypothesis import given

import hystkit as hk
from hystkit.circuit.signals import Signal
from tests.circuit.strategies import signals, within

SPAN: Any = (0, "2")
LEVEL = hk.signals.Linear(per_unit=1.2, at_zero="600 mV", span=SPAN, unit="m", name="level")


@given(signals(), within(-100, 100))
def test_there_and_back(signal: hk.signals.Linear, quantity: float) -> None:
    volts = signal.volts(quantity)
    # Below the smallest normal number a double has no twelve digits.
    room = 1e-12 * (abs(signal.at_zero) + abs(volts)) / abs(signal.per_unit) + 1e-300
    assert signal.quantity(volts) == pytest.approx(quantity, rel=1e-12, abs=room)


@given(signals())
def test_decreasing_says_which_way_the_voltage_goes(signal: hk.signals.Linear) -> None:
    low, high = signal.span
    assert signal.decreasing == (signal.volts(high) < signal.volts(low))


def test_two_points_of_a_current_loop() -> None:
    assert LEVEL.volts(0.0) == pytest.approx(4e-3 * 150)
    assert LEVEL.volts(2.0) == pytest.approx(20e-3 * 150)


def test_arrays_pass_through() -> None:
    quantities = np.array([[0.0, 1.0], [1.5, 2.0]])
    np.testing.assert_allclose(LEVEL.quantity(LEVEL.volts(quantities)), quantities)


def test_it_is_a_signal_and_a_value() -> None:
    assert isinstance(LEVEL, Signal)
    for twin in (pickle.loads(pickle.dumps(LEVEL)), copy.deepcopy(LEVEL)):
        assert twin == LEVEL
        assert hash(twin) == hash(LEVEL)


@pytest.mark.parametrize("span", [(1, 1), (2, 1), (1,), (0, 1, 2), 5, "12", None])
def test_a_span_is_an_interval(span: Any) -> None:
    with pytest.raises(hk.SignalError, match="span of a signal is not an interval"):
        hk.signals.Linear(1.0, span=span)


def test_a_slope_of_zero_cannot_be_read_back() -> None:
    with pytest.raises(hk.SignalError, match="slope of zero"):
        hk.signals.Linear(0, span=(0, 1))


def test_every_fault_is_reported_at_once() -> None:
    span: Any = (float("nan"), "1,5")
    with pytest.raises(hk.SignalError) as caught:
        hk.signals.Linear("a", "b", span=span)
    assert len(caught.value.faults) == 4
    with pytest.raises(hk.SignalError) as caught:
        hk.signals.Linear(0, span=(1, 0))
    assert len(caught.value.faults) == 2

"""Quantity to volts and back, for every kind of signal over its whole span."""

from __future__ import annotations

import copy
import math
import pickle
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.signals import Signal
from tests.circuit.signals.strategies import any_signals, saved_signals
from tests.circuit.strategies import within

S = hk.signals
FINE = np.linspace(0, 1, 201)


def along(signal: Signal, share: Any) -> Any:
    low, high = signal.span
    # Exactly the ends at 0 and 1.
    return low * (1 - np.asarray(share)) + high * np.asarray(share)


def accuracy(signal: Signal) -> float:
    """How well a quantity can come back, relative to the span."""
    tables = (S.MeasuredTable, S.ResistanceTable)
    # At an end a monotone cubic may be level: there a rounding of 1e-16 weighs its root.
    return 2e-7 if isinstance(getattr(signal, "sensor", signal), tables) else 1e-9


@given(any_signals())
def test_a_quantity_comes_back(signal: Signal) -> None:
    quantity = along(signal, FINE)
    back = signal.quantity(signal.volts(quantity))
    low, high = signal.span
    room = accuracy(signal) * (high - low)
    np.testing.assert_allclose(back, quantity, rtol=1e-9, atol=room)


@given(any_signals(), within(0, 1))
def test_a_voltage_comes_back(signal: Signal, share: float) -> None:
    first, last = (float(signal.volts(end)) for end in signal.span)
    volts = first * (1 - share) + last * share
    room = 1e-9 * (abs(first) + abs(last))
    assert float(signal.volts(signal.quantity(volts))) == pytest.approx(volts, abs=room)


@given(any_signals())
def test_it_is_monotone_and_says_which_way(signal: Signal) -> None:
    steps = np.diff(signal.volts(along(signal, FINE)))
    assert np.all(steps < 0) if signal.decreasing else np.all(steps > 0)


@given(any_signals())
def test_arrays_give_what_numbers_give(signal: Signal) -> None:
    quantities = np.reshape(along(signal, np.linspace(0, 1, 6)), (2, 3))
    volts = signal.volts(quantities)
    resistance = np.broadcast_to(signal.source_resistance(quantities), (2, 3))
    back = signal.quantity(volts)
    room = accuracy(signal) * (signal.span[1] - signal.span[0])
    assert np.shape(volts) == np.shape(back) == (2, 3)
    for place in np.ndindex(2, 3):
        assert float(signal.volts(float(quantities[place]))) == pytest.approx(
            volts[place], rel=1e-12, abs=1e-15
        )
        assert float(signal.quantity(float(volts[place]))) == pytest.approx(
            back[place], rel=1e-9, abs=room
        )
        assert float(signal.source_resistance(float(quantities[place]))) == pytest.approx(
            resistance[place], rel=1e-12
        )


@given(any_signals(), st.data())
def test_parameters_act_the_same_both_ways(signal: Signal, data: st.DataObject) -> None:
    values = {
        name: data.draw(within(limits.low, limits.high), label=name)
        for name, limits in signal.parameters.items()
    }
    if signal.ratiometric:
        values["V_CC"] = data.draw(within(3, 15))
    quantity = along(signal, np.linspace(0.02, 0.98, 9))
    back = signal.quantity(signal.volts(quantity, **values), **values)
    low, high = signal.span
    np.testing.assert_allclose(back, quantity, rtol=1e-8, atol=1e-8 * (high - low))


@given(any_signals())
def test_typical_parameters_are_the_default_and_lie_within_their_limits(signal: Signal) -> None:
    limits = signal.parameters
    assert all(each.low <= each.nominal <= each.high for each in limits.values())
    typical = {name: each.nominal for name, each in limits.items()}
    quantity = along(signal, np.linspace(0, 1, 5))
    np.testing.assert_array_equal(signal.volts(quantity, **typical), signal.volts(quantity))


@given(any_signals())
def test_parameters_take_arrays(signal: Signal) -> None:
    values = {name: np.array([each.low, each.high]) for name, each in signal.parameters.items()}
    if not values:
        return
    middle = float(along(signal, 0.5))
    volts = signal.volts(middle, **values)
    assert np.shape(volts) == (2,)
    for place in range(2):
        single = {name: both[place] for name, both in values.items()}
        assert float(signal.volts(middle, **single)) == pytest.approx(volts[place], rel=1e-12)
        assert float(signal.quantity(volts[place], **single)) == pytest.approx(
            float(signal.quantity(volts, **values)[place]), rel=1e-9, abs=1e-9
        )


@given(any_signals())
def test_no_quantity_gives_nan_not_an_error(signal: Signal) -> None:
    assert math.isnan(signal.quantity(math.nan))


@pytest.mark.parametrize(
    "signal",
    [
        S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-40, 125), v_cc=5.0),
        S.SensorDivider(S.Rtd(), "1k", "top", 5.0, span=(-200, 850)),
        S.DrivenSensor(S.ResistanceTable((0, 1, 2), (1e3, 2e3, 5e3)), "1 mA", span=(0, 2)),
        S.MeasuredTable((0, 1, 2), (1.0, 2.0, 4.0)),
        S.Function(np.exp, span=(-1, 1)),
    ],
    ids=lambda signal: type(signal).__name__,
)
def test_outside_what_the_sensor_can_give_there_is_no_quantity(signal: Signal) -> None:
    assert math.isnan(signal.quantity(-0.5))
    assert math.isnan(signal.quantity(1e300))
    assert np.isnan(signal.quantity(np.array([-0.5, 1e300]))).all()


def test_a_resistance_no_ntc_has_is_no_temperature() -> None:
    # The one-B formula would give a temperature below absolute zero for these.
    hot = S.Ntc("10k", 3950)
    assert math.isnan(hot.quantity(1e-3))
    assert float(hot.quantity(float(hot.resistance(1500.0)))) == pytest.approx(1500.0)
    three = S.NtcCoefficients(1.13e-3, 2.34e-4, 8.8e-8)
    assert math.isnan(three.quantity(1e-3))
    for sensor in (hot, three):
        assert math.isnan(sensor.resistance(-273.15))


@given(any_signals().filter(lambda signal: not isinstance(signal, S.Function)))
def test_it_is_a_value(signal: Signal) -> None:
    signal.quantity(0.0)  # what is kept after the first use plays no part
    for twin in (pickle.loads(pickle.dumps(signal)), copy.deepcopy(signal)):
        assert twin == signal
        assert hash(twin) == hash(signal)


@given(saved_signals())
def test_only_what_is_fed_from_the_supply_depends_on_it(signal: Signal) -> None:
    bound = signal.at(7.0)
    if not signal.ratiometric:
        assert bound is signal
        return
    quantity = along(signal, np.linspace(0, 1, 5))
    np.testing.assert_allclose(
        np.asarray(bound.volts(quantity)) / 7.0,
        np.asarray(signal.volts(quantity, V_CC=3.3)) / 3.3,
        rtol=1e-12,
        atol=1e-15,
    )
    with pytest.raises(hk.SignalError, match="needs to know V_CC") as caught:
        signal.volts(1.0)
    assert "signal.at(5.0)" in str(caught.value)

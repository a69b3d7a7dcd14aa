"""Windows in a field: what is read, what is refused, and that writing reads back."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.base.errors import InputError
from hystkit.panels.windows import (
    read_ends,
    read_temperatures,
    read_window,
    write_temperatures,
    write_window,
)

volts = st.floats(-1e3, 1e3).filter(lambda v: v == 0 or abs(v) > 1e-9)
LEVEL = hk.signals.Linear(per_unit=1.2, at_zero=0.6, span=(0, 2), unit="m", name="level")
FALLING = hk.signals.Linear(per_unit=-0.01, at_zero=3, span=(0, 100), unit="°C", name="heat")


@given(volts, volts, st.integers(0, 2))
def test_a_window_reads_back_exactly(one: float, other: float, opened: int) -> None:
    low, high = sorted((one, other))
    window = ((low, high), (low, None), (None, high))[opened]
    assert read_window(write_window(window)) == window
    assert read_ends(write_window(one)) == one


@given(st.floats(-60, 200), st.floats(-60, 200))
def test_temperatures_read_back_exactly(one: float, other: float) -> None:
    low, high = sorted((round(one, 3), round(other, 3)))
    assert read_temperatures(write_temperatures((low, high))) == (low, high)


@pytest.mark.parametrize(
    ("text", "window"),
    [
        ("", None),
        ("2.25 to 2.32", (2.25, 2.32)),
        ("2.25 V..2320 mV", (2.25, 2.32)),
        ("2.25 … 2.32 V", (2.25, 2.32)),
        ("-5 to -2", (-5.0, -2.0)),
        ("from 2.25", (2.25, None)),
        (">= 2.25 V", (2.25, None)),
        ("up to 2.3", (None, 2.3)),
        ("< 2.3", (None, 2.3)),
    ],
)
def test_ways_to_write_a_window(text: str, window: tuple[float | None, float | None]) -> None:
    assert read_window(text) == window


def test_a_window_in_the_measurand() -> None:
    assert read_window("0.5 to 1 m", LEVEL) == pytest.approx((1.2, 1.8))
    assert read_window("from 0.5 m", LEVEL) == (pytest.approx(1.2), None)
    # Millivolts stay millivolts.
    assert read_window("1200 mV to 1.8 V", LEVEL) == pytest.approx((1.2, 1.8))


def test_a_falling_sensor_turns_the_ends() -> None:
    assert read_window("20 to 30 °C", FALLING) == pytest.approx((2.7, 2.8))
    assert read_window("from 20 °C", FALLING) == (None, pytest.approx(2.8))
    assert read_window("up to 20 °C", FALLING) == (pytest.approx(2.8), None)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("2.3", "two ends"),
        ("1 to 2 to 3", "more than two"),
        ("2.3 to 2.2", "wrong way round"),
        ("30 to 20 °C", "wrong way round"),
        ("2,3 to 2,4", "2.3"),
        ("from", "number"),
        ("2 to", "number"),
        ("<b>", "number"),
    ],
)
def test_what_is_no_window_is_refused(text: str, said: str) -> None:
    with pytest.raises(InputError, match=said):
        read_window(text, FALLING)


@pytest.mark.parametrize("text", ["20", "60 to -20", "a to b", "1 to 2 to 3"])
def test_what_is_no_temperature_range_is_refused(text: str) -> None:
    with pytest.raises(InputError):
        read_temperatures(text)


def test_a_percent_of_a_quantity_counts_as_one() -> None:
    opening = hk.signals.Linear("50m", span=(0, 100), unit="%", name="opening")
    assert read_window("40 to 45 %", opening) == pytest.approx((2.0, 2.25))

"""Digits that show what they have to."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.digits import exact_digits, rounded, trip_digits


@pytest.mark.parametrize("value", [2.5005, 0.9999, -11.98, 1e-3])
@pytest.mark.parametrize("share", [0.9, 0.11, 0.012, 1.3e-3, 2e-4])
def test_both_trips_differ_in_their_last_two_digits(value: float, share: float) -> None:
    width = abs(value) * share
    digits = trip_digits(value, width)
    assert 4 <= digits <= 7
    apart = abs(rounded(value, digits) - rounded(value - width, digits))
    assert 0.9 * width < apart < 1.1 * width


def test_no_more_digits_than_allowed() -> None:
    assert trip_digits(5.0, 1e-12) == 7
    assert trip_digits(5.0, 1e-12, most=9) == 9


@pytest.mark.parametrize("width", [0.0, math.nan, math.inf])
def test_without_a_width_there_are_four(width: float) -> None:
    assert trip_digits(5.0, width) == 4


@given(st.integers(1, 999_999_999), st.integers(-18, 9))
def test_nine_digits_read_back_the_same(mantissa: int, power: int) -> None:
    value = float(f"{mantissa}e{power}")
    assert rounded(value, exact_digits(value)) == value


def test_more_than_nine_digits_are_rounded() -> None:
    assert exact_digits(1 / 3) == 9
    assert exact_digits(4700.0) == 4

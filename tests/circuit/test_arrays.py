"""How numbers are read that may be single ones, text, or arrays of either."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from hystkit.base.errors import Fault
from hystkit.circuit.arrays import read_array, read_positives, together


@pytest.mark.parametrize(
    ("given", "expected"),
    [
        (2, 2.0),
        ("2 mV", 2e-3),
        (np.float32(0.5), 0.5),
        (np.array(3), 3.0),
        ([1, 2.5], [1.0, 2.5]),
        (["1m", "2.5 V"], [1e-3, 2.5]),
        ([[0.1, "10 mV"]], [[0.1, 0.01]]),
        ((np.nan, np.inf), [np.nan, np.inf]),
        ([], []),
    ],
)
def test_what_is_read(given: Any, expected: Any) -> None:
    faults: list[Fault] = []
    found = read_array(faults, "width", given, "V")
    assert not faults
    assert found.shape == np.shape(expected)
    assert np.array_equal(found, np.asarray(expected, dtype=float), equal_nan=True)


@pytest.mark.parametrize(
    ("given", "problem"),
    [
        (None, "width is not a single number."),
        (True, "width is not a single number."),
        (np.nan, "width is not a finite number."),
        ("wide", "width is not a number."),
        ("2 A", "width is not in V."),
        (["1", "2 A"], "width is not in V."),
        ([True, False], "width is not a number or an array of numbers [V]."),
        ([1.0, None], "width is not a number or an array of numbers [V]."),
        ([[1.0], [1.0, 2.0]], "width is not a number or an array of numbers [V]."),
    ],
)
def test_what_is_refused(given: Any, problem: str) -> None:
    faults: list[Fault] = []
    found = read_array(faults, "width", given, "V")
    assert [fault.problem for fault in faults] == [problem]
    assert found.shape == ()
    assert np.isnan(found)


def test_a_single_number_need_not_be_finite_where_that_is_judged_later() -> None:
    faults: list[Fault] = []
    assert np.isnan(read_array(faults, "trip", np.nan, finite=False))
    assert not faults


def test_a_percent_counts_as_one() -> None:
    faults: list[Fault] = []
    assert read_array(faults, "opening", ["45 %", "50"], "%").tolist() == [45.0, 50.0]
    assert read_array(faults, "opening", "45 %", "%") == 45.0
    assert not faults


def test_elements_that_are_not_positive_stop_nothing() -> None:
    faults: list[Fault] = []
    found = read_positives(faults, "interval", ["1 s", "0", "-1"], "s")
    assert np.array_equal(found, [1.0, np.nan, np.nan], equal_nan=True)
    assert read_positives(faults, "interval", [0.0], "s", zero=True).tolist() == [0.0]
    assert not faults
    read_positives(faults, "interval", 0, "s")
    read_positives(faults, "interval", -1, "s", zero=True)
    assert [fault.problem for fault in faults] == [
        "interval is not positive.",
        "interval is negative.",
    ]


def test_shapes() -> None:
    faults: list[Fault] = []
    assert together(faults, {"a": np.ones((2, 1)), "b": 1.0, "c": [1, 2, 3]}) == (2, 3)
    assert together(faults, {}) == ()
    assert not faults
    assert together(faults, {"a": [1, 2], "b": 1.0, "c": [1, 2, 3]}) == ()
    assert faults[0].have == "a of shape (2,), c of shape (3,)"

"""Why a sample has no trip points: one code for each element of a result."""

from __future__ import annotations

from collections.abc import Mapping
from enum import IntEnum
from typing import Any

import numpy as np
from numpy.typing import NDArray


class Status(IntEnum):
    """What became of one element of a result."""

    OK = 0
    NOT_FINITE = 1
    NOT_POSITIVE = 2
    RAILS = 3
    OUTPUT_LEVELS = 4
    SENSE = 5
    NO_HYSTERESIS = 6
    RAIL = 7
    NEGATIVE = 8

    @property
    def message(self) -> str:
        """One line that says what is wrong."""
        return _MESSAGES[self]


_MESSAGES = {
    Status.OK: "switches",
    Status.NOT_FINITE: "a value is not finite",
    Status.NOT_POSITIVE: "a resistance is not positive",
    Status.RAILS: "V_CC is not above V_EE",
    Status.OUTPUT_LEVELS: "the high output level is not above the low one",
    Status.SENSE: "the signal drives the inputs against the stated sense",
    Status.NO_HYSTERESIS: "the upper trip is not above the lower: no hysteresis",
    Status.RAIL: "V_CC is not above 0 V",
    Status.NEGATIVE: "an output resistance is negative",
}


def status_of(
    values: Mapping[str, Any],
    parts: tuple[str, ...],
    upper: Any,
    lower: Any,
    against_sense: Any = False,
) -> NDArray[np.int8]:
    """Judge every element.

    Parameters
    ----------
    values : mapping of str to float or ndarray
        What the trips were computed from; arrays broadcast.
    parts : tuple of str
        Names of the resistors among them.
    upper, lower : float or ndarray
        Computed trip points [V].
    against_sense : bool or ndarray of bool, default False
        Whether a rising signal drives the inputs the other way than the stage states.

    Returns
    -------
    ndarray of int8
        A `Status` code for each element, the first that applies.
    """
    high = values.get("V_OH", values.get("V_PU", np.inf))
    shape = np.broadcast_shapes(*map(np.shape, values.values()), np.shape(upper))
    status = np.zeros(shape, dtype=np.int8)
    # An impossible element may hold inf - inf; the comparison is false there, as it should be.
    switches = np.isfinite(upper) & np.isfinite(lower) & np.greater(upper, lower)
    _mark(status, Status.NO_HYSTERESIS, switches)
    _mark(status, Status.SENSE, np.logical_not(against_sense))
    _mark(status, Status.OUTPUT_LEVELS, np.greater(high, values["V_OL"]))
    rails = Status.RAILS if "V_EE" in values else Status.RAIL
    _mark(status, rails, np.greater(values["V_CC"], values.get("V_EE", 0.0)))
    for name in ("R_OH", "R_OL"):
        _mark(status, Status.NEGATIVE, np.greater_equal(values.get(name, 0.0), 0))
    for name in parts:
        _mark(status, Status.NOT_POSITIVE, np.greater(values[name], 0))
    for value in values.values():
        _mark(status, Status.NOT_FINITE, np.isfinite(value))
    return status


def _mark(status: NDArray[np.int8], code: Status, good: Any) -> None:
    """Write a code wherever `good` is false; codes that go first are marked last."""
    if not good.all():
        status[np.broadcast_to(~good, status.shape)] = code

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
    NO_HYSTERESIS = 5

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
    Status.NO_HYSTERESIS: "the upper trip is not above the lower: no hysteresis",
}


def status_of(
    values: Mapping[str, Any], parts: tuple[str, ...], upper: Any, lower: Any
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

    Returns
    -------
    ndarray of int8
        A `Status` code for each element, the first that applies.
    """
    high = values.get("V_OH", values.get("V_PU", np.inf))
    v_ee = values.get("V_EE", 0.0)
    finite = np.logical_and.reduce(np.broadcast_arrays(*map(np.isfinite, values.values())))
    positive = np.logical_and.reduce(
        np.broadcast_arrays(*(np.greater(values[name], 0) for name in parts))
    )
    # An impossible element may hold inf - inf; the comparison is false there, as it should be.
    conditions = [
        ~finite,
        ~positive,
        ~np.greater(values["V_CC"], v_ee),
        ~np.greater(high, values["V_OL"]),
        ~(np.greater(upper, lower) & np.isfinite(upper) & np.isfinite(lower)),
    ]
    codes = [int(s) for s in Status if s is not Status.OK]
    return np.select(np.broadcast_arrays(*conditions), codes, default=0).astype(np.int8)

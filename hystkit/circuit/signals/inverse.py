"""The inverse of any monotone function, for arrays."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

_STEPS = 80
#: Rounding allowed beyond the ends, relative to the values there.
_ROOM = 1e-12


def inverse(function: Callable[[Any], Any], wanted: Any, ends: tuple[Any, Any]) -> Any:
    """Find where a monotone function takes given values.

    Parameters
    ----------
    function : callable
        Continuous and monotone between `ends`; takes and gives arrays.
    wanted : float or ndarray
        Values to reach.
    ends : pair of float or ndarray
        Where the search begins and ends.

    Returns
    -------
    float or ndarray
        Arguments, to the last bits; NaN where the value lies outside.
    """
    low, high = (np.broadcast_to(end, np.shape(wanted)).astype(float) for end in ends)
    first, last = function(low), function(high)
    rising = last > first
    # A value that was scaled there and back may lie beyond the end by its rounding.
    room = _ROOM * np.maximum(np.abs(first), np.abs(last))
    inside = (wanted >= np.minimum(first, last) - room) & (wanted <= np.maximum(first, last) + room)
    for _ in range(_STEPS):
        middle = (low + high) / 2
        beyond = (function(middle) > wanted) == rising
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    return np.where(inside, (low + high) / 2, np.nan)[()]

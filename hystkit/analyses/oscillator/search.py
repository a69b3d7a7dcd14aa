"""Extremes of a smooth function over a box, looked for from its corners: attained values."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.numeric.views import Interval

Array = NDArray[np.float64]
#: Name to values in, the function at each place out; NaN where it has no value.
Function = Callable[[dict[str, Any]], Any]

# Points on a line along one quantity.
_POINTS = 33
# Rounds after which a search ends even if it still gains.
_ROUNDS = 50
# A gain below this share of the value is rounding.
_ROUNDING = 1e-12


def corner_grid(box: dict[str, Interval]) -> dict[str, Array]:
    """Give every corner of a box.

    Parameters
    ----------
    box : dict of str to pair of float
        Lowest and highest value by name.

    Returns
    -------
    dict
        Name to values, shape (corners,).
    """
    numbers = np.arange(1 << len(box))
    return {
        name: np.array(pair)[numbers >> place & 1] for place, (name, pair) in enumerate(box.items())
    }


def climbed(function: Function, box: dict[str, Interval], start: dict[str, float]) -> float:
    """Climb from a point of a box, along one quantity after the other.

    Parameters
    ----------
    function : callable
        What is to become large.
    box : dict of str to pair of float
        Lowest and highest value by name.
    start : dict of str to float
        Where to begin.

    Returns
    -------
    float
        A value that is attained in the box, no less than the one at the start.
    """
    point = start
    best = float(function(dict(start)))
    for _ in range(_ROUNDS if box else 0):
        before = best
        # From end to end, then between the neighbours of the best point, and once more.
        for share in (1.0, 1 / (_POINTS - 1), 1 / (_POINTS - 1) ** 2):
            lines = _lines(box, point, share)
            values = np.nan_to_num(function(lines), nan=-np.inf)
            place = int(values.argmax())
            if values[place] > best:
                best = float(values[place])
                point = {name: float(line[place]) for name, line in lines.items()}
        if best - before <= _ROUNDING * abs(best):
            break
    return best


def _lines(box: dict[str, Interval], point: dict[str, float], share: float) -> dict[str, Array]:
    """Points on a line along each quantity, no farther from `point` than a share of its range."""
    found = {name: np.full((len(box), _POINTS), point[name]) for name in box}
    for row, (name, (low, high)) in enumerate(box.items()):
        reach = share * (high - low)
        ends = max(low, point[name] - reach), min(high, point[name] + reach)
        found[name][row] = np.linspace(*ends, _POINTS)
    return {name: lines.ravel() for name, lines in found.items()}

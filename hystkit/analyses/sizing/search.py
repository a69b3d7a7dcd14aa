"""The best points of a grid of part values, found exactly without visiting all of it.

Each trip point is a linear-fractional function of every single resistor, so it is monotone in it.
The error, the largest of the distances of both trips from what is wanted, is then quasi-convex
along any one part: it falls to its lowest value and rises again. For every combination of the other
parts, bisection over the ordered values of one part finds that lowest value, and the points below a
given error form an interval whose ends are found in the same way.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Indices = NDArray[np.intp]

#: More combinations of the parts that are not bisected would take too long.
MAX_COMBINATIONS = 3_000_000
_BLOCK = 65_536


@dataclass(frozen=True)
class Grid:
    """Values of the free parts.

    Attributes
    ----------
    values : dict
        Part to its values in ascending order [Ohm].
    """

    values: dict[str, Floats]

    @property
    def line(self) -> str:
        """The part with the most values, along which the grid is bisected."""
        return max(self.values, key=lambda name: self.values[name].size)

    @property
    def others(self) -> tuple[str, ...]:
        """The parts that are combined with each other."""
        return tuple(name for name in self.values if name != self.line)

    @property
    def combinations(self) -> int:
        """Number of combinations of the other parts."""
        return int(np.prod([self.values[name].size for name in self.others], dtype=float))

    def thinned(self, every: int = 8) -> dict[str, Floats]:
        """Give the points of a coarser grid that keeps the ends of every part.

        Parameters
        ----------
        every : int
            One value of so many is kept.

        Returns
        -------
        dict
            Part to values, one for each point [Ohm].
        """
        kept = [np.append(v[:-1:every], v[-1]) for v in self.values.values()]
        return dict(zip(self.values, map(np.ravel, np.meshgrid(*kept)), strict=True))

    def point(self, combination: Indices, index: Indices) -> dict[str, Floats]:
        """Give part values of grid points.

        Parameters
        ----------
        combination, index : ndarray of int, shape (n,)
            Number of the combination, and place along the line.

        Returns
        -------
        dict
            Part to values, shape (n,) [Ohm].
        """
        shape = tuple(self.values[name].size for name in self.others)
        places = np.unravel_index(combination, shape) if shape else ()
        found = {n: self.values[n][p] for n, p in zip(self.others, places, strict=True)}
        return {**found, self.line: self.values[self.line][index]}


#: Error of points of the grid, given by their part values.
Error = Callable[[Mapping[str, Any]], Floats]
#: Which points of the grid are allowed, given by their part values.
Allowed = Callable[[Mapping[str, Any]], NDArray[np.bool_]]


def best_points(
    grid: Grid, error: Error, allowed: Allowed, count: int
) -> tuple[dict[str, Floats], Floats]:
    """Find the allowed points with the smallest errors.

    Parameters
    ----------
    grid : Grid
        At most `MAX_COMBINATIONS` combinations of the other parts.
    error : callable
        Quasi-convex along each single part.
    allowed : callable
        Any condition.
    count : int
        How many points are wanted.

    Returns
    -------
    dict and ndarray
        Part values and errors of at most `count` points, best first; exact over the whole grid.
    """
    turning = _turning_points(grid, error)
    lowest = error(grid.point(*turning))
    order = np.argsort(lowest, kind="stable")
    taken = min(count, order.size)
    while True:
        level = lowest[order[taken - 1]]
        near = order[: np.searchsorted(lowest[order], level, side="right")]
        combination, index = _below(grid, error, turning[0][near], turning[1][near], level)
        point = grid.point(combination, index)
        kept = np.flatnonzero(allowed(point))
        if kept.size >= count or taken == order.size:
            found = {name: v[kept] for name, v in point.items()}
            errors = error(found) if kept.size else np.empty(0)
            best = np.argsort(errors, kind="stable")[:count]
            if kept.size >= count or level == lowest[order[-1]]:
                return {name: v[best] for name, v in found.items()}, errors[best]
        taken = min(4 * taken, order.size)


def _turning_points(grid: Grid, error: Error) -> tuple[Indices, Indices]:
    """Find the place of the lowest error along each line."""
    combination = np.arange(grid.combinations)
    low = np.zeros_like(combination)
    high = np.full_like(combination, grid.values[grid.line].size - 1)
    for _ in range(int(grid.values[grid.line].size).bit_length()):
        middle = (low + high) // 2
        falling = _in_blocks(grid, error, combination, middle) > _in_blocks(
            grid, error, combination, np.minimum(middle + 1, high)
        )
        open_ = low < high
        low = np.where(open_ & falling, middle + 1, low)
        high = np.where(open_ & ~falling, middle, high)
    return combination, low


def _below(
    grid: Grid, error: Error, combination: Indices, turning: Indices, level: float
) -> tuple[Indices, Indices]:
    """List all points of the given lines whose error is at most `level`."""
    last = grid.values[grid.line].size - 1
    first = _edge(grid, error, combination, np.zeros_like(turning), turning, level)
    end = _edge(grid, error, combination, np.full_like(turning, last), turning, level)
    lengths = end - first + 1
    starts = np.repeat(first - np.concatenate([[0], np.cumsum(lengths)[:-1]]), lengths)
    return np.repeat(combination, lengths), np.arange(lengths.sum()) + starts


def _edge(
    grid: Grid, error: Error, combination: Indices, outer: Indices, inner: Indices, level: float
) -> Indices:
    """Find the point furthest out, between `inner` and `outer`, that is still at most `level`."""
    reached = _in_blocks(grid, error, combination, outer) <= level
    inside, outside = np.where(reached, outer, inner), outer.copy()
    while np.any(np.abs(outside - inside) > 1):
        middle = (inside + outside) // 2
        good = _in_blocks(grid, error, combination, middle) <= level
        inside, outside = np.where(good, middle, inside), np.where(good, outside, middle)
    return inside


def _in_blocks(grid: Grid, error: Error, combination: Indices, index: Indices) -> Floats:
    """Evaluate in blocks that stay in cache."""
    parts = range(0, combination.size, _BLOCK)
    blocks = [error(grid.point(combination[i : i + _BLOCK], index[i : i + _BLOCK])) for i in parts]
    return np.concatenate(blocks)

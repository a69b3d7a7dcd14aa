"""The best points of a grid of part values, found exactly without visiting all of it.

The grid is cut into boxes. Each box gets a lower bound of the error over all of its points; a box
whose bound lies above what is already reached holds no better point and is dropped, any other is
halved, until its corners are all the points that it has. The bounds, and why they hold, are those
of `hystkit.analyses.sizing.bounds`.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import product

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import InputError

Floats = NDArray[np.float64]
Indices = NDArray[np.int32]
#: Part to values [Ohm], all of one shape.
Points = dict[str, Floats]

#: A search that would have to look at more corners of boxes is refused.
MAX_CORNERS = 60_000_000
#: So is one whose two longest lists of values leave more combinations of the others: two trips
#: fix no more than two values.
MAX_LEFT_OPEN = 1_000_000
# Boxes looked at in one go: few enough for their corners to stay in cache.
_BLOCK = 4096
# Boxes kept at each halving while a first level is looked for.
_BEAM = 512
# Errors as close as this are equal; rounding must not decide which of them are kept.
_EQUAL = 1e-12


@dataclass(frozen=True, eq=False)
class Grid:
    """Values of the free parts.

    Attributes
    ----------
    values : dict
        Part to its values in ascending order, at least one each [Ohm].
    """

    values: dict[str, Floats]

    @property
    def size(self) -> int:
        """Number of points."""
        return int(np.prod([v.size for v in self.values.values()], dtype=float))

    @property
    def left_open(self) -> int:
        """Number of combinations of all parts but the two with most values."""
        sizes = sorted(v.size for v in self.values.values())
        return int(np.prod(sizes[:-2], dtype=float))

    def at(self, indices: Indices) -> Points:
        """Give part values at places of the grid.

        Parameters
        ----------
        indices : ndarray of int, shape (..., parts)
            Place of each part's value.

        Returns
        -------
        dict
            Part to values, shape (...) [Ohm].
        """
        return {n: v[indices[..., axis]] for axis, (n, v) in enumerate(self.values.items())}

    @cached_property
    def logs(self) -> list[Floats]:
        """Logarithms of the values, by which boxes are measured."""
        return [np.log(v) for v in self.values.values()]


@dataclass(frozen=True, eq=False)
class Boxes:
    """Some boxes of a grid.

    Attributes
    ----------
    low, high : ndarray of int, shape (boxes, parts)
        First and last place of each part's value.
    """

    low: Indices
    high: Indices

    @classmethod
    def whole(cls, grid: Grid) -> Boxes:
        """One box that holds the whole grid."""
        last = [v.size - 1 for v in grid.values.values()]
        return cls(np.zeros((1, len(last)), np.int32), np.array([last], np.int32))

    @property
    def count(self) -> int:
        """Number of boxes."""
        return int(self.low.shape[0])

    @property
    def small(self) -> NDArray[np.bool_]:
        """Whether a box has no points beside its corners, shape (boxes,)."""
        found: NDArray[np.bool_] = np.all(self.high - self.low <= 1, axis=1)
        return found

    def corners(self) -> Indices:
        """Places of all corners, shape (2**parts, boxes, parts)."""
        return np.where(self._ends, self.high, self.low)

    def points(self) -> Indices:
        """Places of all points of small boxes, each point once, shape (points, parts)."""
        flat = (self.high == self.low) & self._ends
        found: Indices = self.corners()[~flat.any(axis=2)]
        return found

    @property
    def _ends(self) -> NDArray[np.bool_]:
        """Which end each part is at in each corner, shape (2**parts, 1, parts)."""
        return np.array([*product((False, True), repeat=self.low.shape[1])])[:, None, :]

    def take(self, chosen: NDArray[np.generic]) -> Boxes:
        """Choose some of the boxes, by mask or by number."""
        return Boxes(self.low[chosen], self.high[chosen])

    def halved(self, grid: Grid) -> Boxes:
        """Both halves of each box, cut across where it is longest by ratio of values."""
        lengths = np.stack(
            [logs[self.high[:, a]] - logs[self.low[:, a]] for a, logs in enumerate(grid.logs)],
            axis=1,
        )
        axis = np.where(self.high - self.low > 1, lengths, -1.0).argmax(axis=1)
        rows = np.arange(self.count)
        middle = (self.low[rows, axis] + self.high[rows, axis]) // 2
        left, right = self.high.copy(), self.low.copy()
        left[rows, axis], right[rows, axis] = middle, middle + 1
        return Boxes(np.concatenate([self.low, right]), np.concatenate([left, self.high]))


#: From the corners of boxes, shape (corners, boxes): a lower bound of the error over each box,
#: infinite where no point of it is allowed; and a guess of the best error in it.
Bound = Callable[[Points], tuple[Floats, Floats]]
#: Error of points, infinite where a point is not allowed; errors above a level, which comes as the
#: second argument, need not be told apart.
Error = Callable[[Points, float], Floats]


def near_points(grid: Grid, bound: Bound, error: Error, count: int) -> tuple[Points, Floats, bool]:
    """Find points with small errors, without a proof that there are none with smaller ones.

    Parameters
    ----------
    grid : Grid
        Of any size.
    bound : callable
        Bounds the error of boxes from below.
    error : callable
        Exact error of points.
    count : int
        How many points are wanted at least.

    Returns
    -------
    dict, ndarray and bool
        Part values and errors, best first; fewer than `count` only where fewer are allowed. And
        whether these are all that are allowed.

    Raises
    ------
    InputError
        If too many points cannot be told apart from the best.
    """
    if grid.left_open > MAX_LEFT_OPEN:
        raise _too_wide(grid)
    beam = _BEAM
    while True:
        ends, cut = _descend(grid, bound, np.inf, beam)
        points, errors = _evaluate(grid, ends, error, np.inf)
        if errors.size >= count or not cut:
            return points, errors, not cut
        beam *= 8


def best_points(grid: Grid, bound: Bound, error: Error, count: int) -> tuple[Points, Floats]:
    """Find the points with the smallest errors.

    Parameters
    ----------
    grid : Grid
        Of any size.
    bound : callable
        Bounds the error of boxes from below.
    error : callable
        Exact error of points.
    count : int
        How many points are wanted.

    Returns
    -------
    dict and ndarray
        Part values and errors of all points up to the error of number `count`, so that points of
        equal error come together; best first. Fewer where fewer are allowed.

    Raises
    ------
    InputError
        If too many points cannot be told apart from the best.
    """
    points, errors, complete = near_points(grid, bound, error, count)
    if errors.size < count:
        return points, errors
    level = float(errors[count - 1])
    if not complete:
        points, errors = _evaluate(grid, _descend(grid, bound, level, None)[0], error, level)
    level = float(errors[count - 1])
    kept = np.searchsorted(errors, level + _EQUAL * (1 + abs(level)), side="right")
    return {name: p[:kept] for name, p in points.items()}, errors[:kept]


def _descend(grid: Grid, bound: Bound, level: float, beam: int | None) -> tuple[Boxes, bool]:
    """Halve boxes down to small ones; tell too whether more than `beam` of them were dropped."""
    boxes, done, seen, cut = Boxes.whole(grid), [], 0, False
    while boxes.count:
        seen += boxes.count << len(grid.values)
        if seen > MAX_CORNERS:
            raise _too_wide(grid)
        bounds, guesses = _bounds(grid, boxes, bound)
        kept = np.flatnonzero(bounds <= level + _EQUAL * (1 + abs(level)))
        kept = kept[bounds[kept] < np.inf]
        if beam is not None and kept.size > beam:
            order = np.lexsort((guesses[kept], bounds[kept]))
            kept, cut = np.sort(kept[order[:beam]]), True
        boxes = boxes.take(kept)
        small = boxes.small
        done.append(boxes.take(small))
        boxes = boxes.take(~small)
        if boxes.count:
            boxes = boxes.halved(grid)
    low, high = (np.concatenate([getattr(b, end) for b in done]) for end in ("low", "high"))
    return Boxes(low, high), cut


def _bounds(grid: Grid, boxes: Boxes, bound: Bound) -> tuple[Floats, Floats]:
    pairs = [bound(grid.at(block.corners())) for block in _blocks(boxes)]
    bounds, guesses = zip(*pairs, strict=True)
    return np.concatenate(bounds), np.concatenate(guesses)


def _evaluate(grid: Grid, ends: Boxes, error: Error, level: float) -> tuple[Points, Floats]:
    """Errors of all points of small boxes that do not exceed a level, best first."""
    places, errors = [], []
    for block in _blocks(ends):
        points = block.points()
        found = error(grid.at(points), level)
        good = (found <= level + _EQUAL * (1 + abs(level))) & (found < np.inf)
        places.append(points[good])
        errors.append(found[good])
    if not places:
        return grid.at(np.empty((0, len(grid.values)), np.int32)), np.empty(0)
    all_places, all_errors = np.concatenate(places), np.concatenate(errors)
    order = np.lexsort((*all_places.T[::-1], all_errors))
    return grid.at(all_places[order]), all_errors[order]


def _blocks(boxes: Boxes) -> Iterator[Boxes]:
    for start in range(0, boxes.count, _BLOCK):
        yield boxes.take(np.arange(start, min(start + _BLOCK, boxes.count)))


def _too_wide(grid: Grid) -> InputError:
    return InputError(
        "the search is too wide: too many points cannot be told apart from the best.",
        asked=" x ".join(f"{v.size} values of {n}" for n, v in grid.values.items()),
        have=f"{grid.left_open:,} combinations beside the two longest lists",
        rule="two trips fix two values; the others should be few",
        remedy="fix one part, or give narrower ranges or a coarser series",
    )

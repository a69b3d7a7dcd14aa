r"""Errors of grid points, and lower bounds of them over boxes of the grid.

A trip point is a linear-fractional function of each single resistance (proved at
`hystkit.numeric.extremes.corners`), hence monotone in each, and over a box of part values it takes
its lowest and its highest value in a corner. The distance of that range from what is wanted is a
lower bound of the error of every point of the box.

The same holds for the trips with every uncertain quantity at some place of its tolerance. The
error over all tolerances is not less than that in a few of their corners, which are taken from a
design that is near the best; this bounds the worst case, and the exact worst case is then worked
out for what the bound does not exclude.

Currents and the resistance that an input sees are linear-fractional in each resistance too, as
long as the signal stands still. Where the signal is a trip point, it is taken anywhere between the
lowest and the highest value of that trip point in the box: a current is affine in the signal, so
that its lowest value over this wider region lies in a corner again.

Nothing of this needs a part to act in the same direction everywhere. It needs a denominator
without a zero, which circuits with the signal at both inputs need not have; there no box is
excluded, and all points are looked at.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.sizing.conditions import Conditions, WorstCase, conditions
from hystkit.analyses.sizing.limits import Limits, least_loads, loads
from hystkit.analyses.sizing.search import Grid, Points, best_points, near_points
from hystkit.analyses.sizing.target import Target
from hystkit.circuit.checks import infer_sense
from hystkit.circuit.design import Design

Floats = NDArray[np.float64]
# Points whose worst case is worked out before the boxes are bounded by it.
_TRIED = 64


@dataclass(frozen=True, eq=False)
class Problem:
    """What is minimised over a grid.

    Attributes
    ----------
    template : Design
        With any values in its free parts, and the tolerances of all.
    target : Target
        What is wanted.
    limits : Limits
        What every point keeps at nominal values.
    nominal, corners : Conditions
        One case; and the cases that bound the error.
    worst : WorstCase or None
        Where the error is that over all tolerances.
    """

    template: Design
    target: Target
    limits: Limits
    nominal: Conditions
    corners: Conditions
    worst: WorstCase | None = None

    def bound(self, corners: Points) -> tuple[Floats, Floats]:
        """Bound the error over boxes, as `hystkit.analyses.sizing.search.Bound`.

        Parameters
        ----------
        corners : dict of str to ndarray, shape (corners, boxes)
            Values of the free parts in the corners of each box [Ohm].

        Returns
        -------
        tuple of two ndarray, shape (boxes,)
            Lower bound of the error, and the lowest error in a corner.
        """
        upper, lower = self.corners.trips(corners)
        guess = self.target.error(upper, lower, self.corners.v_cc(2)).max(axis=0).min(axis=0)
        if not self._monotone:
            return np.zeros_like(guess), guess
        up, down = ((trip.min(axis=1), trip.max(axis=1)) for trip in (upper, lower))
        bound = self.target.nearest(up, down, self.corners.v_cc(1)).max(axis=0)
        with np.errstate(invalid="ignore"):
            dead = np.any(up[1] <= down[0], axis=0)
        if self.limits.given:
            trips = tuple(trip[0] for trip in self.nominal.trips(corners))
            least = least_loads(self.template, self.limits, corners, trips)
            for name, most in self.limits.given.items():
                dead |= least[name] > most * (1 + 1e-12)
        return np.where(dead, np.inf, bound), guess

    def error(self, points: Points, level: float) -> Floats:
        """Exact error of points, as `hystkit.analyses.sizing.search.Error`.

        Parameters
        ----------
        points : dict of str to ndarray, shape (n,)
            Values of the free parts [Ohm].
        level : float
            Errors above it need not be told apart.

        Returns
        -------
        ndarray, shape (n,)
            As `Target.error`; infinite where the stage does not switch or a limit is not kept.
        """
        trips = self.nominal.trips(points)
        upper, lower = (trip[0] for trip in trips)
        error = np.asarray(self.target.error(upper, lower))
        with np.errstate(invalid="ignore"):
            error[~(upper > lower)] = np.inf
        if self.worst is not None:
            error = np.maximum(error, self._bounding_error(points))
        for name, found in self._loads(points, error <= level).items():
            error[~(found <= self.limits.given[name])] = np.inf
        if self.worst is not None:
            near = np.flatnonzero((error <= level) & (error < np.inf))
            error[near] = self.worst.error({n: p[near] for n, p in points.items()})
        return error

    def _bounding_error(self, points: Points) -> Floats:
        upper, lower = self.corners.trips(points)
        found: Floats = self.target.error(upper, lower, self.corners.v_cc(1)).max(axis=0)
        return found

    def _loads(self, points: Points, near: NDArray[np.bool_]) -> Points:
        """Limited quantities, those of points that are out anyway left at 0."""
        if not self.limits.given:
            return {}
        chosen = {n: p[near] for n, p in points.items()}
        trips = tuple(trip[0] for trip in self.nominal.trips(chosen))
        found = {}
        for name, values in loads(self.template, self.limits, chosen, trips).items():
            found[name] = np.zeros(near.shape)
            found[name][near] = values
        return found

    @property
    def _monotone(self) -> bool:
        stage = self.template.stage
        return not stage.is_custom or infer_sense(stage.wiring) is not None


def minimised(
    grid: Grid,
    template: Design,
    target: Target,
    limits: Limits,
    count: int,
    excursion: float = 0.0,
) -> tuple[Points, Floats]:
    """Find the best points of a grid.

    Parameters
    ----------
    grid : Grid
        Values of the free parts.
    template : Design
        With any values in its free parts, and the tolerances of all.
    target : Target
        With windows the error is that over all tolerances, else that at nominal values.
    limits : Limits
        What every point keeps at nominal values.
    count : int
        How many points are wanted.
    excursion : float, default 0
        Farthest distance from the temperature that values are stated for [K].

    Returns
    -------
    dict and ndarray
        As `hystkit.analyses.sizing.search.best_points`.
    """
    free = tuple(grid.values)
    nominal = conditions(template, free, {}, (1,))
    plain = Problem(template, target, limits, nominal, nominal)
    if not target.has_windows:
        return best_points(grid, plain.bound, plain.error, count)
    worst = WorstCase.of(template, free, target, excursion)
    near, _, _ = near_points(grid, plain.bound, plain.error, _TRIED)
    if not near[free[0]].size:
        return near, np.empty(0)
    near = {n: p[:_TRIED] for n, p in near.items()}
    errors = worst.error(near)
    start = {n: p[int(errors.argmin())] for n, p in near.items()}
    problem = Problem(template, target, limits, nominal, worst.critical(start), worst)
    return best_points(grid, problem.bound, problem.error, count)

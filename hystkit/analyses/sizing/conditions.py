"""The trips of many designs at once, at nominal values and over all tolerances."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.sizing.target import Target
from hystkit.base.errors import DesignError
from hystkit.circuit.design import Design
from hystkit.numeric.compile import kernel
from hystkit.numeric.extremes import MAX_RESISTANCES
from hystkit.numeric.tolerances import is_resistance, toleranced
from hystkit.numeric.trips import overridden
from hystkit.numeric.views import Interval

Floats = NDArray[np.float64]
# Trips evaluated in one go: few enough to stay in cache.
_BLOCK = 1 << 16


@dataclass(frozen=True, eq=False)
class Conditions:
    """Values that everything beside the free parts takes at once, in one or many cases.

    Attributes
    ----------
    template : Design
        With any values in its free parts.
    symbols : dict
        Every symbol of the law to its value or values, broadcast over the cases.
    factors : dict
        Free part to its deviation, 1 where it has its stated value [1].
    shape : tuple of int
        Of the cases.
    """

    template: Design
    symbols: dict[str, Any]
    factors: dict[str, Any]
    shape: tuple[int, ...]

    def v_cc(self, axes: int) -> Any:
        """Positive rail in each case [V], followed by so many axes of length one."""
        return _apart(self.symbols["V_CC"], axes)

    def trips(self, points: Mapping[str, Floats]) -> tuple[Floats, Floats]:
        """Evaluate both trips.

        Parameters
        ----------
        points : mapping of str to ndarray, shape (...)
            Values of the free parts [Ohm].

        Returns
        -------
        tuple of ndarray, shape (*cases, ...)
            Upper and lower trip [V]; NaN or infinite where the law has no value.
        """
        each = np.broadcast_shapes(*(np.shape(p) for p in points.values()))
        values = {n: _apart(v, len(each)) for n, v in self.symbols.items()}
        for name, stated in points.items():
            values[name] = _apart(self.factors[name], len(each)) * stated
        with np.errstate(all="ignore"):
            upper, lower = kernel(self.template.stage).trips(values)
        shape = (*self.shape, *each)
        return np.broadcast_to(upper, shape), np.broadcast_to(lower, shape)


def _apart(values: Any, axes: int) -> Any:
    """Put so many axes of length one behind those of the cases."""
    return values if np.ndim(values) == 0 else np.reshape(values, (*np.shape(values), *(1,) * axes))


def conditions(
    template: Design, free: tuple[str, ...], given: Mapping[str, Any], shape: tuple[int, ...]
) -> Conditions:
    """Take a design with some of its values replaced.

    Parameters
    ----------
    template : Design
        Gives the others.
    free : tuple of str
        Parts whose values come later; those given here count as deviations from the template's.
    given : mapping of str to ndarray
        Values of parts, levels, rails and device fields that broadcast to `shape`.
    shape : tuple of int
        Of the cases.

    Returns
    -------
    Conditions
        What follows from a value (levels from a rail) follows here too.
    """
    symbols = overridden(template, dict(given))
    factors = {n: np.asarray(symbols.pop(n)) / template.parts[n].value for n in free}
    return Conditions(template, symbols, factors, shape)


@dataclass(frozen=True, eq=False)
class WorstCase:
    """Exact worst case of both trips, over all tolerances, for many designs at once.

    Attributes
    ----------
    template : Design
        With the tolerances of all parts.
    free : tuple of str
        Parts whose values differ from design to design.
    target : Target
        What is wanted.
    cases : Conditions
        Shape (sources + 1, corners): every combination of ends of what enters with products,
        in the first row with all sources at their low ends, then one after the other high.
    box : dict
        Lowest and highest value of each uncertain quantity.
    enumerated, sources : tuple of str
        Names in the box.

    Notes
    -----
    That corners suffice is proved at `hystkit.numeric.extremes.corners`. Windows that follow V_CC
    make the supply one of the quantities whose ends are combined: a trip, and the ends of its
    window, are affine in V_CC, so that their distance in half-widths is monotone in it.
    """

    template: Design
    free: tuple[str, ...]
    target: Target
    cases: Conditions
    box: dict[str, Interval]
    enumerated: tuple[str, ...]
    sources: tuple[str, ...]

    @classmethod
    def of(
        cls, template: Design, free: tuple[str, ...], target: Target, excursion: float = 0.0
    ) -> WorstCase:
        """Prepare the corners.

        Parameters
        ----------
        template : Design
            Tolerances stand at its parts, levels and supply, limits at its device.
        free : tuple of str
            Parts whose values come later.
        target : Target
            What is wanted.
        excursion : float, default 0
            Farthest distance from the temperature that values are stated for [K].

        Returns
        -------
        WorstCase
            With one case where nothing is uncertain.

        Raises
        ------
        DesignError
            If more resistances have a tolerance than all combinations can be evaluated of.
        """
        box = toleranced(template, excursion)
        coupled = "V_CC" if target.follows is not None else None
        enumerated = tuple(n for n in box if n == coupled or is_resistance(template, n))
        sources = tuple(n for n in box if n not in enumerated)
        if len(enumerated) > MAX_RESISTANCES:
            raise DesignError(
                "this request has too many uncertain resistances for an exact worst case.",
                have=f"{len(enumerated)} with a tolerance: {', '.join(enumerated)}",
                rule=f"at most {MAX_RESISTANCES}, of which all combinations are evaluated",
                remedy="no tolerance on those that matter least",
            )
        grid: dict[str, Any] = {}
        for number, name in enumerate(enumerated):
            grid[name] = np.array(box[name])[np.arange(1 << len(enumerated)) >> number & 1]
        for row, name in enumerate(sources, 1):
            grid[name] = np.full((len(sources) + 1, 1), box[name][0])
            grid[name][row] = box[name][1]
        shape = (len(sources) + 1, 1 << len(enumerated))
        return cls(
            template,
            free,
            target,
            conditions(template, free, grid, shape),
            box,
            enumerated,
            sources,
        )

    def error(self, points: Mapping[str, Floats]) -> Floats:
        """Largest error over all tolerances.

        Parameters
        ----------
        points : mapping of str to ndarray, shape (n,)
            Values of the free parts [Ohm]; without free parts the result has no axis.

        Returns
        -------
        ndarray, shape (n,)
            As `Target.error`; infinite where some corner cannot switch.
        """
        return self._in_blocks(points, self._error)

    def margin(self, points: Mapping[str, Floats]) -> Floats:
        """Smallest distance of the worst case from the ends of the windows.

        Parameters
        ----------
        points : mapping of str to ndarray, shape (n,)
            Values of the free parts [Ohm]; without free parts the result has no axis.

        Returns
        -------
        ndarray, shape (n,)
            [V]; negative where a window is left, NaN where some corner cannot switch.
        """
        return self._in_blocks(points, self._margin)

    def ranges(self, points: Mapping[str, Floats]) -> tuple[Any, Any, NDArray[np.bool_]]:
        """Lowest and highest of each trip over the sources, by corner of the rest.

        Parameters
        ----------
        points : mapping of str to ndarray, shape (...)
            Values of the free parts [Ohm].

        Returns
        -------
        tuple
            Of upper and of lower the pair of ndarray, shape (corners, ...) [V]; and whether the
            stage switches in all corners, shape (...).
        """
        upper, lower = self.cases.trips(points)
        up, down = _span(upper), _span(lower)
        with np.errstate(invalid="ignore"):
            switches = np.all(_span(upper - lower)[0] > 0, axis=0)
        return up, down, switches

    def critical(self, points: Mapping[str, Floats]) -> Conditions:
        """Collect the corners in which the trips of one design are farthest off.

        Parameters
        ----------
        points : mapping of str to float
            Values of the free parts [Ohm].

        Returns
        -------
        Conditions
            At most four cases, one for each end of each trip; and where the design does not
            switch in all corners, the one that is farthest from it.
        """
        upper, lower = self.cases.trips(points)
        width = upper - lower
        wanted = [(trip, sign) for trip in (upper, lower) for sign in (-1, 1)]
        if not np.all(_span(width)[0] > 0):
            wanted.append((width, -1))
        found: dict[tuple[int, ...], None] = {}
        for rows, sign in wanted:
            column = int(np.argmax(sign * _span(rows)[sign > 0]))
            rises = sign * (rows[1:, column] - rows[0, column]) > 0
            ends = [column >> number & 1 for number in range(len(self.enumerated))]
            found[(*ends, *map(int, rises))] = None
        chosen = np.array([*found], dtype=int).reshape(len(found), -1)
        names = (*self.enumerated, *self.sources)
        given = {n: np.array(self.box[n])[chosen[:, i]] for i, n in enumerate(names)}
        return conditions(self.template, self.free, given, (len(found),))

    def _v_cc(self, points: Mapping[str, Floats]) -> Any:
        """Supply in each corner, where it is one of what is enumerated."""
        axes = max((np.ndim(p) for p in points.values()), default=0)
        return None if self.target.follows is None else self.cases.v_cc(axes)

    def _error(self, points: Mapping[str, Floats]) -> Floats:
        up, down, switches = self.ranges(points)
        worst = self.target.farthest(up, down, self._v_cc(points)).max(axis=0)
        return np.where(switches, worst, np.inf)

    def _margin(self, points: Mapping[str, Floats]) -> Floats:
        up, down, switches = self.ranges(points)
        margin = self.target.margin(up, down, self._v_cc(points)).min(axis=0)
        return np.where(switches, margin, np.nan)

    def _in_blocks(self, points: Mapping[str, Floats], evaluate: Any) -> Floats:
        if not points:
            return np.asarray(evaluate(points))
        step = max(1, _BLOCK // int(np.prod(self.cases.shape)))
        count = next(iter(points.values())).size
        blocks = [
            evaluate({n: p[i : i + step] for n, p in points.items()}) for i in range(0, count, step)
        ]
        return np.concatenate(blocks) if blocks else np.empty(0)


def _span(rows: Floats) -> tuple[Floats, Floats]:
    """Lowest and highest over the sources, which act as a sum; shape (corners, ...)."""
    with np.errstate(invalid="ignore"):
        steps = rows[1:] - rows[0]
        low = rows[0] + np.minimum(steps, 0).sum(axis=0)
        return low, rows[0] + np.maximum(steps, 0).sum(axis=0)

"""Exact extremes over a box of uncertain quantities that lie in its corners."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import DesignError
from hystkit.circuit.checks import infer_sense
from hystkit.circuit.design import Design
from hystkit.numeric.compile import kernel
from hystkit.numeric.control import control_net
from hystkit.numeric.fractions import fractions
from hystkit.numeric.tolerances import is_resistance, toleranced
from hystkit.numeric.trips import overridden
from hystkit.numeric.views import Interval

#: More uncertain resistances than this would need too many corners.
MAX_RESISTANCES = 16
TOO_MANY = f"tolerances not evaluated: more than {MAX_RESISTANCES} uncertain resistances"
KINDS = ("upper", "lower", "width", "middle")


@dataclass(frozen=True, eq=False)
class Corners:
    """The trips of a design in the corners of a box.

    Attributes
    ----------
    box : dict of str to pair of float
        Lowest and highest value by name.
    resistances, sources : tuple of str
        Names in the box.
    upper, lower : ndarray, shape (sources + 1, corners)
        Trip points [V] for every combination of the ends of the resistances: in the first row with
        all sources at their low ends, then with one source after the other at its high end.
    possible : bool
        Whether the stage switches in every corner.
    """

    box: dict[str, Interval]
    resistances: tuple[str, ...]
    sources: tuple[str, ...]
    upper: NDArray[np.float64]
    lower: NDArray[np.float64]
    possible: bool

    def interval(self, kind: str) -> Interval:
        """Lowest and highest value over all corners.

        Parameters
        ----------
        kind : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        tuple of float
            [V], NaN where some corner cannot switch.
        """
        if not self.possible:
            return (np.nan, np.nan)
        low, high = _span(self._rows[kind])
        return float(low.min()), float(high.max())

    def at(self, kind: str) -> tuple[dict[str, float], dict[str, float]]:
        """Tell in which corners the extremes lie.

        Parameters
        ----------
        kind : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        tuple of two dict
            Name to value, at the lowest and at the highest.
        """
        rows = self._rows[kind]
        low, high = _span(rows)
        return self._corner(rows, int(low.argmin()), -1), self._corner(rows, int(high.argmax()), 1)

    def _corner(self, rows: NDArray[np.float64], column: int, sign: int) -> dict[str, float]:
        ends = _ends_of(len(self.resistances))[:, column]
        rises = sign * (rows[1:, column] - rows[0, column]) > 0
        chosen = dict(zip((*self.resistances, *self.sources), (*ends, *rises), strict=True))
        return {name: pair[int(chosen[name])] for name, pair in self.box.items()}

    @cached_property
    def _rows(self) -> dict[str, NDArray[np.float64]]:
        width, middle = self.upper - self.lower, (self.upper + self.lower) / 2
        return dict(zip(KINDS, (self.upper, self.lower, width, middle), strict=True))


def corners(design: Design, box: dict[str, Interval]) -> Corners:
    """Evaluate a design in the corners of a box.

    Parameters
    ----------
    design : Design
        Gives every value that the box leaves out.
    box : dict of str to pair of float
        Lowest and highest value of symbols and device fields, as from `toleranced`.

    Returns
    -------
    Corners
        Of which the extremes of `upper` and `lower` are those over the whole box.

    Raises
    ------
    DesignError
        If the box holds more than `MAX_RESISTANCES` resistances.

    Notes
    -----
    Proof that corners suffice for each trip point by itself. A resistor adds a matrix of rank one,
    scaled by its conductance, to the node equations; a determinant is therefore affine in that
    conductance. By Cramer's rule a trip point is a quotient of two determinants, so it is a
    linear-fractional function (a + b x) / (c + d x) of each single resistance x, whose derivative
    (b c - a d) / (c + d x)^2 does not change its sign in x as long as the denominator has no zero.
    From any point of the box one can thus walk along one axis after the other to an end without
    losing, and arrives in a corner. The denominator is affine in each resistance too, so that it
    has no zero in the box if it has one sign in all corners: it is a sum of products of
    resistances where the signal reaches one input only, and is looked at where it reaches both.

    In the voltages and currents a trip point, the width and the middle are affine, all at once.
    Their best ends follow for each corner of the resistances from one evaluation a source.
    """
    resistances = tuple(name for name in box if is_resistance(design, name))
    sources = tuple(name for name in box if name not in resistances)
    if len(resistances) > MAX_RESISTANCES:
        raise DesignError(
            "this design has too many uncertain resistances for exact extremes.",
            asked="the extremes over all tolerances",
            have=f"{len(resistances)} resistances with a tolerance: {', '.join(resistances)}",
            rule=f"at most {MAX_RESISTANCES}, of which all combinations of ends are evaluated",
            remedy="no tolerance on those that matter least, or series and parallel parts as one",
        )
    values = overridden(design, _grid(box, resistances, sources))
    with np.errstate(all="ignore"):
        trips = kernel(design.stage).trips(values)
    shape = (len(sources) + 1, 1 << len(resistances))
    upper, lower = (np.broadcast_to(trip, shape) for trip in trips)
    possible = _possible(design, box, values, upper, lower)
    return Corners(box, resistances, sources, upper, lower, possible)


def trip_intervals(design: Design) -> tuple[Interval, Interval] | None:
    """Exact interval of the upper and of the lower trip over all stated tolerances.

    Parameters
    ----------
    design : Design
        Tolerances stand at its parts, levels and supply, limits at its device.

    Returns
    -------
    tuple of two (lowest, highest), or None
        Upper, then lower [V]; None without tolerances, and where `not_evaluated` tells why. NaN
        where a corner cannot switch.

    Notes
    -----
    See `corners` for the proof.
    """
    box = toleranced(design)
    if not box or not_evaluated(design):
        return None
    found = corners(design, box)
    return found.interval("upper"), found.interval("lower")


def not_evaluated(design: Design) -> str:
    """Tell why `trip_intervals` gives none although tolerances are stated.

    Parameters
    ----------
    design : Design
        As for `trip_intervals`.

    Returns
    -------
    str
        Empty where all stated tolerances are evaluated.
    """
    count = sum(is_resistance(design, name) for name in toleranced(design))
    return TOO_MANY if count > MAX_RESISTANCES else ""


def _grid(
    box: dict[str, Interval], resistances: tuple[str, ...], sources: tuple[str, ...]
) -> dict[str, Any]:
    grid: dict[str, Any] = {}
    for name, high_end in zip(resistances, _ends_of(len(resistances)), strict=True):
        grid[name] = np.where(high_end, box[name][1], box[name][0])
    for row, name in enumerate(sources, 1):
        grid[name] = np.full((len(sources) + 1, 1), box[name][0])
        grid[name][row] = box[name][1]
    return grid


@lru_cache(maxsize=MAX_RESISTANCES + 1)
def _ends_of(count: int) -> NDArray[np.bool_]:
    """Every combination of low and high ends, shape (count, 2**count)."""
    return (np.arange(1 << count) >> np.arange(count)[:, None] & 1).astype(bool)


def _span(rows: Any) -> tuple[Any, Any]:
    """Lowest and highest over the sources, for each corner of the resistances."""
    steps = rows[1:] - rows[0]
    return rows[0] + np.minimum(steps, 0).sum(axis=0), rows[0] + np.maximum(steps, 0).sum(axis=0)


def _possible(
    design: Design, box: dict[str, Interval], values: dict[str, Any], upper: Any, lower: Any
) -> bool:
    """Whether every corner has rails, output levels and hysteresis the right way round."""
    rows = (upper.shape[0], 1)
    gaps = [upper - lower, values["V_CC"] - values.get("V_EE", 0.0)]
    gaps += [values[high] - values["V_OL"] for high in ("V_OH", "V_PU") if high in values]
    # A corner that is not finite compares false.
    apart = all(np.all(_span(gap + np.zeros(rows))[0] > 0) for gap in gaps)
    positive = all(pair[0] > 0 for name, pair in box.items() if name in design.parts)
    return apart and positive and denominators_hold(design, box)


def denominators_hold(design: Design, box: dict[str, Interval]) -> bool:
    """Tell whether no trip point runs to infinity inside a box.

    Parameters
    ----------
    design : Design
        Any design; only where the signal reaches both inputs is there something to look at.
    box : dict of str to pair of float
        As for `corners`.

    Returns
    -------
    bool
        Whether each denominator has one sign in all corners, and therefore in the whole box.
    """
    stage = design.stage
    if not stage.is_custom or infer_sense(stage.wiring) is not None:
        return True
    found = fractions(design, box)
    nets = (control_net(found[kind], design, box).below for kind in ("upper", "lower"))
    return all(bool(np.all(net > 0)) for net in nets)

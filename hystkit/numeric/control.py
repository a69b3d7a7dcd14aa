r"""Control points of a law over a box: bounds that hold in the whole box.

A polynomial over a box is a weighted mean of its control points (its coefficients in Bernstein
form), with weights that are positive and sum to one. A quotient of two polynomials is therefore a
weighted mean of the quotients of their control points, as long as those below the line are all
positive: it never leaves the range of these quotients. Control points at corners are values that
are taken there. A highest control point at a corner is thus the exact maximum; any other bounds
it, the closer the smaller the box, with an error that falls with the square of its size.

References
----------
G. T. Cargo and O. Shisha, The Bernstein form of a polynomial, J. Res. Natl. Bur. Stand. 70B
(1966), 79-81. J. Garloff, Convergent bounds for the range of multivariate polynomials, LNCS 212
(1986), 37-56.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property, lru_cache
from math import comb
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.circuit.design import Design
from hystkit.numeric.fractions import Fraction, Polynomial, gains
from hystkit.numeric.trips import overridden
from hystkit.numeric.views import Interval

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class ControlNet:
    """Control points of one of the four formulas over a box.

    Attributes
    ----------
    resistances, sources : tuple of str
        Names of the quantities in the box that act.
    intervals : tuple of pair of float
        Lowest and highest value of each resistance [Ohm].
    middles, halves : ndarray, shape (sources,)
        Middle and half of the range of each source, [V] or [A].
    above : ndarray, shape (sources + 1, ...)
        Control points above the line, one axis a resistance: with all sources at their middles,
        then what half a range of each adds.
    below : ndarray
        Control points below the line.
    """

    resistances: tuple[str, ...]
    sources: tuple[str, ...]
    intervals: tuple[Interval, ...]
    middles: Array
    halves: Array
    above: Array
    below: Array

    @cached_property
    def highest(self) -> Array:
        """Quotients [V], each with the sources at the ends that raise it most."""
        if not np.all(self.below > 0):
            return np.full(self.below.shape, np.inf)
        found: Array = (self.above[0] + np.abs(self.above[1:]).sum(axis=0)) / self.below
        return found

    @cached_property
    def bound(self) -> float:
        """Upper bound over the box [V], infinite where the net cannot tell."""
        return float(self.highest.max())

    @cached_property
    def best(self) -> float:
        """Highest value in a corner of the box [V], which is attained."""
        return float(self._corners.max())

    @property
    def best_at(self) -> dict[str, float]:
        """The corner that `best` is taken in, name to value."""
        place = np.unravel_index(int(self._corners.argmax()), self._corners.shape)
        pairs = zip(self.intervals, place, strict=True)
        ends_of_axes: Any = (slice(1, None), *(-int(end) for end in place))
        shares = self.above[ends_of_axes]
        ends = self.middles + np.sign(shares) * self.halves
        values = [pair[int(end)] for pair, end in pairs] + [float(end) for end in ends]
        return dict(zip((*self.resistances, *self.sources), values, strict=True))

    @property
    def _corners(self) -> Array:
        return self.highest[tuple(slice(None, None, size - 1) for size in self.highest.shape)]

    def mirrored(self) -> ControlNet:
        """Give the net of the negated formula, whose maximum is the minimum of this one."""
        return replace(self, above=-self.above)

    def axis_to_halve(self) -> int:
        """Tell where the highest control point stands farthest above what is attained.

        Returns
        -------
        int
            An axis along which that point is no end, the one with the strongest bend.
        """
        if not np.isfinite(self.bound):
            return int(np.argmax([(high - low) / (high + low) for low, high in self.intervals]))
        top = np.unravel_index(int(self.highest.argmax()), self.highest.shape)
        bends = [0.0] * len(top)
        for axis, place in enumerate(top):
            if 0 < place < self.highest.shape[axis] - 1:
                line = self.highest[tuple(slice(None) if a == axis else i
                                          for a, i in enumerate(top))]  # fmt: skip
                bends[axis] = float(2 * line[place] - line[place - 1] - line[place + 1])
        return int(np.argmax(bends))

    def halved(self, axis: int) -> tuple[ControlNet, ControlNet]:
        """Cut the box in two.

        Parameters
        ----------
        axis : int
            Place of the resistance that is divided.

        Returns
        -------
        tuple of two ControlNet
            Exact nets of the lower and of the upper half.
        """
        low, high = self.intervals[axis]
        cut = (low + high) / 2
        left = _halving(self.below.shape[axis] - 1)
        halves = []
        for matrix, interval in ((left, (low, cut)), (left[::-1, ::-1], (cut, high))):
            parts = [*self.intervals]
            parts[axis] = interval
            halves.append(
                replace(
                    self,
                    intervals=tuple(parts),
                    above=_along(matrix, self.above, axis + 1),
                    below=_along(matrix, self.below, axis),
                )
            )
        return halves[0], halves[1]


def control_net(fraction: Fraction, design: Design, box: dict[str, Interval]) -> ControlNet:
    """Build the control points of a formula over a box.

    Parameters
    ----------
    fraction : Fraction
        One of `fractions(design, box)`.
    design : Design
        Gives every value that the box leaves out.
    box : dict of str to pair of float
        Lowest and highest value by name of symbol or device field.

    Returns
    -------
    ControlNet
        Over those of the box that act on the formula.
    """
    moved = {name: gains(design, name) for name in box}
    acting = {n: s for n in box for s in moved[n] if fraction.degrees.get(s, 0) > 0}
    sources = tuple(n for n in box if any(s in fraction.numerators for s in moved[n]))
    middle = overridden(design, {name: sum(pair) / 2 for name, pair in box.items()})
    place = _Place(fraction, {symbol: box[name] for name, symbol in acting.items()}, middle)
    nets = {symbol: place.points(p) for symbol, p in fraction.numerators.items()}
    below = place.points(fraction.denominator)
    shares: list[Any] = [sum(middle[symbol] * net for symbol, net in nets.items())]
    halves = np.array([(box[name][1] - box[name][0]) / 2 for name in sources])
    for name, half in zip(sources, halves, strict=True):
        shares.append(half * sum(g * nets[s] for s, g in moved[name].items() if s in nets))
    sign = np.sign(below.flat[0])
    return ControlNet(
        tuple(acting),
        sources,
        tuple(box[name] for name in acting),
        np.array([sum(box[name]) / 2 for name in sources]),
        halves,
        sign * np.array(shares),
        sign * below,
    )


@dataclass(frozen=True, eq=False)
class _Place:
    """Where the polynomials of a fraction are evaluated: intervals, and fixed values elsewhere."""

    fraction: Fraction
    intervals: dict[str, Interval]
    fixed: dict[str, Any]

    @cached_property
    def degrees(self) -> list[int]:
        """Degree along each axis."""
        return [self.fraction.degrees[symbol] for symbol in self.intervals]

    @cached_property
    def matrices(self) -> list[Array]:
        """From powers to control points, along each axis."""
        return [_polar(d, p) for d, p in zip(self.degrees, self.intervals.values(), strict=True)]

    def points(self, polynomial: Polynomial) -> Array:
        """Control points, one axis an interval."""
        names = self.fraction.resistances
        moving = [names.index(symbol) for symbol in self.intervals]
        still = [i for i, name in enumerate(names) if name not in self.intervals]
        point = np.array([self.fixed[names[i]] for i in still])
        weights = polynomial.coefficients * np.prod(point ** polynomial.exponents[:, still], axis=1)
        net = np.zeros([degree + 1 for degree in self.degrees])
        np.add.at(net, tuple(polynomial.exponents[:, moving].T), weights)
        for axis, matrix in enumerate(self.matrices):
            net = _along(matrix, net, axis)
        return net


def _polar(degree: int, interval: Interval) -> Array:
    """Matrix from coefficients of powers to control points on an interval.

    The control point number k is the polar form at `degree - k` low ends and k high ends.
    """
    rows = []
    for highs in range(degree + 1):
        symmetric = np.ones(1)
        for end in [interval[0]] * (degree - highs) + [interval[1]] * highs:
            symmetric = np.convolve(symmetric, [1.0, end])
        rows.append([e / comb(degree, power) for power, e in enumerate(symmetric)])
    return np.array(rows)


@lru_cache(maxsize=16)
def _halving(degree: int) -> Array:
    """Matrix from the control points of an interval to those of its lower half."""
    rows = [np.ones(1)]
    for _ in range(degree):
        rows.append(np.convolve(rows[-1], [0.5, 0.5]))
    return np.array([np.pad(row, (0, degree + 1 - len(row))) for row in rows])


def _along(matrix: Array, net: Array, axis: int) -> Array:
    return np.moveaxis(np.tensordot(matrix, net, axes=(1, axis)), 0, axis)

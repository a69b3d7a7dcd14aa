"""The law as reduced fractions of polynomials, and its exact derivatives.

A trip point is linear in all voltages and currents together, with polynomials of the resistances
as coefficients, over a polynomial of the resistances. Exact bounds and derivatives need the
polynomials themselves.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
import sympy as sp
from numpy.typing import NDArray

from hystkit.circuit.design import Design, law_values
from hystkit.circuit.device import LAW_FIELDS
from hystkit.symbolic.law import SwitchingLaw, derive


@dataclass(frozen=True, eq=False)
class Polynomial:
    """A polynomial in named resistances.

    Attributes
    ----------
    exponents : ndarray of int, shape (terms, resistances)
        One row a term.
    coefficients : ndarray, shape (terms,)
        One number a term.
    """

    exponents: NDArray[np.int64]
    coefficients: NDArray[np.float64]

    def __call__(self, point: NDArray[np.float64]) -> float:
        """Evaluate at a point, shape (resistances,)."""
        return float(self.coefficients @ np.prod(point**self.exponents, axis=1))

    def derivative(self, axis: int) -> Polynomial:
        """Differentiate by one resistance.

        Parameters
        ----------
        axis : int
            Its place.

        Returns
        -------
        Polynomial
            Exact.
        """
        powers = self.exponents[:, axis]
        lowered = self.exponents.copy()
        lowered[:, axis] = np.maximum(powers - 1, 0)
        return Polynomial(lowered, self.coefficients * powers)


@dataclass(frozen=True, eq=False)
class Fraction:
    """A reduced fraction: sources times polynomials, over a polynomial.

    Attributes
    ----------
    resistances : tuple of str
        Symbols that the polynomials are in.
    numerators : dict of str to Polynomial
        By the symbol of the voltage or current that each is multiplied by.
    denominator : Polynomial
        Common to all.
    """

    resistances: tuple[str, ...]
    numerators: dict[str, Polynomial]
    denominator: Polynomial

    @property
    def degrees(self) -> dict[str, int]:
        """Highest power of each resistance that occurs, above or below the line."""
        rows = [p.exponents for p in (*self.numerators.values(), self.denominator)]
        highest = np.concatenate(rows).max(axis=0)
        return dict(zip(self.resistances, map(int, highest), strict=True))

    def slopes(self, values: Mapping[str, float]) -> dict[str, float]:
        """Exact partial derivative with respect to every symbol.

        Parameters
        ----------
        values : mapping of str to float
            Every symbol of the law.

        Returns
        -------
        dict
            Symbol to derivative, [V/Ohm], [V/V] or [Ohm].
        """
        point = np.array([values[name] for name in self.resistances])
        below = self.denominator(point)
        found = {s: p(point) / below for s, p in self.numerators.items()}
        level = sum(values[s] * share for s, share in found.items())
        for axis, name in enumerate(self.resistances):
            above = sum(values[s] * p.derivative(axis)(point) for s, p in self.numerators.items())
            found[name] = (above - level * self.denominator.derivative(axis)(point)) / below
        return found


def fractions(design: Design, varied: Iterable[str] = ()) -> dict[str, Fraction]:
    """Give the law of a design as reduced fractions.

    Parameters
    ----------
    design : Design
        Non-idealities that are zero in it are left out, unless they are to be varied.
    varied : iterable of str
        Symbols and device fields that will move.

    Returns
    -------
    dict
        "upper", "lower", "width" and "middle" to `Fraction`.
    """
    law = derive(design)
    moved = {symbol for name in varied for symbol in gains(design, name)}
    idle = [n for n in law.non_ideal if design.values[n] == 0 and n not in moved]
    return _fractions(law.without(idle))


@lru_cache(maxsize=128)
def _fractions(law: SwitchingLaw) -> dict[str, Fraction]:
    symbols = sorted(law.upper.free_symbols | law.lower.free_symbols, key=lambda s: str(s.name))
    field = sp.QQ.frac_field(*symbols)
    upper, lower = (field.from_sympy(trip) for trip in (law.upper, law.lower))
    found = {"upper": upper, "lower": lower, "width": upper - lower, "middle": (upper + lower) / 2}
    names = tuple(s.name for s in symbols)
    return {kind: _fraction(element, names) for kind, element in found.items()}


def _fraction(element: Any, names: tuple[str, ...]) -> Fraction:
    is_source = np.array([name[0] in "VI" for name in names])
    resistances = tuple(name for name in names if name[0] not in "VI")
    terms = [(np.array(powers), float(c)) for powers, c in element.numer.terms()]
    numerators = {
        name: _polynomial([(p[~is_source], c) for p, c in terms if p[place]], len(resistances))
        for place, name in enumerate(names)
        if is_source[place] and any(p[place] for p, _ in terms)
    }
    below = [(np.array(powers)[~is_source], float(c)) for powers, c in element.denom.terms()]
    return Fraction(resistances, numerators, _polynomial(below, len(resistances)))


def _polynomial(terms: list[tuple[NDArray[np.int64], float]], count: int) -> Polynomial:
    exponents = np.array([powers for powers, _ in terms], dtype=np.int64)
    return Polynomial(exponents.reshape(len(terms), count), np.array([c for _, c in terms]))


def gains(design: Design, name: str) -> dict[str, float]:
    """Tell which symbols of the law move with a quantity, and how far.

    Parameters
    ----------
    design : Design
        Its levels decide what follows the rails and the drops.
    name : str
        A part, a level, V_CC, V_EE or a field of `LAW_FIELDS`.

    Returns
    -------
    dict
        Symbol to change per unit of the quantity, exact: V_OH falls by 1 with drop_high.
    """
    if name in design.parts:
        return {name: 1.0}
    still, moved = (_follow(design, {name: by}) for by in (0.0, 1.0))
    return {s: moved[s] - still[s] for s in moved if moved[s] != still[s]}


def _follow(design: Design, given: Mapping[str, float]) -> dict[str, float]:
    device = {field: given.get(field, 0.0) for field in LAW_FIELDS}
    levels = {level: given.get(level, 0.0) for level in design.levels}
    return law_values(design.stage, device, levels, given.get("V_CC", 0.0), given.get("V_EE", 0.0))


def slopes(design: Design, names: Iterable[str]) -> dict[str, dict[str, float]]:
    """Exact derivatives of trips, width and middle at the nominal values.

    Parameters
    ----------
    design : Design
        Gives the point.
    names : iterable of str
        Parts, levels, V_CC, V_EE and device fields; what follows them moves along.

    Returns
    -------
    dict
        "upper", "lower", "width" and "middle" to a dict of name to derivative, [V/Ohm], [V/V] or
        [Ohm]; nothing is differenced.
    """
    wanted = {name: gains(design, name) for name in names}
    by_symbol = {
        kind: fraction.slopes(design.values) for kind, fraction in fractions(design, wanted).items()
    }
    return {
        kind: {
            name: sum(gain * found.get(symbol, 0.0) for symbol, gain in moved.items())
            for name, moved in wanted.items()
        }
        for kind, found in by_symbol.items()
    }

"""Named intermediate quantities of a law, in the order in which they are evaluated."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import count

import sympy as sp

from hystkit.symbolic.symbols import symbol

HIGH, LOW = "high", "low"
_SUFFIX = {HIGH: "H", LOW: "L", None: ""}


@dataclass(frozen=True)
class Definition:
    """One named intermediate quantity.

    Attributes
    ----------
    symbol : sympy.Symbol
        Its name in the law.
    expression : sympy.Expr
        In symbols of the circuit and of earlier definitions.
    meaning, unit : str
        What it is.
    state : str or None
        Output state in which it holds; None where it holds in both.
    """

    symbol: sp.Symbol
    expression: sp.Expr
    meaning: str
    unit: str
    state: str | None

    def mapped(self, changes: dict[sp.Symbol, sp.Expr]) -> Definition:
        """Give the definition with symbols replaced, its own name included."""
        return replace(
            self,
            symbol=changes.get(self.symbol, self.symbol),
            expression=self.expression.xreplace(changes),
        )


class Ledger:
    """Collects the definitions of both output states; equal ones are kept once."""

    def __init__(self) -> None:
        # Symbol -> (what it was asked for as, its name without the mark of the state, definition).
        self._rows: dict[sp.Symbol, tuple[str, str, Definition]] = {}

    def define(
        self, base: str, state: str | None, expression: sp.Expr, meaning: str, unit: str
    ) -> sp.Expr:
        """Name an expression.

        Parameters
        ----------
        base : str
            Name without the mark of the state, such as "E_" or "S_tap".
        state : {"high", "low"} or None
            Output state in which it arises.
        expression : sympy.Expr
            What it stands for; a bare symbol or number needs no name.
        meaning, unit : str
            What it is.

        Returns
        -------
        sympy.Expr
            The new symbol, that of an equal definition, or the bare expression.
        """
        if expression.is_Atom:
            return expression
        for known, (known_base, stem, row) in self._rows.items():
            if known_base == base and row.expression == expression:
                if row.state != state:
                    self._rows[known] = (base, stem, replace(row, state=None))
                return known
        stem = self._free_stem(base, _SUFFIX[state])
        new = symbol(stem + _SUFFIX[state])
        self._rows[new] = (base, stem, Definition(new, expression, meaning, unit, state))
        return new

    def _free_stem(self, base: str, suffix: str) -> str:
        """Give a name that no other quantity has, numbered where it must be."""
        numbered = (base + (str(number) if number > 1 else "") for number in count(1))
        return next(stem for stem in numbered if symbol(stem + suffix) not in self._rows)

    def shared_names(self) -> dict[sp.Symbol, sp.Expr]:
        """Give the shorter names of what turned out equal in both states."""
        taken = {known.name for known in self._rows}
        changes: dict[sp.Symbol, sp.Expr] = {}
        for known, (base, stem, row) in self._rows.items():
            if row.state is None and stem not in taken and not base.endswith("_"):
                changes[known] = symbol(stem)
                taken.add(stem)
        return changes

    def definitions(self) -> tuple[Definition, ...]:
        """Give all definitions, each after those that it uses."""
        changes = self.shared_names()
        return tuple(row.mapped(changes) for _, _, row in self._rows.values())


def expand(expression: sp.Expr, definitions: Iterable[Definition]) -> sp.Expr:
    """Put the definitions back in.

    Parameters
    ----------
    expression : sympy.Expr
        In symbols of the circuit and of the definitions.
    definitions : iterable of Definition
        In the order of evaluation.

    Returns
    -------
    sympy.Expr
        In symbols of the circuit only.
    """
    known: dict[sp.Expr, sp.Expr] = {}
    for row in definitions:
        known[row.symbol] = row.expression.xreplace(known)
    return expression.xreplace(known)


def needed(
    expressions: Iterable[sp.Expr], definitions: Iterable[Definition]
) -> tuple[tuple[Definition, ...], frozenset[sp.Symbol]]:
    """Tell what expressions are evaluated from.

    Parameters
    ----------
    expressions : iterable of sympy.Expr
        In symbols of the circuit and of the definitions.
    definitions : iterable of Definition
        In the order of evaluation.

    Returns
    -------
    tuple
        The definitions that act on the expressions, in the order of evaluation, and the symbols
        of the circuit that act on them.
    """
    used: set[sp.Symbol] = set().union(*(e.free_symbols for e in expressions))
    acting = []
    for row in reversed(tuple(definitions)):
        if row.symbol in used:
            used = (used - {row.symbol}) | row.expression.free_symbols
            acting.append(row)
    return tuple(reversed(acting)), frozenset(used)


def restrict(
    definitions: Iterable[Definition], zeros: Iterable[sp.Symbol]
) -> tuple[tuple[Definition, ...], dict[sp.Expr, sp.Expr]]:
    """Set symbols to zero; what becomes a bare symbol needs no definition any more.

    Parameters
    ----------
    definitions : iterable of Definition
        In the order of evaluation.
    zeros : iterable of sympy.Symbol
        What is zero.

    Returns
    -------
    tuple
        The definitions that remain, and the replacements for expressions that use them.
    """
    changes: dict[sp.Expr, sp.Expr] = dict.fromkeys(zeros, sp.S.Zero)
    kept = []
    for row in definitions:
        reduced = row.mapped(changes)
        if reduced.expression.is_Atom:
            changes[row.symbol] = reduced.expression
        else:
            kept.append(reduced)
    return tuple(kept), changes

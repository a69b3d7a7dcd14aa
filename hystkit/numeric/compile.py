"""The one crossing from symbols to numbers."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import Any

import sympy as sp
from sympy.printing.numpy import NumPyPrinter

from hystkit.circuit.stage import Stage
from hystkit.symbolic.law import SwitchingLaw, derive
from hystkit.symbolic.ledger import Definition, needed

#: Names of the arguments in order, and the function of them.
Compiled = tuple[tuple[str, ...], Callable[..., Any]]


@dataclass(frozen=True)
class Kernel:
    """A stage's law as functions of numbers or arrays.

    Attributes
    ----------
    law : SwitchingLaw
        What it was compiled from.
    """

    law: SwitchingLaw

    def trips(self, values: Mapping[str, Any]) -> tuple[Any, Any]:
        """Evaluate both trip points.

        Parameters
        ----------
        values : mapping of str to float or ndarray
            Every symbol of the full law; arrays broadcast.

        Returns
        -------
        tuple
            Upper and lower [V], inf or NaN where the law has no value.
        """
        names, function = self._trips
        upper, lower = function(*(values[name] for name in names))
        return upper, lower

    def voltages(self, state: str, values: Mapping[str, Any], signal: Any) -> dict[str, Any]:
        """Evaluate the voltage of every free node.

        Parameters
        ----------
        state : {"high", "low"}
            Output state.
        values : mapping of str to float or ndarray
            Every symbol of the full law; arrays broadcast.
        signal : float or ndarray
            Signal voltage V_IN [V].

        Returns
        -------
        dict
            Node to voltage [V].
        """
        nodes, names, function = self._voltages[state]
        given = {**values, "V_IN": signal}
        return dict(zip(nodes, function(*(given[name] for name in names)), strict=True))

    @cached_property
    def _trips(self) -> Compiled:
        return compiled(self.law.named, self.law.definitions)

    @cached_property
    def _voltages(self) -> dict[str, tuple[tuple[str, ...], tuple[str, ...], Callable[..., Any]]]:
        return {
            state: (
                tuple(found.potentials),
                *compiled(tuple(found.potentials.values()), self.law.definitions),
            )
            for state, found in self.law.states.items()
        }


@lru_cache(maxsize=256)
def kernel(stage: Stage) -> Kernel:
    """Compile the law of a stage; stages of the same circuit share one kernel.

    Parameters
    ----------
    stage : Stage
        With its optional parts.

    Returns
    -------
    Kernel
        Compiled on first use.
    """
    return Kernel(derive(stage))


def compiled(
    expressions: tuple[sp.Expr, ...], definitions: tuple[Definition, ...] = ()
) -> Compiled:
    """Compile expressions into one function with common parts evaluated once.

    Parameters
    ----------
    expressions : tuple of sympy.Expr
        In symbols of a law.
    definitions : tuple of Definition
        Of the same law: its named quantities are the common parts. Put back in, those of a dense
        network would grow without end.

    Returns
    -------
    tuple
        Names of the arguments in order, and the function; it returns one value an expression.
    """
    rows, leaves = needed(expressions, definitions)
    symbols = sorted(leaves, key=lambda s: s.name)
    named = [(row.symbol, row.expression) for row in rows]
    shared = (lambda given: (named, given)) if named else True
    printer = _Printer({"fully_qualified_modules": False, "inline": True})
    function = sp.lambdify(symbols, expressions, modules="numpy", printer=printer, cse=shared)
    return tuple(s.name for s in symbols), function


class _Printer(NumPyPrinter):  # type: ignore[misc]  # sympy comes without types
    """Writes a reciprocal as a division, for which numpy needs a third of the time of a power."""

    def _print_Pow(self, expr: sp.Pow, **settings: Any) -> str:  # noqa: N802 - sympy's name
        if expr.exp == -1:
            return f"(1/({self._print(expr.base)}))"
        return str(super()._print_Pow(expr, **settings))

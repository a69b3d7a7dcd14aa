"""Design equations and sensitivities: the formulas turned round."""

from __future__ import annotations

import sympy as sp

from hystkit.symbolic.symbols import symbol


def solve_pair(
    upper: sp.Expr, lower: sp.Expr, one: sp.Symbol, two: sp.Symbol
) -> tuple[dict[str, sp.Expr], ...]:
    """Solve both trip formulas for two of their symbols.

    Parameters
    ----------
    upper, lower : sympy.Expr
        Trip points as rational expressions.
    one, two : sympy.Symbol
        What is sought.

    Returns
    -------
    tuple of dict
        Solutions as name to expression in V_upper, V_lower and the other symbols; empty where
        there is none.
    """
    # Conductances enter node equations linearly: unknown resistors are sought as 1/R.
    unknowns = [sp.Dummy(s.name) for s in (one, two)]
    stand_in = {
        s: 1 / u if s.name.startswith("R") else u for s, u in zip((one, two), unknowns, strict=True)
    }
    equations = [
        sp.numer(sp.together((trip - symbol(wanted)).xreplace(stand_in)))
        for trip, wanted in ((upper, "V_upper"), (lower, "V_lower"))
    ]
    found = []
    for solution in _solve(equations, unknowns):
        values = [solution.get(u, sp.S.Zero) for u in unknowns]
        if any(v == 0 or v.has(*unknowns) for v in values):
            continue
        found.append(
            {
                s.name: _signed(sp.factor(1 / v if s.name.startswith("R") else v))
                for s, v in zip((one, two), values, strict=True)
            }
        )
    return tuple(found)


def normalised(formula: sp.Expr, x: sp.Symbol) -> sp.Expr:
    """Relative change of a formula for a relative change of one symbol.

    Parameters
    ----------
    formula : sympy.Expr
        Any expression.
    x : sympy.Symbol
        What changes.

    Returns
    -------
    sympy.Expr
        (x/f) df/dx as one fraction.
    """
    return sp.factor(sp.together(x * formula.diff(x) / formula))


def _signed(formula: sp.Expr) -> sp.Expr:
    """Turn a leading minus into the order of a difference: -(a - b) is b - a."""
    number, factors = formula.as_coeff_mul()
    difference = next((f for f in factors if f.is_Add), None)
    if number >= 0 or difference is None:
        return formula
    return sp.Mul(-number, -difference, *(f for f in factors if f is not difference))


def _solve(equations: list[sp.Expr], unknowns: list[sp.Symbol]) -> list[dict[sp.Symbol, sp.Expr]]:
    polynomials = [sp.Poly(e, *unknowns) for e in equations]
    if all(p.total_degree() <= 1 for p in polynomials):
        return [
            dict(zip(unknowns, solution, strict=True))
            for solution in sp.linsolve([p.as_expr() for p in polynomials], *unknowns)
        ]
    return list(sp.solve([p.as_expr() for p in polynomials], unknowns, dict=True))

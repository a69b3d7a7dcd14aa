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
    # A trip is linear-fractional in each conductance and linear in each voltage: what has to be
    # zero is bilinear in the two unknowns, with resistors sought as 1/R.
    unknowns = tuple(sp.Dummy(s.name) for s in (one, two))
    stand_in = {
        s: 1 / u if s.name.startswith("R") else u for s, u in zip((one, two), unknowns, strict=True)
    }
    fractions = [
        sp.fraction(sp.cancel(sp.together((trip - symbol(wanted)).xreplace(stand_in))))
        for trip, wanted in ((upper, "V_upper"), (lower, "V_lower"))
    ]
    above, below = zip(*fractions, strict=True)
    return tuple(
        {
            s.name: _signed(_tidy(1 / value if s.name.startswith("R") else value))
            for s, value in zip((one, two), pair, strict=True)
        }
        for pair in _bilinear(*above, *unknowns)
        if 0 not in pair and not any(_vanishes(d, unknowns, pair) for d in below)
    )


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


# What stands first, and positive, in a difference.
_LEADING = ("V_OH", "V_upper")


def _signed(formula: sp.Expr) -> sp.Expr:
    """Turn differences above and below the bar into their natural order, with few minus signs."""
    number, factors = formula.as_coeff_mul()
    turned = []
    for factor in factors:
        flip = _is_turned(factor.as_base_exp()[0])
        turned.append(_negated(factor) if flip else factor)
        number *= _sign_of_negated(factor) if flip else 1
    if number < 0:
        # A leading minus is the other order of a difference that has no natural one.
        for place, factor in enumerate(turned):
            base, _ = factor.as_base_exp()
            if base.is_Add and _leader(base) is None and _sign_of_negated(factor) < 0:
                number, turned[place] = -number, _negated(factor)
                break
    return sp.Mul(number, *turned)


def _negated(factor: sp.Expr) -> sp.Expr:
    """Give a power of a sum with every sign of the sum turned."""
    base, exponent = factor.as_base_exp()
    return (-base) ** exponent if exponent.is_Integer else factor


def _sign_of_negated(factor: sp.Expr) -> int:
    """Tell what `_negated` has to be multiplied by to stand for the factor again."""
    _, exponent = factor.as_base_exp()
    return -1 if exponent.is_Integer and exponent % 2 else 1


def _is_turned(total: sp.Expr) -> bool:
    """Whether a sum has its leading voltage, or all it has, negative."""
    if not total.is_Add:
        return False
    leader = _leader(total)
    if leader is not None:
        return bool(leader.could_extract_minus_sign())
    return all(term.could_extract_minus_sign() for term in total.args)


def _leader(total: sp.Expr) -> sp.Expr | None:
    """Give the term that decides the order of a sum."""
    for name in _LEADING:
        terms = [term for term in total.args if symbol(name) in term.free_symbols]
        if len(terms) == 1:
            return terms[0]
    return None


def _bilinear(
    first: sp.Expr, second: sp.Expr, u: sp.Symbol, v: sp.Symbol
) -> list[tuple[sp.Expr, sp.Expr]]:
    """Solve a0 + a1 u + a2 v + a3 u v = 0 and the same with b for u and v."""
    rows = [[sp.Poly(e, u, v).coeff_monomial(m) for m in (1, u, v, u * v)] for e in (first, second)]
    (a0, a1, a2, a3), (b0, b1, b2, b3) = rows
    # v from one equation in the other.
    resultant = (b0 + b1 * u) * (a2 + a3 * u) - (b2 + b3 * u) * (a0 + a1 * u)
    pairs = []
    for root in _roots(sp.Poly(resultant, u)):
        for c0, c1, c2, c3 in rows:
            share = _tidy(c2 + c3 * root)
            if share != 0:
                pairs.append((root, _tidy(-(c0 + c1 * root) / share)))
                break
    return pairs


def _roots(polynomial: sp.Poly) -> list[sp.Expr]:
    """Solve a polynomial of the second degree at most; rational roots first."""
    if polynomial.is_zero:
        return []
    _, factors = sp.factor_list(polynomial)
    linear = [f for f, _ in factors if f.degree() == 1]
    roots = [_tidy(-f.coeff_monomial(1) / f.LC()) for f in linear]
    for f in (f for f, _ in factors if f.degree() == 2):
        a, b, c = f.all_coeffs()
        root = sp.sqrt(sp.factor(b**2 - 4 * a * c))
        roots += [(-b + sign * root) / (2 * a) for sign in (1, -1)]
    return roots


def _vanishes(
    formula: sp.Expr, unknowns: tuple[sp.Symbol, ...], pair: tuple[sp.Expr, sp.Expr]
) -> bool:
    """Whether a formula is zero at a solution: told at a place that no formula singles out."""
    names = sorted((formula.free_symbols | pair[0].free_symbols | pair[1].free_symbols), key=str)
    place = {s: sp.Rational(sp.prime(n + 7), sp.prime(2 * n + 5)) for n, s in enumerate(names)}
    at = {u: value.xreplace(place) for u, value in zip(unknowns, pair, strict=True)}
    return bool(abs(sp.N(formula.xreplace(at).xreplace(place), 30, chop=True)) < 1e-20)


def _tidy(formula: sp.Expr) -> sp.Expr:
    """Write as one factored fraction; a root is left where it stands."""
    rooted = any(not power.exp.is_Integer for power in formula.atoms(sp.Pow))
    return formula if rooted else sp.factor(formula)

"""Formulas in the form that an engineer writes: by source, factored, few fractions."""

from __future__ import annotations

import sympy as sp

#: Operations times symbols above which factoring takes longer than anyone waits; the built-in
#: forms stay below 600.
LARGEST = 1000


def by_source(expression: sp.Expr, sources: tuple[sp.Symbol, ...]) -> sp.Expr:
    """Arrange an expression that is linear in its sources.

    Parameters
    ----------
    expression : sympy.Expr
        Linear in `sources`, rational in all other symbols.
    sources : tuple of sympy.Symbol
        Voltages and currents.

    Returns
    -------
    sympy.Expr
        Equal to `expression`, one fraction for each denominator that occurs; two sources whose
        coefficients are opposite or equal stand together as their difference or sum. Left as it
        is where it is larger than `LARGEST`: the formula of a dense network of one's own.
    """
    if expression.count_ops() * len(expression.free_symbols) > LARGEST:
        return expression
    shares = {s: sp.factor(sp.together(expression.diff(s))) for s in sources}
    terms = _paired({s: share for s, share in shares.items() if share != 0})
    if not terms:
        return sp.factor(expression)
    groups: dict[sp.Expr, list[tuple[sp.Expr, sp.Expr]]] = {}
    for share, source in terms:
        numerator, denominator = sp.fraction(share)
        number, rest = denominator.as_content_primitive()
        groups.setdefault(rest, []).append((numerator / number, source))
    return sp.Add(*(_fraction(rest, group) for rest, group in groups.items()))


def _fraction(denominator: sp.Expr, terms: list[tuple[sp.Expr, sp.Expr]]) -> sp.Expr:
    """Write terms over one denominator, what all numerators share in front."""
    if all(share.could_extract_minus_sign() for share, _ in terms):
        # The minus goes in front, not into each sum of resistances.
        return -_fraction(denominator, [(-share, source) for share, source in terms])
    number = sp.ilcm(1, *(share.as_coeff_Mul()[0].q for share, _ in terms))
    common = sp.factor(sp.gcd_list([sp.expand(share * number) for share, _ in terms]))
    inner = sp.Add(*(sp.factor(share * number / common) * source for share, source in terms))
    return sp.Mul(sp.Rational(1, number), common, inner, 1 / denominator)


def _paired(shares: dict[sp.Symbol, sp.Expr]) -> list[tuple[sp.Expr, sp.Expr]]:
    """Join sources whose shares are opposite or equal: (share, combined source)."""
    terms: list[tuple[sp.Expr, sp.Expr]] = []
    left = dict(shares)
    while left:
        source, share = left.popitem()
        partner = next((s for s, other in left.items() if other in (share, -share)), None)
        if partner is None:
            terms.append((share, source))
            continue
        other = left.pop(partner)
        combined = partner + source if other == share else partner - source
        terms.append((other, combined))
    return terms[::-1]

"""LaTeX of expressions: the field's symbols, terms in reading order, numbers in their place."""

from __future__ import annotations

from collections.abc import Iterable
from functools import cache
from typing import Any

import sympy as sp
from sympy.printing.latex import LatexPrinter

from hystkit.symbolic.symbols import latex_name, split_name

#: Width, in letters, that the right side of an equation may take on a page.
LINE_WIDTH = 52.0

#: Letters that the number in place of each symbol takes, as pairs of symbol and letters.
Letters = tuple[tuple[sp.Symbol, float], ...]

_TERM_ORDER = ("V_", "E_", "R_", "Z_", "S_", "K_", "G_", "I_")


class LawPrinter(LatexPrinter):
    """LaTeX printer with the subscripts of the field and positive terms first."""

    def _print_Symbol(self, expr: sp.Symbol, style: str = "plain") -> str:  # noqa: N802
        return str(self._settings["symbol_names"].get(expr, latex_name(expr.name)))

    def _print_Mul(self, expr: sp.Expr) -> str:  # noqa: N802
        # A sum of fractions stands beside the bar, not above it, where it would be set small.
        outer = self._settings["long_frac_ratio"]
        self._settings["long_frac_ratio"] = 0.1 if _holds_fractions(expr) else None
        try:
            return str(super()._print_Mul(expr))
        finally:
            self._settings["long_frac_ratio"] = outer

    def _as_ordered_terms(self, expr: sp.Expr, order: str | None = None) -> list[sp.Expr]:
        return ordered_terms(expr)


def ordered_terms(expression: sp.Expr) -> list[sp.Expr]:
    """Give the terms of a sum in reading order.

    Parameters
    ----------
    expression : sympy.Expr
        A sum, or a single term.

    Returns
    -------
    list of sympy.Expr
        Positive terms first, then by what they hold: voltages, resistances, currents.
    """
    terms = sp.Add.make_args(expression)
    return sorted(terms, key=lambda term: (term.could_extract_minus_sign(), *_rank(term)))


def write_expression(expression: sp.Expr, names: dict[sp.Symbol, str] | None = None) -> str:
    r"""Write an expression in LaTeX.

    Parameters
    ----------
    expression : sympy.Expr
        In symbols of a law.
    names : dict, optional
        What stands in place of a symbol, such as a number with its unit; factors are then joined
        by a dot.

    Returns
    -------
    str
        Math-mode LaTeX; needs amsmath only.
    """
    settings: dict[str, Any] = {"symbol_names": names or {}}
    if names:
        settings["mul_symbol"] = "dot"
    return str(LawPrinter(settings).doprint(expression))


def write_lines(
    expression: sp.Expr, names: dict[sp.Symbol, str] | None = None, letters: Letters = ()
) -> list[str]:
    """Write an expression on as many lines as its width asks for.

    Parameters
    ----------
    expression : sympy.Expr
        In symbols of a law.
    names : dict, optional
        As for `write_expression`.
    letters : tuple of (sympy.Symbol, float), optional
        Room that each of the names takes, where these are numbers.

    Returns
    -------
    list of str
        One line, or one for each group of terms; all but the first begin with a sign.
    """
    if width(expression, letters) <= LINE_WIDTH:
        return [write_expression(expression, names)]
    if expression.is_Mul:
        return _product_lines(expression, names, letters)
    return _sum_lines(expression, LINE_WIDTH, names, letters)


def _product_lines(
    expression: sp.Expr, names: dict[sp.Symbol, str] | None, letters: Letters
) -> list[str]:
    """Break a product inside its widest sum; a fraction stays whole."""
    sums = [factor for factor in expression.args if factor.is_Add]
    if not sums or _is_whole(expression):
        return [write_expression(expression, names)]
    inner = max(sums, key=lambda factor: (width(factor, letters), str(factor)))
    front = sp.Mul(*(factor for factor in expression.args if factor is not inner))
    before = write_expression(front, names)
    if front.is_Add:
        before = f"\\left({before}\\right)"
    dot = "\\cdot " if names else ""
    room = max(LINE_WIDTH - width(front, letters), LINE_WIDTH / 2)
    lines = _sum_lines(inner, room, names, letters)
    lines[0] = f"{before} {dot}\\bigl[ {lines[0]}"
    lines[-1] += " \\bigr]"
    return lines


def _sum_lines(
    expression: sp.Expr, room: float, names: dict[sp.Symbol, str] | None, letters: Letters
) -> list[str]:
    lines: list[list[sp.Expr]] = [[]]
    for term in ordered_terms(expression):
        if lines[-1] and _sum_width((*lines[-1], term), letters) > room:
            lines.append([])
        lines[-1].append(term)
    written = [write_expression(sp.Add(*line), names) for line in lines]
    return [written[0], *(line if line.startswith("-") else f"+ {line}" for line in written[1:])]


def _sum_width(terms: Iterable[sp.Expr], letters: Letters) -> float:
    return float(sum(width(term, letters) + 2.8 for term in terms))


@cache
def width(expression: sp.Expr, letters: Letters = ()) -> float:
    """Estimate the set width of an expression.

    Parameters
    ----------
    expression : sympy.Expr
        Any expression of a law.
    letters : tuple of (sympy.Symbol, float), optional
        Room that the numbers take which stand in place of the symbols; empty where symbols stand.

    Returns
    -------
    float
        In letters of the text.
    """
    if expression.is_Symbol:
        named = 1.6 + 1.2 * len(split_name(expression.name)[1])
        return float(dict(letters).get(expression, named))
    if expression.is_Add:
        return _sum_width(expression.args, letters) - 2.8
    below = [f for f in sp.Mul.make_args(expression) if _is_divisor(f)]
    if below:
        above = sp.Mul(*(f for f in sp.Mul.make_args(expression) if f not in below))
        divisor = sp.Mul(*(1 / f for f in below))
        widths = width(above, letters), width(divisor, letters)
        return (sum(widths) + 2.0 if _holds_fractions(expression) else max(widths)) + 0.5
    if expression.is_Mul:
        brackets = sum(2.0 for factor in expression.args if factor.is_Add)
        # Between numbers stand dots; a minus has its room between the terms already.
        factors = [f for f in expression.args if f != -1] if letters else expression.args
        dots = 1.6 * (len(factors) - 1) if letters else 0.0
        return sum(width(factor, letters) for factor in factors) + dots + brackets
    if expression.is_Pow:
        return width(expression.base, letters) + (2.0 if expression.base.is_Add else 0.6)
    return float(len(str(expression)))


def fits(expression: sp.Expr, letters: Letters = ()) -> bool:
    """Tell whether an expression can be set within the width of a page.

    Parameters
    ----------
    expression : sympy.Expr
        Any expression of a law.
    letters : tuple of (sympy.Symbol, float), optional
        As for `width`.

    Returns
    -------
    bool
        Whether each of its terms fits on a line.
    """
    return all(width(term, letters) <= LINE_WIDTH for term in sp.Add.make_args(expression))


def _is_whole(product: sp.Expr) -> bool:
    """Tell whether a product is set as one fraction, which cannot be broken."""
    return any(map(_is_divisor, product.args)) and not _holds_fractions(product)


def _is_divisor(factor: sp.Expr) -> bool:
    return bool(factor.is_Pow and factor.exp.is_negative)


def _holds_fractions(product: sp.Expr) -> bool:
    """Tell whether a product has a sum of fractions among its factors."""
    terms = [term for factor in product.args if factor.is_Add for term in factor.args]
    return any(map(_is_divisor, (f for term in terms for f in sp.Mul.make_args(term))))


def _rank(term: sp.Expr) -> tuple[int, str]:
    names = sorted(s.name for s in term.free_symbols)
    kinds = [i for i, start in enumerate(_TERM_ORDER) for n in names if n.startswith(start)]
    return min(kinds, default=len(_TERM_ORDER)), " ".join(names)

"""A law as presentation MathML, in the subset that browsers set natively."""

from __future__ import annotations

from collections.abc import Iterable
from functools import lru_cache
from typing import Any

import sympy as sp
from sympy.printing.mathml import MathMLPresentationPrinter

from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.printing import ordered_terms, width
from hystkit.symbolic.symbols import split_name, split_signs

#: Media type of presentation MathML, in the output of a notebook.
MIME = "application/mathml-presentation+xml"

_NAMESPACE = "http://www.w3.org/1998/Math/MathML"
_MINUS = "\N{MINUS SIGN}"
_TIMES = "\N{INVISIBLE TIMES}"
#: Letters that the right side of an equation may take beside the pictures of a page.
_ROOM = 40.0


class LawMathPrinter(MathMLPresentationPrinter):  # type: ignore[misc]
    """MathML printer with the subscripts of the field and positive terms first."""

    def _print_Symbol(self, sym: sp.Symbol, style: str = "plain") -> Any:  # noqa: N802
        base, subscript = split_name(sym.name)
        letter = self._leaf("mi", base)
        if not subscript:
            return letter
        signs, rest = split_signs(subscript)
        return self._inner("msub", letter, self._leaf("mtext", signs.replace("-", _MINUS) + rest))

    def _print_Add(self, expr: sp.Expr, order: str | None = None) -> Any:  # noqa: N802
        return self._terms(ordered_terms(expr))

    def _print_Mul(self, expr: sp.Expr) -> Any:  # noqa: N802
        if expr.could_extract_minus_sign():
            return self._inner("mrow", self._leaf("mo", _MINUS), self._print(-expr))
        above, below = sp.fraction(expr)
        if below == 1:
            return self._product(expr)
        outside = [factor for factor in sp.Mul.make_args(above) if _holds_fraction(factor)]
        if not outside:
            return self._inner("mfrac", self._print(above), self._print(below))
        # A sum of fractions stands beside the bar, not above it, where it would be set small.
        rest = sp.Mul(*(f for f in sp.Mul.make_args(above) if f not in outside))
        bar = self._inner("mfrac", self._print(rest), self._print(below))
        return self._joined([bar, *(self._bracketed(factor) for factor in outside)])

    def _product(self, expr: sp.Expr) -> Any:
        factors = sp.Mul.make_args(expr)
        order = sp.Mul._from_args(factors).as_ordered_factors() if len(factors) > 1 else factors
        return self._joined([self._bracketed(f) if f.is_Add else self._print(f) for f in order])

    def _bracketed(self, expr: sp.Expr) -> Any:
        return self._inner("mrow", self._leaf("mo", "("), self._print(expr), self._leaf("mo", ")"))

    def _joined(self, nodes: list[Any]) -> Any:
        pieces = [nodes[0]]
        for node in nodes[1:]:
            times = self._leaf("mo", _TIMES)
            for side in ("lspace", "rspace"):
                times.setAttribute(side, "0.09em")
            pieces += [times, node]
        return self._inner("mrow", *pieces) if len(pieces) > 1 else pieces[0]

    def _terms(self, terms: list[sp.Expr], *, signed: bool = False) -> Any:
        """Join the terms of a sum; `signed` where a sign stands in front of the first one, too."""
        pieces = []
        for index, term in enumerate(terms):
            negative = term.could_extract_minus_sign()
            if index or negative or signed:
                sign = self._leaf("mo", _MINUS if negative else "+")
                if signed:
                    sign.setAttribute("form", "infix")  # also where it opens a line
                pieces.append(sign)
            pieces.append(self._print(-term if negative else term))
        return self._inner("mrow", *pieces)

    def _lines(self, expr: sp.Expr, room: float) -> Any:
        """Set an expression on as many lines as its width asks for."""
        if width(expr) <= room:
            return self._print(expr)
        if expr.is_Mul and expr.could_extract_minus_sign():
            return self._inner("mrow", self._leaf("mo", _MINUS), self._lines(-expr, room))
        if expr.is_Mul:
            return self._product_lines(expr, room)
        groups = _grouped(expr, room)
        if len(groups) == 1:
            return self._print(expr)
        rows = [
            self._inner("mtr", self._inner("mtd", self._terms(group, signed=index > 0)))
            for index, group in enumerate(groups)
        ]
        table = self._inner("mtable", *rows)
        table.setAttribute("displaystyle", "true")
        return table

    def _product_lines(self, expr: sp.Expr, room: float) -> Any:
        """Break a product inside its widest sum; one without a sum stays whole."""
        sums = [factor for factor in expr.args if factor.is_Add]
        if not sums:
            return self._print(expr)
        inner = max(sums, key=lambda factor: (width(factor), str(factor)))
        front = sp.Mul(*(factor for factor in expr.args if factor is not inner))
        left = self._bracketed(front) if front.is_Add else self._print(front)
        lines = self._lines(inner, max(room - width(front), room / 2))
        right = self._inner("mrow", self._leaf("mo", "("), lines, self._leaf("mo", ")"))
        return right if front == 1 else self._joined([left, right])

    def equation(self, left: sp.Symbol, right: sp.Expr) -> str:
        """Write ``left = right`` as the content of a ``math`` element."""
        row = self._inner(
            "mrow", self._print(left), self._leaf("mo", "="), self._lines(right, _ROOM)
        )
        return str(row.toxml())

    def row(self, left: sp.Symbol, right: sp.Expr) -> str:
        """Write ``left = right`` as a row of a table."""
        pieces = (self._print(left), self._leaf("mo", "="), self._lines(right, _ROOM))
        return str(self._inner("mtr", *(self._inner("mtd", each) for each in pieces)).toxml())

    def _leaf(self, tag: str, text: str) -> Any:
        node = self.dom.createElement(tag)
        node.appendChild(self.dom.createTextNode(text))
        return node

    def _inner(self, tag: str, *children: Any) -> Any:
        node = self.dom.createElement(tag)
        for child in children:
            node.appendChild(child)
        return node


@lru_cache(maxsize=64)
def law_mathml(law: SwitchingLaw) -> tuple[tuple[str, str], ...]:
    """Write the rows of a law in MathML.

    Parameters
    ----------
    law : SwitchingLaw
        Full, or less some non-idealities: ``law.for_design(design)`` leaves those that count.

    Returns
    -------
    tuple of (str, str)
        Name of the quantity and its equation as one ``math`` element, in reading order; named
        quantities first, both trip points last.
    """
    return tuple(
        (left.name, f'<math displaystyle="true">{LawMathPrinter().equation(left, right)}</math>')
        for left, right in law.rows
    )


def formula_mathml(rows: Iterable[tuple[sp.Symbol, sp.Expr]]) -> str:
    """Write equations below each other in MathML.

    Parameters
    ----------
    rows : iterable of tuple of sympy.Symbol and sympy.Expr
        What is defined, and what it is.

    Returns
    -------
    str
        One ``math`` element with a row for each equation, aligned at the equals signs.
    """
    printer = LawMathPrinter()
    table = "".join(printer.row(left, right) for left, right in rows)
    table = f'<mtable displaystyle="true" columnalign="right center left">{table}</mtable>'
    return f'<math xmlns="{_NAMESPACE}" display="block">{table}</math>'


def symbol_mathml(name: str) -> str:
    """Write a single name in MathML.

    Parameters
    ----------
    name : str
        Such as "R_PU".

    Returns
    -------
    str
        One ``math`` element.

    Examples
    --------
    >>> symbol_mathml("R_F")
    '<math><msub><mi>R</mi><mtext>F</mtext></msub></math>'
    """
    return f"<math>{LawMathPrinter()._print(sp.Symbol(name)).toxml()}</math>"


def _holds_fraction(factor: sp.Expr) -> bool:
    """Tell whether a factor is a sum with a fraction in it."""
    return bool(factor.is_Add) and any(sp.fraction(term)[1] != 1 for term in factor.args)


def _grouped(expression: sp.Expr, room: float) -> list[list[sp.Expr]]:
    """Share the terms of a sum out over lines."""
    lines: list[list[sp.Expr]] = [[]]
    for term in ordered_terms(expression):
        if lines[-1] and sum(width(t) + 2.8 for t in (*lines[-1], term)) > room:
            lines.append([])
        lines[-1].append(term)
    return lines

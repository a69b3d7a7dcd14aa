"""A law in LaTeX, in the four ways in which a report wants it."""

from __future__ import annotations

import math
import re
from functools import lru_cache

import sympy as sp

from hystkit.base.digits import exact_digits, rounded, trip_digits
from hystkit.base.errors import Fault, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show_latex
from hystkit.circuit.design import Design
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.printing import LINE_WIDTH, Letters, fits, width
from hystkit.symbolic.steps import derivation, equation
from hystkit.symbolic.symbols import meaning, symbol
from hystkit.symbolic.tables import PartsAndTrips, exact_values

# Room that a number with its unit takes at least, and that the equals sign of a result takes, in
# letters.
_NUMBER_WIDTH = 6.0
_EQUALS_WIDTH = 2.0
# Digits that no number is written beyond: of a trip, and of what it is computed from.
_MOST_DIGITS = 9
_MOST_INNER_DIGITS = 15

Rows = tuple[tuple[sp.Symbol, sp.Expr], ...]

VARIANTS = ("formula", "derivation", "numbers", "table")


def write(law: SwitchingLaw, variant: str = "formula", design: Design | None = None) -> str:
    r"""Write a law in LaTeX.

    Parameters
    ----------
    law : SwitchingLaw
        Full, or less some non-idealities: ``law.for_design(design)`` leaves those that count.
    variant : {"formula", "derivation", "numbers", "table"}
        Both trip points as one ``aligned`` block, for math mode; the derivation as an ``align*``
        block with its steps; the formula with the design's numbers and units put in, for math
        mode; a ``tabular`` of parts and trips.
    design : Design, optional
        Needed for "numbers" and "table".

    Returns
    -------
    str
        LaTeX that needs amsmath only.

    Raises
    ------
    UnknownNameError
        If there is no such variant.
    InputError
        If "numbers" or "table" is asked for without a design, or with one of another stage.
    """
    if variant not in VARIANTS:
        raise UnknownNameError.of("this LaTeX", [unknown_name_fault("variant", variant, VARIANTS)])
    if variant == "formula":
        return formula(law.rows)
    if variant == "derivation":
        return _align(law)
    if design is None or design.stage != law.stage:
        raise InputError.of("this LaTeX", [_design_fault(law, variant, design)])
    if variant == "table":
        return PartsAndTrips(law, design).to_latex()
    return aligned(_number_lines(law, design))


def aligned(lines: list[str]) -> str:
    r"""Put lines into an ``aligned`` block.

    Parameters
    ----------
    lines : list of str
        With their alignment marks.

    Returns
    -------
    str
        For math mode.
    """
    return "\\begin{aligned}\n" + " \\\\\n".join(lines) + "\n\\end{aligned}"


@lru_cache(maxsize=128)
def formula(rows: Rows) -> str:
    r"""Write equations as one ``aligned`` block.

    Parameters
    ----------
    rows : tuple of (sympy.Symbol, sympy.Expr)
        What is defined, and what it is.

    Returns
    -------
    str
        For math mode.
    """
    return aligned([line for left, right in rows for line in equation(left, right)])


def _align(law: SwitchingLaw) -> str:
    blocks = []
    for step in derivation(law):
        body = " \\\\\n".join(step.equations)
        blocks.append(f"\\intertext{{{step.title}}}\n{body}")
    first, *more = blocks
    # \intertext cannot open an align block: the first title stands before it.
    title, _, body = first.partition("\n")
    opening = title.removeprefix("\\intertext{").removesuffix("}")
    return "\n".join([opening, "\\begin{align*}", " \\\\\n".join([body, *more]), "\\end{align*}"])


def _number_lines(law: SwitchingLaw, design: Design) -> list[str]:
    rows = law.rows
    shown = _shown(law, design, rows)
    if rows != law.named_rows and not all(fits(right, _letters(shown)) for _, right in rows):
        rows = law.named_rows  # numbers take more room than the symbols that they stand for
        shown = _shown(law, design, rows)
    letters = _letters(shown)
    room = dict(letters)
    lines = []
    for (left, right), template in zip(rows, _templates(rows, letters), strict=True):
        filled = [_fill(line, shown) for line in template]
        result = f"= {shown[left].removeprefix(_OPENING).removesuffix(_CLOSING)}"
        if len(filled) == 1 and width(right, letters) + room[left] + _EQUALS_WIDTH <= LINE_WIDTH:
            filled[0] += f" {result}"
        else:
            filled.append(f"&\\quad {result}")
        lines += filled
    return lines


def _shown(law: SwitchingLaw, design: Design, rows: Rows) -> dict[sp.Symbol, str]:
    """Write every number of a law so that those shown give those shown further down."""
    units = {row.symbol: row.unit for row in law.definitions}
    exact = exact_values(design)
    given = {s: _decimal(v, exact_digits(float(v), _MOST_DIGITS)) for s, v in exact.items()}
    shown = {s: _number(v, meaning(s.name)[1], _MOST_DIGITS) for s, v in given.items()}
    digits, values = _consistent(rows, exact, given)
    for left, _ in rows:
        unit = units.get(left, "V").replace("1", "")  # a ratio carries no unit
        shown[left] = _number(values[left], unit, digits[left])
    return shown


def _consistent(
    rows: Rows, exact: dict[sp.Symbol, sp.Rational], given: dict[sp.Symbol, sp.Rational]
) -> tuple[dict[sp.Symbol, int], dict[sp.Symbol, sp.Rational]]:
    """Give the digits of each row, and the values computed from numbers with these digits.

    The trips get as many as show their width; what they are computed from as many as it takes to
    find the same trips from the numbers written down.
    """
    trips = [left for left, _ in rows[-2:]]
    wanted = _evaluated(rows, exact, {})
    upper, lower = (float(wanted[trip]) for trip in trips)
    final = {trip: trip_digits(float(wanted[trip]), upper - lower, _MOST_DIGITS) for trip in trips}
    for inner in range(max(final.values()), _MOST_INNER_DIGITS + 1):
        digits = {left: inner for left, _ in rows} | final
        values = _evaluated(rows, given, digits)
        if all(values[trip] == _decimal(wanted[trip], final[trip]) for trip in trips):
            break
    return digits, values


def _evaluated(
    rows: Rows, known: dict[sp.Symbol, sp.Rational], digits: dict[sp.Symbol, int]
) -> dict[sp.Symbol, sp.Rational]:
    """Evaluate row by row, each rounded where digits are given."""
    values = dict(known)
    for left, right in rows:
        value = right.xreplace(values)
        values[left] = _decimal(value, digits[left]) if left in digits else value
    return values


def _decimal(value: sp.Rational, digits: int) -> sp.Rational:
    """Round to a number that is exactly what its digits say."""
    return sp.Rational(repr(rounded(float(value), digits)))


def _letters(shown: dict[sp.Symbol, str]) -> Letters:
    """Tell how much room each number takes, in whole letters so that few templates are made."""
    return tuple((s, max(_NUMBER_WIDTH, math.ceil(0.75 * _length(t)))) for s, t in shown.items())


def _length(text: str) -> int:
    """Count the signs that LaTeX sets for a number with its unit."""
    return len(re.sub(r"\\[A-Za-z]+", "x", re.sub(r"\\(?:left|right|mathrm|,)|[{} ]", "", text)))


@lru_cache(maxsize=128)
def _templates(rows: Rows, letters: Letters) -> list[list[str]]:
    """Write each row once, with a mark in place of every symbol."""
    return [
        equation(left, right, {s: f"@{s.name}@" for s in right.free_symbols}, letters)
        for left, right in rows
    ]


def _fill(template: str, shown: dict[sp.Symbol, str]) -> str:
    parts = template.split("@")
    parts[1::2] = (shown[symbol(name)] for name in parts[1::2])
    return "".join(parts)


_OPENING, _CLOSING = "\\left(", "\\right)"


def _number(value: sp.Rational, unit: str, digits: int) -> str:
    text = show_latex(float(value), unit, digits)
    return f"{_OPENING}{text}{_CLOSING}" if value < 0 else text


def _design_fault(law: SwitchingLaw, variant: str, design: Design | None) -> Fault:
    return Fault(
        f'"{variant}" needs the design whose numbers it shows.',
        asked=f'latex("{variant}")',
        have="no design" if design is None else f"a design of another stage: {design.stage.title}",
        rule=f"a design of the stage: {law.stage.title}",
        remedy=f'law.latex("{variant}", design=design)',
    )

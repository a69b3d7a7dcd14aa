"""A law in LaTeX, in the four ways in which a report wants it."""

from __future__ import annotations

from functools import lru_cache

import sympy as sp

from hystkit.base.errors import Fault, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show_latex
from hystkit.circuit.design import Design
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.printing import LINE_WIDTH, width
from hystkit.symbolic.steps import derivation, equation
from hystkit.symbolic.symbols import meaning
from hystkit.symbolic.tables import PartsAndTrips, exact_values

# Room that a result takes at the end of a line, in letters.
_RESULT_WIDTH = 10.0

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
def formula(rows: tuple[tuple[sp.Symbol, sp.Expr], ...]) -> str:
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
    exact = exact_values(design)
    units = {row.symbol.name: row.unit for row in law.definitions}
    shown = {s.name: _number(float(v), meaning(s.name)[1]) for s, v in exact.items()}
    lines = []
    for (left, right), template in zip(law.rows, _templates(law), strict=True):
        exact[left] = right.xreplace(exact)
        unit = units.get(left.name, "V").replace("1", "")  # a ratio carries no unit
        value = float(exact[left])
        shown[left.name] = _number(value, unit)
        filled = [_fill(line, shown) for line in template]
        result = f"= {show_latex(value, unit)}"
        if len(filled) == 1 and width(right, numeric=True) <= LINE_WIDTH - _RESULT_WIDTH:
            filled[0] += f" {result}"
        else:
            filled.append(f"&\\quad {result}")
        lines += filled
    return lines


@lru_cache(maxsize=128)
def _templates(law: SwitchingLaw) -> list[list[str]]:
    """Write each row once, with a mark in place of every symbol."""
    return [
        equation(left, right, {s: f"@{s.name}@" for s in right.free_symbols})
        for left, right in law.rows
    ]


def _fill(template: str, shown: dict[str, str]) -> str:
    parts = template.split("@")
    parts[1::2] = (shown[name] for name in parts[1::2])
    return "".join(parts)


def _number(value: float, unit: str) -> str:
    text = show_latex(value, unit)
    return f"\\left({text}\\right)" if value < 0 else text


def _design_fault(law: SwitchingLaw, variant: str, design: Design | None) -> Fault:
    return Fault(
        f'"{variant}" needs the design whose numbers it shows.',
        asked=f'latex("{variant}")',
        have="no design" if design is None else f"a design of another stage: {design.stage.title}",
        rule=f"a design of the stage: {law.stage.title}",
        remedy=f'law.latex("{variant}", design=design)',
    )

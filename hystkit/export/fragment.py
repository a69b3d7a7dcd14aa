r"""A design in LaTeX, as a fragment that a report takes in with ``\input``."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from hystkit import __version__
from hystkit.base.fields import Field, Viewed, escape_latex
from hystkit.base.files import write_text
from hystkit.base.quantity import show_latex
from hystkit.circuit.design import Design
from hystkit.export.cautions import CAUTIONS
from hystkit.export.summary import Summary
from hystkit.symbolic.law import SwitchingLaw, derive
from hystkit.symbolic.steps import Step
from hystkit.symbolic.symbols import latex_name, meaning

_VALIDITY = (
    "The law is static and holds for the resistive network and the device values stated; delay,"
    " slew, noise and capacitances are not part of it."
)
# Symbols that a derivation uses beside those of the law itself.
_IN_DERIVATIONS = ("V_IN", "V_plus", "V_minus", "V_out", "V_width", "V_middle")
# Ends a heading that no formula follows.
_APART = r"\par\nobreak"
# Steps of a derivation ahead of the law itself: node equations, output states, condition.
_PREMISES = 3


def tex(design: Design) -> str:
    r"""Write a design in LaTeX for a report.

    Parameters
    ----------
    design : Design
        What to write down.

    Returns
    -------
    str
        Trip points, derivation, switching law, the law with the numbers put in, tables of parts
        and of symbols. No preamble and no sectioning commands, so that any document class takes it
        in; it needs ``\usepackage{amsmath}`` only and defines nothing.

    Raises
    ------
    DesignError
        If the design has no trip points.

    Notes
    -----
    Names in scripts other than Latin need LuaLaTeX or XeLaTeX and a font that has them.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> print(next(line for line in tex(header_tank()).splitlines() if "width" in line))
    \noindent $V_{\mathrm{width}} = 724.6\,\mathrm{mV}$ (0.6038 m)\par
    """
    summary = Summary(design)
    law = derive(design).for_design(design)
    body = "\n".join(_body(summary, law))
    glossary = Glossary(tuple(row for row in _known(law, design) if latex_name(row[0]) in body))
    return "\n".join(
        [
            f"% hystkit {__version__}: \\input this file; it needs \\usepackage{{amsmath}} only.",
            body,
            *_heading("Symbols"),
            *_table(glossary.to_latex()),
            *_heading("Validity"),
            _APART,
            *(rf"\noindent {escape_latex(line)}\par" for line in (_VALIDITY, *CAUTIONS)),
            "",
        ]
    )


def write_tex(design: Design, path: str | os.PathLike[str], *, overwrite: bool = False) -> Path:
    r"""Write a design in LaTeX to a file, for ``\input`` in a report; see `tex`.

    Parameters
    ----------
    design : Design
        What to write down.
    path : path
        File to write.
    overwrite : bool, default False
        Whether an existing file may be replaced.

    Returns
    -------
    Path
        The file.

    Raises
    ------
    OutputExistsError
        If the file exists and `overwrite` is false.
    DesignError
        If the design has no trip points.
    """
    return write_text(Path(path), tex(design), overwrite=overwrite)


@dataclass(frozen=True)
class Glossary(Viewed):
    """Symbols with their meaning and unit.

    Attributes
    ----------
    rows : tuple of (name, meaning, unit)
        In the order in which they are listed.
    """

    rows: tuple[tuple[str, str, str], ...]

    def _fields(self) -> Sequence[Field]:
        return [Field(name, text, "", unit, latex_name(name)) for name, text, unit in self.rows]


def _body(summary: Summary, law: SwitchingLaw) -> Iterator[str]:
    design = summary.design
    yield from (*_heading(summary.heading), _APART)
    yield from _results(summary)
    yield from (*_heading("Derivation"), _APART)
    for step in law.steps[:_PREMISES]:
        yield from _step(step)
    yield from _heading("Switching law")
    yield from _display(law.latex("formula"))
    if not law.is_ideal:
        yield from _heading("The same with an ideal device")
        yield from _display(law.without(law.non_ideal).latex("formula"))
    yield from _step(law.steps[-1])
    yield from _heading("With numbers")
    yield from _display(law.latex("numbers", design=design))
    yield from _heading("Parts and trip points")
    yield from _table(law.latex("table", design=design))


def _heading(text: str) -> list[str]:
    # Sectioning commands differ between document classes, and would enter the contents.
    return [rf"\par\medskip\noindent\textbf{{{escape_latex(text)}}}"]


def _results(summary: Summary) -> Iterator[str]:
    for name, volts in summary.trips.items():
        notes = filter(None, (summary.quantity(name), summary.interval(name)))
        text = escape_latex("; ".join(notes))
        shown = show_latex(volts, "V", summary.texts.digits(name))
        yield (
            rf"\noindent ${latex_name(f'V_{name}')} = {shown}$"
            rf"{f' ({text})' if text else ''}\par"
        )


def _step(step: Step) -> Iterator[str]:
    yield rf"\par\noindent {escape_latex(step.title)}:"
    yield from _align(" \\\\\n".join(step.equations))


def _display(block: str) -> list[str]:
    """Turn an ``aligned`` block into a display of its own."""
    lines = block.removeprefix("\\begin{aligned}\n").removesuffix("\n\\end{aligned}")
    return _align(lines)


def _align(lines: str) -> list[str]:
    # A long law runs over more than one page.
    opening = r"\begingroup\allowdisplaybreaks\begin{align*}"
    return [opening, lines, r"\end{align*}\endgroup"]


def _table(tabular: str) -> list[str]:
    return [_APART, r"\noindent", tabular + r"\par"]


def _known(law: SwitchingLaw, design: Design) -> Iterator[tuple[str, str, str]]:
    """Every symbol that may occur, once, with its meaning and unit."""
    nodes = (f"V_{node}" for state in law.states.values() for node in state.potentials)
    circuit = {name: meaning(name) for name in (*design.values, *_IN_DERIVATIONS, *nodes)}
    ideal = law.without(law.non_ideal)
    for name, (text, unit) in {**circuit, **ideal.symbols, **law.symbols}.items():
        yield name, text, unit

"""One list of fields, and every view of a result made from it: text, HTML and LaTeX."""

from __future__ import annotations

import html
from abc import ABC, abstractmethod
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from hystkit.base.digits import span_digits
from hystkit.base.quantity import show, show_latex

Value = float | bool | str | tuple[float, float] | None


@dataclass(frozen=True)
class Field:
    """One line of a result.

    Parameters
    ----------
    label : str
        What it is.
    value : float, bool, str, pair of float, or None
        A number in SI units, yes or no, text, an interval (lowest, highest), or None where there
        is none.
    unit : str, optional
        Unit of the number.
    note : str, optional
        A remark to stand beside it.
    latex : str, optional
        The label in LaTeX math, such as ``V_{UT}``; `label` is used where it is empty.
    digits : int, default 4
        Significant digits of a number; the ends of an interval get as many as tell them apart.
    """

    label: str
    value: Value
    unit: str = ""
    note: str = ""
    latex: str = ""
    digits: int = 4

    @property
    def shown(self) -> str:
        """The value with its unit, rounded for display."""
        return self._rendered(show, str)

    @property
    def shown_latex(self) -> str:
        """The value with its unit, rounded for display, as LaTeX text."""
        return self._rendered(lambda *given: f"${show_latex(*given)}$", escape_latex)

    @property
    def label_latex(self) -> str:
        """The label as LaTeX text."""
        return f"${self.latex}$" if self.latex else escape_latex(self.label)

    def _rendered(
        self, number: Callable[[float, str, int], str], words: Callable[[str], str]
    ) -> str:
        value = self.value
        if value is None:
            return words("—")
        if isinstance(value, bool):
            return words("yes" if value else "no")
        if isinstance(value, str):
            return words(value)
        if not isinstance(value, tuple):
            return number(value, self.unit, self.digits)
        digits = span_digits(*value)
        return " to ".join(number(end, self.unit, digits) for end in value)


class Viewed(ABC):
    """Text, HTML and LaTeX views of a result, from its one list of fields.

    A subclass gives `_fields` and may give `_title`.
    """

    __slots__ = ()

    @abstractmethod
    def _fields(self) -> Sequence[Field]:
        """Return the fields, in the order in which they are shown."""

    @property
    def _title(self) -> str:
        """What stands above the fields; nothing by default."""
        return ""

    def to_text(self) -> str:
        """Return the fields as aligned lines of text."""
        rows = [(f.label, f.shown, f.note) for f in self._fields()]
        labels, values = (max((len(row[i]) for row in rows), default=0) for i in (0, 1))
        lines = [
            f"{label:<{labels}}  {value:<{values}}  {note}".rstrip() for label, value, note in rows
        ]
        return "\n".join([self._title, *lines] if self._title else lines)

    def to_latex(self) -> str:
        r"""Return the fields as a LaTeX tabular, to stand in text; amsmath is enough.

        Accents and Greek letters in labels need an input encoding or an engine that knows them.
        """
        fields = self._fields()
        noted = any(f.note for f in fields)
        columns = "lll" if noted else "ll"
        lines = [rf"\begin{{tabular}}{{{columns}}}"]
        if self._title:
            lines += [
                rf"\multicolumn{{{len(columns)}}}{{l}}{{{escape_latex(self._title)}}} \\",
                r"\hline\noalign{\smallskip}",
            ]
        for f in fields:
            cells = [f.label_latex, f.shown_latex] + [escape_latex(f.note)] * noted
            lines.append(" & ".join(cells) + r" \\")
        return "\n".join([*lines, r"\end{tabular}"])

    def __str__(self) -> str:
        """Return the text view."""
        return self.to_text()

    def _repr_html_(self) -> str:
        """Return the fields as an HTML table that takes its colours from the page."""
        fields = self._fields()
        noted = any(f.note for f in fields)
        caption = f"<caption {_LEFT}>{html.escape(self._title)}</caption>" if self._title else ""
        rows = "".join(_html_row(f, noted) for f in fields)
        return f'<table style="color: inherit">{caption}<tbody>{rows}</tbody></table>'


def escape_latex(text: str) -> str:
    r"""Return plain text as LaTeX text, with everything special to LaTeX escaped.

    Parameters
    ----------
    text : str
        Any text. Ohm, micro, degree and the signs of `show` become commands that need no package
        but amsmath.

    Examples
    --------
    >>> print(escape_latex("R_T: 1 % of 4 kΩ"))
    R\_T: 1 \% of 4 k\ensuremath{\Omega}
    """
    return "".join(_LATEX.get(c, c) for c in text)


# Notebooks align cells to the right unless each says otherwise.
_LEFT = 'style="text-align: left; padding: 0.1em 1em 0.1em 0"'


def _html_row(field: Field, noted: bool) -> str:
    cells = [field.shown] + [field.note] * noted
    heading = f'<th scope="row" {_LEFT}>{html.escape(field.label)}</th>'
    return f"<tr>{heading}{''.join(f'<td {_LEFT}>{html.escape(cell)}</td>' for cell in cells)}</tr>"


_LATEX = {
    **{c: f"\\{c}" for c in "&%$#_{}"},
    "\\": r"\textbackslash{}",
    "~": r"\textasciitilde{}",
    "^": r"\textasciicircum{}",
    "\n": " ",
    # At the start of a row these two would belong to the line break before it.
    "[": "{[}",
    "*": "{*}",
    "<": r"\ensuremath{<}",
    ">": r"\ensuremath{>}",
    "|": r"\ensuremath{|}",
    '"': "''",
    "Ω": r"\ensuremath{\Omega}",
    "\u2126": r"\ensuremath{\Omega}",
    "µ": r"\ensuremath{\mu}",
    "\u03bc": r"\ensuremath{\mu}",
    "°": r"\ensuremath{{}^\circ}",
    "∞": r"\ensuremath{\infty}",
    "√": r"\ensuremath{\surd}",
    "±": r"\ensuremath{\pm}",
    "²": r"\ensuremath{^2}",
    "³": r"\ensuremath{^3}",
    "·": r"\ensuremath{\cdot}",
    "−": r"\ensuremath{-}",
    "—": "---",
    "–": "--",
}

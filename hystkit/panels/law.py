"""The law of a stage: in symbols, and with the numbers of the design put in."""

from __future__ import annotations

import html
from typing import Any

import ipywidgets as widgets

from hystkit.circuit.design import Design
from hystkit.panels.copying import CopyButton
from hystkit.panels.desk import Desk
from hystkit.symbolic.law import SwitchingLaw


class LawView:
    """Formula and formula with numbers, each with buttons that copy its LaTeX.

    Parameters
    ----------
    desk : Desk
        Of the panel.

    Attributes
    ----------
    latex : str
        The formula that is shown, for math mode.
    """

    def __init__(self, desk: Desk) -> None:
        kit = desk.kit
        self._written: tuple[object, ...] | None = None
        self.latex = ""
        self.formula: Any = kit.make(widgets.HTMLMath, "math", layout={"margin": "0"})
        self.numbers: Any = kit.make(widgets.HTMLMath, "math", "numbers", layout={"margin": "0"})
        self.copies = {
            "formula": CopyButton(desk, "copy formula", "copy the formula as LaTeX"),
            "derivation": CopyButton(desk, "copy derivation", "copy the derivation as LaTeX"),
            "numbers": CopyButton(desk, "copy numbers", "copy the formula with numbers as LaTeX"),
        }
        above = [self.copies["formula"].widget, self.copies["derivation"].widget]
        heads = [
            headed(desk, "Law", above),
            headed(desk, "Law with numbers", [self.copies["numbers"].widget]),
        ]
        self.widget = kit.make(
            widgets.VBox,
            "card",
            children=[heads[0], self.formula, heads[1], self.numbers],
            layout={"flex": "3 1 600px", "min_width": "0", "margin": "0"},
        )

    def show(self, law: SwitchingLaw, design: Design) -> None:
        """Show a law.

        Parameters
        ----------
        law : SwitchingLaw
            With the non-idealities that count in the design.
        design : Design
            Gives the numbers.
        """
        structure = (law.stage, law.non_ideal)
        if structure != self._written:
            self.latex = law.latex("formula")
            self.formula.value = displayed(self.latex)
            self.copies["formula"].show(self.latex)
            self.copies["derivation"].show(law.latex("derivation"))
            self._written = structure
        numbers = law.latex("numbers", design=design)
        self.numbers.value = displayed(numbers)
        self.copies["numbers"].show(numbers)


def displayed(latex: str) -> str:
    """Write a formula for a page that typesets math.

    Parameters
    ----------
    latex : str
        For math mode.

    Returns
    -------
    str
        HTML, escaped.
    """
    return f"$${html.escape(latex)}$$"


def headed(desk: Desk, title: str, actions: list[Any]) -> Any:
    """Lay out the heading of a card with what can be done there.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    title : str
        Plain text.
    actions : list of ipywidgets.DOMWidget
        Stand at its right.

    Returns
    -------
    ipywidgets.HBox
        The heading.
    """
    return desk.kit.make(
        widgets.HBox,
        "head",
        children=[desk.kit.label(html.escape(title), "heading"), *actions],
        layout={"width": "100%", "margin": "0", "flex_flow": "row wrap", "align_items": "center"},
    )

"""Selectors of the built-in form; a circuit of one's own shows its title in their place."""

from __future__ import annotations

import html
from functools import partial
from typing import Any

import ipywidgets as widgets

from hystkit.circuit.design import Design
from hystkit.circuit.forms import CHOICES
from hystkit.circuit.stage import Stage
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import Note


class FormSection:
    """Four selectors: sense, supply, reference, output.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self._reference = "divider"
        self.note = Note(desk)
        kit = desk.kit
        self.selectors = {choice: self._selector(choice) for choice in CHOICES}
        for choice, selector in self.selectors.items():
            desk.listen(selector, partial(self._chosen, choice), self.note.say)
        self._heading = kit.label("", "heading")
        self.widget = kit.make(
            widgets.VBox, "section", children=[], layout={"width": "100%", "margin": "0"}
        )

    def show(self, design: Design) -> None:
        """Show the form of a design.

        Parameters
        ----------
        design : Design
            The model.
        """
        stage = design.stage
        self.note.clear()
        if stage.is_custom:
            self._heading.value = _own_circuit(stage)
            self.widget.children = [self._heading, self.note.widget]
            return
        self._heading.value = "Form"
        if stage.reference != "ground":
            self._reference = str(stage.reference)
        for choice, selector in self.selectors.items():
            offered = offered_choices(choice, stage.supply)
            if tuple(selector.options) != offered:
                selector.options = offered
            selector.value = getattr(stage, choice)
        self.widget.children = [self._heading, *self.selectors.values(), self.note.widget]

    def _selector(self, choice: str) -> Any:
        options = CHOICES[choice]
        return self._desk.kit.make(
            widgets.ToggleButtons,
            "choice",
            options=options,
            description=choice,
            tooltips=[f"{choice}: {option}" for option in options],
            layout={"width": "100%", "margin": "0"},
            style={"description_width": "72px", "button_width": "auto"},
        )

    def _chosen(self, choice: str, value: str) -> Changes:
        changes = {choice: value}
        if (choice, value) == ("supply", "single") and (
            self.selectors["reference"].value == "ground"
        ):
            # Ground is no reference in a single supply: back to what there was before it.
            changes["reference"] = self._reference
        return changes


def offered_choices(choice: str, supply: str) -> tuple[str, ...]:
    """Give the options of a selector.

    Parameters
    ----------
    choice : str
        "sense", "supply", "reference" or "output".
    supply : str
        "single" or "split".

    Returns
    -------
    tuple of str
        "ground" is a reference with a split supply only.
    """
    options = CHOICES[choice]
    return tuple(o for o in options if o != "ground" or supply == "split")


def _own_circuit(stage: Stage) -> str:
    rows = {"sense": stage.sense, "supply": stage.supply, "output": stage.output}
    facts = ", ".join(f"{value} {key}" if key == "supply" else value for key, value in rows.items())
    return (
        f'{html.escape(stage.title)}<div class="hystkit-quiet">own circuit of {len(stage.parts)} '
        f"resistors: {html.escape(facts)}</div>"
    )

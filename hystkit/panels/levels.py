"""Folded section of supply rails and levels."""

from __future__ import annotations

import html
from functools import partial

from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import (
    TOLERANCE_WIDTH,
    VALUE_WIDTH,
    Level,
    Note,
    read_tolerance,
    row_of,
    text_field,
)
from hystkit.panels.fold import Fold
from hystkit.panels.texts import amount, percent, subscripted

_RAILS = {"V_CC": "positive rail", "V_EE": "negative rail"}
_LEVELS = {
    "V_REF": "reference",
    "V_PU": "pull-up supply",
    "V_L": "load",
    "V_OH": "output high",
    "V_OL": "output low",
}


class LevelsSection:
    """Rails with their tolerance, and every level that the stage has.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self._design: Design | None = None
        self._desk = desk
        self._shown: tuple[object, ...] | None = None
        self.rails = {name: _Rail(desk, name, says) for name, says in _RAILS.items()}
        self.levels = {
            name: Level(desk, name, says, partial(self._level, name))
            for name, says in _LEVELS.items()
        }
        self.fold = Fold(desk, "Levels")
        self.widget = self.fold.widget

    def show(self, design: Design) -> None:
        """Show the levels of a design.

        Parameters
        ----------
        design : Design
            The model.
        """
        self._design = design
        volts = {n: v for n, v in design.values.items() if n.startswith("V_")}
        shown = (design.supply, design.levels, volts)
        if self._shown == shown and not self._desk.typed:
            return
        self._shown = shown
        rails = ["V_CC", "V_EE"] if design.supply.split else ["V_CC"]
        voltages = {"V_CC": design.supply.v_cc, "V_EE": design.supply.low_rail}
        for name in rails:
            self.rails[name].show(voltages[name], design.supply.tol)
        for name in design.stage.levels:
            self.levels[name].show(None if name == "V_REF" else design.values[name])
        rows = [self.rails[n].widget for n in rails]
        self.fold.fill(rows + [self.levels[n].widget for n in design.stage.levels])
        told = [*rails, *(n for n in design.stage.levels if n in ("V_REF", "V_PU"))]
        shown_volts = (f"{subscripted(n)} {amount(design.values[n], 'V')}" for n in told)
        self.fold.summarise(", ".join(shown_volts))

    def _level(self, name: str) -> Part | None:
        if self._design is None or name not in self._design.levels:
            return None
        return self._design.levels[name]


class _Rail:
    """A supply rail; both rails have one tolerance, which stands at the positive one."""

    def __init__(self, desk: Desk, name: str, says: str) -> None:
        self.name = name
        self.note = Note(desk)
        self.field = text_field(desk, f"{name}, {says}", "100%")
        self.tolerance = text_field(desk, "tolerance of the supply", "100%")
        label = f'{subscripted(name)} <span class="hystkit-quiet">{html.escape(says)}</span>'
        self._label = desk.kit.label(label)
        desk.listen(self.field, self._read, self.note.say, keep=True)
        desk.listen(self.tolerance, self._read_tolerance, self.note.say, keep=True)
        cells = [self._label, self.field] + ([self.tolerance] if name == "V_CC" else [])
        self.widget = row_of(desk, f"1fr {VALUE_WIDTH} {TOLERANCE_WIDTH}", cells, self.note)

    def show(self, volts: float, tol: float) -> None:
        self.note.clear()
        self.field.value = amount(volts, "V")
        self.tolerance.value = percent(tol)

    def _read(self, text: str) -> Changes:
        return {self.name: read(text, unit="V", name=self.name)}

    def _read_tolerance(self, text: str) -> Changes:
        return {"supply_tol": read_tolerance(text)}

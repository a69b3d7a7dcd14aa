"""The parts of a stage: a slider over a preferred series, a typed value and a tolerance each."""

from __future__ import annotations

from bisect import bisect_left
from typing import Any

import ipywidgets as widgets

from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.preferred import nearest, series, step
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import (
    NAME_WIDTH,
    TOLERANCE_WIDTH,
    VALUE_WIDTH,
    Note,
    row_of,
    text_field,
    with_tolerance,
)
from hystkit.panels.revise import FIRST_VALUES
from hystkit.panels.texts import ohms, percent, subscripted

SERIES = ("E12", "E24", "E48", "E96", "E192")

#: What the optional parts are, for their toggles.
OPTIONS = {
    "R_S": "source resistance of the signal",
    "R_G": "shunt from the plus input to ground",
    "R_R": "series resistance of the reference",
    "R_L": "load at the output",
}
# Far enough for any slider; beyond, preferred values would leave the range of floats.
_SMALLEST, _LARGEST = 1e-6, 1e15


class Steps:
    """The preferred values that a slider steps through: a decade to either side of a middle.

    Parameters
    ----------
    name : str
        Name of the series.
    middle : float
        Value around which they lie [Ω]; on the series or off it.
    """

    def __init__(self, name: str, middle: float) -> None:
        count = len(series(name))
        centre = nearest(min(max(middle, _SMALLEST), _LARGEST), name)
        self.series = name
        self.values = tuple(step(centre, name, n) for n in range(-count, 0))
        self.values += (centre, *(step(centre, name, n) for n in range(1, count + 1)))

    def place(self, value: float) -> int:
        """Give the number of the step nearest to a value.

        Parameters
        ----------
        value : float
            Resistance [Ω].

        Returns
        -------
        int
            The last or first step for a value beyond them.
        """
        above = bisect_left(self.values, value)
        pair = [n for n in (above - 1, above) if 0 <= n < len(self.values)]
        return min(pair, key=lambda n: abs(value / self.values[n] - self.values[n] / value))

    def reach(self, value: float) -> bool:
        """Whether a value lies between the first and the last step.

        Parameters
        ----------
        value : float
            Resistance [Ω].

        Returns
        -------
        bool
        """
        return self.values[0] <= value <= self.values[-1]


class PartRow:
    """One part.

    The slider holds the number of a step, never the value: a front end may round what a slider
    holds, and a value off the series would be lost.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Name of the part.
    """

    def __init__(self, desk: Desk, name: str) -> None:
        self.name = name
        self._desk = desk
        self._part = Part(FIRST_VALUES.get(name, 10e3))
        self._steps = Steps("E96", self._part.value)
        self._recentre = True
        self.note = Note(desk)
        self.slider = desk.kit.make(
            widgets.IntSlider,
            "slider",
            description=subscripted(name),
            description_allow_html=True,
            tooltip=f"{name}, steps of the series",
            readout=False,
            min=0,
            max=len(self._steps.values) - 1,
            layout={"width": "auto", "min_width": "0", "margin": "0"},
            style={"description_width": NAME_WIDTH},
        )
        self.field = text_field(desk, f"{name}, such as 4k7", "100%")
        self.tolerance = text_field(desk, f"tolerance of {name}", "100%")
        desk.listen(self.slider, self._stepped, self.note.say)
        desk.listen(self.field, self._typed, self.note.say, keep=True)
        desk.listen(self.tolerance, self._read_tolerance, self.note.say, keep=True)
        columns = f"1fr {VALUE_WIDTH} {TOLERANCE_WIDTH}"
        self.widget = row_of(desk, columns, [self.slider, self.field, self.tolerance], self.note)

    @property
    def steps(self) -> Steps:
        """The values that the slider steps through."""
        return self._steps

    def show(self, part: Part, series_name: str) -> None:
        """Show a part.

        Parameters
        ----------
        part : Part
            Value and tolerance.
        series_name : str
            Series of the slider's steps.
        """
        self._part = part
        self.note.clear()
        self.field.value = ohms(part.value)
        self.tolerance.value = percent(part.tol)
        # The steps stay while the value is among them: a slider must not move under the hand.
        lost = self._steps.series != series_name or not self._steps.reach(part.value)
        if self._recentre or lost:
            self._steps = Steps(series_name, part.value)
            self._recentre = False
        with self.slider.hold_sync():
            place, last = self._steps.place(part.value), len(self._steps.values) - 1
            self.slider.value = min(place, self.slider.max)
            self.slider.max = last
            self.slider.value = place

    def _stepped(self, place: int) -> Changes:
        return {self.name: self._steps.values[place]}

    def _typed(self, text: str) -> Changes:
        value = read(text, unit="Ω", name=self.name)
        self._recentre = True
        return {self.name: value}

    def _read_tolerance(self, text: str) -> Changes:
        return {self.name: with_tolerance(self._part, text)}


class PartsSection:
    """All parts of the stage, and which of the optional ones are fitted.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self._rows: dict[str, PartRow] = {}
        self._toggles: dict[str, Any] = {}
        self._design: Design | None = None
        kit = desk.kit
        self.note = Note(desk)
        self.series = kit.make(
            widgets.Dropdown,
            "field",
            options=SERIES,
            value="E96",
            tooltip="preferred series of the sliders",
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )
        desk.listen(self.series, self._rescale, self.note.say)
        heading = kit.label("Parts", "heading")
        per_cent = kit.label('<span class="hystkit-quiet">± %</span>')
        columns = f"1fr {VALUE_WIDTH} {TOLERANCE_WIDTH}"
        top = row_of(desk, columns, [heading, self.series, per_cent], self.note)
        self._list = kit.make(widgets.VBox, layout={"width": "100%", "margin": "0"})
        self._options_label = kit.label('<span class="hystkit-quiet">optional</span>')
        self._options = kit.make(
            widgets.HBox, "chips", layout={"flex_flow": "row wrap", "align_items": "center"}
        )
        self.widget = kit.make(
            widgets.VBox,
            "section",
            children=[top, self._list, self._options],
            layout={"width": "100%", "margin": "0"},
        )

    @property
    def rows(self) -> dict[str, PartRow]:
        """Rows of the parts that are shown, by name."""
        return {} if self._design is None else {n: self._rows[n] for n in self._design.parts}

    @property
    def toggles(self) -> dict[str, Any]:
        """Toggles of the optional parts that the form may have, by name."""
        optional = () if self._design is None else self._design.stage.optional
        return {name: self._toggles[name] for name in optional}

    def show(self, design: Design) -> None:
        """Show the parts of a design.

        Parameters
        ----------
        design : Design
            The model.
        """
        self._design = design
        self.note.clear()
        for name in design.parts:
            if name not in self._rows:
                self._rows[name] = PartRow(self._desk, name)
        for name in design.stage.optional:
            if name not in self._toggles:
                self._toggles[name] = self._toggle(name)
        for name, row in self.rows.items():
            row.show(design.parts[name], self.series.value)
        for name, toggle in self.toggles.items():
            toggle.value = name in design.parts
        self._list.children = [row.widget for row in self.rows.values()]
        chips = list(self.toggles.values())
        self._options.children = [self._options_label, *chips] if chips else []

    def _rescale(self, series_name: str) -> Changes:
        """Give the sliders other steps; the values stay."""
        with self._desk.silence():
            for name, row in self.rows.items():
                if self._design is not None:
                    row.show(self._design.parts[name], series_name)
        return {}

    def _toggle(self, name: str) -> Any:
        toggle = self._desk.kit.make(
            widgets.ToggleButton,
            "chip",
            description=name,
            tooltip=f"{name}, {OPTIONS[name]}",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )
        self._desk.listen(toggle, lambda fitted: {name: self._fitted(name, fitted)}, self.note.say)
        return toggle

    def _fitted(self, name: str, fitted: bool) -> Part | float | None:
        if not fitted:
            return None
        return self._desk.spare.parts.get(name) or FIRST_VALUES[name]

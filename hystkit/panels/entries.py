"""Rows of a control column: typed values with their tolerance, and why one was refused."""

from __future__ import annotations

import html
from collections.abc import Callable, Mapping
from typing import Any

import ipywidgets as widgets

from hystkit.base.quantity import parse_percent, read
from hystkit.circuit.parts import Part
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.texts import amount, percent, subscripted

NAME_WIDTH = "46px"
VALUE_WIDTH = "86px"
TOLERANCE_WIDTH = "58px"

_FLAT = {"width": "auto", "min_width": "0", "margin": "0"}


class Note:
    """A line below a row that says why a value was refused; takes no room while it is empty."""

    def __init__(self, desk: Desk) -> None:
        self.widget = desk.kit.make(widgets.HTML, "note", layout={**_FLAT, "width": "100%"})

    @property
    def text(self) -> str:
        """What is said, as HTML; empty while there is nothing to say."""
        return str(self.widget.value)

    def say(self, text: str) -> None:
        """Show a text.

        Parameters
        ----------
        text : str
            Plain text, of any content.
        """
        shown = html.escape(text)
        self.widget.value = f'<span role="alert">{shown}</span>' if text else ""

    def clear(self) -> None:
        """Show nothing."""
        self.widget.value = ""


def text_field(desk: Desk, tooltip: str, width: str, placeholder: str = "") -> Any:
    """Make a field that is read when Enter is pressed or the field is left.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    tooltip : str
        Its accessible name.
    width : str
        CSS width.
    placeholder : str, default ""
        What it shows while it is empty.

    Returns
    -------
    ipywidgets.Text
        The field.
    """
    return desk.kit.make(
        widgets.Text,
        "field",
        continuous_update=False,
        tooltip=tooltip,
        placeholder=placeholder,
        layout={"width": width, "min_width": "0", "margin": "0"},
    )


def row_of(desk: Desk, columns: str, cells: list[Any], note: Note) -> Any:
    """Lay cells out in columns, with the note below them.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    columns : str
        CSS grid columns.
    cells : list of ipywidgets.DOMWidget
        One for each column.
    note : Note
        Of this row.

    Returns
    -------
    ipywidgets.VBox
        The row.
    """
    grid = desk.kit.make(
        widgets.GridBox,
        children=cells,
        layout={
            "grid_template_columns": columns,
            "grid_gap": "0 8px",
            "align_items": "center",
            "width": "100%",
            "margin": "0",
        },
    )
    return desk.kit.make(
        widgets.VBox, "row", children=[grid, note.widget], layout={"width": "100%", "margin": "0"}
    )


class Amount:
    """A labelled field for one number; left empty, it stands for its default.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Key of the change that it proposes.
    label : str
        What stands before it, HTML.
    unit : str or None
        Unit of the number, empty where it has none; None for plain text.
    says : str
        Accessible name.
    """

    def __init__(self, desk: Desk, name: str, label: str, unit: str | None, says: str) -> None:
        self.name = name
        self._unit = unit
        self._text = label
        self._says = says
        self.note = Note(desk)
        self.field = text_field(desk, says, "100%")
        self._label = desk.kit.label(label)
        desk.listen(self.field, self._read, self._say, keep=True)
        columns = f"{NAME_WIDTH} 1fr" if unit is None else f"1fr {VALUE_WIDTH}"
        self.widget = row_of(desk, columns, [self._label, self.field], self.note)

    def show(self, value: float | str | None, default: str = "") -> None:
        """Show a value.

        Parameters
        ----------
        value : float, str or None
            None leaves the field empty.
        default : str, default ""
            What an empty field stands for.
        """
        self.note.clear()
        self.field.placeholder = default
        self.field.value = _written(value, self._unit)

    def remark(self, text: str) -> None:
        """Show a remark beside the label.

        Parameters
        ----------
        text : str
            Plain text; empty for none.
        """
        remark = f' <span class="hystkit-quiet">{html.escape(text)}</span>' if text else ""
        self._label.value = self._text + remark

    def _read(self, text: str) -> Changes:
        if not text.strip():
            return {self.name: None}
        if self._unit is None:
            return {self.name: text}
        return {self.name: read(text, unit=self._unit, name=self._says)}

    def _say(self, text: str) -> None:
        # A refusal names the field of the device; here it stands under its label.
        self.note.say(text.replace(self.name, self._says))


class Level:
    """A labelled field for a voltage with its tolerance.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    name : str
        Name of the level, such as "V_REF".
    says : str
        What it is.
    find : callable
        Gives the level as it stands in the design, None where it is left to its default.
    """

    def __init__(self, desk: Desk, name: str, says: str, find: Callable[[], Part | None]) -> None:
        self.name = name
        self._find = find
        self.note = Note(desk)
        self.field = text_field(desk, f"{name}, {says}", "100%")
        self.tolerance = text_field(desk, f"tolerance of {name}", "100%")
        label = f'{subscripted(name)} <span class="hystkit-quiet">{html.escape(says)}</span>'
        heading = desk.kit.label(label)
        desk.listen(self.field, self._read, self.note.say, keep=True)
        desk.listen(self.tolerance, self._read_tolerance, self.note.say, keep=True)
        columns = f"1fr {VALUE_WIDTH} {TOLERANCE_WIDTH}"
        self.widget = row_of(desk, columns, [heading, self.field, self.tolerance], self.note)

    def show(self, default: float | None) -> None:
        """Show the level as it stands in the design.

        Parameters
        ----------
        default : float or None
            What an empty field stands for [V].
        """
        part = self._find()
        self.note.clear()
        self.field.placeholder = "" if default is None else amount(default, "V")
        self.field.value = "" if part is None else amount(part.value, "V")
        # A default follows the rails and has no tolerance of its own.
        self.tolerance.disabled = part is None
        self.tolerance.value = "" if part is None else percent(part.tol)

    def _read(self, text: str) -> Changes:
        if not text.strip():
            return {self.name: None}
        return {self.name: read(text, unit="V", name=self.name)}

    def _read_tolerance(self, text: str) -> Mapping[str, Any]:
        part = self._find()
        return {} if part is None else {self.name: with_tolerance(part, text)}


def with_tolerance(part: Part, text: str) -> Part:
    """Give a part another tolerance.

    Parameters
    ----------
    part : Part
        A part or level.
    text : str
        As typed into a field that is headed in per cent; empty for none.

    Returns
    -------
    Part
        Value and temperature coefficient are kept.
    """
    return Part(part.value, read_tolerance(text), part.tempco)


def read_tolerance(text: str) -> float:
    """Read what was typed into a field that is headed in per cent.

    Parameters
    ----------
    text : str
        "1", "1 %" or a letter of IEC 60062; empty for none.

    Returns
    -------
    float
        A fraction.
    """
    return parse_percent(text, bare=True) if text.strip() else 0.0


def _written(value: float | str | None, unit: str | None) -> str:
    if value is None or isinstance(value, str):
        return value or ""
    return amount(value, unit or "")

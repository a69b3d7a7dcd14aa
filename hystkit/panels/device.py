"""Folded section of the switching device."""

from __future__ import annotations

import html
from dataclasses import fields

import ipywidgets as widgets

from hystkit.circuit.classes import device_classes, fitting
from hystkit.circuit.design import Design
from hystkit.circuit.device import UNITS, Device
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import NAME_WIDTH, Amount, Note, row_of
from hystkit.panels.fold import Fold
from hystkit.panels.texts import amount

#: Every field of a device in the order of its datasheet, and what it is.
LABELS = {
    "drop_high": "output high, below V_CC",
    "drop_low": "output low, above V_EE",
    "r_high": "output resistance, high",
    "r_low": "output resistance, low",
    "leakage": "output leakage, high",
    "offset": "input offset",
    "offset_drift": "offset drift",
    "bias_plus": "bias current, plus pin",
    "bias_minus": "bias current, minus pin",
    "common_mode_low": "common mode from, above V_EE",
    "common_mode_high": "common mode to, below V_CC",
    "delay": "delay",
    "gain": "open-loop gain",
    "source_current": "output sources at most",
    "sink_current": "output sinks at most",
}
#: Fields without a meaning for one kind of output.
_ONLY_WITH = {
    "r_high": "push-pull",
    "drop_high": "push-pull",
    "source_current": "push-pull",
    "leakage": "open-collector",
}
#: What the choice of a class shows where the values are those of no class.
OWN_VALUES = "own values"
_REPLACE = "values marked typical stand for a class: replace them from your own datasheet"
_DEFAULTS = {f.name: f.default for f in fields(Device)}


class ClassChoice:
    """A choice of the classes that fit the output; it fills every value at once.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self.note = Note(desk)
        self.field = desk.kit.make(
            widgets.Dropdown,
            "field",
            options=[OWN_VALUES],
            tooltip="class of the device",
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )
        desk.listen(self.field, _class_chosen, self.note.say)
        label = desk.kit.label("class")
        self.widget = row_of(desk, f"{NAME_WIDTH} 1fr", [label, self.field], self.note)

    def show(self, device: Device, output: str) -> None:
        """Show which class a device is of.

        Parameters
        ----------
        device : Device
            Of the design; of no class once one of its values is another.
        output : {"push-pull", "open-collector"}
            Of the stage: only classes that fit it are offered.
        """
        self.note.clear()
        names = fitting(output)
        if self.field.options != (OWN_VALUES, *names):
            self.field.options = (OWN_VALUES, *names)
        known = device.name in names and device == device_classes[device.name].device
        self.field.value = device.name if known else OWN_VALUES


class DeviceSection:
    """Every number of the device, as its datasheet states it.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self._shown: tuple[Device, str] | None = None
        self.choice = ClassChoice(desk)
        self.entries = {
            name: Amount(desk, name, html.escape(label), UNITS[name], label)
            for name, label in LABELS.items()
        }
        self.name = Amount(desk, "device_name", "name", None, "name of the device")
        self.remark = desk.kit.label("")
        self.fold = Fold(desk, "Device")
        self.widget = self.fold.widget

    def show(self, design: Design) -> None:
        """Show the device of a design.

        Parameters
        ----------
        design : Design
            The model.
        """
        device, output = design.device, design.stage.output
        if self._shown == (device, output) and not self._desk.typed:
            return
        self._shown = (device, output)
        self.choice.show(device, output)
        self.name.show(device.name)
        self.remark.value = _quiet(_REPLACE) if device.typical else ""
        for name, entry in self.entries.items():
            value = getattr(device, name)
            default = _DEFAULTS[name]
            entry.show(
                None if value == default else value,
                "not stated" if default is None else amount(0.0, UNITS[name]),
            )
            entry.remark(_remark(device, name))
        shown = [e.widget for n, e in self.entries.items() if _ONLY_WITH.get(n, output) == output]
        marked = [self.remark] if device.typical else []
        self.fold.fill([self.choice.widget, self.name.widget, *marked, *shown])
        stated = sum(getattr(device, name) != _DEFAULTS[name] for name in LABELS)
        counted = f"{stated} value{'s' * (stated != 1)} stated" if stated else "ideal"
        self.fold.summarise(html.escape(device.title or counted))


def _class_chosen(label: str) -> Changes:
    return {"device_class": None if label == OWN_VALUES else label}


def _remark(device: Device, name: str) -> str:
    """Say that a value is typical, and between which limits it lies."""
    told = ["typical"] if name in device.typical else []
    if name in device.limits:
        told.append(" to ".join(amount(end, UNITS[name]) for end in device.limits[name]))
    return ", ".join(told)


def _quiet(text: str) -> str:
    return f'<span class="hystkit-quiet">{html.escape(text)}</span>'

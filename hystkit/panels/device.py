"""Folded section of the switching device."""

from __future__ import annotations

import html
from dataclasses import fields

from hystkit.circuit.design import Design
from hystkit.circuit.device import UNITS, Device
from hystkit.panels.desk import Desk
from hystkit.panels.entries import Amount
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
}
#: Fields without a meaning for one kind of output.
_ONLY_WITH = {"r_high": "push-pull", "drop_high": "push-pull", "leakage": "open-collector"}
_DEFAULTS = {f.name: f.default for f in fields(Device)}


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
        self.entries = {
            name: Amount(desk, name, html.escape(label), UNITS[name], label)
            for name, label in LABELS.items()
        }
        self.name = Amount(desk, "device_name", "name", "", "name of the device")
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
        self.name.show(device.name)
        for name, entry in self.entries.items():
            value = getattr(device, name)
            default = _DEFAULTS[name]
            entry.show(
                None if value == default else value,
                "not stated" if default is None else amount(0.0, UNITS[name]),
            )
            entry.remark(_limits(device, name))
        shown = [e for n, e in self.entries.items() if _ONLY_WITH.get(n, output) == output]
        self.fold.fill([self.name.widget, *(entry.widget for entry in shown)])
        stated = sum(getattr(device, name) != _DEFAULTS[name] for name in LABELS)
        counted = f"{stated} value{'s' * (stated != 1)} stated" if stated else "ideal"
        self.fold.summarise(html.escape(device.name) or counted)


def _limits(device: Device, name: str) -> str:
    if name not in device.limits:
        return ""
    low, high = (amount(end, UNITS[name]) for end in device.limits[name])
    return f"{low} to {high}"

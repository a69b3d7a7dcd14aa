"""Rows of a noise panel: numbers of noise, passage and hum, and what comes of them as a table."""

from __future__ import annotations

import html
import math
from collections.abc import Callable, Sequence
from functools import partial
from typing import Any

import ipywidgets as widgets

from hystkit.base.errors import InputError, NoiseModelError
from hystkit.base.quantity import read, show
from hystkit.circuit.design import Design
from hystkit.panels.asking import Asked, Chosen
from hystkit.panels.cycle_rows import Ladder, NumberRow
from hystkit.panels.desk import Desk
from hystkit.panels.noise_request import KINDS, NUMBERS, OWN, NoiseRequest
from hystkit.panels.parts import Steps
from hystkit.panels.table import Rows
from hystkit.panels.texts import amount
from hystkit.review.noise_scene import NoiseScene

_SERIES = "E24"
#: Amplitude about which a slider steps that begins without hum [V].
_FIRST_HUM = 10e-3
_HOUR = 3600.0
#: Label, accessible name and unit of every number that has a slider.
_ROWS = {
    "rms": ("noise, rms", "rms of the noise on the signal [V]", "V"),
    "f1": ("pole", "corner frequency of the filter [Hz]", "Hz"),
    "f2": ("second pole", "second corner frequency, that of the device [Hz]", "Hz"),
    "bandwidth": ("bandwidth", "highest frequency of the noise [Hz]", "Hz"),
    "slope": ("slope", "slope of the signal at the trips [V/s]", "V/s"),
    "hum_amplitude": ("hum", "amplitude of hum on the signal [V], empty for none", "V"),
}


class NoiseSection:
    """Noise, slope and hum: a slider and a typed value each.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    find : callable
        Gives the request as it stands.
    """

    def __init__(self, desk: Desk, find: Callable[[], NoiseRequest]) -> None:
        self._find = find
        kit = desk.kit
        self.kind = Chosen(desk, "kind", "noise", {kind: kind for kind in KINDS})
        self.rows = {name: _number_row(desk, name) for name in _ROWS}
        self.frequency = Asked(
            desk,
            "hum_frequency",
            "hum at",
            "frequency of the hum [Hz]",
            _read_frequency,
            partial(_write, "Hz"),
        )
        self.remark: Any = kit.label("")
        self._list = kit.make(widgets.VBox, layout={"width": "100%", "margin": "0"})
        passage = (self.rows["slope"], self.rows["hum_amplitude"], self.frequency)
        self.widget = kit.make(
            widgets.VBox,
            "section",
            children=[
                kit.label("Noise", "heading"),
                self.kind.widget,
                self._list,
                *(row.widget for row in passage),
            ],
            layout={"width": "100%", "margin": "0"},
        )

    def show(self, design: Design) -> None:
        """Show noise, slope and hum.

        Parameters
        ----------
        design : Design
            The model; the request stands beside it.
        """
        request = self._find()
        self.kind.show(request.kind)
        for name in ("slope", "hum_amplitude", *NUMBERS.get(request.kind, ())):
            self.rows[name].show(getattr(request, name))
        self.frequency.show(request.hum_frequency)
        if request.kind == OWN:
            said = "" if request.own is None else f"{request.own.describe}; "
            text = html.escape(f"{said}set in code: panel.set(noise=...)")
            self.remark.value = f'<span class="hystkit-quiet">{text}</span>'
            self._list.children = [self.remark]
        else:
            self._list.children = [self.rows[name].widget for name in NUMBERS[request.kind]]


def noise_rows(found: NoiseScene) -> Rows:
    """Write what noise does as rows of a table.

    Parameters
    ----------
    found : NoiseScene
        What is shown.

    Returns
    -------
    list of tuple of str
        Name, value, and for widths the measurand.
    """
    rows: Rows = []
    chatter = found.found
    if chatter is not None:
        rows += [
            ("width / rms", f"{found.width / found.noise.rms:.3g}", ""),
            ("switches again", f"{float(chatter.probability):.3g}", ""),
            ("extra cycles", f"{float(chatter.extra_cycles):.3g}", ""),
            ("early shift", show(float(chatter.early_shift), "V", 3), ""),
            ("jitter, rms", show(float(chatter.jitter), "V", 3), ""),
            ("false cycles, standing", f"{_HOUR * found.standing:.3g} per hour", ""),
        ]
    needs = [("needed, noise", found.needed)]
    if found.hum is not None:
        needs += [("needed, hum", found.needed_for_hum), ("needed, both", found.together)]
    for name, width in needs:
        sensed = found.sensed(width)
        rows.append((name, show(width, "V", 3), "" if math.isnan(sensed) else f"{sensed:.3g}"))
    return rows


def filled(rows: Sequence[tuple[str, ...]], columns: int) -> Rows:
    """Fill rows of name, value and measurand up to the columns of a table.

    Parameters
    ----------
    rows : sequence of tuple of str
        Name, value, measurand.
    columns : int
        Of the table; with two of them there is no measurand.

    Returns
    -------
    list of tuple of str
        The measurand stands in the last column.
    """
    return [(name, value, *[""] * (columns - 3), last)[:columns] for name, value, last in rows]


def _number_row(desk: Desk, name: str) -> NumberRow:
    label, says, unit = _ROWS[name]
    ladder = _hum_ladder if name == "hum_amplitude" else Ladder.of_times
    reads = {"f2": _read_second_pole, "hum_amplitude": _read_hum}
    return NumberRow(
        desk, name, label, says, ladder, reads.get(name, partial(_read, label, unit)),
        partial(_write, unit),
    )  # fmt: skip


def _hum_ladder(middle: float) -> Ladder:
    return Ladder((0.0, *Steps(_SERIES, middle or _FIRST_HUM).values))


def _read(name: str, unit: str, text: str) -> float:
    return read(text, unit=unit, name=name)


def _read_second_pole(text: str) -> float:
    """Read the second pole; without one there is no crossing rate."""
    if not text.strip():
        raise NoiseModelError(
            "noise behind a single pole has no crossing rate, for its slope has no finite rms.",
            rule="two poles",
            remedy="the bandwidth of the device as second pole",
        )
    return _read("second pole", "Hz", text)


def _read_hum(text: str) -> float:
    return _read("hum", "V", text) if text.strip() else 0.0


def _read_frequency(text: str) -> float:
    frequency = _read("hum frequency", "Hz", text)
    if frequency <= 0:
        raise InputError(
            "the frequency of hum is not positive.",
            asked=f"{frequency:g} Hz",
            rule="frequency > 0",
            remedy="50 Hz or 60 Hz for mains, twice that behind a rectifier",
        )
    return frequency


def _write(unit: str, value: float) -> str:
    return amount(value, unit) if value else ""

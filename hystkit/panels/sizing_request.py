"""What a sizing panel asks, and its section of the control column."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Any

import ipywidgets as widgets

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.panels.asking import Asked, Chosen, RequestSection
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.entries import Note, read_tolerance
from hystkit.panels.parts import SERIES
from hystkit.panels.texts import amount, percent
from hystkit.panels.windows import (
    read_ends,
    read_temperatures,
    write_temperatures,
    write_window,
)

#: A wanted trip: one number, or both ends of a window.
Trip = float | tuple[float, float]

#: Parts that are fixed unless they are chosen, for they hardly move a trip.
_USUALLY_FIXED = ("R_PU", "R_L", "R_S")
_MOST_FREE = 3
_IN_VOLTS, _IN_MEASURAND = ("upper", "lower"), ("on_at", "off_at")


@dataclass(frozen=True)
class SizingRequest:
    """What a `SizingPanel` asks.

    Attributes
    ----------
    upper, lower : float, pair of float or None
        Wanted trips [V], as numbers or as windows that hold over all tolerances.
    on_at, off_at : float, pair of float or None
        Instead of these: where the load switches, in the unit of the signal.
    load : {"high", "low"}
        Output state in which the load is on.
    series : str
        Preferred series of the free parts.
    tol, tempco : float
        Their tolerance as a fraction, and magnitude of their temperature coefficient [1/K].
    temperature : tuple of float, or None
        Range in service [°C]; None leaves drift out.
    free : tuple of str, or None
        Parts that are searched; None for those that set the trips.
    supply_current, output_current : float or None
        Most that may be drawn [A].
    input_resistance : float or None
        Most that an input may see [Ohm].
    all_forms : bool
        Whether every form is searched that can do it.
    """

    upper: Trip | None = None
    lower: Trip | None = None
    on_at: Trip | None = None
    off_at: Trip | None = None
    load: str = "high"
    series: str = "E96"
    tol: float = 0.01
    tempco: float = 0.0
    temperature: tuple[float, float] | None = None
    free: tuple[str, ...] | None = None
    supply_current: float | None = None
    output_current: float | None = None
    input_resistance: float | None = None
    all_forms: bool = False

    def free_in(self, design: Design) -> tuple[str, ...]:
        """Return the parts of a design that are searched.

        Parameters
        ----------
        design : Design
            That has them.

        Returns
        -------
        tuple of str
        """
        if self.free is not None:
            return tuple(name for name in design.parts if name in self.free)
        return tuple(n for n in design.parts if n not in _USUALLY_FIXED)[:_MOST_FREE]

    @property
    def in_measurand(self) -> bool:
        """Whether switching points of the load are asked for, and no trips in volts."""
        return any(getattr(self, name) is not None for name in _IN_MEASURAND)

    @property
    def limits(self) -> dict[str, float]:
        """Limits that are set, as `hystkit.size` takes them."""
        found = {
            name: getattr(self, name)
            for name in ("supply_current", "output_current", "input_resistance")
        }
        return {name: value for name, value in found.items() if value is not None}


class SizingSection:
    """The requirement, which parts are free, and the button that searches.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    find : callable
        Gives the request as it stands.
    search : callable
        Starts the search.
    """

    def __init__(
        self, desk: Desk, find: Callable[[], SizingRequest], search: Callable[[], None]
    ) -> None:
        self._desk = desk
        self._find = find
        self._design: Design | None = None
        self.note = Note(desk)
        self._chips: dict[str, Any] = {}
        kit = desk.kit
        self._label = kit.label('<span class="hystkit-quiet">free parts</span>')
        self._free = kit.make(
            widgets.HBox, "chips", layout={"flex_flow": "row wrap", "align_items": "center"}
        )
        self.button = kit.make(
            widgets.Button,
            "chip",
            description="search",
            tooltip="search for parts that give the wanted trips",
            layout={"width": "auto", "height": "auto", "margin": "6px 0 0"},
        )

        def clicked(_: Any) -> None:
            with desk.guarded("searching for parts"):
                search()

        self.button.on_click(clicked)
        foot = (self._free, self.note.widget, self.button)
        self._section = RequestSection(desk, "Requirement", self._make_rows(), find, foot)
        self.rows = self._section.rows
        self.widget = self._section.widget

    @property
    def chips(self) -> dict[str, Any]:
        """Toggles of the parts of the design, by name."""
        return {} if self._design is None else {n: self._chips[n] for n in self._design.parts}

    def show(self, design: Design) -> None:
        """Show the request.

        Parameters
        ----------
        design : Design
            Whose parts can be free.
        """
        self._design = design
        self.note.clear()
        self._section.show(design)
        for name in _IN_MEASURAND:
            signal = design.signal
            field = self.rows[name].field
            field.disabled = signal is None
            unit = "no signal" if signal is None else f"number or window, {signal.unit}"
            field.placeholder = unit.rstrip(", ")
        for name in design.parts:
            if name not in self._chips:
                self._chips[name] = self._chip(name)
        free = self._find().free_in(design)
        for name, chip in self.chips.items():
            chip.value = name in free
        self._free.children = [self._label, *self.chips.values()]

    def _make_rows(self) -> list[Asked | Chosen]:
        desk = self._desk
        rows: list[Asked | Chosen] = []
        for names, others in ((_IN_MEASURAND, _IN_VOLTS), (_IN_VOLTS, _IN_MEASURAND)):
            for name in names:
                rows.append(
                    Asked(
                        desk,
                        name,
                        name.replace("_", " "),
                        f"{name.replace('_', ' ')}, a number or a window such as 2.2 to 2.3",
                        partial(self._read_trip, name),
                        partial(self._write_trip, name),
                        "number or window, V",
                        clears=others,
                    )
                )
        rows.append(
            Chosen(desk, "load", "load is on at", {"output high": "high", "output low": "low"})
        )
        rows.append(Chosen(desk, "series", "series", {name: name for name in SERIES}))
        rows.append(
            Asked(desk, "tol", "tolerance", "tolerance of the free parts", read_tolerance, percent)
        )
        rows.append(
            Asked(
                desk,
                "tempco",
                "drift",
                "temperature coefficient of the free parts, such as 25 ppm/K",
                _read_tempco,
                _write_tempco,
                "none",
            )
        )
        rows.append(
            Asked(
                desk,
                "temperature",
                "temperature",
                "range of temperature in service, such as -20 to 60 °C",
                read_temperatures,
                write_temperatures,
                "no drift",
            )
        )
        for name, label, unit in (
            ("input_resistance", "inputs see", "Ω"),
            ("supply_current", "supply gives", "A"),
            ("output_current", "output drives", "A"),
        ):
            says = f"{label} at most [{unit}]"
            reader, writer = partial(_read_limit, name, unit), partial(_write_limit, unit)
            rows.append(Asked(desk, name, label, says, reader, writer, f"any {unit}"))
        forms = {"this one": False, "all that can do it": True}
        rows.append(Chosen(desk, "all_forms", "form", forms))
        return rows

    def _unit(self, name: str) -> str:
        signal = None if self._design is None else self._design.signal
        return signal.unit if signal is not None and name in _IN_MEASURAND else "V"

    def _read_trip(self, name: str, text: str) -> Trip | None:
        found = read_ends(text, None, name.replace("_", " "), self._unit(name))
        if not isinstance(found, tuple):
            return found
        low, high = found
        if low is None or high is None:
            fault = Fault(
                "a wanted window needs both ends.", asked=text, remedy="2.25 to 2.35, or a number"
            )
            raise InputError.of("this entry", [fault])
        return low, high

    def _write_trip(self, name: str, trip: Trip | None) -> str:
        return write_window(trip, self._unit(name))

    def _chip(self, name: str) -> Any:
        chip = self._desk.kit.make(
            widgets.ToggleButton,
            "chip",
            description=name,
            tooltip=f"{name} is free",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )
        self._desk.listen(chip, partial(self._toggled, name), self.note.say)
        return chip

    def _toggled(self, name: str, free: bool) -> Changes:
        if self._design is None:
            return {}
        kept = set(self._find().free_in(self._design)) - {name} | ({name} if free else set())
        if not kept:
            fault = Fault("nothing would be left to search.", remedy="one free part at least")
            raise InputError.of("the free parts", [fault])
        return {"free": tuple(n for n in self._design.parts if n in kept)}


def _read_tempco(text: str) -> float:
    return read(text, unit="1/K", name="drift") if text.strip() else 0.0


def _write_tempco(tempco: float) -> str:
    return amount(tempco, "1/K") if tempco else ""


def _read_limit(name: str, unit: str, text: str) -> float | None:
    if not text.strip():
        return None
    return read(text, unit=unit, name=name.replace("_", " "))


def _write_limit(unit: str, value: float | None) -> str:
    return "" if value is None else amount(value, unit)

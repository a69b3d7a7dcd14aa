"""All findings on a stage, live, with what is declared about its load and its service."""

from __future__ import annotations

import html
from collections.abc import Sequence
from dataclasses import dataclass, fields, replace
from typing import Any

import ipywidgets as widgets

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.drive.result import Drive
from hystkit.analyses.load_step.result import LoadStep
from hystkit.analyses.noise.model import Noise
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity
from hystkit.panels.asking import Asked, AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.findings import all_remarks, findings_table
from hystkit.panels.law import headed
from hystkit.panels.loop_figure import LoopFigure
from hystkit.panels.width_request import disturbance_entries, requirement_entries, unit_of
from hystkit.review.finding import Review
from hystkit.review.review import review
from hystkit.review.service import service_of

_STATES = {"output high": "high", "output low": "low"}
#: What is typed, and what is declared in code.
_TYPED = ("slope", "probability", "hum", "starts_per_hour", "min_on", "min_off")
_OBJECTS = {"noise": "noise", "plant": "plant", "drive": "drive", "load_step": "load step"}


@dataclass(frozen=True)
class FindingsRequest:
    """What is declared about the load and the service of a stage, as `review` takes it.

    Attributes
    ----------
    load : {"high", "low"}
        Output state in which it is on.
    safe : {"on", "off"} or None
        State that it must take when the sensor fails; None where none is declared.
    start : {"high", "low"} or None
        Output state that the stage is made to start in; None where nothing is provided.
    noise : Noise or None
        On the signal [V].
    slope : float or None
        Of the signal at the trips [V/s]; None for that of the plant's cycle.
    probability : float or None
        Allowed probability of a further transition per passage; None for 1e-3.
    hum : pair of float or None
        Amplitude [V] and frequency [Hz] of hum on the signal.
    plant : Plant or None
        What the load acts on, in the unit of the signal.
    starts_per_hour : float or None
        At most [1/h].
    min_on, min_off : float or None
        Shortest time on and off [s].
    drive : Drive or None
        What the output drives.
    load_step : LoadStep or None
        What the load's current does to the stage; found again for each design.
    """

    load: str = "high"
    safe: str | None = None
    start: str | None = None
    noise: Noise | None = None
    slope: Quantity | None = None
    probability: Quantity | None = None
    hum: tuple[Quantity, Quantity] | None = None
    plant: Plant | None = None
    starts_per_hour: Quantity | None = None
    min_on: Quantity | None = None
    min_off: Quantity | None = None
    drive: Drive | None = None
    load_step: LoadStep | None = None

    def declared(self) -> dict[str, Any]:
        """Give what is declared.

        Returns
        -------
        dict
            Arguments of `review`.
        """
        given = {field.name: getattr(self, field.name) for field in fields(self)}
        return {name: value for name, value in given.items() if value is not None}

    def in_numbers(self) -> FindingsRequest:
        """Give the same with every text read.

        Returns
        -------
        FindingsRequest
            With numbers in SI units.

        Raises
        ------
        InputError
            Naming everything that cannot be used.
        """
        typed = {name: value for name, value in self.declared().items() if name in _TYPED}
        service = service_of(typed)
        return replace(self, **{name: getattr(service, name) for name in typed})


class FindingsPanel(LoopFigure, AskingPanel):
    """Move parts and declare the load, and see every finding with its margin follow.

    Parameters
    ----------
    design : Design
        What to begin with.
    **asked : object
        Fields of `FindingsRequest`: load, safe, start, noise, slope, probability, hum, plant,
        starts_per_hour, min_on, min_off, drive, load_step.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : FindingsRequest
        What is declared; changed with `set`.
    result : TripPoints
        The trip points.
    reviewed : Review
        All findings, the worst first.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = FindingsPanel(header_tank(), start="low")
    >>> panel.reviewed["start-up"].severity
    'pass'
    >>> panel.close()
    """

    def _first_request(self) -> FindingsRequest:
        return FindingsRequest()

    def _checked(self, design: Design, request: FindingsRequest) -> FindingsRequest:
        review(design, **request.declared())
        return request.in_numbers()

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk
        rows = [
            Chosen(desk, "load", "load is on at", _STATES),
            Chosen(desk, "safe", "safe state", {"not declared": None, "on": "on", "off": "off"}),
            Chosen(desk, "start", "starts with", {"not provided for": None, **_STATES}),
        ]
        self.asked = RequestSection(desk, "Load", rows, lambda: self.request)
        entries = (*disturbance_entries(), *requirement_entries(lambda: unit_of(self.design)))
        typed = [
            Asked(desk, e.name, e.label, e.says, e.read, e.write, e.placeholder)
            for e in entries
            if e.name in _TYPED
        ]
        self.objects: Any = desk.kit.label("")
        self.service = RequestSection(
            desk, "Service", typed, lambda: self.request, foot=[self.objects]
        )
        return self.asked, self.service

    def _own_cards(self) -> Sequence[Any]:
        desk = self._desk
        self.table: Any = desk.kit.label("", "table")
        self.table.add_class("hystkit-wrapped")
        card = desk.kit.make(
            widgets.VBox,
            "card",
            children=[headed(desk, "Findings", []), self.table],
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )
        return (card,)

    def _review(self, design: Design) -> Review:
        return review(design, **self.request.declared())

    def _show_review(self, found: Review) -> None:
        super()._show_review(found)
        self.objects.value = _objects(self.request)
        self.table.value = findings_table(found)

    def _remarks(self) -> tuple[str, ...]:
        return all_remarks(self.reviewed)


def _objects(request: FindingsRequest) -> str:
    """Name what is declared in code, and how the rest could be."""
    given = [label for name, label in _OBJECTS.items() if getattr(request, name) is not None]
    missing = [name for name in _OBJECTS if getattr(request, name) is None]
    told = f"declared in code: {', '.join(given)}" if given else ""
    open_ones = f"in code: panel.set({', '.join(f'{name}=…' for name in missing)})"
    return "<br>".join(html.escape(line) for line in (told, open_ones if missing else "") if line)

"""All findings on a stage, live, with what is declared about its load."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass
from typing import Any

import ipywidgets as widgets

from hystkit.circuit.design import Design
from hystkit.panels.asking import AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.findings import all_remarks, findings_table
from hystkit.panels.law import headed
from hystkit.panels.loop_figure import LoopFigure
from hystkit.review.finding import Review
from hystkit.review.review import review

_STATES = {"output high": "high", "output low": "low"}


@dataclass(frozen=True)
class FindingsRequest:
    """What is declared about the load.

    Attributes
    ----------
    load : {"high", "low"}
        Output state in which it is on.
    safe : {"on", "off"} or None
        State that it must take when the sensor fails; None where none is declared.
    start : {"high", "low"} or None
        Output state that the stage is made to start in; None where nothing is provided.
    """

    load: str = "high"
    safe: str | None = None
    start: str | None = None


class FindingsPanel(LoopFigure, AskingPanel):
    """Move parts and declare the load, and see every finding with its margin follow.

    Parameters
    ----------
    design : Design
        What to begin with.
    **asked : object
        Fields of `FindingsRequest`: load, safe, start.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : FindingsRequest
        What is declared about the load; changed with `set`.
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
        review(design, **asdict(request))
        return request

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk
        rows = [
            Chosen(desk, "load", "load is on at", _STATES),
            Chosen(desk, "safe", "safe state", {"not declared": None, "on": "on", "off": "off"}),
            Chosen(desk, "start", "starts with", {"not provided for": None, **_STATES}),
        ]
        self.asked = RequestSection(desk, "Load", rows, lambda: self.request)
        return (self.asked,)

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
        return review(design, **asdict(self.request))

    def _show_review(self, found: Review) -> None:
        super()._show_review(found)
        self.table.value = findings_table(found)

    def _remarks(self) -> tuple[str, ...]:
        return all_remarks(self.reviewed)

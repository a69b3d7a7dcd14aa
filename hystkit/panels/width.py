"""How wide the hysteresis may be, live: floors, ceilings, the window between, what opens it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import ipywidgets as widgets

from hystkit.analyses.noise.model import Noise
from hystkit.base.errors import DesignError, HystkitError
from hystkit.circuit.design import Design
from hystkit.figures.graduation import step_for
from hystkit.figures.window import WindowPicture
from hystkit.numeric.levels import levels
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Levels
from hystkit.panels.asking import Asked, AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.cycle_request import numbers_of
from hystkit.panels.cycle_rows import PlantSection
from hystkit.panels.desk import Changes, Desk, why
from hystkit.panels.entries import Note
from hystkit.panels.table import Rows, trip_rows
from hystkit.panels.view import PictureView
from hystkit.panels.width_card import BoundTable, WindowCard, width_rows
from hystkit.panels.width_request import (
    NOISE_RMS,
    PLANT_NUMBERS,
    Entry,
    WindowRequest,
    disturbance_entries,
    edited_noise,
    edited_plant,
    plant_request,
    requirement_entries,
    unit_of,
)
from hystkit.review.cycling import first_plant
from hystkit.review.finding import Review
from hystkit.review.review import review
from hystkit.review.window import WidthWindow, width_window
from hystkit.symbolic.law import SwitchingLaw

_STATES = {"output high": "high", "output low": "low"}
#: Steps of a level's slider across the band.
_ACROSS = 10
_FIRST_STEP = 0.05


@dataclass(frozen=True)
class _Run:
    """What was evaluated last, and for what."""

    design: Design
    request: WindowRequest
    found: WidthWindow | None
    message: str = ""


class WindowPanel(AskingPanel):
    """Move parts, plant and requirements, and see which widths meet everything.

    Parameters
    ----------
    design : Design
        What to begin with.
    **asked : object
        Fields of `WindowRequest`, as `width_window` takes them: load, noise, probability, slope,
        hum, load_step, plant, starts_per_hour, min_on, min_off, swing, accuracy, uncertainty,
        error_share, temperature.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : WindowRequest
        What is asked; changed with `set`, which takes the numbers of the plant by name and
        "noise_rms" as well.
    window : WidthWindow or None
        What is shown of it; None where the design has no trips.
    result : TripPoints
        The trip points.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.analyses.cycle.plants import Integrating
    >>> from hystkit.circuit.demo import header_tank
    >>> tank = Integrating(rate_on=0.5e-3, rate_off=-0.2e-3, unit="m")
    >>> panel = WindowPanel(header_tank(), plant=tank, starts_per_hour=2, accuracy=0.5)
    >>> panel.set(starts_per_hour=1)
    >>> print(f"{panel.window.floor.name}: at least {panel.window.floor.width:.2f} m")
    cycling: at least 0.51 m
    >>> panel.close()
    """

    @property
    def window(self) -> WidthWindow | None:
        """What is shown; None where the design has no trips."""
        return self._ran.found

    def set(self, **changes: Any) -> None:
        """Change several values at once, of the plant, of the request and of the design.

        Parameters
        ----------
        **changes : object
            Fields of the request, numbers of the plant such as "tau" and "dead_time", "noise_rms",
            and whatever `Panel.set` takes.

        Raises
        ------
        HystkitError
            Naming every fault; nothing is changed then.
        """
        request = self.request
        numbers = {name: changes.pop(name) for name in list(changes) if name in PLANT_NUMBERS}
        if numbers:
            plant = changes.get("plant", request.plant)
            kept = {**self._numbers, **({} if plant is None else numbers_of(plant))}
            changes["plant"] = edited_plant(kept, numbers, self.design, request.load)
        if NOISE_RMS in changes:
            noise = changes.get("noise", request.noise) or self._last_noise
            changes["noise"] = edited_noise(noise, changes.pop(NOISE_RMS))
        super().set(**changes)

    def _first_request(self) -> WindowRequest:
        self._last_noise: Noise | None = None
        # Of every kind of plant that was shown, so that they are there again when it is chosen.
        self._numbers: dict[str, Any] = {}
        return WindowRequest()

    def _checked(self, design: Design, request: WindowRequest) -> WindowRequest:
        request = request.in_numbers(unit_of(design))
        try:
            self._ran = _Run(design, request, width_window(design, **request.asked()))
        except DesignError as error:
            # A design without trips can be mended; what is asked of it is kept.
            self._ran = _Run(design, request, None, why(error))
        self._last_noise = request.noise or self._last_noise
        if request.plant is not None:
            self._numbers |= numbers_of(request.plant)
        return request

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk

        def rows(entries: Sequence[Entry]) -> list[Asked | Chosen]:
            return [
                Asked(desk, e.name, e.label, e.says, e.read, e.write, e.placeholder)
                for e in entries
            ]

        entries = requirement_entries(lambda: unit_of(self.design))
        asked: list[Asked | Chosen] = [Chosen(desk, "load", "load is on at", _STATES)]
        self.asked = RequestSection(
            desk, "Requirements", [*asked, *rows(entries)], lambda: self.request
        )
        self.disturbances = RequestSection(
            desk, "Disturbances", rows(disturbance_entries()), lambda: self.request
        )
        self.plant_section = _PlantOrNone(desk, lambda: self.request, self._level_step)
        return self.asked, self.plant_section, self.disturbances

    def _own_cards(self) -> Sequence[Any]:
        self.card = WindowCard(self._desk, lambda changes: self.set(**changes))
        return (self.card.widget,)

    def _figure(self, width_px: int) -> PictureView[Any]:
        return PictureView(self._desk, WindowPicture, width_px)

    def _evaluate(self, design: Design) -> Levels:
        if self._ran.design is not design or self._ran.request is not self.request:
            self._ran = _evaluated(design, self.request)
        return levels(design)

    def _draw(self, design: Design) -> None:
        run = self._ran
        self.figure.show(run.found or run.message)
        self.card.show(run.found, run.message, design, self.request.load)

    def _review(self, design: Design) -> Review:
        declared = self.request.declared()
        if self.window is None:
            declared.pop("plant", None)
        return review(design, load=self.request.load, **declared)

    def _remarks(self) -> tuple[str, ...]:
        return (*super()._remarks(), *self.card.lines)

    def _tabulated(self, found: Levels, trips: TripPoints, law: SwitchingLaw) -> tuple[Rows, str]:
        rows = trip_rows(found, trips)
        latex = law.latex("table", design=self.design)
        window = self.window
        if window is None:
            return rows, latex
        rows += width_rows(window, len(rows[0]))
        return rows, f"{latex}\n\n{BoundTable(window).to_latex()}"

    def _level_step(self) -> float:
        found = self.window
        return _FIRST_STEP if found is None else step_for(found.width, _ACROSS)


class _PlantOrNone:
    """The plant, and a chip that takes it away or brings it back."""

    def __init__(
        self, desk: Desk, find: Callable[[], WindowRequest], step: Callable[[], float]
    ) -> None:
        kit = desk.kit
        self._find = find
        self._last: Any = None
        self._design: Design | None = None
        self.note = Note(desk)
        self.plant = PlantSection(desk, lambda: plant_request(self._last), step)
        self.toggle = kit.make(
            widgets.ToggleButton,
            "chip",
            description="plant",
            tooltip="plant, what the load acts on",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )
        desk.listen(self.toggle, self._toggled, self.note.say)
        self._chips = kit.make(
            widgets.HBox,
            "chips",
            children=[self.toggle],
            layout={"flex_flow": "row wrap", "align_items": "center"},
        )
        self.widget = kit.make(
            widgets.VBox, "section", children=[], layout={"width": "100%", "margin": "0"}
        )

    def show(self, design: Design) -> None:
        """Show the plant.

        Parameters
        ----------
        design : Design
            Its signal gives the unit.
        """
        plant = self._find().plant
        self._design = design
        self._last = plant or self._last
        self.note.clear()
        self.toggle.value = plant is not None
        foot = [self._chips, self.note.widget]
        if plant is not None:
            self.plant.show(design)
        self.widget.children = foot if plant is None else [self.plant.widget, *foot]

    def _toggled(self, wanted: bool) -> Changes:
        assert self._design is not None
        if not wanted:
            return {"plant": None}
        return {"plant": self._last or first_plant(self._design, self._find().load)}


def _evaluated(design: Design, request: WindowRequest) -> _Run:
    try:
        return _Run(design, request, width_window(design, **request.asked()))
    except HystkitError as error:
        return _Run(design, request, None, why(error))

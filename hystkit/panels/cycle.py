"""A plant under the control of a stage, live: waveform, extremes, starts per hour."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from typing import Any

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.cycle.result import Cycle
from hystkit.base.quantity import read, show
from hystkit.circuit.design import Design
from hystkit.figures.cycle import CyclePicture
from hystkit.figures.graduation import step_for
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Levels
from hystkit.panels.asking import Asked, AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.cycle_request import CycleRequest, begun_with, numbers_of
from hystkit.panels.cycle_rows import PlantSection, write_level
from hystkit.panels.table import Rows, trip_rows
from hystkit.panels.texts import amount
from hystkit.panels.view import PictureView
from hystkit.review.cycling import Cycling, cycling, first_plant
from hystkit.review.finding import Review
from hystkit.review.review import review
from hystkit.review.service import service_of
from hystkit.symbolic.law import SwitchingLaw

_STATES = {"output high": "high", "output low": "low"}
#: Steps of a level's slider across the band.
_ACROSS = 10
_FIRST_STEP = 0.05


class CyclePanel(AskingPanel):
    """Move parts and plant, and see the waveform, true extremes and starts per hour follow.

    Parameters
    ----------
    design : Design
        What to begin with.
    plant : Plant, optional
        What the load acts on, in the unit of the signal; a lag that suits the band unless given.
    **asked : object
        Further fields of `CycleRequest`: load, min_on, min_off, starts_per_hour, operations,
        start, until, and the numbers of the plant by name.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : CycleRequest
        What is asked of it; changed with `set`, which takes a plant as well.
    plant : Plant
        What the load acts on.
    cycling : Cycling
        What is shown of it.
    cycle : Cycle or None
        Its steady cycle; None where the design has no trips.
    result : TripPoints
        The trip points.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.analyses.cycle.plants import Integrating
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = CyclePanel(header_tank(), plant=Integrating(0.002, -0.001), operations=100e3)
    >>> panel.set(rate_off=-0.002)
    >>> print(f"{panel.cycle.starts_per_hour:.2f} starts per hour")
    5.96 starts per hour
    >>> panel.close()
    """

    cycling: Cycling

    def __init__(self, design: Design, *, plant: Plant | None = None, **asked: Any) -> None:
        if isinstance(design, Design):
            given = {} if plant is None else numbers_of(plant)
            first = first_plant(design, asked.get("load", CycleRequest.load))
            asked = {**begun_with(first), **given, **asked}
        super().__init__(design, **asked)

    @property
    def plant(self) -> Plant:
        """What the load acts on."""
        return self.cycling.plant

    @property
    def cycle(self) -> Cycle | None:
        """The steady cycle; None where the design has no trips."""
        return self.cycling.cycle

    def set(self, **changes: Any) -> None:
        """Change several values at once, of the plant, of the request and of the design.

        Parameters
        ----------
        **changes : object
            "plant", fields of the request, and whatever `Panel.set` takes.

        Raises
        ------
        HystkitError
            Naming every fault; nothing is changed then.
        """
        if "plant" in changes:
            plant = numbers_of(changes.pop("plant"))
            changes = {**plant, **changes}
        super().set(**changes)

    def _first_request(self) -> CycleRequest:
        return CycleRequest()

    def _checked(self, design: Design, request: CycleRequest) -> CycleRequest:
        found = _found(design, request)
        service_of(_declared(request))
        if request.operations is not None and found.cycle is not None:
            found.cycle.contact_life(request.operations)
        # What was run to see whether it can be is what will be shown.
        self._run = (design, request, found)
        return request

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk
        self.plant_section = PlantSection(desk, lambda: self.request, self._level_step)
        rows: list[Asked | Chosen] = [Chosen(desk, "load", "load is on at", _STATES)]
        holds = (("min_on", "on at least"), ("min_off", "off at least"))
        rows += [
            Asked(
                desk,
                name,
                label,
                f"time that the load stays {label}, kept by a timer [s]",
                partial(_read_hold, label),
                _write_hold,
                "no timer",
            )
            for name, label in holds
        ]
        starts = "starts per hour that the load stands at most"
        rows += [
            self._optional("starts_per_hour", "starts per h", starts, "", "not asked"),
            self._optional("operations", "operations", "rating of the contact", "", "not rated"),
            Asked(
                desk,
                "start",
                "start from",
                "process value that a run starts from; empty for the steady cycle",
                self._read_start,
                self._write_start,
                "steady cycle",
            ),
            self._optional(
                "until", "run for", "how long a run from a start takes", "s", "as long as it takes"
            ),
        ]
        self.asked = RequestSection(desk, "Service", rows, lambda: self.request)
        return (self.plant_section, self.asked)

    def _figure(self, width_px: int) -> PictureView[Any]:
        return PictureView(self._desk, CyclePicture, width_px)

    def _evaluate(self, design: Design) -> Levels:
        ran_design, ran_request, found = self._run
        if ran_design is not design or ran_request is not self.request:
            found = _found(design, self.request)
        self.cycling = found
        return found.levels

    def _draw(self, design: Design) -> None:
        self.figure.show(self.cycling)

    def _review(self, design: Design) -> Review:
        return _reviewed(design, self.request, self.cycling)

    def _tabulated(self, found: Levels, trips: TripPoints, law: SwitchingLaw) -> tuple[Rows, str]:
        rows = [*trip_rows(found, trips), *cycle_rows(self.cycling, self.request.operations)]
        columns = len(rows[0])
        # Times stand with the nominal values, process values in the unit of the signal.
        rows = [row if len(row) == columns else _filled(row, columns) for row in rows]
        latex = law.latex("table", design=self.design)
        return rows, f"{latex}\n\n{self.cycling.to_latex()}"

    def _level_step(self) -> float:
        axis = self._run[2].axis
        return _FIRST_STEP if axis is None else step_for(axis.width, _ACROSS)

    def _optional(self, name: str, label: str, says: str, unit: str, placeholder: str) -> Asked:
        reads, writes = partial(_read_optional, label, unit), partial(_write_optional, unit)
        return Asked(self._desk, name, label, says, reads, writes, placeholder)

    def _read_start(self, text: str) -> float | None:
        unit = _unit(self.design)
        return read(text, unit=unit, name="start") if text.strip() else None

    def _write_start(self, value: float | None) -> str:
        return "" if value is None else write_level(value, _unit(self.design))


def cycle_rows(found: Cycling, operations: float | None) -> Rows:
    """Write a steady cycle as rows of a table.

    Parameters
    ----------
    found : Cycling
        What is shown.
    operations : float or None
        Operations that the contact is rated for; None leaves its life out.

    Returns
    -------
    list of tuple of str
        Name and value; for process values the name, nothing, and the value.
    """
    cycle = found.cycle
    if cycle is None or not found.cycles:
        return [("cycle", found.message)]
    rows: Rows = [
        (name, show(float(time), "s"))
        for name, time in (
            ("on time", cycle.on_time),
            ("off time", cycle.off_time),
            ("period", cycle.period),
        )
    ]
    rows.append(("duty", show(float(cycle.duty), "%", 3)))
    digits = 4
    for name, value in (("highest", cycle.high), ("lowest", cycle.low)):
        volts = found.levels.signal is None
        text = show(float(value), "V", digits) if volts else f"{float(value):.{digits}g}"
        rows.append((name, text) if volts else (name, "", text))
    rows.append(("starts per hour", f"{float(cycle.starts_per_hour):.3g}"))
    if operations is not None:
        rows.append(("contact life", f"{float(cycle.contact_life(operations)):.3g} years"))
    return rows


def _filled(row: tuple[str, ...], columns: int) -> tuple[str, ...]:
    """Fill a row up; a third entry belongs to the last column."""
    name, value, *last = row
    return (name, value, *[""] * (columns - 2 - len(last)), *last)


def _unit(design: Design) -> str:
    return "V" if design.signal is None else design.signal.unit


def _found(design: Design, request: CycleRequest) -> Cycling:
    return cycling(
        design,
        request.plant(_unit(design)),
        load=request.load,
        min_on=request.min_on,
        min_off=request.min_off,
        start=request.start,
        until=request.until,
    )


def _reviewed(design: Design, request: CycleRequest, found: Cycling) -> Review:
    """Review a design with what is declared; the plant only where there are trips to run it."""
    plant = None if found.axis is None else found.plant
    return review(design, load=request.load, plant=plant, **_declared(request))


def _declared(request: CycleRequest) -> dict[str, Any]:
    """Give what the load is declared to stand; no minimum time is none that is declared."""
    return {
        "starts_per_hour": request.starts_per_hour,
        "min_on": request.min_on or None,
        "min_off": request.min_off or None,
    }


def _read_hold(name: str, text: str) -> float:
    return read(text, unit="s", name=name) if text.strip() else 0.0


def _write_hold(value: float) -> str:
    return amount(value, "s") if value else ""


def _read_optional(name: str, unit: str, text: str) -> float | None:
    return read(text, unit=unit, name=name) if text.strip() else None


def _write_optional(unit: str, value: float | None) -> str:
    return "" if value is None else amount(value, unit)

"""A plant under the control of a design: its steady cycle, and the run that shows it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.follow import Event
from hystkit.analyses.cycle.plants import FirstOrder, Plant
from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.run import Run, Waveform
from hystkit.analyses.cycle.steady import steady_cycle
from hystkit.base.errors import DesignError, Fault, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, collect, is_kind, wrong_kind
from hystkit.numeric.levels import levels
from hystkit.numeric.measurand import load_edges
from hystkit.numeric.views import Levels
from hystkit.review.axis import Axis, unit_faults
from hystkit.review.cycling_run import Control, Disturbances

Array = NDArray[np.float64]

#: Points of the waveform between which it is drawn straight, beside its corners.
_POINTS = 601
#: A plant to begin with: distance of its levels from the middle of the band in widths, and its
#: time constant [s].
_APART, _TAU = 4.0, 600.0


class Phase(NamedTuple):
    """A time with the load on, or off, as far as it is shown [s]."""

    begin: float
    end: float
    on: bool


class Turn(NamedTuple):
    """A true extreme of the process value that is shown."""

    time: float
    value: float
    high: bool


@dataclass(frozen=True, eq=False)
class Cycling(Viewed):
    """A design that switches the load of a plant.

    Attributes
    ----------
    levels : Levels
        Of the design.
    plant : Plant
        What the load acts on.
    load : {"high", "low"}
        Output state in which the load is on.
    edges : tuple of str
        Names of the trip points at which the load is switched on and off.
    axis : Axis or None
        The band in the unit of the signal; None where the design has no trips within its reach.
    cycle : Cycle or None
        The steady cycle, without disturbances.
    run : Run or None
        What is shown: steady cycles, a start, or where the plant sticks.
    shown : tuple of float
        From when to when of the run [s].
    steady : bool
        Whether the steady cycle is shown.
    fault : str
        Why there is nothing to run; empty where there is.
    """

    levels: Levels
    plant: Plant
    load: str
    edges: tuple[str, str]
    axis: Axis | None
    cycle: Cycle | None
    run: Run | None
    shown: tuple[float, float]
    steady: bool
    fault: str = ""

    @property
    def unit(self) -> str:
        """Unit of the process value."""
        return "V" if self.levels.signal is None else self.levels.signal.unit

    @property
    def cycles(self) -> bool:
        """Whether the plant cycles between the trips."""
        return self.cycle is not None and bool(self.cycle.ok)

    @property
    def message(self) -> str:
        """Why there is no cycle, or which way it sticks; empty where there is one."""
        if self.cycle is None:
            return self.fault
        return "" if self.cycles else str(self.cycle.message)

    @property
    def trips(self) -> dict[str, float]:
        """Process value at each trip point, by its name [unit]; NaN without trips."""
        ends = (math.nan, math.nan) if self.axis is None else self.axis.edges(self.axis.width)
        return dict(zip(self.edges, ends, strict=True))

    @property
    def length(self) -> float:
        """Length of the time that is shown [s]."""
        return self.shown[1] - self.shown[0]

    @cached_property
    def waveform(self) -> Waveform:
        """Process value, sensed value and load over the time that is shown, from 0."""
        begin, end = self.shown
        if self.run is None:
            nothing = np.empty(0)
            return Waveform(nothing, nothing, nothing, np.empty(0, dtype=bool))
        corners = [*self.run.times, *self.run.extremes.time]
        even = np.linspace(begin, end, _POINTS)
        inside = [time for time in corners if begin < time < end]
        found = self.run.sampled(np.unique(np.concatenate([even, inside])))
        return found._replace(time=found.time - begin)

    @cached_property
    def phases(self) -> tuple[Phase, ...]:
        """When the load is on and off over the time that is shown, from 0."""
        begin, end = self.shown
        if self.run is None:
            return ()
        changes = (self.run.events & (Event.START | Event.COMMAND)) > 0
        times, on = self.run.times[changes], self.run.on[changes]
        ends = np.append(times[1:], np.inf)
        return tuple(
            Phase(max(float(a), begin) - begin, min(float(b), end) - begin, bool(state))
            for a, b, state in zip(times, ends, on, strict=True)
            if b > begin and a < end and b > a
        )

    @cached_property
    def turns(self) -> tuple[Turn, ...]:
        """True extremes of the process value within the time that is shown, from 0."""
        begin, end = self.shown
        if self.run is None:
            return ()
        found = self.run.extremes
        return tuple(
            Turn(float(time) - begin, float(value), bool(high))
            for time, value, high in zip(found.time, found.value, found.high, strict=True)
            if begin <= time <= end
        )

    @property
    def disturbed(self) -> tuple[float, ...]:
        """When a disturbance steps within the time that is shown, from 0 [s]."""
        begin, end = self.shown
        if self.run is None:
            return ()
        steps = self.run.times[(self.run.events & Event.DISTURBANCE) > 0]
        return tuple(float(time) - begin for time in steps if begin < time < end)

    def furthest(self, *, high: bool) -> float:
        """Give the highest or the lowest true extreme that is shown.

        Parameters
        ----------
        high : bool
            Which of both.

        Returns
        -------
        float
            [unit]; NaN where the process value does not turn.
        """
        values = [turn.value for turn in self.turns if turn.high == high]
        return (max(values) if high else min(values)) if values else math.nan

    @property
    def _title(self) -> str:
        return f"Cycle of {self.plant.name}" if self.plant.name else "Cycle"

    def _fields(self) -> Sequence[Field]:
        if self.cycle is None:
            return [Field("behaviour", self.fault)]
        # In the unit itself: a level in m does not turn into mm.
        ends = (f"{self.trips[name]:.4g} {self.unit}".rstrip() for name in self.edges)
        places = [Field(f"{does} at", at) for does, at in zip(("on", "off"), ends, strict=True)]
        return [*places, *self.cycle._fields()]


def cycling(
    design: Design,
    plant: Plant,
    *,
    load: str = "high",
    min_on: Quantity = 0.0,
    min_off: Quantity = 0.0,
    start: Quantity | None = None,
    until: Quantity | None = None,
    disturbances: Disturbances = (),
) -> Cycling:
    """Put a plant under the control of a design.

    Parameters
    ----------
    design : Design
        Gives the trips, in the unit of its signal, or in volts without one.
    plant : Plant
        What the load acts on, a single one, in the same unit.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    min_on, min_off : float or str, default 0
        Time that a timer keeps a command before the trip counts [s], >= 0.
    start : float or str, optional
        Process value at time 0, from which plant and sensor are at rest [unit]. Without one the
        steady cycle is shown, or from a trip to where the plant sticks.
    until : float or str, optional
        How long a run from `start` takes [s], > 0. Otherwise two time constants of the plant and
        three periods, twelve periods at most.
    disturbances : sequence of pairs, optional
        Time [s] and size of each step of the disturbance, as for `hystkit.simulate`; only with a
        `start`.

    Returns
    -------
    Cycling
        The steady cycle, and a run with its waveform, phases and true extremes.

    Raises
    ------
    InputError
        Naming everything that cannot be used.
    UnknownNameError
        If there is no such output state.

    Notes
    -----
    What is shown protects nothing. Where heat, pressure or a level can hurt someone, an
    independent limiter is needed; local codes and licensed practice come first.

    Examples
    --------
    >>> from hystkit.analyses.cycle.plants import Integrating
    >>> from hystkit.circuit.demo import header_tank
    >>> found = cycling(header_tank(), Integrating(rate_on=0.002, rate_off=-0.001))
    >>> print(f"{found.cycle.on_time:.0f} s on, {found.cycle.off_time:.0f} s off")
    302 s on, 604 s off
    """
    edges = load_edges(design.stage.sense, load)
    names = (str(edges.on_at), str(edges.off_at))
    found = levels(design)
    unit = "V" if design.signal is None else design.signal.unit
    faults = [_NO_START] if start is None and disturbances else []
    given = {"min_on": min_on, "min_off": min_off, "until": until}
    times = _checked(plant, unit, given, faults)
    try:
        axis = Axis.of(design, load)
    except DesignError as error:
        fault = found.message or error.faults[0].have
        return Cycling(found, plant, load, names, None, None, None, (0.0, 1.0), False, fault)
    length = times.pop("until")
    on_at, off_at = axis.edges(axis.width)
    cycle = steady_cycle(plant, on_at, off_at, **times)
    shown = Control(plant, on_at, off_at, **times, cycle=cycle).shown(start, length, disturbances)
    span = (shown.begin, shown.end)
    return Cycling(found, plant, load, names, axis, cycle, shown.run, span, shown.steady)


def first_plant(design: Design, load: str = "high") -> FirstOrder:
    """Give a lag that cycles between the trips of a design, to begin with.

    Parameters
    ----------
    design : Design
        Gives the band.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.

    Returns
    -------
    FirstOrder
        With rounded levels, four widths to either side of the band's middle; nothing more is
        known of the plant.
    """
    try:
        axis = Axis.of(design, load)
    except DesignError:
        return FirstOrder(_TAU, 1.0, 0.0)
    reach = _APART * (axis.width if axis.on_is_low else -axis.width)
    digits = 1 - math.floor(math.log10(axis.width))
    on, off = (round(axis.middle + way * reach, digits) for way in (1, -1))
    return FirstOrder(_TAU, on, off)


_NO_START = Fault(
    "disturbances need a start.",
    rule="disturbances count from the start of a run",
    remedy="start=..., the process value at time 0",
)


def _checked(
    plant: Any, unit: str, times: dict[str, Quantity | None], faults: list[Fault]
) -> dict[str, Any]:
    """Read the times, and refuse whatever cannot be run together with the faults found before."""
    read_times: dict[str, Any] = {}
    for name, value in times.items():
        read_times[name] = None if value is None else _read_time(faults, name, value)
    if not is_kind(plant, Plant):
        example = "hk.FirstOrder(tau=600, on_level=40, off_level=10)"
        faults.append(wrong_kind("plant", plant, "a plant", example))
    elif plant.shape:
        faults.append(
            Fault(
                "one plant is run here.",
                have=f"plants of shape {plant.shape}",
                remedy="one value of each, or hk.steady_cycle for all of them",
            )
        )
    else:
        faults += unit_faults(plant, unit)
    if faults:
        raise InputError.of("this cycle", faults)
    return read_times


def _read_time(faults: list[Fault], name: str, value: Quantity) -> float:
    time = collect(faults, lambda: read(value, unit="s", name=name))
    zero = name != "until"
    if math.isinf(time) or time < 0 or (time == 0 and not zero):
        rule = f"finite, {name} {'>=' if zero else '>'} 0"
        faults.append(Fault(f"{name} is out of range.", f"{name} = {time:g}", rule=rule))
    return time

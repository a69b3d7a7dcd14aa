"""What a load does to the stage that switches it: the result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.analyses.load_step.effect import Effect
from hystkit.analyses.load_step.hunting import Hunting, Scene
from hystkit.analyses.load_step.simulate import simulated
from hystkit.base.errors import InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity
from hystkit.numeric.measurand import Edges, load_edges, shown_span, span_of
from hystkit.numeric.status import Status
from hystkit.numeric.trips import TripPoints


class Holds(IntEnum):
    """What a load does to one element of a result."""

    OK = 0
    HUNTS = 1
    NOISE = 2
    NO_TRIPS = 3

    @property
    def message(self) -> str:
        """One line that says what happens."""
        return _MESSAGES[self]


_MESSAGES = {
    Holds.OK: "holds",
    Holds.HUNTS: "hunts: the load's effect turns the stage back",
    Holds.NOISE: "may hunt: the load's effect leaves less than the noise needs",
    Holds.NO_TRIPS: "no trip points without load or with it, or a value is not finite",
}


@dataclass(frozen=True)
class StepMeasurand(Viewed):
    """The same in the signal's own unit.

    Attributes
    ----------
    on_at, off_at : float or ndarray
        Quantity at which the load switches on and off, in `unit`: as it stands without the load's
        effect, so that of a battery `off_at` is the voltage at rest.
    margin : float or ndarray
        What the load's effect leaves of the width, in `unit`; negative where the stage hunts.
    unit, name : str
        Unit and name of the quantity.
    """

    on_at: Any
    off_at: Any
    margin: Any
    unit: str
    name: str

    def _fields(self) -> Sequence[Field]:
        rows = {"load on at": self.on_at, "load off at": self.off_at, "margin": self.margin}
        notes = {"load off at": "without the load's effect"}
        return [
            Field(f"{self.name}, {label}", shown_span(value, self.unit), note=notes.get(label, ""))
            for label, value in rows.items()
        ]


@dataclass(frozen=True)
class LoadStep(Viewed):
    """What a load does to the stage that switches it.

    Floats where all values are scalars, else arrays of the broadcast shape; NaN where the stage
    has no trip points.

    Attributes
    ----------
    design : Design
        The stage.
    load : {"high", "low"}
        Output state in which the load is on.
    current : float or ndarray
        Of the load while it is on [A].
    effect : Effect
        What its current does to rails and signal.
    without, during : TripPoints
        Trip points with the load off, and on.
    noise : float or ndarray
        What is kept free for noise [V].
    asked : mapping of str to object
        Arguments of `load_step`, for the same load at another design.

    Notes
    -----
    For a signal that is slow against the load's effect. The load switches on at one trip with the
    load off; the signal then jumps and creeps by `signal_shift`, and the trip that would turn the
    stage back moves by `threshold_shift`. A margin is the distance that is left between the two
    at the worst instant, less `noise`. A shift away from that trip makes it larger than the width.
    """

    design: Design
    load: str
    current: Any
    effect: Effect
    without: TripPoints
    during: TripPoints
    noise: Any = 0.0
    asked: Named[Any] = Named()  # noqa: RUF009 - immutable

    @property
    def width(self) -> Any:
        """Upper less lower trip point, with the load off [V]."""
        return self.without.width

    @property
    def on_at(self) -> Any:
        """Signal at which the load switches on [V]."""
        return getattr(self.without, self._edges.on_at)

    @property
    def off_at(self) -> Any:
        """Signal at which it switches off, as it stands without the load's effect [V]."""
        return self.effect.unloaded(getattr(self.during, self._edges.off_at), 1.0)

    @property
    def signal_shift(self) -> Any:
        """By how much the signal moves as the load switches on, at the worst instant [V]."""
        return self.effect.seen(self.on_at, self._worst_creep) - self.on_at

    @property
    def threshold_shift(self) -> Any:
        """By how much the trip point that would turn the stage back moves [V]."""
        back = self._edges.off_at
        return getattr(self.during, back) - getattr(self.without, back)

    @property
    def closing(self) -> Any:
        """By how much the signal and that trip point come closer [V]; negative: they part."""
        return self._sign * (self.threshold_shift - self.signal_shift)

    @property
    def margin_on(self) -> Any:
        """What is left as the load switches on: width less `closing` less noise [V]."""
        return self.width - self.closing - self.noise

    @property
    def margin_off(self) -> Any:
        """What is left as the load switches off and its effect ends [V]."""
        released = self.effect.seen(self.off_at, 1.0 - self._worst_creep, load=False)
        return self._sign * (self.on_at - released) - self.noise

    @cached_property
    def margin(self) -> Any:
        """The smaller of both margins [V]."""
        return np.minimum(self.margin_on, self.margin_off)[()]

    @property
    def harmless(self) -> Any:
        """Whether the load's effect drives the signal further past the trip, or does nothing."""
        return np.less_equal(self.closing, 0)

    @cached_property
    def status(self) -> Any:
        """A `Holds` code for each element, 0 where the stage stays as it has switched."""
        code = np.where(np.greater(self.margin, 0), Holds.OK, Holds.NOISE)
        code = np.where(np.less_equal(self.margin + self.noise, 0), Holds.HUNTS, code)
        possible = (self.without.status == Status.OK) & (self.during.status == Status.OK)
        possible = possible & np.greater(self.effect.gain, 0) & np.isfinite(self.margin)
        return np.where(possible, code, Holds.NO_TRIPS).astype(np.int8)[()]

    @property
    def ok(self) -> Any:
        """Whether each element stays as it has switched."""
        return self.status == Holds.OK

    @property
    def message(self) -> str:
        """What happens; of arrays, to how many elements and the first one that fails."""
        failed = np.flatnonzero(self.status)
        if np.ndim(self.status):
            first = Holds(int(np.ravel(self.status)[failed[0]])) if failed.size else Holds.OK
            holds = f"{np.size(self.status) - failed.size} of {np.size(self.status)} hold"
            return holds if first is Holds.OK else f"{holds}; the first other {first.message}"
        status = Holds(int(self.status))
        if status is Holds.NO_TRIPS:
            return status.message
        if status is Holds.OK and self.harmless:
            return "holds: the load does not drive the stage back"
        width = show(self.width, "V")
        if self.margin > 0:
            return f"{status.message}, {show(self.margin, 'V')} left of {width}"
        return f"{status.message}; {show(self.width - self.margin, 'V')} of {width} are taken"

    @property
    def measurand(self) -> StepMeasurand | None:
        """The same in the signal's own unit; None without a signal."""
        signal = self.design.signal
        if signal is None:
            return None
        on_at, off_at = signal.quantity(self.on_at), signal.quantity(self.off_at)
        short = signal.quantity(self.on_at - self._sign * self.margin)
        margin = np.copysign(np.abs(on_at - short), self.margin)[()]
        return StepMeasurand(on_at, off_at, margin, signal.unit, signal.name)

    def hunt(
        self,
        *,
        slope: Quantity | None = None,
        relaxation_time: Quantity = 0.0,
        delay: Quantity = 10e-3,
        most: int = 2000,
    ) -> Hunting:
        """Simulate the signal on its way past both trips and back, with the load's effect.

        Parameters
        ----------
        slope : float or str, optional
            Of the signal without the load's effect [V/s]; slow enough for hunting to show when
            left out.
        relaxation_time : float or str, default 0
            Time constant of the relaxation [s]; 0 where it comes at once, but after the step.
        delay : float or str, default 0.01
            From a change of the output to that of the load's current [s], > 0; a small relay takes
            about 10 ms (common practice).
        most : int, default 2000
            Changes of the output after which the simulation ends.

        Returns
        -------
        Hunting
            Every change of the output, and samples in between.

        Raises
        ------
        InputError
            If an argument cannot be used, this is an array, or there are no trip points.

        Notes
        -----
        From event to event: between two of them the signal is a straight line and an exponential,
        whose crossing of the trip is found to rounding. Noise is left out, so that without noise
        a negative `margin` hunts and a positive one switches once each way, for a slope that is
        slow against delay and relaxation.
        """
        if np.ndim(self.status) or self.status == Holds.NO_TRIPS:
            raise InputError(
                "there is no single stage to simulate.",
                have=self.message,
                rule="scalar values, and trip points without load and with it",
                remedy="hk.load_step with one value of each",
            )
        edges = self._edges
        without, during = (
            (float(getattr(trips, edges.on_at)), float(getattr(trips, edges.off_at)))
            for trips in (self.without, self.during)
        )
        margin = float(self.margin + self.noise)
        scene = Scene(self.effect, self._sign, (without, during), float(self.off_at), margin)
        return simulated(scene, slope, relaxation_time, delay, most)

    @property
    def _edges(self) -> Edges:
        return load_edges(self.design.stage.sense, self.load)

    @property
    def _sign(self) -> float:
        """Direction of the signal in which the load switches on."""
        return 1.0 if self._edges.on_at == "upper" else -1.0

    @property
    def _worst_creep(self) -> Any:
        """Share of the relaxation at which signal and trip are closest after switching on."""
        return np.where(self._sign * np.asarray(self.effect.relaxation) < 0, 1.0, 0.0)[()]

    @property
    def _title(self) -> str:
        name = self.design.name or self.design.stage.title
        return f"Load of {name}, on while the output is {self.load}"

    def _fields(self) -> Sequence[Field]:
        holds = bool(self.ok) if np.ndim(self.ok) == 0 else f"{np.count_nonzero(self.ok)}"
        rows = [
            Field("holds", holds, "", self.message),
            Field("load current", span_of(self.current), "A"),
            Field("width", span_of(self.width), "V"),
            Field("signal moves by", span_of(self.signal_shift), "V", "as the load switches on"),
            Field(
                "trip moves by", span_of(self.threshold_shift), "V", "the one that turns it back"
            ),
            Field("kept free for noise", span_of(self.noise), "V"),
            Field("margin, switching on", span_of(self.margin_on), "V"),
            Field("margin, switching off", span_of(self.margin_off), "V"),
        ]
        return rows + (list(self.measurand._fields()) if self.measurand else [])

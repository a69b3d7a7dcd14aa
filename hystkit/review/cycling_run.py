"""Which run shows the cycle of a plant: steady, from a start, or to where it sticks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.run import Run
from hystkit.analyses.cycle.simulate import simulate
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.base.digits import rounded_up
from hystkit.circuit.reading import Quantity

#: Periods that are shown at least.
_PERIODS = 2.5
#: From a start of its own: time constants and periods, and the most periods.
_CONSTANTS, _FROM_START, _MOST = 2.0, 3.0, 12.0
#: Cycles until a plant of so many states repeats itself to the eye; more states: the last.
_SETTLING = (1, 3, 6)
#: Time constants after which nothing more is to be seen of a plant that sticks.
_STUCK = 4.0
#: For a plant that neither moves nor settles [s].
_ANY_TIME = 600.0

Disturbances = Sequence[tuple[Any, Any]]


class Shown(NamedTuple):
    """A run, from when to when of it is shown [s], and whether that is the steady cycle."""

    run: Run | None
    begin: float
    end: float
    steady: bool


@dataclass(frozen=True, eq=False)
class Control:
    """A plant between its trips, with the timer that keeps its commands.

    Attributes
    ----------
    plant : Plant
        A single one.
    on_at, off_at : float
        Trips [unit].
    min_on, min_off : float
        Time that a command is kept [s].
    cycle : Cycle
        The steady cycle of all that.
    """

    plant: Plant
    on_at: float
    off_at: float
    min_on: float
    min_off: float
    cycle: Cycle

    def shown(
        self, start: Quantity | None, until: float | None, disturbances: Disturbances
    ) -> Shown:
        """Run what is to be shown.

        Parameters
        ----------
        start : float, str or None
            Process value at time 0 [unit]; None for the steady cycle, or where it sticks.
        until : float or None
            How long a run from a start takes [s].
        disturbances : sequence of pairs
            Of a run from a start.

        Returns
        -------
        Shown
            Without a run where a trip is not finite, or both are one.
        """
        status = CycleStatus(int(self.cycle.status))
        if status in (CycleStatus.NOT_FINITE, CycleStatus.CHATTERS):
            return Shown(None, 0.0, 1.0, steady=False)
        if start is not None:
            end = until or self._length_from_start()
            return Shown(self._run(end, disturbances, start=start), 0.0, end, steady=False)
        return self._stuck(status) if status is not CycleStatus.CYCLES else self._steady()

    def _steady(self) -> Shown:
        period = float(self.cycle.period)
        length = rounded_up(_PERIODS * period)
        order = self.plant.dynamics.order
        settling = _SETTLING[min(order, len(_SETTLING)) - 1]
        until = (settling + 1.1) * period + length
        if order < len(_SETTLING):
            run = self._run(until, start=self.on_at)
        else:
            run = self._run(until, state=self._rest(on=False))
        begin = float(run.starts[min(settling, run.starts.size - 1)])
        return Shown(run, begin, begin + length, steady=True)

    def _stuck(self, status: CycleStatus) -> Shown:
        """Run from the trip that is passed last to where the plant sticks."""
        off = status is CycleStatus.STAYS_OFF
        until = rounded_up(_STUCK * self._slowest())
        if self.plant.dynamics.order < len(_SETTLING) and status is not CycleStatus.UNPROVED:
            run = self._run(until, start=self.off_at if off else self.on_at, start_on=off)
        else:
            run = self._run(until, state=self._rest(on=off), start_on=off)
        return Shown(run, 0.0, until, steady=False)

    def _run(self, until: float, disturbances: Disturbances = (), **begins: Any) -> Run:
        return simulate(
            self.plant,
            on_at=self.on_at,
            off_at=self.off_at,
            until=until,
            min_on=self.min_on,
            min_off=self.min_off,
            disturbances=disturbances,
            **begins,
        )

    def _length_from_start(self) -> float:
        if not self.cycle.ok:
            return rounded_up(_STUCK * self._slowest())
        period = float(self.cycle.period)
        whole = _CONSTANTS * self._slowest() + _FROM_START * period
        return rounded_up(min(whole, _MOST * period))

    def _slowest(self) -> float:
        """Give the longest time constant, or without one the time that the band takes [s]."""
        dynamics = self.plant.dynamics
        decay = float(np.abs(np.linalg.eigvals(dynamics.a).real).min())
        dead = float(max(dynamics.dead_on, dynamics.dead_off))
        if decay > 0:
            return 1 / decay + dead
        speeds = [abs(float(dynamics.sensed_of(dynamics.forcing(on)))) for on in (True, False)]
        moving = [speed for speed in speeds if speed > 0]
        width = abs(self.off_at - self.on_at)
        return dead + (width / min(moving) if moving else _ANY_TIME)

    def _rest(self, *, on: bool) -> NDArray[np.float64]:
        """Give the state at rest, or zero of a plant that never comes to rest."""
        found = self.plant.dynamics.settled(on)
        return np.where(np.isnan(found), 0.0, found)

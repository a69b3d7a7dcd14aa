"""Whether a stage hunts: what is simulated, and what comes of it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.load_step.effect import Effect
from hystkit.base.fields import Field, Viewed

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Scene:
    """What is simulated: numbers of one stage with one load.

    Attributes
    ----------
    effect : Effect
        Of the load's current.
    direction : float
        1 where the load switches on as the signal rises, -1 where as it falls.
    trips : tuple of two pairs of float
        Without load, and with it: the trip that switches the load on, and the one that switches
        it off [V].
    off_at : float
        Signal at which the load switches off, as it stands without the load's effect [V].
    margin : float
        Without noise [V].
    """

    effect: Effect
    direction: float
    trips: tuple[tuple[float, float], tuple[float, float]]
    off_at: float
    margin: float

    @property
    def on_at(self) -> float:
        """Signal at which the load switches on [V]."""
        return self.trips[0][0]

    @property
    def ends(self) -> tuple[float, float]:
        """Signal on the side of the load off, and of the load on, clear of all that happens [V]."""
        width = abs(self.trips[0][0] - self.trips[0][1])
        room = width / 2 + 2 * abs(self.margin) + 2 * abs(float(self.effect.relaxation))
        ordered = sorted((self.direction * self.on_at, self.direction * self.off_at))
        return self.direction * (ordered[0] - room), self.direction * (ordered[1] + room)


@dataclass(frozen=True)
class Leg:
    """The time between two events.

    Attributes
    ----------
    start : float
        When it begins [s].
    signal, slope : float
        Signal without the load's effect, at `start` [V], and its slope [V/s].
    creep : float
        Share of the relaxation at `start`, which goes to 1 with the load on and to 0 with it off.
    on, load : bool
        Whether the output is in the state of the load, and whether the load has followed.
    """

    start: float
    signal: float
    slope: float
    creep: float
    on: bool
    load: bool


@dataclass(frozen=True)
class Samples:
    """The simulation over time.

    Attributes
    ----------
    time : ndarray, shape (n,)
        [s].
    signal, seen, trip : ndarray, shape (n,)
        Signal without the load's effect, as the stage sees it, and the trip it waits for [V].
    on, load : ndarray of bool, shape (n,)
        Whether the output is in the state of the load, and whether the load is on.
    """

    time: Array
    signal: Array
    seen: Array
    trip: Array
    on: NDArray[np.bool_]
    load: NDArray[np.bool_]


@dataclass(frozen=True)
class Hunting(Viewed):
    """What the stage does while the signal passes both trips and returns.

    Attributes
    ----------
    scene : Scene
        What was simulated.
    times : ndarray, shape (n,)
        When the output changes [s].
    states : ndarray of bool, shape (n,)
        Whether the load is switched on by that change.
    turned_at, ended_at : float
        When the signal turns round, and when the simulation ends [s].
    complete : bool
        Whether the signal went the whole way; False where there were too many changes.
    slope : float
        Of the signal on its way there [V/s].
    relaxation_time : float
        Time constant of the relaxation [s].
    legs : tuple of Leg
        The time between events.
    """

    scene: Scene
    times: Array
    states: NDArray[np.bool_]
    turned_at: float
    ended_at: float
    complete: bool
    slope: float
    relaxation_time: float
    legs: tuple[Leg, ...]

    @property
    def changes(self) -> tuple[int, int]:
        """How often the output changes as the signal goes there, and as it comes back."""
        there = int(np.count_nonzero(self.times <= self.turned_at))
        return there, self.times.size - there

    @property
    def hunts(self) -> bool:
        """Whether the output changes more than once on either way."""
        return max(self.changes) > 1

    @property
    def period(self) -> float:
        """Median time from one switching on to the next while it hunts [s]; NaN without hunting."""
        switched_on = self.times[self.states]
        there = np.diff(switched_on[switched_on <= self.turned_at])
        return float(np.median(there)) if there.size else math.nan

    def sampled(self, count: int = 2001) -> Samples:
        """Evaluate the simulation at equal steps of time.

        Parameters
        ----------
        count : int, default 2001
            Number of samples.

        Returns
        -------
        Samples
            Exact at each instant.
        """
        time = np.linspace(0.0, self.ended_at, count)
        starts = np.array([leg.start for leg in self.legs])
        place = np.searchsorted(starts, time, side="right") - 1
        start, signal, slope, creep, on, load = (
            np.array([getattr(leg, name) for leg in self.legs])[place]
            for name in ("start", "signal", "slope", "creep", "on", "load")
        )
        since = time - start
        signal = signal + slope * since
        creep = load + (creep - load) * decay(since, self.relaxation_time)
        effect = self.scene.effect
        seen = np.where(load, effect.seen(signal, creep), effect.seen(signal, creep, load=False))
        trip = np.array(self.scene.trips)[load.astype(int), on.astype(int)]
        return Samples(time, signal, seen, trip, on, load)

    def _fields(self) -> Sequence[Field]:
        there, back = self.changes
        rows = [
            Field("hunts", self.hunts),
            Field("changes on the way there", f"{there}"),
            Field("changes on the way back", f"{back}" if self.complete else "not simulated"),
            Field("slope of the signal", self.slope, "V/s"),
        ]
        return rows + ([Field("period", self.period, "s")] if self.hunts else [])


def decay(since: Any, tau: float) -> Any:
    """Tell what is left of a relaxation.

    Parameters
    ----------
    since : float or ndarray
        Time since it began [s].
    tau : float
        Its time constant [s]; 0 where it is over right after it began.

    Returns
    -------
    float or ndarray
        Share, 0 to 1.
    """
    return np.exp(-since / tau) if tau else np.equal(since, 0) * 1.0

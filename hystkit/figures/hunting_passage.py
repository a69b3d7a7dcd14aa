"""One way of a signal past both trips of a stage: what of a simulation a picture shows."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.load_step.hunting import Hunting, Leg, Samples

#: More changes of the output than this would run together; the first ones are shown.
MOST_CHANGES = 40
# Space beside the changes, as a share of the time between the first and the last one, and of the
# whole way at least; a single change has more.
_BESIDE, _OF_WAY, _OF_WAY_ALONE = 0.15, 0.01, 0.05
# Samples of the signal across the picture, and of the whole simulation at most.
_SAMPLES, _MOST_SAMPLES = 2001, 400_000

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Passage:
    """What a `HuntingPicture` shows: one way of the signal past both trips.

    Attributes
    ----------
    run : Hunting
        The simulation.
    way : {"there", "back"}
        Whether the load switches on, or off.
    """

    run: Hunting
    way: str = "there"

    @property
    def rises(self) -> bool:
        """Whether the signal rises on this way."""
        return (self.run.scene.direction > 0) == (self.way == "there")

    @property
    def bounds(self) -> tuple[float, float]:
        """Begin and end of this way [s]."""
        turned, ended = self.run.turned_at, self.run.ended_at
        return (0.0, min(turned, ended)) if self.way == "there" else (turned, ended)

    @cached_property
    def changes(self) -> tuple[Array, NDArray[np.bool_]]:
        """When the output changes on this way [s], and whether that switches the load on."""
        start, end = self.bounds
        times = self.run.times
        here = (times <= end) & (times > start if start else times >= 0)
        return times[here], self.run.states[here]

    @property
    def shown(self) -> int:
        """How many of the changes are shown."""
        return min(self.changes[0].size, MOST_CHANGES)

    @property
    def origin(self) -> float:
        """First change of the output, from which the picture counts time [s]."""
        times = self.changes[0]
        return float(times[0]) if times.size else self.bounds[0]

    @cached_property
    def window(self) -> tuple[float, float]:
        """Time from before the first to after the last change that is shown [s]."""
        start, end = self.bounds
        times = self.changes[0]
        if not times.size:
            return start, end
        first, last = float(times[0]), float(times[self.shown - 1])
        least = _OF_WAY if self.run.hunts else _OF_WAY_ALONE
        beside = max(_BESIDE * (last - first), least * (end - start))
        # Where not all are shown, the next change follows.
        after = beside if self.shown == times.size else float(times[self.shown] - last) / 2
        return max(start, first - beside), min(end, last + after)

    @cached_property
    def samples(self) -> Samples:
        """The simulation over the window, finer than a px."""
        start, end = self.window
        count = math.ceil(_SAMPLES * self.run.ended_at / (end - start))
        found = self.run.sampled(min(count, _MOST_SAMPLES))
        # One more on either side, so that the traces reach both ends.
        first, last = np.searchsorted(found.time, (start, end))
        here = slice(max(int(first) - 1, 0), int(last) + 1)
        return Samples(
            found.time[here],
            found.signal[here],
            found.seen[here],
            found.trip[here],
            found.on[here],
            found.load[here],
        )

    @cached_property
    def legs(self) -> tuple[tuple[float, float, Leg], ...]:
        """Begin and end of each leg within the window [s], and the leg."""
        low, high = self.window
        starts = [leg.start for leg in self.run.legs]
        ends = [*starts[1:], self.run.ended_at]
        cut = [
            (max(start, low), min(end, high), leg)
            for start, end, leg in zip(starts, ends, self.run.legs, strict=True)
        ]
        return tuple((start, end, leg) for start, end, leg in cut if end > start)

    def trips(self, load: bool) -> dict[str, float]:
        """Both trips by name, with the load on or off [V]."""
        lower, upper = sorted(float(volts) for volts in self.run.scene.trips[load])
        return {"upper": upper, "lower": lower}

    def spans(self, state: str) -> list[tuple[float, float]]:
        """When a state of the legs holds, "on" or "load": begin and end of each time [s]."""
        found: list[tuple[float, float]] = []
        for start, end, leg in self.legs:
            if not getattr(leg, state):
                continue
            if found and found[-1][1] == start:
                start = found.pop()[0]
            found.append((start, end))
        return found

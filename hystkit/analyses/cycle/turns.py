"""True highs and lows of a run: where the process value turns, at events and between them."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.crossings import first_reach
from hystkit.analyses.cycle.follow import Track

Array = NDArray[np.float64]
Turns = tuple[Array, Array, NDArray[np.bool_]]

# A turning point is looked for to this part of its stretch [1].
_RESOLUTION = 1e-14
# Closer than this part of a stretch [1], two turning points, or one and an event, are one.
_APART = 1e-9


def turns(track: Track) -> Turns:
    """Find every turning point of the process value.

    Parameters
    ----------
    track : Track
        What happened.

    Returns
    -------
    times, values : ndarray, shape (m, j)
        In order of time, NaN beyond the last.
    high : ndarray of bool, shape (m, j)
        Whether each is a high.
    """
    element, time, value, high = _Stretches(track).found()
    order = np.lexsort((time, element))
    return _padded(element[order], track.times.shape[1], time[order], value[order], high[order])


class _Stretches:
    """All stretches between two events, of all elements, side by side."""

    def __init__(self, track: Track) -> None:
        spans = np.diff(track.times, axis=0)
        # Element by element, so that the one before is the stretch before.
        self.element, self.event = np.nonzero(spans.T > 0)
        self.span = spans[self.event, self.element]
        self.began = track.times[self.event, self.element]
        self.z, self.v = (array[self.event, :, self.element].T for array in (track.z, track.v))
        self.row = track.process[:, self.element]
        self.motion = track.motion.taken(self.element)
        self.apart = _APART * self.span

    def found(self) -> list[NDArray[Any]]:
        """Return element, time, value and kind of each turning point."""
        everywhere = np.arange(self.span.size)
        first = np.sign(self._slope(everywhere, self.apart))
        last, inside = self._inside(first)
        # At events the slope changes its sign from stretch to stretch.
        same = self.element[1:] == self.element[:-1]
        index = 1 + np.flatnonzero(same & (last[:-1] * first[1:] < 0))
        between = self._told(index, np.zeros(index.size), last[index - 1])
        return [np.concatenate(column) for column in zip(between, *inside, strict=True)]

    def _inside(self, first: Array) -> tuple[Array, list[tuple[NDArray[Any], ...]]]:
        """Find turning points within stretches, one after the other; return the last signs too."""
        last, found = first.copy(), []
        index = np.flatnonzero(first)
        time = self.apart[index]
        while index.size:
            sign = last[index]
            time = time + self._turn_after(index, time, sign)
            within = time < (self.span - self.apart)[index]
            index, time, sign = index[within], time[within], sign[within]
            resumed = time + self.apart[index]
            after = np.sign(self._slope(index, resumed))
            turned = after == -sign
            found.append(self._told(index[turned], time[turned], sign[turned]))
            last[index[turned]] = after[turned]
            index, time = index[after != 0], resumed[after != 0]
        return last, found

    def _turn_after(self, index: NDArray[np.intp], time: Array, sign: Array) -> Array:
        """Return how long after a time the slope loses its sign; infinite where it keeps it."""
        motion, v = self.motion.taken(index), self.v[:, index]
        rate = v + motion.turned(motion.covered(v, time))
        row = self.row[:, index]
        return first_reach(
            motion,
            -row * sign,
            -np.abs((row * rate).sum(axis=0).real),
            motion.turned(rate),
            self.span[index] - time,
            _RESOLUTION * self.span[index],
            np.abs(row).sum(axis=0) * np.abs(v).max(axis=0),
        )

    def _slope(self, index: NDArray[np.intp], time: Array) -> Array:
        motion, v = self.motion.taken(index), self.v[:, index]
        rate = v + motion.turned(motion.covered(v, time))
        return np.asarray((self.row[:, index] * rate).sum(axis=0).real)

    def _told(self, index: NDArray[np.intp], time: Array, sign: Array) -> tuple[NDArray[Any], ...]:
        """Return element, time, value and kind of turning points before which the sign holds."""
        gone = self.motion.taken(index).covered(self.v[:, index], time)
        value = (self.row[:, index] * (self.z[:, index] + gone)).sum(axis=0).real
        return self.element[index], self.began[index] + time, value, sign > 0


def _padded(
    element: NDArray[np.intp], count: int, time: Array, value: Array, high: NDArray[np.bool_]
) -> Turns:
    """Put values of elements, in order, into one row for each element."""
    each = np.bincount(element, minlength=count)
    place = np.arange(element.size) - np.repeat(np.cumsum(each) - each, each)
    times, values = np.full((2, count, each.max(initial=0)), np.nan)
    highs = np.zeros(times.shape, dtype=bool)
    times[element, place], values[element, place], highs[element, place] = time, value, high
    return times, values, highs

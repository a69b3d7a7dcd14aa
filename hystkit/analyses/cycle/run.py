"""What happened in a run: events, phases, extremes, and the waveform at any times."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.analyses.cycle.follow import Event, Outcome, Track
from hystkit.analyses.cycle.numbers import read_numbers
from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.cycle.turns import turns
from hystkit.base.errors import Fault, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.circuit.reading import wrong_kind
from hystkit.numeric.measurand import shown_span, span_of

Array = NDArray[np.float64]

#: Up to this part of the period, and of the width, two cycles are alike [1].
SETTLED = 1e-6


class Waveform(NamedTuple):
    """A run at given times; all arrays of one shape, the times on the last axis."""

    time: Array
    process: Array
    sensed: Array
    on: NDArray[np.bool_]


class Extremes(NamedTuple):
    """Turning points of the process value in order of time, NaN beyond the last."""

    time: Array
    value: Array
    high: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Run(Viewed):
    """A run of one plant, or of an array of them, from event to event.

    Arrays have the shape of the request with one more axis, for events or phases; NaN fills up
    the elements that have fewer.

    Attributes
    ----------
    plant : Plant
        That was controlled.
    on_at, off_at : float or ndarray
        Trips [unit].
    until : float or ndarray
        When the run ends [s].
    shape : tuple of int
        Shape of the request, () for a single run.
    tracks : tuple
        What was followed: elements, and their `Track`.
    refused : ndarray of int8, shape (m,)
        `Outcome` codes of the elements that could not be followed.
    """

    plant: Plant
    on_at: Any
    off_at: Any
    until: Any
    shape: tuple[int, ...]
    tracks: tuple[tuple[NDArray[np.intp], Track], ...]
    refused: NDArray[np.int8]

    @cached_property
    def times(self) -> Array:
        """When each event happens, shape (..., k) [s]."""
        return self._gathered(lambda track: track.times, np.nan)

    @cached_property
    def events(self) -> NDArray[np.uint8]:
        """What happens in each event, as `Event` flags, shape (..., k); 0 beyond the end."""
        return self._gathered(lambda track: track.events, np.uint8(0))

    @cached_property
    def states(self) -> Array:
        """States of the plant at each event, shape (..., k, n)."""
        order = self.plant.dynamics.order
        return self._gathered(lambda track: track.motion.outward(track.z)[..., :order], np.nan)

    @cached_property
    def process(self) -> Array:
        """Process value at each event, shape (..., k) [unit]."""
        return self._gathered(lambda track: _signal(track.process, track.z), np.nan)

    @cached_property
    def sensed(self) -> Array:
        """Sensed value at each event, behind the input filter, shape (..., k) [unit]."""
        return self._gathered(lambda track: _signal(track.sensed, track.z), np.nan)

    @cached_property
    def on(self) -> NDArray[np.bool_]:
        """Whether the load is switched on right after each event, shape (..., k)."""
        return self._gathered(lambda track: track.command, False)

    @cached_property
    def acting(self) -> NDArray[np.bool_]:
        """Whether the load acts right after each event, the dead time elapsed, shape (..., k)."""
        return self._gathered(lambda track: track.load, False)

    @cached_property
    def status(self) -> Any:
        """An `Outcome` code for each element."""
        found = self.refused.copy()
        for index, track in self.tracks:
            found[index] = track.outcome
        return found.reshape(self.shape)[()]

    @property
    def message(self) -> str:
        """What became of the run; of an array, how many elements went which way."""
        if self.shape == ():
            return Outcome(int(self.status)).message
        codes, counts = np.unique(self.status, return_counts=True)
        pairs = zip(codes, counts, strict=True)
        return "; ".join(f"{count} {Outcome(int(code)).message}" for code, count in pairs)

    @cached_property
    def starts(self) -> Array:
        """When the load is switched on, shape (..., j) [s]."""
        return _leftmost(self._commands & self.on, self.times)

    @cached_property
    def on_times(self) -> Array:
        """Length of each whole phase with the load switched on, shape (..., j) [s]."""
        return self._phases(on=True)

    @cached_property
    def off_times(self) -> Array:
        """Length of each whole phase between two of them, shape (..., j) [s]."""
        return self._phases(on=False)

    @property
    def duty(self) -> Any:
        """Share of time with the load switched on in the last whole cycle, NaN without one [1]."""
        on, starts = self.on_times, self.starts
        # The phase after the last start belongs to a cycle that is not whole.
        whole = np.isfinite(on).sum(axis=-1) < np.isfinite(starts).sum(axis=-1)
        last = np.where(whole, _last(on, 0), _last(on, 1))
        return np.asarray(last / (_last(starts, 0) - _last(starts, 1)))[()]

    @property
    def settled(self) -> Any:
        """Whether the last two cycles are alike: phases, and where the process value starts."""
        phases = (self.on_times, self.off_times)
        period = sum(_last(lengths, 0) for lengths in phases)
        change = sum(abs(_last(lengths, 0) - _last(lengths, 1)) for lengths in phases)
        begins = _leftmost(self._commands & self.on, self.process)
        width = np.abs(np.subtract(self.off_at, self.on_at))
        returns = abs(_last(begins, 0) - _last(begins, 1)) <= SETTLED * width
        return np.asarray((change <= SETTLED * period) & returns)[()]

    @cached_property
    def extremes(self) -> Extremes:
        """True highs and lows of the process value, at events and between them, shape (..., j)."""
        found = [turns(track) for _, track in self.tracks]
        count = int(np.prod(self.shape))
        most = max((times.shape[1] for times, _, _ in found), default=0)
        time, value = np.full((2, count, most), np.nan)
        high = np.zeros((count, most), dtype=bool)
        for (index, _), (times, values, highs) in zip(self.tracks, found, strict=True):
            for whole, part in ((time, times), (value, values), (high, highs)):
                whole[index, : part.shape[1]] = part
        return Extremes(*(array.reshape(*self.shape, most) for array in (time, value, high)))

    @property
    def low(self) -> Any:
        """Last true low of the process value, NaN without one [unit]."""
        return _last(self._turned(high=False), 0)

    @property
    def high(self) -> Any:
        """Last true high of the process value, NaN without one [unit]."""
        return _last(self._turned(high=True), 0)

    def sampled(self, at: ArrayLike) -> Waveform:
        """Evaluate the run at any times, in closed form.

        Parameters
        ----------
        at : int or array_like
            Number of times, evenly from 0 to the end of each element; or the times themselves
            [s], one axis for all elements.

        Returns
        -------
        Waveform
            Time [s], process value, sensed value behind the input filter [unit], and whether the
            load is switched on; shape (..., count). NaN and False outside the run.

        Raises
        ------
        InputError
            If `at` is neither a number of times nor an array of times.
        """
        until = np.broadcast_to(self.until, self.shape).ravel()
        times = _read_times(at)
        if isinstance(times, int):
            time = np.linspace(0.0, until, times, axis=-1)
        else:
            time = np.broadcast_to(times, (until.size, times.size))
        process, sensed = np.full((2, *time.shape), np.nan)
        on = np.zeros(time.shape, dtype=bool)
        for index, track in self.tracks:
            process[index], sensed[index], on[index] = _evaluated(track, time[index])
        parts = (np.array(part).reshape(*self.shape, -1) for part in (time, process, sensed, on))
        return Waveform(*parts)

    @property
    def _commands(self) -> NDArray[np.bool_]:
        return (self.events & Event.COMMAND) > 0

    def _phases(self, *, on: bool) -> Array:
        times = _leftmost(self._commands, self.times)
        states = _leftmost(self._commands, np.where(self.on, 1.0, 0.0))
        return _leftmost(states[..., :-1] == float(on), np.diff(times), finite=True)

    def _turned(self, *, high: bool) -> Array:
        extremes = self.extremes
        return _leftmost((extremes.high == high) & np.isfinite(extremes.time), extremes.value)

    def _gathered(self, reader: Callable[[Track], Any], fill: Any) -> NDArray[Any]:
        """Put what all tracks hold of each event into one array."""
        parts = [(index, track, np.moveaxis(reader(track), 1, 0)) for index, track in self.tracks]
        longest = max((part.shape[1] for _, _, part in parts), default=0)
        tail = parts[0][2].shape[2:] if parts else ()
        found = np.full((int(np.prod(self.shape)), longest, *tail), fill)
        for index, track, part in parts:
            found[index, : part.shape[1]] = part
            beyond = np.zeros(found.shape[:2], dtype=bool)
            beyond[index, : part.shape[1]] = track.events.T == 0
            found[beyond] = fill
        return found.reshape(*self.shape, *found.shape[1:])

    @property
    def _title(self) -> str:
        return f"Run of {self.plant.name or 'the plant'}"

    def _fields(self) -> Sequence[Field]:
        unit = self.plant.unit
        last = (("on time", self.on_times), ("off time", self.off_times))
        return [
            Field("behaviour", self.message),
            Field("starts", span_of(np.isfinite(self.starts).sum(axis=-1))),
            *(Field(label, span_of(_last(phases, 0)), "s", "last one") for label, phases in last),
            Field("duty", span_of(self.duty), "%", "last cycle"),
            Field("lowest", shown_span(self.low, unit), "", "last low of the process value"),
            Field("highest", shown_span(self.high, unit), "", "last high of the process value"),
            Field("settled", bool(np.all(self.settled)), "", "last two cycles alike"),
        ]


def _read_times(at: Any) -> int | Array:
    faults: list[Fault] = []
    read = read_numbers(faults, "at", at, "s")
    if not faults and np.ndim(read) == 0 and not (read >= 1 and float(read).is_integer()):
        faults.append(wrong_kind("at", at, "a number of times", "run.sampled(1500)"))
    if faults:
        raise InputError.of("these times", faults)
    return int(read) if np.ndim(read) == 0 else np.ravel(read)


def _signal(row: NDArray[Any], z: NDArray[Any]) -> Array:
    return np.asarray((row * z).sum(axis=-2).real)


def _evaluated(track: Track, time: Array) -> tuple[Array, Array, NDArray[np.bool_]]:
    """Return process value, sensed value and command at times of shape (m, count)."""
    elements = np.arange(len(time))[:, None]
    # The last event at or before each time; of several at one instant, the last.
    place = np.stack(
        [
            np.searchsorted(own, when, side="right")
            for own, when in zip(track.times.T, time, strict=True)
        ]
    )
    place = np.clip(place - 1, 0, None)
    outside = (time < 0) | (time > track.times[-1][:, None])
    since = np.where(outside, np.nan, time - track.times[place, elements])
    # Times go first, so that one plant keeps its place on the last axis.
    z, v = (np.moveaxis(array[place, :, elements], 0, -1) for array in (track.z, track.v))
    z = z + track.motion.covered(v, since.T)
    process, sensed = (_signal(row, z).T for row in (track.process, track.sensed))
    return process, sensed, track.command[place, elements] & ~outside


def _leftmost(chosen: NDArray[np.bool_], values: Array, *, finite: bool = False) -> Array:
    """Move the chosen values to the left of the last axis, and cut off what stays empty."""
    chosen = chosen & np.isfinite(values) if finite else chosen
    order = np.argsort(~chosen, axis=-1, kind="stable")
    counts = chosen.sum(axis=-1)
    moved = np.take_along_axis(values, order, axis=-1)
    moved = np.where(np.arange(moved.shape[-1]) < counts[..., None], moved, np.nan)
    return moved[..., : int(counts.max(initial=0))]


def _last(values: Array, back: int) -> Any:
    """Return the last finite value of each row, or the one so many places before it."""
    place = np.isfinite(values).sum(axis=-1) - 1 - back
    if not values.shape[-1]:
        return np.full(values.shape[:-1], np.nan)[()]
    taken = np.take_along_axis(values, np.maximum(place, 0)[..., None], axis=-1)[..., 0]
    return np.where(place >= 0, taken, np.nan)[()]

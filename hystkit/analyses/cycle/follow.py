"""Follow many stages and their plants from event to event; no fixed time step anywhere."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum, IntFlag
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.crossings import first_reach
from hystkit.analyses.cycle.motion import Motion
from hystkit.analyses.cycle.pending import Pending

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

#: After this many events an element is cut short.
MAX_EVENTS = 10_000
# The search for a crossing ends at this fraction of the time on the clock.
_RESOLUTION = 4 * np.finfo(float).eps
# Time constants after which a plant that has not reached its trip never will.
_FOR_EVER = 60.0
# Lengths of the run after which an integrator has not reached it either.
_DRIFTS = 1e6


class Event(IntFlag):
    """What happens at one instant; several things may."""

    START = 1
    TRIP = 2
    OUTPUT = 4
    COMMAND = 8
    LOAD = 16
    DISTURBANCE = 32
    END = 64


class Outcome(IntEnum):
    """What became of one element of a run."""

    SWITCHES = 0
    STAYS_ON = 1
    STAYS_OFF = 2
    NO_WIDTH = 3
    NOT_FINITE = 4
    CUT_SHORT = 5

    @property
    def message(self) -> str:
        """One line that says it."""
        return _MESSAGES[self]


_MESSAGES = {
    Outcome.SWITCHES: "still switching at the end",
    Outcome.STAYS_ON: "stays on: never reaches the off trip",
    Outcome.STAYS_OFF: "stays off: never reaches the on trip",
    Outcome.NO_WIDTH: "both trips are one: no hysteresis",
    Outcome.NOT_FINITE: "a value is not finite",
    Outcome.CUT_SHORT: f"cut short after {MAX_EVENTS} events",
}


@dataclass(frozen=True)
class Task:
    """What is followed, one element on each place of the last axis.

    Attributes
    ----------
    motion : Motion
        Of m plants.
    sensed, process : ndarray, shape (n, m)
        Rows that give both values.
    start : ndarray, shape (n, m)
        Coordinates at time 0.
    off, lift : ndarray, shape (n, m)
        Forcing with the load off, and what the load adds.
    steps : ndarray, shape (k + 1, n, m)
        Forcing of the disturbance before and after each of its steps.
    step_times : ndarray, shape (k + 1, m)
        When each ends [s]; infinite for the last.
    on_at, off_at : ndarray, shape (m,)
        Trips [unit].
    min_on, min_off, dead_on, dead_off, delay, until : ndarray, shape (m,)
        Times [s].
    start_on : ndarray of bool, shape (m,)
        Whether the load is on at time 0.
    """

    motion: Motion
    sensed: NDArray[Any]
    process: NDArray[Any]
    start: NDArray[Any]
    off: NDArray[Any]
    lift: NDArray[Any]
    steps: NDArray[Any]
    step_times: Array
    on_at: Array
    off_at: Array
    min_on: Array
    min_off: Array
    dead_on: Array
    dead_off: Array
    delay: Array
    until: Array
    start_on: Mask


@dataclass(frozen=True)
class Track:
    """What happened, one row for each event; elements that have ended repeat their last state.

    Attributes
    ----------
    motion : Motion
        Of m plants.
    sensed, process : ndarray, shape (n, m)
        Rows that give both values.
    times : ndarray, shape (k, m)
        [s].
    z, v : ndarray, shape (k, n, m)
        Coordinates, and their rates right after the event.
    command, load : ndarray of bool, shape (k, m)
        Whether the load is switched on, and whether it acts, right after the event.
    events : ndarray of uint8, shape (k, m)
        `Event` flags; 0 after the end.
    outcome : ndarray of int8, shape (m,)
        `Outcome` codes.
    """

    motion: Motion
    sensed: NDArray[Any]
    process: NDArray[Any]
    times: Array
    z: NDArray[Any]
    v: NDArray[Any]
    command: Mask
    load: Mask
    events: NDArray[np.uint8]
    outcome: NDArray[np.int8]


def follow(task: Task) -> Track:
    """Follow all elements to their ends.

    Parameters
    ----------
    task : Task
        What to follow.
    """
    state = _State(task)
    rows = [state.row(np.full(state.count, int(Event.START)))]
    while state.running.any() and len(rows) < MAX_EVENTS:
        rows.append(state.row(state.proceed()))
    columns = (np.stack(column) for column in zip(*rows, strict=True))
    times, z, v, command, load, events = columns
    return Track(
        motion=task.motion,
        sensed=task.sensed,
        process=task.process,
        times=times,
        z=z,
        v=v,
        command=command,
        load=load,
        events=events.astype(np.uint8),
        outcome=state.outcome(),
    )


class _State:
    """Where every element stands.

    The sensed value trips the stage; its output follows after the propagation delay; the command
    to the load follows the output as soon as the minimum times let it; the load acts after the
    dead time.
    """

    def __init__(self, task: Task) -> None:
        self.task, self.count = task, task.until.size
        self.now = np.zeros(self.count)
        self.running = np.ones(self.count, dtype=bool)
        self.z = task.start
        self.tripped = self.output = self.command = self.load = task.start_on
        # The minimum times have elapsed when the run starts.
        self.free_at = np.full(self.count, -np.inf)
        self.outputs, self.commands = Pending(self.count), Pending(self.count)
        self.disturbance = np.zeros(self.count, dtype=np.intp)
        self.everyone = np.arange(self.count)
        self.direction = np.sign(task.off_at - task.on_at)
        self.delayed = bool(task.delay.any())
        self.disturbed = len(task.steps) > 1
        self._turn()

    def proceed(self) -> NDArray[Any]:
        """Go to the next event of every element; return what happens there."""
        task = self.task
        due = np.minimum(self._due(), task.until)
        span = due - self.now
        reach = self._reach(span)
        hit = reach <= span
        moved = task.motion.covered(self.v, np.where(hit, reach, span))
        self.z = self.z + moved
        self.now = np.where(hit, self.now + reach, due)
        events = self._switch(hit & self.running)
        ended = self.running & (self.now >= task.until)
        self.running = self.running & ~ended
        self._turn()
        return np.asarray(events + int(Event.END) * ended)

    def row(self, events: NDArray[Any]) -> tuple[NDArray[Any], ...]:
        """Return what is kept of this instant.

        Parameters
        ----------
        events : ndarray of int
            `Event` flags.
        """
        return self.now, self.z, self.v, self.command, self.load, events

    def outcome(self) -> NDArray[np.int8]:
        """Tell which elements would never switch again, and which were cut short."""
        waiting = np.isfinite(self._due())
        motion = self.task.motion
        # An integrator may take long; next to modes that never fade, twice the run has to do.
        drifting = np.where(motion.fades, _DRIFTS, 2.0) * self.task.until
        patience = np.where(np.isinf(motion.slowest), drifting, _FOR_EVER * motion.slowest)
        horizon = np.where(waiting, 0.0, patience)
        stuck = ~waiting & np.isinf(self._reach(horizon))
        code = np.where(self.command, Outcome.STAYS_ON, Outcome.STAYS_OFF)
        found = np.where(stuck, code, Outcome.SWITCHES)
        return np.where(self.running, Outcome.CUT_SHORT, found).astype(np.int8)

    def _due(self) -> Array:
        """Return when the next thing that is on the clock happens; infinite where nothing is."""
        held = np.where(self.output != self.command, self.free_at, np.inf)
        due = np.minimum(held, self.commands.next)
        if self.delayed:
            due = np.minimum(due, self.outputs.next)
        if self.disturbed:
            due = np.minimum(due, self.task.step_times[self.disturbance, self.everyone])
        return due

    def _reach(self, horizon: Array) -> Array:
        """Return the time to the trip that comes next."""
        task = self.task
        sense = np.where(self.tripped, self.direction, -self.direction)
        trip = np.where(self.tripped, task.off_at, task.on_at)
        row = task.sensed * sense
        gap = (row * self.z).sum(axis=0).real - sense * trip
        step = _RESOLUTION * (self.now + np.minimum(horizon, task.until))
        # A run may start at rest on a trip; one that comes to rest on it has not reached it.
        scale = np.where(self.now > 0, np.abs(gap) + 2 * np.abs(trip), 0.0)
        return first_reach(task.motion, row, gap, self.v, horizon, step, scale)

    def _switch(self, hit: Mask) -> NDArray[Any]:
        """Carry a trip, and all that is due, through to the load."""
        task, now, turned = self.task, self.now, hit
        self.tripped = self.tripped ^ hit
        if self.delayed:
            self.outputs.push(hit, now + task.delay)
            turned = self.outputs.pop(now) & self.running
        self.output = self.output ^ turned
        changed = (self.output != self.command) & (now >= self.free_at) & self.running
        self.command = self.command ^ changed
        if changed.any():
            least = np.where(self.command, task.min_on, task.min_off)
            self.free_at = np.where(changed, now + least, self.free_at)
            dead = np.where(self.command, task.dead_on, task.dead_off)
            self.commands.push(changed, now + dead)
        acts = self.commands.pop(now) & self.running
        self.load = self.load ^ acts
        happened = {
            Event.TRIP: hit,
            Event.OUTPUT: turned,
            Event.COMMAND: changed,
            Event.LOAD: acts,
        }
        if self.disturbed:
            stepped = self.running & (now >= task.step_times[self.disturbance, self.everyone])
            self.disturbance = self.disturbance + stepped
            happened[Event.DISTURBANCE] = stepped
        return np.asarray(sum(int(event) * mask for event, mask in happened.items()))

    def _turn(self) -> None:
        """Work out the rates with the load and the disturbance as they are now."""
        task = self.task
        forcing = task.off + task.lift * self.load
        if self.disturbed:
            forcing = forcing + task.steps[self.disturbance, :, self.everyone].T
        self.v = task.motion.turned(self.z) + forcing

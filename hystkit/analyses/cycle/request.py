"""What a run is asked for: everything read, checked together and broadcast to one shape."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Array, Dynamics
from hystkit.analyses.cycle.follow import Outcome, Task
from hystkit.analyses.cycle.motion import Motion, motions
from hystkit.analyses.cycle.numbers import Given, Numbers, read_numbers
from hystkit.analyses.cycle.plants import Plant
from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import together
from hystkit.circuit.reading import is_kind, members, wrong_kind

_RULES = {"until": "> 0", "min_on": ">= 0", "min_off": ">= 0", "delay": ">= 0", "input_rc": ">= 0"}
_BY_STATE = "state=[...], all states of the plant at time 0"


@dataclass(frozen=True)
class Request:
    """A run that can be followed.

    Attributes
    ----------
    dynamics : Dynamics
        The plants, of shape (m,).
    start : ndarray, shape (m, n)
        States at time 0.
    numbers : mapping of str to float or ndarray
        Trips and times, as read.
    steps : tuple of pairs
        Time [s] and size of each step of the disturbance.
    start_on : ndarray of bool
        Whether the load is on at time 0.
    shape : tuple of int
        To which everything broadcasts.
    """

    dynamics: Dynamics
    start: Array
    numbers: Mapping[str, Numbers]
    steps: tuple[tuple[Numbers, Numbers], ...]
    start_on: NDArray[np.bool_]
    shape: tuple[int, ...]

    @cached_property
    def outcome(self) -> NDArray[np.int8]:
        """What becomes of elements that cannot be followed, shape (m,); SWITCHES elsewhere."""
        trips = self._each("on_at"), self._each("off_at")
        found = np.where(trips[0] == trips[1], Outcome.NO_WIDTH, Outcome.SWITCHES)
        finite = np.isfinite(trips[0] + trips[1]) & np.isfinite(self.start).all(axis=-1)
        return np.where(finite, found, Outcome.NOT_FINITE).astype(np.int8)

    def tasks(self) -> Iterator[tuple[NDArray[np.intp], Task]]:
        """Give tasks of plants that move in one way, with the elements that each holds."""
        possible = self.outcome == Outcome.SWITCHES
        filtered = self._each("input_rc") > 0
        for group in (possible & ~filtered, possible & filtered):
            chosen = np.flatnonzero(group)
            if not chosen.size:
                continue
            dynamics, start = self.dynamics.taken(chosen), self.start[chosen]
            if filtered[chosen[0]]:
                dynamics, start = _behind(dynamics, start, self._each("input_rc")[chosen])
            for index, motion in motions(dynamics):
                yield (
                    chosen[index],
                    self._task(motion, dynamics.taken(index), start[index], chosen[index]),
                )

    def _task(
        self, motion: Motion, dynamics: Dynamics, start: Array, index: NDArray[np.intp]
    ) -> Task:
        names = ("on_at", "off_at", "min_on", "min_off", "delay", "until")
        sizes, times = self._disturbance(dynamics, index)
        return Task(
            motion=motion,
            sensed=motion.row(dynamics.sensed),
            process=motion.row(dynamics.process),
            start=motion.inward(start),
            off=motion.inward(dynamics.off),
            lift=motion.inward(dynamics.on - dynamics.off),
            steps=np.stack([motion.inward(size) for size in sizes]),
            step_times=times,
            dead_on=dynamics.dead_on,
            dead_off=dynamics.dead_off,
            start_on=self._flat(self.start_on)[index],
            **{name: self._each(name)[index] for name in names},
        )

    def _disturbance(
        self, dynamics: Dynamics, index: NDArray[np.intp]
    ) -> tuple[list[Array], Array]:
        """Give the forcing of the disturbance between its steps, and when each part ends."""
        forcing, ends = [np.zeros_like(dynamics.off)], []
        for time, size in self.steps:
            shift = dynamics.shifted(self._flat(size)[index]).off - dynamics.off
            forcing.append(forcing[-1] + shift)
            ends.append(self._flat(time)[index])
        return forcing, np.stack([*ends, np.full(index.size, np.inf)])

    def _each(self, name: str) -> Array:
        return self._flat(self.numbers[name])

    def _flat(self, value: Any) -> NDArray[Any]:
        return np.broadcast_to(value, self.shape).ravel()


def read_request(
    plant: Plant,
    values: Mapping[str, Given | None],
    times: Mapping[str, Given],
    disturbances: Sequence[tuple[Given, Given]],
    start_on: Any,
    state: Any,
) -> Request:
    """Read what is asked for.

    Parameters
    ----------
    plant : Plant
        As given.
    values : mapping of str to float, str or array_like
        on_at, off_at and start, the last perhaps None [unit].
    times : mapping of str to float, str or array_like
        until, min_on, min_off, delay, input_rc [s].
    disturbances : sequence of pairs
        Time [s] and size.
    start_on : bool or array_like of bool
        As given.
    state : array_like or None
        As given.

    Raises
    ------
    InputError
        Naming everything that cannot be used.
    """
    faults: list[Fault] = []
    known = is_kind(plant, Plant)
    if not known:
        remedy = "hk.FirstOrder(tau=600, on_level=40, off_level=10)"
        faults.append(wrong_kind("plant", plant, "a plant", remedy))
    unit = plant.unit if known else ""
    given = {name: value for name, value in values.items() if value is not None}
    numbers = {
        name: read_numbers(faults, name, value, unit, "or NaN") for name, value in given.items()
    }
    numbers |= {n: read_numbers(faults, n, value, "s", _RULES[n]) for n, value in times.items()}
    steps = tuple(_read_steps(faults, disturbances, plant.disturbance_unit if known else ""))
    on = _read_on(faults, start_on)
    faults += _start_faults(values["start"], state)
    states = None if state is None else read_numbers(faults, "state", state)
    if known:
        faults += _plant_faults(plant.dynamics, states, bool(steps))
    if faults:
        raise InputError.of("this run", faults)
    return _together(plant.dynamics, numbers, steps, on, states)


def _together(
    dynamics: Dynamics,
    numbers: Mapping[str, Numbers],
    steps: tuple[tuple[Numbers, Numbers], ...],
    on: NDArray[np.bool_],
    states: Numbers | None,
) -> Request:
    """Broadcast everything, and refuse what only shows then."""
    faults: list[Fault] = []
    sizes: dict[str, Any] = {**numbers, "start_on": on, "plant": np.empty(dynamics.shape)}
    for place, (time, size) in enumerate(steps, 1):
        sizes |= {f"time of disturbance {place}": time, f"size of disturbance {place}": size}
    if states is not None:
        sizes["state"] = np.asarray(states)[..., 0]
    shape = together(faults, sizes)
    if not faults:
        faults += _order_faults(steps)
        if shape == () and numbers["on_at"] == numbers["off_at"]:
            faults.append(_no_width(numbers["on_at"]))
    if faults:
        raise InputError.of("this run", faults)
    count = int(np.prod(shape))
    flat = _flattened(dynamics, shape)
    if states is None:
        start = _at_rest(flat, np.broadcast_to(numbers["start"], shape).ravel())
    else:
        start = np.broadcast_to(states, (*shape, dynamics.order)).reshape(count, dynamics.order)
    return Request(flat, start, numbers, steps, on, shape)


def _flattened(dynamics: Dynamics, shape: tuple[int, ...]) -> Dynamics:
    """Put all plants on one axis."""
    index = np.arange(int(np.prod(shape))).reshape(shape)
    where = np.unravel_index(index.ravel(), shape) if shape else (np.newaxis,)
    return dynamics.over(shape).taken(where)


def _at_rest(dynamics: Dynamics, process: Array) -> Array:
    """Return states that a constant disturbance holds at the process value; NaN without one."""
    n = dynamics.order
    push = dynamics.on - dynamics.off if dynamics.disturbance is None else dynamics.disturbance
    system = np.zeros((process.size, n + 1, n + 1))
    system[:, :n, :n], system[:, :n, n], system[:, n, :n] = dynamics.a, push, dynamics.process
    right = np.concatenate([-dynamics.off, process[:, None]], axis=1)[..., None]
    one = np.linalg.matrix_rank(system) == n + 1
    if not one.any():
        raise InputError(
            "start does not say in which state this plant is at rest.",
            asked=f"the plant at rest with a process value of {process[0]:g}",
            have="no such state, or many of them",
            remedy=_BY_STATE,
        )
    found = np.full((process.size, n), np.nan)
    found[one] = np.linalg.solve(system[one], right[one])[:, :n, 0]
    return found


def _behind(dynamics: Dynamics, start: Array, rc: Array) -> tuple[Dynamics, Array]:
    """Put a low-pass filter behind the sensor: one more state, which becomes what is sensed."""
    count, n = start.shape
    a = np.zeros((count, n + 1, n + 1))
    a[:, :n, :n], a[:, n, :n], a[:, n, n] = dynamics.a, dynamics.sensed / rc[:, None], -1 / rc
    filtered = np.concatenate([start, dynamics.sensed_of(start)[:, None]], axis=1)
    sensed = np.zeros(n + 1)
    sensed[n] = 1.0
    behind = Dynamics(
        a=a,
        on=_longer(dynamics.on),
        off=_longer(dynamics.off),
        sensed=np.broadcast_to(sensed, (count, n + 1)),
        process=_longer(dynamics.process),
        disturbance=None if dynamics.disturbance is None else _longer(dynamics.disturbance),
        dead_on=dynamics.dead_on,
        dead_off=dynamics.dead_off,
    )
    return behind, filtered


def _longer(rows: Array) -> Array:
    return np.concatenate([rows, np.zeros((*rows.shape[:-1], 1))], axis=-1)


def _read_steps(
    faults: list[Fault], disturbances: Any, unit: str
) -> Iterator[tuple[Numbers, Numbers]]:
    pairs = members(disturbances)
    if not pairs and not is_kind(disturbances, (tuple, list)):
        wanted = "a list of pairs (time, size)"
        faults.append(wrong_kind("disturbances", disturbances, wanted, "[(600, -5)]"))
    for place, pair in enumerate(pairs, 1):
        if len(members(pair)) != 2:
            name = f"disturbance {place}"
            faults.append(wrong_kind(name, pair, "a pair (time, size)", "(600, -5)"))
            continue
        time, size = pair
        yield (
            read_numbers(faults, f"time of disturbance {place}", time, "s", ">= 0"),
            read_numbers(faults, f"size of disturbance {place}", size, unit),
        )


def _read_on(faults: list[Fault], start_on: Any) -> NDArray[np.bool_]:
    on = np.asarray(start_on) if np.ndim(start_on) or is_kind(start_on, (bool, np.bool_)) else None
    if on is None or on.dtype != bool:
        faults.append(wrong_kind("start_on", start_on, "True or False", "start_on=False"))
        return np.zeros((), dtype=bool)
    return on


def _start_faults(start: Any, state: Any) -> Iterator[Fault]:
    if (start is None) == (state is None):
        yield Fault(
            "start and state are both given." if state is not None else "no start is given.",
            rule="one of the two says where the plant is at time 0",
            remedy=f"start=20, the process value with everything at rest; or {_BY_STATE}",
        )


def _plant_faults(dynamics: Dynamics, states: Numbers | None, disturbed: bool) -> Iterator[Fault]:
    if states is not None and np.shape(states)[-1:] != (dynamics.order,):
        yield Fault(
            "state has a shape that does not fit.",
            asked=f"state of shape {np.shape(states)}",
            rule=f"shape (..., {dynamics.order}): the plant has {dynamics.order} states",
            remedy=_BY_STATE,
        )
    if disturbed:
        try:
            dynamics.shifted(0.0)
        except InputError as error:
            yield from error.faults


def _order_faults(steps: Sequence[tuple[Numbers, Numbers]]) -> Iterator[Fault]:
    for place, ((before, _), (after, _)) in enumerate(pairwise(steps), 1):
        if np.any(np.asarray(before) >= np.asarray(after)):
            yield Fault(
                f"disturbance {place + 1} does not come after disturbance {place}.",
                rule="steps of the disturbance stand in order of time",
                remedy="one pair for each instant, the earliest first",
            )


def _no_width(trip: Any) -> Fault:
    return Fault(
        "both trips are one: no hysteresis.",
        asked=f"on_at = off_at = {trip:g}",
        rule="on_at below off_at to heat, above it to cool",
        remedy="trips that lie apart",
    )

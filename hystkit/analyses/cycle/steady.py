"""The steady cycle between two trips, exactly, for whole arrays of plants at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.lagged import solve_lagged
from hystkit.analyses.cycle.numbers import Given, Numbers, read_numbers
from hystkit.analyses.cycle.plants import Plant, StateSpace, TwoLag
from hystkit.analyses.cycle.question import Flags, Orbit, Question, turn
from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.returns import solve_returns
from hystkit.analyses.cycle.single import solve_single
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.analyses.cycle.turning import extremes, mean, rates
from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import together
from hystkit.circuit.reading import is_kind, wrong_kind

Array = NDArray[np.float64]
Codes = NDArray[np.int8]

#: A time that falls short of its minimum by this much [1] does so by rounding, and a level that
#: lies beyond a trip by this much of the distance between both levels.
_ROUNDING = 1e-12


def steady_cycle(
    plant: Plant, on_at: Given, off_at: Given, min_on: Given = 0.0, min_off: Given = 0.0
) -> Cycle:
    r"""Give the steady cycle of a plant that is switched on at one trip and off at the other.

    Parameters
    ----------
    plant : FirstOrder, TwoLag, Integrating or StateSpace
        What the load acts on; its numbers may be arrays.
    on_at, off_at : float, str or array_like
        Sensed values at which the load is commanded on and off [unit]. On below off is heating,
        on above off is cooling. NaN in an array, such as a trip point that does not exist, stays
        NaN in the result.
    min_on, min_off : float, str or array_like, default 0
        Time that a command is kept before the trip counts [s], >= 0.

    Returns
    -------
    Cycle
        Floats where all values are scalars, else arrays of the broadcast shape. Elements that do
        not cycle are NaN, and their status says which way they stick.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

    Notes
    -----
    The command follows the sensed value without delay, and acts after the dead time. Exact: each
    phase is a closed form. A single lag and an integrator are solved in closed form, two lags by
    Newton's method with a bracket behind it, a plant of one's own by following its turns from
    rest with the load off, and Newton's method then.

    With a dead time, faster cycles can exist, in which several commands are under way at once;
    of one lag they are known to be unstable [1]_. What is reported is the slow one, in which each
    command has acted before the next one comes: its on time is never shorter than the dead time
    on switching on, nor its off time than that on switching off. For one lag and for an
    integrator there is one such cycle; for two lags there is no second one as far as the tests
    have looked. For a plant of one's own it is the one reached from rest; it has to repeat, to
    hold itself against small departures, and to have every command at its first crossing, else
    its status says that no cycle was proved. Extremes of such a plant are looked for at 640
    points of each phase.

    With equal dead times :math:`\mathrm{duty} = (\mathrm{mean} - y_0)/(y_1 - y_0)` for both
    kinds of lag, where :math:`y_1, y_0` are the levels with the load on and off.

    A cycle is what a plant does by itself: it protects nothing. Where heat, pressure or a level
    can hurt someone, an independent limiter is needed; local codes and licensed practice come
    first.

    References
    ----------
    .. [1] L. Fridman, E. Fridman, E. Shustin, Steady modes in relay systems with delay, in:
       W. Perruquetti, J.-P. Barbot (eds.), Sliding Mode Control in Engineering, 2002 (from
       memory).

    Examples
    --------
    >>> boiler = TwoLag(tau=1800, sensor_tau=120, on_level=110, off_level=20, dead_time=30)
    >>> cycle = steady_cycle(boiler, on_at=58, off_at=62)
    >>> print(f"{cycle.on_time:.1f} s on, {cycle.off_time:.1f} s off, {cycle.low:.1f} to")
    386.6 s on, 477.0 s off, 55.0 to

    >>> steady_cycle(boiler, on_at=58, off_at=[62, 112]).message.tolist()
    ['cycles', 'stays on: never reaches the off trip']
    """
    numbers = _read(plant, on_at, off_at, min_on, min_off)
    shape = np.broadcast_shapes(plant.shape, *(np.shape(value) for value in numbers))
    on, off, *times = (np.broadcast_to(value, shape).ravel() for value in numbers)
    lift = np.broadcast_to(plant.lift, shape).ravel()
    heating = np.where(on == off, lift >= 0, ~(on > off))
    sign = np.where(heating, 1.0, -1.0)
    dynamics = plant.dynamics.over(shape).taken(np.ones(shape, dtype=bool))
    question = Question.turned(dynamics, (on, off), (times[0], times[1]), sign)
    orbit, status = _solved(plant, question, sign * lift < 0)
    return _result(plant, question, orbit, (status, heating), shape)


def _solved(plant: Plant, question: Question, wrong: Flags) -> tuple[Orbit, Codes]:
    """Judge every element, and solve those that can cycle."""
    orbit = Orbit.blank(question.low.size, question.dynamics.order)
    general = isinstance(plant, StateSpace)
    status = _judged(question, wrong)
    if not general:
        _judge_levels(status, question)
    some = np.flatnonzero(status == CycleStatus.CYCLES)
    if not some.size:
        return orbit, status
    part = question.taken(some)
    if general:
        found, status[some] = solve_returns(part)
    else:
        found = _by_minimum_times(part, solve_lagged if isinstance(plant, TwoLag) else solve_single)
        status[some[np.isnan(found.rise)]] = CycleStatus.UNPROVED
    orbit.put(some, found)
    return orbit, status


def _judged(question: Question, wrong: Flags) -> Codes:
    """Give the code of elements that no plant could make a cycle of."""
    dynamics = question.dynamics
    paused = (dynamics.dead_on > 0) | (dynamics.dead_off > 0)
    paused |= (question.min_on > 0) | (question.min_off > 0)
    status = np.full(wrong.shape, CycleStatus.CYCLES, dtype=np.int8)
    status[(question.low == question.high) & ~paused] = CycleStatus.CHATTERS
    status[wrong] = CycleStatus.WRONG_WAY
    status[np.isnan(question.low) | np.isnan(question.high)] = CycleStatus.NOT_FINITE
    return status


def _judge_levels(status: Codes, question: Question) -> None:
    """Mark which lags and integrators do not reach a trip; they reach no further than they end."""
    dynamics = question.dynamics
    top, bottom = (dynamics.sensed_of(dynamics.settled(on)) for on in (True, False))
    rises, drops = (dynamics.sensed_of(dynamics.forcing(on)) for on in (True, False))
    margin = _ROUNDING * np.abs(top - bottom)
    up = np.where(np.isnan(top), rises > 0, top > question.high + margin)
    down = np.where(np.isnan(bottom), drops < 0, bottom < question.low - margin)
    can = (status == CycleStatus.CYCLES) | (status == CycleStatus.CHATTERS)
    status[can & ~up & down] = CycleStatus.STAYS_ON
    status[can & up & ~down] = CycleStatus.STAYS_OFF
    status[can & ~up & ~down] = CycleStatus.STAYS


def _by_minimum_times(question: Question, solve: Callable[[Question, bool, bool], Orbit]) -> Orbit:
    """Try which minimum times hold, until each element agrees with its own assumption."""
    orbit = Orbit.blank(question.low.size, question.dynamics.order)
    left = np.ones(question.low.shape, dtype=bool)
    for hold_on, hold_off in ((False, False), (True, False), (False, True), (True, True)):
        some = left.copy()
        some[left] = _may_hold(question.taken(left), hold_on, hold_off)
        if not some.any():
            continue
        part = question.taken(some)
        found = solve(part, hold_on, hold_off)
        agrees = _agrees(part, found, hold_on, hold_off)
        index = np.flatnonzero(some)[agrees]
        orbit.put(index, found.taken(agrees))
        left[index] = False
    return orbit


def _may_hold(question: Question, hold_on: bool, hold_off: bool) -> Flags:
    """Tell where the minimum times leave the dead times behind; only then can they hold."""
    may = np.ones(question.low.shape, dtype=bool)
    if hold_on:
        may &= question.held_rise > 0
    if hold_off:
        may &= question.held_fall > 0
    return may


def _agrees(question: Question, orbit: Orbit, hold_on: bool, hold_off: bool) -> Flags:
    """Tell where a free time is long enough, and a held one ends beyond its trip."""
    dynamics = question.dynamics
    at_on, at_off = orbit.start, turn(dynamics, orbit).off
    on_good = (
        dynamics.sensed_of(at_off) >= question.high
        if hold_on
        else orbit.rise >= question.held_rise * (1 - _ROUNDING)
    )
    off_good = (
        dynamics.sensed_of(at_on) <= question.low
        if hold_off
        else orbit.fall >= question.held_fall * (1 - _ROUNDING)
    )
    return np.asarray(on_good & off_good & np.isfinite(orbit.rise + orbit.fall))


def _result(
    plant: Plant,
    question: Question,
    orbit: Orbit,
    judged: tuple[Codes, Flags],
    shape: tuple[int, ...],
) -> Cycle:
    """Turn the orbits into times and values, the right way up again."""
    status, heating = judged
    good = status == CycleStatus.CYCLES
    columns = np.full((9, good.size), np.nan)
    if good.any():
        part, known = question.taken(good), orbit.taken(good)
        process, sensed = extremes(type(plant), part, known)
        values = np.array([*process, *sensed, mean(part, known), *rates(part, known)])
        # A cooling load was turned over: its lowest is the highest, with the other sign.
        turned = -values[[1, 0, 3, 2, 4, 5, 6]]
        columns[:2, good] = known.rise + part.dynamics.dead_on, known.fall + part.dynamics.dead_off
        columns[2:, good] = np.where(heating[good], values, turned)
    on_time, off_time, low, high, sensed_low, sensed_high, average, at_on, at_off = (
        column.reshape(shape)[()] for column in columns
    )
    return Cycle(
        on_time=on_time,
        off_time=off_time,
        low=low,
        high=high,
        sensed_low=sensed_low,
        sensed_high=sensed_high,
        mean=average,
        rate_at_on=at_on,
        rate_at_off=at_off,
        status=status.reshape(shape)[()],
        heating=heating.reshape(shape)[()],
        unit=plant.unit,
        name=plant.name,
    )


def _read(plant: Any, on_at: Any, off_at: Any, min_on: Any, min_off: Any) -> list[Numbers]:
    """Read what was given; all faults together."""
    faults: list[Fault] = []
    unit = plant.unit if is_kind(plant, Plant) else ""
    numbers = {
        "on_at": read_numbers(faults, "on_at", on_at, unit, "or NaN"),
        "off_at": read_numbers(faults, "off_at", off_at, unit, "or NaN"),
        "min_on": read_numbers(faults, "min_on", min_on, "s", ">= 0"),
        "min_off": read_numbers(faults, "min_off", min_off, "s", ">= 0"),
    }
    if is_kind(plant, Plant):
        together(faults, {"plant": np.empty(plant.shape), **numbers})
    else:
        faults.append(wrong_kind("plant", plant, "a plant", "hk.FirstOrder(tau, on_level, ...)"))
    if faults:
        raise InputError.of("the steady cycle", faults)
    return list(numbers.values())

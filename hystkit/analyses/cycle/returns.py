"""The steady cycle of a linear plant of any order: follow its turns until they repeat."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.crossings import first_reach
from hystkit.analyses.cycle.dynamics import Dynamics
from hystkit.analyses.cycle.motion import motions
from hystkit.analyses.cycle.newton import Held, growth, refine
from hystkit.analyses.cycle.question import Flags, Orbit, Question, turn
from hystkit.analyses.cycle.status import CycleStatus

Array = NDArray[np.float64]

_TURNS = 200
#: From here on Newton's method takes over: change of both times from turn to turn [1].
_REPEATS = 1e-6
#: A cycle is proved if each command comes at the time found, to this [1] ...
_AGREES = 1e-6
#: ... and if a departure from it shrinks, with a margin for rounding [1].
_SHRINKS = 1 - 1e-6
# Time constants after which a plant that comes to rest has reached all that it ever will.
_FOR_EVER = 60.0
# Turns without damping that are waited for, where the plant never comes to rest.
_PATIENCE = 1e3


@dataclass(frozen=True, eq=False)
class _Once:
    """One turn, followed from the command on: its times, and where they lead."""

    rise: Array
    fall: Array
    held: Held
    next: Array


def solve_returns(question: Question) -> tuple[Orbit, NDArray[np.int8]]:
    """Give the orbit on which the plant settles from rest with the load off.

    Parameters
    ----------
    question : Question
        Plants of one order.

    Returns
    -------
    orbit : Orbit
        NaN where there is none.
    status : ndarray of int8
        A `CycleStatus` for each.
    """
    count, n = question.low.size, question.dynamics.order
    status = np.full(count, CycleStatus.UNPROVED, dtype=np.int8)
    orbit = Orbit.blank(count, n)
    start, once = _repeated(question)
    status[np.isnan(once.rise)] = CycleStatus.STAYS_ON
    status[~np.isnan(once.rise) & np.isnan(once.fall)] = CycleStatus.STAYS_OFF
    some = np.flatnonzero((once.rise > 0) & (once.fall > 0))
    if some.size:
        held = once.held.taken(some)
        found, good = refine(
            question.taken(some), held, Orbit(start[some], once.rise[some], once.fall[some])
        )
        some, held, found = some[good], held.taken(good), found.taken(good)
        proved = _proved(question.taken(some), held, found)
        status[some[proved]] = CycleStatus.CYCLES
        orbit.put(some[proved], found.taken(proved))
    return orbit, status


def _repeated(question: Question) -> tuple[Array, _Once]:
    """Follow turns until their times repeat; elements that stop keep their NaN."""
    start = _at_rest(question)
    once = _follow(question, start)
    for _ in range(_TURNS):
        going = np.isfinite(once.fall)
        then = _follow(question, np.where(going[:, None], once.next, start))
        start = np.where(going[:, None], once.next, start)
        change = _change(then.rise, once.rise, then.fall, once.fall)
        once = then
        if not (change > _REPEATS).any():
            break
    return start, once


def _change(rise: Array, rise_before: Array, fall: Array, fall_before: Array) -> Array:
    """Return by how much either time changed [1]; NaN where there is none."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratios = np.log([rise / rise_before, fall / fall_before])
    return np.asarray(np.abs(ratios).max(axis=0))


def _at_rest(question: Question) -> Array:
    """Return the settled state with the load off, or the least one at the lower trip."""
    dynamics = question.dynamics
    rest = dynamics.settled(False)
    row = dynamics.sensed
    least = question.low[:, None] * row / (row * row).sum(axis=-1, keepdims=True)
    return np.where(np.isnan(rest), least, rest)


def _follow(question: Question, start: Array) -> _Once:
    """Follow one turn to its commands."""
    dynamics = question.dynamics
    acts_on = dynamics.advance(start, False, dynamics.dead_on)
    rise, held_on = _command(question, acts_on, True)
    off = dynamics.advance(acts_on, True, rise)
    acts_off = dynamics.advance(off, True, dynamics.dead_off)
    fall, held_off = _command(question, acts_off, False)
    held = Held(held_on, held_off)
    return _Once(rise, fall, held, dynamics.advance(acts_off, False, fall))


def _command(question: Question, x: Array, on: bool) -> tuple[Array, Flags]:
    """Return when the next command comes, and whether a minimum time held it back."""
    least = question.held_rise if on else question.held_fall
    reached = _reach(question, x, on)
    return np.maximum(reached, least), reached < least


def _reach(question: Question, x: Array, on: bool) -> Array:
    """Return when the sensed value first reaches the trip ahead, NaN where it never does."""
    sign = 1.0 if on else -1.0
    gap = sign * (question.dynamics.sensed_of(x) - (question.high if on else question.low))
    time = np.full(gap.shape, np.nan)
    valid = np.flatnonzero(np.isfinite(gap))
    if valid.size:
        dynamics = question.dynamics.taken(valid)
        time[valid] = _search(dynamics, x[valid], on, gap[valid], sign * dynamics.sensed)
    return time


def _search(dynamics: Dynamics, x: Array, on: bool, gap: Array, row: Array) -> Array:
    """Return when gap + row (x(t) - x) first rises to zero, NaN where it never does."""
    time = np.full(gap.shape, np.nan)
    rate = dynamics.rate(x, on)
    for index, motion in motions(dynamics):
        part = dynamics.taken(index)
        horizon, step = _patience(part, gap[index], (row * rate)[index].sum(-1))
        time[index] = first_reach(
            motion, motion.row(row[index]), gap[index], motion.inward(rate[index]), horizon, step
        )
    return np.where(np.isfinite(time), time, np.nan)


def _patience(dynamics: Dynamics, gap: Array, speed: Array) -> tuple[Array, Array]:
    """Return how long to look for a crossing, and a time too short to matter [s]."""
    rates = np.linalg.eigvals(dynamics.a)
    size = np.abs(rates)
    moving = size > 1e-9 * size.max(axis=-1, keepdims=True)
    slowest = np.where(moving, 1 / np.where(moving, size, 1.0), 0.0).max(axis=-1)
    # What neither fades nor only integrates could go on for ever.
    endless = (moving & (rates.real > -1e-9 * size)).any(axis=-1)
    horizon = np.where(dynamics.stable, _FOR_EVER * slowest, np.inf)
    horizon = np.where(endless, _PATIENCE * slowest, horizon)
    ramp = np.where(speed != 0, np.abs(gap / np.where(speed != 0, speed, 1.0)), 0.0)
    return horizon, 1e-13 * (slowest + np.where(slowest > 0, 0.0, ramp))


def _proved(question: Question, held: Held, orbit: Orbit) -> Flags:
    """Tell which orbits are cycles that hold themselves, each command at its first chance."""
    once = _follow(question, orbit.start)
    agrees = _change(once.rise, orbit.rise, once.fall, orbit.fall) < _AGREES
    agrees &= (once.held.on == held.on) & (once.held.off == held.off)
    holds = growth(question, held, orbit) < _SHRINKS
    return np.asarray(agrees & holds & ~_overtaken(question, orbit) & ~_recalled(question, orbit))


def _overtaken(question: Question, orbit: Orbit) -> Flags:
    """Tell where the other trip is reached before a command has acted."""
    dynamics, states = question.dynamics, turn(question.dynamics, orbit)
    soon = np.zeros(orbit.rise.shape, dtype=bool)
    for x, on, dead, trip, sign in (
        (orbit.start, False, dynamics.dead_on, question.high, 1.0),
        (states.off, True, dynamics.dead_off, question.low, -1.0),
    ):
        gap = sign * (dynamics.sensed_of(x) - trip)
        # A minimum time may have left the sensed value beyond the trip; it has to come back.
        soon |= (gap < 0) & (_search(dynamics, x, on, gap, sign * dynamics.sensed) < dead)
    return soon


def _recalled(question: Question, orbit: Orbit) -> Flags:
    """Tell where a command that a minimum time holds back is taken back in the meantime."""
    dynamics, states = question.dynamics, turn(question.dynamics, orbit)
    recalled = np.zeros(orbit.rise.shape, dtype=bool)
    for x, on, time, back, sign in (
        (states.acts_on, True, orbit.rise, question.low, -1.0),
        (states.acts_off, False, orbit.fall, question.high, 1.0),
    ):
        reached = np.minimum(_reach(question, x, on), time)
        beyond = dynamics.advance(x, on, reached)
        gap = sign * (dynamics.sensed_of(beyond) - back)
        again = _search(dynamics, beyond, on, gap, sign * dynamics.sensed)
        recalled |= (gap < 0) & (reached + again < time * (1 - _AGREES))
    return recalled

"""The steady cycle of plants with a single state: a lag, or an integrator. Closed form."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Dynamics
from hystkit.analyses.cycle.question import Flags, Orbit, Question, closed

Array = NDArray[np.float64]


def solve_single(question: Question, hold_on: bool, hold_off: bool) -> Orbit:
    """Give the orbit of plants whose one state is the sensed value.

    Parameters
    ----------
    question : Question
        Plants that reach both trips.
    hold_on, hold_off : bool
        Whether the minimum on and off time, instead of the trip, sets the command.

    Returns
    -------
    Orbit
        Each decision forgets what was before, for its trip is the whole state; only where both
        minimum times hold does the state that returns to itself have to be found.
    """
    dynamics = question.dynamics
    if hold_on and hold_off:
        return _held(question)
    at_low, at_high = (trip[:, None] / dynamics.sensed for trip in (question.low, question.high))
    if hold_off:
        acts_off = dynamics.advance(at_high, True, dynamics.dead_off)
        at_low = dynamics.advance(acts_off, False, question.held_fall)
    acts_on = dynamics.advance(at_low, False, dynamics.dead_on)
    rise = _time(dynamics, acts_on, True, at_high)
    if hold_on:
        rise = question.held_rise
        at_high = dynamics.advance(acts_on, True, rise)
    acts_off = dynamics.advance(at_high, True, dynamics.dead_off)
    fall = question.held_fall if hold_off else _time(dynamics, acts_off, False, at_low)
    return Orbit(at_low, rise, fall)


def _held(question: Question) -> Orbit:
    """Both times are given; an integrator then runs away, or was at its trips all the time."""
    orbit = Orbit.blank(question.low.size, 1)
    stable: Flags = np.broadcast_to(question.dynamics.stable, question.low.shape)
    some = question.taken(stable)
    orbit.put(stable, closed(some.dynamics, some.held_rise, some.held_fall))
    return orbit


def _time(dynamics: Dynamics, x: Array, on: bool, target: Array) -> Array:
    """Time from one state to another that lies ahead; the logarithm without cancelling."""
    speed = dynamics.rate(x, on)[:, 0]
    way = (target - x)[:, 0]
    z = dynamics.a[..., 0, 0] * way / speed
    still = z == 0
    return np.asarray(way / speed * np.where(still, 1.0, np.log1p(z) / np.where(still, 1.0, z)))

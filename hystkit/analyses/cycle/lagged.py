"""The steady cycle of a lag that is sensed through a second one: Newton, and brackets behind it."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.newton import Held, refine
from hystkit.analyses.cycle.question import Orbit, Question, closed, turn

Array = NDArray[np.float64]

#: Halvings of a bracket; what they leave is for Newton's method.
_HALVINGS = 34
#: Shortest and longest phase that are looked at, in time constants [1].
_SHORTEST, _LONGEST = 1e-9, 200.0


def solve_lagged(question: Question, hold_on: bool, hold_off: bool) -> Orbit:
    """Give the orbit of two lags, equal ones included.

    Parameters
    ----------
    question : Question
        Plants that reach both trips.
    hold_on, hold_off : bool
        Whether the minimum on and off time, instead of the trip, sets the command.

    Returns
    -------
    Orbit
        NaN where no solution was found; none is known.
    """
    shape = question.low.shape
    held = Held(np.full(shape, hold_on), np.full(shape, hold_off))
    rise, fall = _guess(question)
    rise = question.held_rise if hold_on else rise
    fall = question.held_fall if hold_off else fall
    orbit = closed(question.dynamics, rise, fall)
    if hold_on and hold_off:
        return orbit
    orbit, good = refine(question, held, orbit)
    if not good.all():
        rest = question.taken(~good)
        again, better = refine(rest, held.taken(~good), _bracketed(rest, hold_on, hold_off))
        again.rise[~better] = np.nan
        orbit.put(~good, again)
    return orbit


def _guess(question: Question) -> tuple[Array, Array]:
    """Take the shorter lag for so much more dead time, and the longer one for the plant."""
    dynamics = question.dynamics
    lags = -1 / np.diagonal(dynamics.a, axis1=-2, axis2=-1)
    tau, extra = lags.max(axis=-1), lags.min(axis=-1)
    top, bottom = (dynamics.sensed_of(dynamics.settled(on)) for on in (True, False))
    low, high = question.low, question.high
    highest = top - (top - high) * np.exp(-(dynamics.dead_off + extra) / tau)
    lowest = bottom + (low - bottom) * np.exp(-(dynamics.dead_on + extra) / tau)
    rise = extra + tau * np.log((top - lowest) / (top - high))
    return rise, extra + tau * np.log((highest - bottom) / (low - bottom))


def _bracketed(question: Question, hold_on: bool, hold_off: bool) -> Orbit:
    """Find both times between bounds that cannot miss them.

    For a given length of both phases together, more time for the rise lifts the sensed value at
    both commands; and a longer cycle moves them apart, wherever they lie in their right order.
    The tests look at both, which are not proved here.
    """
    lags = -1 / np.diagonal(question.dynamics.a, axis1=-2, axis2=-1)
    shortest, longest = np.log(_SHORTEST * lags.min(axis=-1)), np.log(_LONGEST * lags.sum(axis=-1))
    dynamics, low, high = question.dynamics, question.low, question.high
    if hold_on:
        rise = question.held_rise
        fall = np.exp(
            _root(lambda u: low - _commands(question, rise, np.exp(u))[0], shortest, longest)
        )
        return closed(dynamics, rise, fall)
    if hold_off:
        fall = question.held_fall
        rise = np.exp(
            _root(lambda u: _commands(question, np.exp(u), fall)[1] - high, shortest, longest)
        )
        return closed(dynamics, rise, fall)

    def centred(total: Array) -> tuple[Array, Array]:
        widest = np.full(total.shape, 40.0)
        share = _root(
            lambda u: sum(_commands(question, *_shared(total, u))) - (low + high), -widest, widest
        )
        return _shared(total, share)

    def apart(u: Array) -> Array:
        at_on, at_off = _commands(question, *centred(np.exp(u)))
        return at_off - at_on - (high - low)

    return closed(dynamics, *centred(np.exp(_root(apart, shortest, longest))))


def _shared(total: Array, share: Array) -> tuple[Array, Array]:
    """Split a time by the log of the ratio of its parts."""
    return total / (1 + np.exp(-share)), total / (1 + np.exp(share))


def _commands(question: Question, rise: Array, fall: Array) -> tuple[Array, Array]:
    """Return the sensed values at the command on and at the command off."""
    dynamics = question.dynamics
    orbit = closed(dynamics, rise, fall)
    return dynamics.sensed_of(orbit.start), dynamics.sensed_of(turn(dynamics, orbit).off)


def _root(increasing: Callable[[Array], Array], low: Array, high: Array) -> Array:
    """Halve the bracket of an increasing function; its end where there is no root inside."""
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        above = increasing(middle) > 0
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    return (low + high) / 2

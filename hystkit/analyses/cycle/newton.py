"""Newton's method on one turn of the cycle, for all elements at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import apply
from hystkit.analyses.cycle.question import Flags, Orbit, Question, closed, turn

Array = NDArray[np.float64]

_STEPS = 40
#: A step this small [1], relative to both times, is the last one.
_DONE = 1e-13
#: A step that no longer halves has met rounding, if it is this small [1].
_ROUNDING = 1e-8


@dataclass(frozen=True, eq=False)
class Held:
    """Which commands the minimum times set, instead of the trips.

    Attributes
    ----------
    on, off : ndarray of bool
        Shape (N,).
    """

    on: Flags
    off: Flags

    def taken(self, index: Any) -> Held:
        """Give some of the elements.

        Parameters
        ----------
        index : index of one axis
            As numpy takes it.
        """
        return Held(self.on[index], self.off[index])


def refine(question: Question, held: Held, orbit: Orbit) -> tuple[Orbit, Flags]:
    """Solve for the orbit from a first guess of it.

    Parameters
    ----------
    question : Question
        Plants and trips.
    held : Held
        Which times are given.
    orbit : Orbit
        First guess; positive times.

    Returns
    -------
    orbit : Orbit
        Where it converged, a solution to rounding.
    converged : ndarray of bool
        Shape (N,).
    """
    best = Orbit(orbit.start.copy(), orbit.rise.copy(), orbit.fall.copy())
    converged = np.zeros(question.low.shape, dtype=bool)
    left = np.arange(question.low.size)
    size = np.full(left.size, np.inf)
    rests = np.array(
        [question.dynamics.sensed_of(question.dynamics.settled(on)) for on in (True, False)]
    )
    for _ in range(_STEPS):
        if not left.size:
            break
        now, step = _step(question, held, best.taken(left), rests[:, left])
        best.put(left, now)
        done = (step < _DONE) | ((step < _ROUNDING) & (step > size / 2))
        converged[left] = done
        going = ~done & np.isfinite(step)
        left, size, question = left[going], step[going], question.taken(going)
        held = held.taken(going)
    return best, converged


def _step(question: Question, held: Held, orbit: Orbit, rests: Array) -> tuple[Orbit, Array]:
    """One damped step in the state and in the logarithms of both times."""
    jacobian, residual = _equations(question, held, orbit, rests)
    n = orbit.start.shape[1]
    try:
        change = -np.linalg.solve(jacobian, residual[..., None])[..., 0]
    except np.linalg.LinAlgError:
        return orbit, np.full(orbit.rise.shape, np.nan)
    size = np.abs(change[:, n:]).max(axis=1)
    change /= np.maximum(1.0, size)[:, None]
    rise, fall = orbit.rise * np.exp(change[:, n]), orbit.fall * np.exp(change[:, n + 1])
    if not np.isnan(rests).any():
        return closed(question.dynamics, rise, fall), size
    return Orbit(orbit.start + change[:, :n], rise, fall), size


def _equations(question: Question, held: Held, orbit: Orbit, rests: Array) -> tuple[Array, Array]:
    """Return the derivatives and the values of what has to vanish, shape (N, n + 2)."""
    dynamics, n = question.dynamics, orbit.start.shape[1]
    states = turn(dynamics, orbit)
    by_rise = dynamics.rate(states.off, True) * orbit.rise[:, None]
    by_fall = dynamics.rate(states.on, False) * orbit.fall[:, None]
    jacobian = np.zeros((orbit.rise.size, n + 2, n + 2))
    residual = np.zeros((orbit.rise.size, n + 2))
    jacobian[:, :n, :n] = states.to_on @ states.to_off - np.eye(n)
    jacobian[:, :n, n], jacobian[:, :n, n + 1] = apply(states.to_on, by_rise), by_fall
    residual[:, :n] = states.on - orbit.start
    row = np.broadcast_to(dynamics.sensed, orbit.start.shape)
    value, slope = _distance(dynamics.sensed_of(states.off), question.high, rests[0])
    jacobian[:, n, :n] = slope[:, None] * (row[:, None, :] @ states.to_off)[:, 0]
    jacobian[:, n, n] = slope * dynamics.sensed_of(by_rise)
    residual[:, n] = value
    value, slope = _distance(dynamics.sensed_of(orbit.start), question.low, rests[1])
    jacobian[:, n + 1, :n] = slope[:, None] * row
    residual[:, n + 1] = value
    _hold(jacobian, residual, held.on, n, (orbit.rise, question.held_rise))
    _hold(jacobian, residual, held.off, n + 1, (orbit.fall, question.held_fall))
    return jacobian, residual


def _hold(
    jacobian: Array, residual: Array, held: Flags, place: int, times: tuple[Array, Array]
) -> None:
    """Put a given time in the place of a trip."""
    time, given = times
    jacobian[held, place] = np.eye(jacobian.shape[-1])[place]
    residual[held, place] = np.log(time[held] / given[held])


def _distance(sensed: Array, trip: Array, rest: Array) -> tuple[Array, Array]:
    """Return how far the sensed value misses its trip, and the slope of that."""
    ahead = rest - trip
    ratio = np.where(ahead != 0, (rest - sensed) / np.where(ahead != 0, ahead, 1.0), np.nan)
    usable = ratio > 0
    safe = np.where(usable, ratio, 1.0)
    return (
        np.where(usable, np.log(safe), sensed - trip),
        np.where(usable, -1 / np.where(usable, safe * ahead, 1.0), 1.0),
    )


def growth(question: Question, held: Held, orbit: Orbit) -> Array:
    """Return by how much a small departure from the orbit grows in one turn.

    Parameters
    ----------
    question : Question
        Plants and trips.
    held : Held
        Which times are given.
    orbit : Orbit
        A solution.

    Returns
    -------
    ndarray
        Largest magnitude of the eigenvalues of the return map, shape (N,); the cycle holds
        itself where this is below 1.
    """
    dynamics, states = question.dynamics, turn(question.dynamics, orbit)
    row = np.broadcast_to(dynamics.sensed, orbit.start.shape)
    to_off = _timed(states.to_off, dynamics.rate(states.off, True), row, held.on)
    to_on = _timed(states.to_on, dynamics.rate(states.on, False), row, held.off)
    return np.asarray(np.abs(np.linalg.eigvals(to_on @ to_off)).max(axis=-1))


def _timed(transition: Array, rate: Array, row: Array, held: Flags) -> Array:
    """Return the derivative of a state at a command whose time the trip sets, not the clock."""
    speed = (row * rate).sum(axis=-1)
    moved = rate[:, :, None] * (row[:, None, :] @ transition) / speed[:, None, None]
    return np.asarray(np.where(held[:, None, None], transition, transition - moved))

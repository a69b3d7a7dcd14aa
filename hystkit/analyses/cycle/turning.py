"""How far both values really go in a cycle, and their mean."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Dynamics, apply
from hystkit.analyses.cycle.plants import Plant, StateSpace, TwoLag
from hystkit.analyses.cycle.question import Orbit, Question, Turn, turn

Array = NDArray[np.float64]
Span = tuple[Array, Array]

#: Points of a phase at which a plant of any order is looked at first, evenly and close to its
#: beginning.
_EVEN, _EARLY = 512, 128
_HALVINGS = 50
# Points of all plants that are looked at together, so that what they need stays in cache.
_AT_ONCE = 4096


def extremes(kind: type[Plant], question: Question, orbit: Orbit) -> tuple[Span, Span]:
    """Return the lowest and the highest process value and sensed value.

    Parameters
    ----------
    kind : type
        Of the plants.
    question : Question
        Plants that cycle.
    orbit : Orbit
        Their cycles.

    Returns
    -------
    process, sensed : pair of ndarray
        Lowest and highest, each of shape (N,).
    """
    dynamics, states = question.dynamics, turn(question.dynamics, orbit)
    if issubclass(kind, StateSpace):
        found = [_searched(dynamics, states, orbit, row) for row in ("process", "sensed")]
        return found[0], found[1]
    lowest, highest = states.acts_on, states.acts_off
    process = dynamics.process_of(lowest), dynamics.process_of(highest)
    if not issubclass(kind, TwoLag):
        return process, (dynamics.sensed_of(lowest), dynamics.sensed_of(highest))
    # The sensor turns where it meets the process value, within the phase that follows.
    bottom = dynamics.advance(lowest, True, _meeting(dynamics, lowest, True))
    top = dynamics.advance(highest, False, _meeting(dynamics, highest, False))
    return process, (dynamics.sensed_of(bottom), dynamics.sensed_of(top))


def mean(question: Question, orbit: Orbit) -> Array:
    """Return the mean process value over a cycle, exactly.

    Parameters
    ----------
    question : Question
        Plants that cycle.
    orbit : Orbit
        Their cycles.
    """
    dynamics = question.dynamics
    on_time, off_time = _phases(dynamics, orbit)
    if np.all(dynamics.stable):
        # Over a period x returns, so that the mean of A x + f vanishes.
        total = on_time[:, None] * dynamics.settled(True)
        total = total + off_time[:, None] * dynamics.settled(False)
        return dynamics.process_of(total) / (on_time + off_time)
    states, summed = turn(dynamics, orbit), _summing(dynamics)
    zero = np.zeros((*orbit.rise.shape, 1))
    area = sum(
        summed.advance(np.concatenate([x, zero], axis=-1), on, time)[..., -1]
        for x, on, time in ((states.acts_on, True, on_time), (states.acts_off, False, off_time))
    )
    return np.asarray(area / (on_time + off_time))


def rates(question: Question, orbit: Orbit) -> Span:
    """Give the rates of the sensed value at the command on and at the command off.

    Parameters
    ----------
    question : Question
        Plants that cycle.
    orbit : Orbit
        Their cycles.

    Returns
    -------
    tuple of ndarray
        At the command on, where the load does not act yet, and at the command off [unit/s].
    """
    dynamics = question.dynamics
    ends = ((orbit.start, False), (turn(dynamics, orbit).off, True))
    at_on, at_off = (dynamics.sensed_of(dynamics.rate(x, on)) for x, on in ends)
    return at_on, at_off


def _phases(dynamics: Dynamics, orbit: Orbit) -> tuple[Array, Array]:
    """Return how long the load acts, and how long it does not [s]."""
    return orbit.rise + dynamics.dead_off, orbit.fall + dynamics.dead_on


def _meeting(dynamics: Dynamics, x: Array, on: bool) -> Array:
    """Time until the second of two lags meets the first one, equal ones included."""
    first, second = -dynamics.a[..., 0, 0], -dynamics.a[..., 1, 1]
    rate = dynamics.rate(x, on)
    away = -rate[..., 1] / (second * rate[..., 0])
    z = away * (second - first)
    still = z == 0
    return np.asarray(away * np.where(still, 1.0, np.log1p(z) / np.where(still, 1.0, z)))


def _summing(dynamics: Dynamics) -> Dynamics:
    """Give the plants with the integral of the process value as one more state."""
    n, lead = dynamics.order, dynamics.shape
    a = np.zeros((*lead, n + 1, n + 1))
    a[..., :n, :n], a[..., n, :n] = dynamics.a, dynamics.process
    still = np.zeros((*lead, 1))
    on, off, row = (
        np.concatenate([np.broadcast_to(v, (*lead, n)), still], axis=-1)
        for v in (dynamics.on, dynamics.off, dynamics.process)
    )
    return Dynamics(a, on, off, row, row, None, dynamics.dead_on, dynamics.dead_off)


def _searched(dynamics: Dynamics, states: Turn, orbit: Orbit, row: str) -> Span:
    """Look at many points of both phases, then close in on the extreme ones."""
    weights = getattr(dynamics, row)
    ends = []
    on_time, off_time = _phases(dynamics, orbit)
    for x, on, time in ((states.acts_on, True, on_time), (states.acts_off, False, off_time)):
        for sign in (1.0, -1.0):
            ends.append(sign * _lowest(dynamics, (x, on, time), sign * weights))
    return np.minimum(ends[0], ends[2]), np.maximum(ends[1], ends[3])


def _lowest(dynamics: Dynamics, phase: tuple[Array, bool, Array], row: Array) -> Array:
    x, on, time = phase

    def along(weights: Array, of: Callable[[Array], Array]) -> Callable[[Array], Array]:
        return lambda t: (weights * of(dynamics.advance(x, on, t))).sum(axis=-1)

    value = along(row, lambda state: state)
    slope = along(row, lambda state: apply(dynamics.a, state) + dynamics.forcing(on))
    early = np.geomspace(1e-6, 1 / _EVEN, _EARLY, endpoint=False)
    shares = np.concatenate([[0.0], early, np.linspace(1 / _EVEN, 1.0, _EVEN)])
    blocks = np.array_split(shares, 1 + shares.size * time.size // _AT_ONCE)
    seen = np.concatenate([value(block[:, None] * time) for block in blocks])
    least = seen.argmin(axis=0)
    left = shares[np.maximum(least - 1, 0)] * time
    right = shares[np.minimum(least + 1, shares.size - 1)] * time
    for _ in range(_HALVINGS):
        middle = (left + right) / 2
        rising = slope(middle) > 0
        left, right = np.where(rising, left, middle), np.where(rising, middle, right)
    return np.asarray(np.minimum(seen.min(axis=0), value((left + right) / 2)))

"""A slow ramp with noise through a band: what it switches, in units of the noise.

Levels are in units of the rms, and time in units of rms / slope, so that the mean of the signal
rises by one unit of level in one unit of time. The upper trip is at 0.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from hystkit.analyses.noise.rates import climb, passage_time, returning
from hystkit.circuit.arrays import Floats

# The mean runs from this far before the upper trip to as far behind it, in steps.
_STEPS = 320
_SHORTEST = 4.5
# Found by simulation: how long a trip waits for the noise to forget the one before, in relaxation
# times for each sigma of width, up to a width; and how early noise with a sharp edge swings back,
# in mean periods.
_FORGETTING = 0.5
_WIDEST = 5.0
_SWINGING = 0.36
# ... and by how much the first trip comes earlier on a fast ramp than crossings tell.
_FAST = 0.12
_ROOT = np.sqrt(2 * np.pi)


@dataclass(frozen=True)
class Passage:
    """What a ramp switches; all arrays of shape (n,).

    Attributes
    ----------
    probability : ndarray
        Of more than one transition.
    extra_cycles : ndarray
        Expected number beyond the one transition that is meant.
    early : ndarray
        By how much the mean of the signal is before the trip at the first transition.
    jitter : ndarray
        Standard deviation of that.
    """

    probability: Floats
    extra_cycles: Floats
    early: Floats
    jitter: Floats


def passage(width: Floats, crossings: Floats, relaxations: Floats) -> Passage:
    r"""Follow the state of a switch along a ramp.

    Parameters
    ----------
    width : ndarray, shape (n,)
        Of the band, in units of the rms.
    crossings : ndarray, shape (n,) or (1,)
        Crossings of the mean while the ramp rises by the rms: nu0 sigma / slope.
    relaxations : ndarray, shape (n,) or (1,)
        Relaxation times in the same time.

    Returns
    -------
    Passage
        Arrays of shape (n,).

    Notes
    -----
    Three states: not yet up, up, down again. They are left at the rates of `passage_time`, with
    Rice's rates for a level that moves: the slope of the noise, with rms :math:`2 \pi \nu_0
    \sigma`, and that of the ramp add. Rates are constant within a step; so each step has its
    closed form, and the steps are chained.
    """
    width, crossings, relaxations = (a[:, None] for a in (width, crossings, relaxations))
    # Fewer than one in 10^5 trips comes before.
    reach = np.sqrt(np.maximum(2 * np.log(1e5 * np.maximum(crossings, 1.0)), _SHORTEST**2))
    nodes = reach * np.linspace(-1, 1, _STEPS + 1)
    step = 2 * reach / _STEPS
    mean = nodes[:, :-1] + step / 2
    rising, falling = _slopes(crossings)
    upward, downward = _bell(mean) * rising, _bell(mean + width) * falling
    slow = 1 / relaxations
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        swing = returning(width)
        first = (1 + _FAST / crossings) / passage_time(upward, slow * np.maximum(climb(-mean), 0))
        up = 1 / passage_time(swing * upward, slow * (climb(-mean) - climb(-mean - width)))
        down = 1 / passage_time(swing * downward, slow * (climb(mean + width) - climb(mean)))
    rates = [rate * step for rate in (first, up, down)]
    waited = _FORGETTING * np.minimum(width, _WIDEST) * slow - _SWINGING / crossings
    tripped = 1 - np.exp(-_running(rates[0]))
    share = np.diff(tripped) / tripped[:, -1:]
    early = -(share * mean).sum(-1)
    jitter = np.sqrt((share * (mean + early[:, None]) ** 2).sum(-1))
    places = (mean + waited + reach) / step
    # Summed from the end, where there is next to nothing.
    left = _between(_running(rates[2][:, ::-1])[:, ::-1], places)
    probability = (share * -np.expm1(-left)).sum(-1)
    arrived = _between(tripped, (nodes - waited + reach) / step)
    cycles = _cycles(arrived, rates[1], rates[2])
    shape = probability.shape
    return Passage(
        probability, cycles, np.broadcast_to(early, shape), np.broadcast_to(jitter, shape)
    )


def _slopes(crossings: Floats) -> tuple[Floats, Floats]:
    """Give the mean rise and fall of noise and ramp together, each counted where it occurs."""
    noise = 2 * np.pi * crossings
    rise = noise * _bell(1 / noise) + ndtr(1 / noise)
    return rise, np.maximum(rise - 1.0, 0.0)


def _bell(level: Floats) -> Floats:
    return np.asarray(np.exp(-(level**2) / 2) / _ROOT)


def _running(steps: Floats) -> Floats:
    """Sum up to each node."""
    total = np.zeros((steps.shape[0], steps.shape[1] + 1))
    np.cumsum(steps, axis=-1, out=total[:, 1:])
    return total


def _between(nodes: Floats, places: Floats) -> Floats:
    """Interpolate rows at fractional places; the end values hold outside."""
    rows = np.broadcast_shapes(nodes.shape[:1], places.shape[:1])
    places = np.clip(places, 0, nodes.shape[1] - 1)
    places = np.broadcast_to(np.nan_to_num(places), (*rows, places.shape[1]))
    nodes = np.broadcast_to(nodes, (*rows, nodes.shape[1]))
    whole = np.minimum(places.astype(np.intp), nodes.shape[1] - 2)
    low, high = (np.take_along_axis(nodes, whole + n, axis=1) for n in (0, 1))
    return np.asarray(low + (places - whole) * (high - low))


def _cycles(arrived: Floats, up: Floats, down: Floats) -> Floats:
    """Count returns from the up state, of all that have arrived in it."""
    both = up + down
    held = np.exp(-both)
    # What remains of a step on average, without loss of digits where it is short.
    kept = np.where(both > 1e-8, -np.expm1(-both) / np.maximum(both, 1e-300), 1.0)
    present = (arrived[:, 1:] + arrived[:, :-1]) / 2
    settled = present * np.where(both > 0, up / np.maximum(both, 1e-300), 0.0)
    # Half of those that arrive in a step are there from its beginning.
    entering = np.diff(arrived) / 2
    # Share in the up state after each step: an affine map of that before it.
    offset = settled * (1 - held) + entering * (1 + held)
    offset[:, 0] += held[:, 0] * arrived[:, 0]
    state = np.hstack([arrived[:, :1], _chained(held, offset)])
    share = settled + (state[:, :-1] + entering - settled) * kept
    # Where next to nothing is up, rounding may leave less.
    return np.asarray((down * np.maximum(share, 0.0)).sum(-1))


def _chained(factor: Floats, offset: Floats) -> Floats:
    """Compose the maps x -> factor x + offset from 0 on, doubling the length of the chains."""
    factor, offset = factor.copy(), offset.copy()
    reach = 1
    while reach < factor.shape[1]:
        offset[:, reach:] += factor[:, reach:] * offset[:, :-reach]
        factor[:, reach:] *= factor[:, :-reach]
        reach *= 2
    return offset

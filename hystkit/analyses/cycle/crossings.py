"""When a signal first reaches a level: a search that cannot step over a crossing."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.motion import Motion

Array = NDArray[np.float64]

#: What is left of a move [1] that cannot be told from none.
_ROUNDING = 16 * np.finfo(float).eps


def first_reach(
    motion: Motion,
    row: NDArray[Any],
    gap: Array,
    v: NDArray[Any],
    horizon: Array,
    step: Array,
    scale: Array | float = 0.0,
) -> Array:
    r"""Find when each signal first rises to zero.

    The signal is g(t) = gap + row z(t), with z(0) = 0 and z' = v there. Where the second
    derivative stays below M from t on,

    .. math:: g(t + s) \le g + g' s + M s^2 / 2 ,

    so up to the first root of the parabola there is no crossing, and the search goes there.

    Parameters
    ----------
    motion : Motion
        Of m plants.
    row : ndarray, shape (n, m)
        Gives the signal.
    gap : ndarray, shape (m,)
        The signal at the beginning; where it is >= 0, the level is reached at once.
    v : ndarray, shape (n, m)
        Rates at the beginning.
    horizon : ndarray, shape (m,)
        Where to stop looking [s].
    step : ndarray, shape (m,)
        A time too short to matter [s].
    scale : ndarray or float, default 0
        Size of the values whose difference `gap` is.

    Returns
    -------
    ndarray, shape (m,)
        Time of the first crossing before the horizon [s], infinite where there is none.

    Notes
    -----
    Two crossings in one segment are told apart however close they lie, down to the rounding of
    the signal itself. Near a crossing M s is small against g', and the search converges as
    Newton's does, from one side; near a signal that only touches the level, it slows down.
    """
    found = np.full(gap.shape, np.inf)
    time = np.zeros(gap.shape)
    searching = np.ones(gap.shape, dtype=bool)
    here, rate = gap, v
    with np.errstate(all="ignore"):
        while True:
            stride = np.minimum(_safe(motion, row, here, rate), motion.longest)
            reached = searching & ((here >= 0) | (stride <= step))
            if reached.any():
                rests = _rests(motion, row, rate, scale + np.abs(gap - here))
                found = np.where(reached & ~rests, time, found)
            time = np.where(searching, time + stride, time)
            searching = searching & ~reached & (time < horizon)
            if not searching.any():
                return found
            gone = motion.covered(v, time)
            here = gap + (row * gone).sum(axis=0).real
            rate = v + motion.turned(gone)


def _rests(motion: Motion, row: NDArray[Any], v: NDArray[Any], scale: Array) -> NDArray[np.bool_]:
    """Tell where a signal has settled at the level itself, and only rounding takes it there."""
    left = np.abs(row * v).sum(axis=0) * motion.slowest
    return np.asarray(left < _ROUNDING * scale)


def _safe(motion: Motion, row: NDArray[Any], gap: Array, v: NDArray[Any]) -> Array:
    """Return the first root of the parabola that lies above the signal; infinite without one."""
    slope = (row * v).sum(axis=0).real
    bend = motion.bend(row, motion.turned(v))
    root = np.sqrt(slope * slope - 2 * bend * gap)
    # Either form of the root is taken where it adds, so that nothing cancels.
    return np.asarray(np.where(slope < 0, (root - slope) / bend, -2 * gap / (slope + root)))

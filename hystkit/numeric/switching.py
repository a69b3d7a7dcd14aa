"""A switch with hysteresis over a long record of samples, without a loop over them."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import read_array
from hystkit.circuit.reading import wrong_kind

# Most samples of a block: the place and the state of each fit together into 16 bits.
_LONGEST = 32766
_SHORTEST = 256


def simulate_switch(
    samples: ArrayLike,
    upper: ArrayLike | str,
    lower: ArrayLike | str,
    start: ArrayLike | None = None,
) -> NDArray[np.bool_]:
    """Follow a switch with hysteresis through a record.

    Parameters
    ----------
    samples : array_like, shape (..., n)
        Signal at the instants of a record, the last axis is time [V].
    upper, lower : float, str or array_like
        Trip points [V]; arrays broadcast against `samples`, so that they may differ from sample
        to sample or from record to record.
    start : bool or array_like, shape (...), optional
        State before the first sample. Left out, a record that starts inside the band starts in
        the state of the trip point that lies nearer.

    Returns
    -------
    ndarray of bool, shape (..., n)
        True from a sample above `upper` on, until a sample lies below `lower`. Samples on a trip
        point, inside the band or NaN keep the state.

    Raises
    ------
    InputError
        Naming everything that cannot be used: shapes that do not fit, an upper trip point below
        the lower one.

    Notes
    -----
    Every sample that sets a state is marked with its place and that state, and the running maximum
    carries the last mark forward, in blocks that stay in cache: n operations without a branch.
    What happens between two samples is not seen.

    Examples
    --------
    >>> simulate_switch([0.0, 1.2, 0.5, -0.1, 0.5], upper=1.0, lower=0.0).astype(int)
    array([0, 1, 1, 0, 0])
    """
    signal, above, below, state = _checked(samples, upper, lower, start)
    shape = np.broadcast_shapes(signal.shape, above.shape, below.shape)
    found = np.empty(shape, dtype=np.bool_)
    if not found.size:
        return found
    signal, above, below = (np.broadcast_to(a, shape) for a in (signal, above, below))
    length = int(np.clip(2**18 * shape[-1] // found.size, _SHORTEST, _LONGEST))
    places = np.arange(2, 2 * length + 2, 2, dtype=np.uint16)
    carried = _first(signal, above, below) if state is None else state.astype(np.uint16)
    for begin in range(0, shape[-1], length):
        block = np.s_[..., begin : begin + length]
        high = signal[block] > above[block]
        marks = places[: high.shape[-1]] + high
        marks *= high | (signal[block] < below[block])
        marks[..., 0] = np.where(marks[..., 0] == 0, carried, marks[..., 0])
        np.maximum.accumulate(marks, axis=-1, out=marks)
        marks &= 1
        found[block] = marks
        carried = marks[..., -1].copy()
    return found


def _first(signal: Any, above: Any, below: Any) -> NDArray[np.uint16]:
    """Give the state of the trip point that lies nearer to the first sample."""
    first = np.s_[..., 0]
    nearer = signal[first] - below[first] > above[first] - signal[first]
    state: NDArray[np.uint16] = np.asarray(nearer, dtype=np.uint16)
    return state


def _checked(
    samples: ArrayLike,
    upper: ArrayLike | str,
    lower: ArrayLike | str,
    start: ArrayLike | None,
) -> tuple[Any, Any, Any, Any]:
    """Take everything as arrays, or report all that is wrong."""
    faults: list[Fault] = []
    signal = _record(faults, samples)
    above, below = (
        read_array(faults, name, trip, "V", finite=False)
        for name, trip in (("upper", upper), ("lower", lower))
    )
    if start is not None and np.asarray(start).dtype != bool:
        faults.append(wrong_kind("start", start, "True or False", "start=False, for the low state"))
    if not faults and signal.ndim == 0:
        faults.append(
            Fault(
                "samples is a single number.",
                have=f"{float(signal):g}",
                rule="the last axis of samples is time",
                remedy="an array of samples",
            )
        )
    if faults:
        raise InputError.of("this simulation", faults)
    try:
        shape = np.broadcast_shapes(signal.shape, above.shape, below.shape)
        state = None if start is None else np.broadcast_to(np.asarray(start, bool), shape[:-1])
    except ValueError:
        raise InputError(
            "the shapes of a simulation do not fit.",
            have=f"samples {signal.shape}, upper {above.shape}, lower {below.shape}"
            + ("" if start is None else f", start {np.shape(start)}"),
            rule="trip points broadcast against samples, start against samples without time",
            remedy="a trip point of each record as shape (..., 1)",
        ) from None
    if np.any(above < below):
        raise InputError(
            "the upper trip point is below the lower one.",
            asked=f"upper = {np.min(above):g} V at least, lower = {np.max(below):g} V at most",
            rule="upper >= lower, sample by sample",
            remedy="exchange them",
        )
    return signal, above, below, state


def _record(faults: list[Fault], samples: ArrayLike) -> Any:
    try:
        return np.asarray(samples, dtype=np.float64)
    except (TypeError, ValueError):
        faults.append(
            Fault(
                "samples does not hold numbers.",
                have=type(samples).__name__,
                remedy="an array of numbers",
            )
        )
        return np.zeros(1)

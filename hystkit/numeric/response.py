"""What the output does while the signal runs: against time."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.base.errors import Fault, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.numeric.compile import kernel
from hystkit.numeric.levels import levels
from hystkit.numeric.loop import signal_axis
from hystkit.numeric.views import Response

SHAPES = ("triangle", "sine", "ramp")


def response(design: Design, time: ArrayLike, signal: ArrayLike) -> Response:
    """Evaluate the output for a signal over time.

    Parameters
    ----------
    design : Design
        The design.
    time : array_like, shape (n,)
        Rising instants [s], n >= 2.
    signal : array_like, shape (n,)
        Signal voltage at these instants [V].

    Returns
    -------
    Response
        The output at the same instants. A signal that starts inside the band starts as if it had
        come from the nearer end of it.

    Raises
    ------
    InputError
        If the arrays do not fit each other, time does not rise or the signal is not finite.

    Notes
    -----
    Static: the device's delay and slew are left out.
    """
    t, v = np.asarray(time, dtype=float), np.asarray(signal, dtype=float)
    _check(t, v)
    found = levels(design)
    compiled = kernel(design.stage)
    above = above_band(v, found.upper, found.lower)
    states = [compiled.law.lower_state, compiled.law.upper_state]
    by_state = [
        np.broadcast_to(compiled.voltages(state, design.values, v)["out"], v.shape)
        for state in states
    ]
    # Above the band the output is in the state that the lower trip leaves.
    output = np.where(above, by_state[0], by_state[1])
    output = output if found.ok else np.full_like(v, np.nan)
    changes = np.flatnonzero(np.diff(above.astype(np.int8)))
    return Response(t, v, output, _crossings(t, v, changes, above, found.upper, found.lower), found)


def above_band(signal: NDArray[np.float64], upper: float, lower: float) -> NDArray[np.bool_]:
    """Tell for every sample whether the switch last saw the signal above the band.

    Parameters
    ----------
    signal : ndarray, shape (n,)
        Signal voltage [V].
    upper, lower : float
        Trip points [V].

    Returns
    -------
    ndarray of bool, shape (n,)
        True from the sample that reaches the upper trip to the one that reaches the lower.
    """
    marked = np.where(signal >= upper, 1, np.where(signal <= lower, -1, 0))
    # Each sample looks back to the last one that was outside the band.
    last = np.maximum.accumulate(np.where(marked != 0, np.arange(signal.size), -1))
    start = 1 if signal[0] > (upper + lower) / 2 else -1
    return np.where(last < 0, start, marked[last]) > 0


def sweep(
    design: Design,
    shape: str = "triangle",
    *,
    cycles: int = 2,
    period: float = 1.0,
    points: int = 2001,
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Give a test signal that runs through both trips.

    Parameters
    ----------
    design : Design
        Its signal span, rails and trips set the ends.
    shape : {"triangle", "sine", "ramp"}
        Waveform; the ramp rises once.
    cycles : int, default 2
        Periods, of triangle and sine.
    period : float, default 1.0
        Length of a period, or of the ramp [s].
    points : int, default 2001
        Samples.

    Returns
    -------
    time, signal : ndarray, shape (points,)
        [s] and [V].

    Raises
    ------
    UnknownNameError
        If the shape is none of these.
    """
    if shape not in SHAPES:
        raise UnknownNameError.of("this sweep", [unknown_name_fault("shape", shape, SHAPES)])
    low, high = signal_axis(levels(design))
    time = np.linspace(0.0, period * (1 if shape == "ramp" else cycles), points)
    phase = time / period
    unit = {
        "ramp": phase,
        "triangle": 1 - np.abs(2 * (phase % 1) - 1),
        "sine": (1 - np.cos(2 * np.pi * phase)) / 2,
    }[shape]
    return time, low + (high - low) * unit


def _crossings(
    time: NDArray[np.float64],
    signal: NDArray[np.float64],
    changes: NDArray[np.intp],
    above: NDArray[np.bool_],
    upper: float,
    lower: float,
) -> NDArray[np.float64]:
    """Interpolate the instants at which the signal meets the trips."""
    trip = np.where(above[changes + 1], upper, lower)
    share = (trip - signal[changes]) / (signal[changes + 1] - signal[changes])
    crossings: NDArray[np.float64] = time[changes] + share * (time[changes + 1] - time[changes])
    return crossings


def _check(time: NDArray[np.float64], signal: NDArray[np.float64]) -> None:
    faults = []
    if time.ndim != 1 or time.shape != signal.shape or time.size < 2:
        faults.append(
            Fault(
                "time and signal do not fit each other.",
                asked=f"time of shape {time.shape}, signal of shape {signal.shape}",
                rule="two one-dimensional arrays of the same length, two samples at least",
                remedy="one signal sample for each instant",
            )
        )
    elif not np.all(np.diff(time) > 0):
        faults.append(
            Fault(
                "time does not rise.",
                have=f"a step of {np.min(np.diff(time)):g} s",
                rule="each instant is later than the one before",
                remedy="sort the samples by time and leave doubles out",
            )
        )
    if not np.all(np.isfinite(signal)):
        faults.append(
            Fault(
                "the signal is not finite.",
                have=f"{np.count_nonzero(~np.isfinite(signal))} of {signal.size} samples",
                rule="what the switch remembers needs every sample",
                remedy="leave such samples out, or interpolate them",
            )
        )
    if faults:
        raise InputError.of("this response", faults)

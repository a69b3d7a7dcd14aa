"""The switching loop: output against signal, along both paths."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from hystkit.circuit.design import Design
from hystkit.numeric.compile import kernel
from hystkit.numeric.levels import levels
from hystkit.numeric.views import Interval, Levels, Loop


def loop(design: Design) -> Loop:
    """Evaluate the switching loop.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    Loop
        Both paths as polylines over the signal's span, the rails and the trips [V]. Between its
        corners the output is a straight line over the signal, so that the polylines are exact.
    """
    found = levels(design)
    axis = signal_axis(found)
    law = kernel(design.stage).law
    return Loop(
        axis,
        rising=_path(design, axis, found.upper, law.upper_state),
        falling=_path(design, axis[::-1], found.lower, law.lower_state),
        levels=found,
    )


def signal_axis(found: Levels) -> Interval:
    """Range of the signal that shows everything.

    Parameters
    ----------
    found : Levels
        Of the design.

    Returns
    -------
    tuple of float
        From the lowest to the highest of rails, signal span and trips with room beside them [V].
    """
    room = found.width if found.ok else 0.0
    marks = [found.v_ee, found.v_cc, found.upper + room, found.lower - room]
    marks += found.signal_span or ()
    known = [mark for mark in marks if np.isfinite(mark)]
    return min(known), max(known)


def _path(
    design: Design, axis: Interval, trip: float, before: str
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Run from the first end of the axis to the second; the output leaves `before` at the trip."""
    compiled = kernel(design.stage)
    after = "low" if before == "high" else "high"
    signal = np.array([axis[0], trip, trip, axis[1]])
    output = np.concatenate(
        [
            np.broadcast_to(compiled.voltages(state, design.values, part)["out"], 2)
            for state, part in ((before, signal[:2]), (after, signal[2:]))
        ]
    )
    return signal, output

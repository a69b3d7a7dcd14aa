"""The exact interval of each trip point over the stated tolerances."""

from __future__ import annotations

from typing import Any

import numpy as np

from hystkit.circuit.design import Design
from hystkit.numeric.trips import trip_points
from hystkit.numeric.views import Interval

#: More tolerances than this would need too many corners.
MAX_TOLERANCES = 16


def toleranced(design: Design) -> dict[str, Interval]:
    """Lowest and highest value of every quantity that carries a tolerance.

    Parameters
    ----------
    design : Design
        Tolerances stand at its parts, levels and supply.

    Returns
    -------
    dict
        Symbol name to (lowest, highest) in [Ohm] or [V].
    """
    found = {**design.parts, **design.levels}
    box = {name: _ends(p.value, p.tol) for name, p in found.items() if p.tol}
    if design.supply.tol:
        box["V_CC"] = _ends(design.supply.v_cc, design.supply.tol)
        if design.supply.split:
            box["V_EE"] = _ends(design.supply.low_rail, design.supply.tol)
    return box


def trip_intervals(design: Design) -> tuple[Interval, Interval] | None:
    """Exact interval of the upper and of the lower trip over all stated tolerances.

    Parameters
    ----------
    design : Design
        Tolerances stand at its parts, levels and supply.

    Returns
    -------
    tuple of two (lowest, highest), or None
        Upper, then lower [V]; None without tolerances. NaN where a corner cannot switch.

    Notes
    -----
    Every resistor enters the node equations bilinearly and every voltage linearly. A trip point is
    therefore a linear-fractional function of each single one, monotone in it wherever its
    denominator keeps its sign, and takes its extremes over the box in corners. All corners are
    evaluated; nothing is sampled.
    """
    box = toleranced(design)
    if not box or len(box) > MAX_TOLERANCES:
        return None
    corners: Any = np.meshgrid(*box.values(), indexing="ij", sparse=True)
    trips = trip_points(design, **dict(zip(box, corners, strict=True)))
    upper, lower = (
        (float(np.min(trip)), float(np.max(trip))) for trip in (trips.upper, trips.lower)
    )
    return upper, lower


def _ends(value: float, tol: float) -> Interval:
    low, high = sorted((value * (1 - tol), value * (1 + tol)))
    return low, high

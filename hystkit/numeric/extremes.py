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
        Tolerances stand at its parts, levels and supply, limits at its device.

    Returns
    -------
    dict
        Symbol or device field to (lowest, highest).
    """
    found = {**design.parts, **design.levels}
    box = {name: _ends(p.value, p.tol) for name, p in found.items() if p.tol}
    if design.supply.tol:
        box["V_CC"] = _ends(design.supply.v_cc, design.supply.tol)
        if design.supply.split:
            box["V_EE"] = _ends(design.supply.low_rail, design.supply.tol)
    limits = {n: pair for n, pair in design.device.limits.items() if pair[0] < pair[1]}
    return {**box, **{n: pair for n, pair in limits.items() if acts(design, n)}}


def acts(design: Design, name: str) -> bool:
    """Tell whether a device field enters the law of a design.

    Parameters
    ----------
    design : Design
        Levels that are given replace the drops; an open collector has no high side of its own.
    name : str
        A field of `LAW_FIELDS`.

    Returns
    -------
    bool
        Whether the trips depend on it.
    """
    push_pull = design.stage.output == "push-pull"
    return {
        "drop_high": push_pull and "V_OH" not in design.levels,
        "drop_low": "V_OL" not in design.levels,
        "r_high": push_pull,
        "leakage": not push_pull,
    }.get(name, True)


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

"""What share of units of a sized design does what was asked for."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.sizing.requirement import Requirement
from hystkit.analyses.sizing.target import Target
from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.circuit.signals import Signal
from hystkit.numeric.sampling import Plan, blocks
from hystkit.numeric.trips import trip_points
from hystkit.numeric.uncertain import REFERENCE_TEMPERATURE, Box, Quantity, uncertain
from hystkit.numeric.yields import Yield, yield_of

Array = NDArray[np.float64]
# Parameters of a signal stand beside parts and levels under names of their own.
_SIGNAL = "signal "


def yield_within(
    design: Design, requirement: Requirement, target: Target, excursion: float, plan: Plan
) -> Yield:
    """Sample a design and count the units whose windows both hold.

    Parameters
    ----------
    design : Design
        With its tolerances.
    requirement : Requirement
        Where a load is to switch, the tolerances of the signal are sampled too, and the windows
        are those that were asked for; a ratiometric signal shares V_CC with the stage.
    target : Target
        Windows of trips in volts.
    excursion : float
        Farthest distance from the temperature that values are stated for [K].
    plan : Plan
        How many samples, and how they are distributed.

    Returns
    -------
    Yield
        With its confidence interval of 95 %.
    """
    around = (REFERENCE_TEMPERATURE - excursion, REFERENCE_TEMPERATURE + excursion)
    quantities = dict(uncertain(design, around).quantities)
    signal = design.signal if requirement.load is not None else None
    parameters = {} if signal is None else _parameters(signal)
    box = Box(Named(quantities | {_SIGNAL + n: one for n, one in parameters.items()}))
    edges = requirement.edges(design.stage.sense) or {n: n for n in ("upper", "lower")}
    found = {edge: np.full(plan.count, np.nan) for edge in edges}
    for start, drawn in blocks(box, plan):
        rows: dict[str, Any] = {n: row[: plan.count - start] for n, row in drawn.items()}
        size = next((row.size for row in rows.values()), plan.count - start)
        trips = trip_points(design, **{n: row for n, row in rows.items() if n in quantities})
        shared = {n: rows[_SIGNAL + n] for n in parameters}
        if signal is not None and signal.ratiometric:
            shared["V_CC"] = rows.get("V_CC", design.supply.v_cc)
        for edge, trip in edges.items():
            volts = getattr(trips, trip)
            here = slice(start, start + size)
            found[edge][here] = volts if signal is None else signal.quantity(volts, **shared)
    if signal is None:
        windows = {"upper": target.upper, "lower": target.lower}
    else:
        windows = {"on_at": requirement.first, "off_at": requirement.second}
    return yield_of(found, windows)


def _parameters(signal: Signal) -> dict[str, Quantity]:
    return {
        name: Quantity(name, limits.nominal, limits.low, limits.high, "")
        for name, limits in signal.parameters.items()
        if limits.low < limits.high
    }

"""Examine a trimmer in a design."""

from __future__ import annotations

from typing import Any

import numpy as np

from hystkit.analyses.setpoint.travel import Travel
from hystkit.analyses.setpoint.trimmer import Trimmer, check_place
from hystkit.base.errors import DesignError
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.netlist import netlist
from hystkit.numeric.operating import operating_point
from hystkit.numeric.trips import overridden, trip_points


def trim(design: Design, trimmer: Trimmer, place: str = "divider") -> Travel:
    """Examine a trimmer in a design.

    Parameters
    ----------
    design : Design
        Its R_T and R_B, or its R_F, are the padding resistors; the trimmer comes on top of them.
    trimmer : Trimmer
        With its tolerance, end resistance, turns and setting resolution.
    place : {"divider", "feedback"}, default "divider"
        Between R_T and R_B with the wiper at the input, or in series with R_F as a variable
        resistor.

    Returns
    -------
    Travel
        The range of the trips with stated values, of every unit and of any unit; its resolution.

    Raises
    ------
    InputError
        If the design has no such place.
    DesignError
        If the stage does not switch everywhere, or the divider's node leaves the rails.

    Notes
    -----
    Static, without drift of temperature. The wiper's contact resistance is in series with an input
    and is left out.

    Examples
    --------
    >>> from hystkit.circuit.stage import Stage
    >>> parts = {"R_T": "47k", "R_B": "47k", "R_F": "470k"}
    >>> found = trim(Design(Stage("inverting"), parts, supply=5.0), Trimmer("10k", turns=25))
    >>> [round(end, 3) for end in found.nominal["upper"]]
    [2.402, 2.858]
    """
    check_place(design, place)
    travel = Travel(design, trimmer, place)
    for setting in (0.0, 1.0):
        for end in {0.0, trimmer.end_resistance}:
            if not all(np.isfinite(v).all() for v in travel.corners(setting, end).values()):
                raise DesignError(
                    "the stage does not switch over the whole travel of the trimmer.",
                    asked=f"the wiper at {'its start' if setting == 0 else 'its end'}",
                    rule="with every combination of tolerances the upper trip is above the lower",
                    remedy="larger padding resistors, or closer tolerances",
                )
    if place == "divider":
        _check_node(travel)
    return travel


def _check_node(travel: Travel) -> None:
    """Refuse a divider whose node may leave the rails, where a trip could turn on its way."""
    design = travel.design
    pin = "plus" if design.stage.sense == "inverting" else "minus"
    node = netlist(design.stage.elements).merged[pin]
    # The two ends of the travel, and the other corners of the box that the way between them is in.
    for both in ((0.0, 1.0), (1.0, 0.0), (0.0, 0.0), (1.0, 1.0)):
        given = travel.shared(*both)
        values, trips = overridden(design, given), trip_points(design, **given)
        for state, trip in _leaving(design, trips):
            volts = operating_point(design.stage, state, values, trip).voltages[node]
            inside = (volts < values["V_CC"]) & (volts > values.get("V_EE", 0.0))
            if not np.all(inside):
                raise DesignError(
                    "the divider's node leaves the rails at a trip.",
                    asked="a trimmer between R_T and R_B",
                    have=f"the node between {show(float(np.min(volts)), 'V')} and "
                    f"{show(float(np.max(volts)), 'V')} with the output {state}",
                    rule="only between the rails does a trip go one way over the whole travel",
                    remedy="a larger R_F, or a smaller pull-up voltage or bias current",
                )


def _leaving(design: Design, trips: Any) -> list[tuple[str, Any]]:
    """Output state and signal at either trip, just before the output moves."""
    first = "high" if design.stage.sense == "inverting" else "low"
    return [(first, trips.upper), ("low" if first == "high" else "high", trips.lower)]

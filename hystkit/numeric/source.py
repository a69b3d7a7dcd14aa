"""Trip points with the resistance that the signal's source has at each of them."""

from __future__ import annotations

from dataclasses import replace
from itertools import count
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from hystkit.base.errors import InputError
from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.circuit.elements import Element, Resistor
from hystkit.circuit.parts import Part
from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.inverse import inverse
from hystkit.circuit.stage import Stage
from hystkit.numeric.compile import kernel
from hystkit.numeric.status import Status
from hystkit.numeric.trips import TripPoints, overridden, trip_points

#: The part that stands for the resistance of the signal's source.
SOURCE = "R_S"
# Quantities at which a source is asked whether it has a resistance.
_PLACES = 65
# In place of 0 Ohm, which a resistor cannot have: far below what moves any trip.
_LEAST = 1e-9


def trips_at_source(design: Design, **overrides: ArrayLike | str) -> TripPoints:
    """Evaluate both trip points, each with the source resistance that the signal has there.

    Parameters
    ----------
    design : Design
        With a signal. A resistance R_S that it gives is replaced.
    **overrides : float, str or array_like
        As for `trip_points`, R_S excepted.

    Returns
    -------
    TripPoints
        As from `trip_points`: each trip point is the one of the design with R_S as the source has
        it at the quantity of that trip point. Where no signal is given, or its source has no
        resistance of its own, those of the design as it stands.

    Raises
    ------
    InputError
        If R_S is overridden.
    UnknownNameError, QuantityError
        As from `trip_points`.

    Notes
    -----
    A trip point V(R_S) and a source R_S(q) fix each other through the signal's voltage v(q). The
    quantity at which v(q) = V(R_S(q)) is enclosed by the signal's span and bisected to the last
    bits. Where a trip point lies outside the span, the source has its resistance at the nearer
    end of it. In inverting forms R_S carries the bias current only, in others it adds to R_I.

    Examples
    --------
    >>> from hystkit.circuit.signals import Potentiometer
    >>> parts = {"R_T": "10k", "R_B": "10k", "R_I": "10k", "R_F": "100k"}
    >>> valve = Potentiometer("10k", span=(0, 100), unit="%", name="opening")
    >>> design = Design(Stage("non-inverting"), parts, supply=5.0, signal=valve)
    >>> round(float(trip_points(design).width), 3), round(float(trips_at_source(design).width), 3)
    (0.5, 0.623)
    """
    if SOURCE in overrides:
        raise InputError(
            "the source resistance is not given here, but found.",
            asked="another R_S",
            rule="each trip point takes R_S of the signal's source at its own quantity",
            remedy="leave it out; hk.trip_points(design, R_S=...) takes one for both",
        )
    if design.signal is None or not has_resistance(design.signal):
        return trip_points(design, **overrides)
    fitted = with_source(design)
    values = overridden(fitted, dict(overrides))
    signal, span = design.signal, design.signal.span
    supply = {"V_CC": values["V_CC"]} if signal.ratiometric else {}
    nothing = np.zeros((2, *np.broadcast_shapes(*map(np.shape, values.values()))))

    def ohms(quantity: Any) -> Any:
        return np.maximum(signal.source_resistance(quantity, **supply), _LEAST)

    def above(quantity: Any) -> Any:
        """How far the signal stands above each trip point [V], the upper one first."""
        trips = kernel(fitted.stage).trips(values | {SOURCE: ohms(quantity)})
        upper, lower = (np.broadcast_to(trip, nothing.shape) for trip in trips)
        return signal.volts(quantity, **supply) - np.stack([upper[0], lower[1]])

    with np.errstate(all="ignore"):
        at = inverse(above, nothing, span)
        nearer = np.where(
            np.abs(above(span[0] + nothing)) <= np.abs(above(span[1] + nothing)), *span
        )
        found = ohms(np.where(np.isnan(at), nearer, at))
    up, down = (trip_points(fitted, **overrides, R_S=one) for one in found)
    return _joined(up, down)


def has_resistance(signal: Signal) -> bool:
    """Tell whether the source of a signal has a resistance of its own.

    Parameters
    ----------
    signal : Signal
        Of any kind.

    Returns
    -------
    bool
        Whether it has one anywhere in its span.
    """
    places = np.linspace(*signal.span, _PLACES)
    return bool(np.any(np.asarray(signal.source_resistance(places)) > 0))


def with_source(design: Design) -> Design:
    """Give a design in which the signal's source has a resistance R_S, of any value.

    Parameters
    ----------
    design : Design
        That may or may not have it.

    Returns
    -------
    Design
        In a circuit of one's own, everything that was wired to the signal is behind R_S.
    """
    if SOURCE in design.parts:
        return design
    if SOURCE in design.stage.optional:
        return design.with_parts(**{SOURCE: 1.0})
    stage = design.stage
    taken = {node for element in stage.elements for node in element.nodes}
    node = next(name for n in count(1) if (name := f"source{n}") not in taken)
    elements = [_moved(element, node) for element in stage.elements]
    custom = Stage.custom(
        [*elements, Resistor(SOURCE, "signal", node)],
        supply=stage.supply,
        output=stage.output,
        sense=stage.sense,
        name=stage.name,
    )
    return replace(design, stage=custom, parts=Named({**design.parts, SOURCE: Part(1.0)}))


def _moved(element: Element, behind: str) -> Element:
    """Wire an element to another node than the signal."""
    node_a, node_b = (behind if node == "signal" else node for node in element.nodes)
    return replace(element, node_a=node_a, node_b=node_b)


def _joined(up: TripPoints, down: TripPoints) -> TripPoints:
    """Take the upper trip point of one result and the lower one of another."""
    status = np.where(up.status == Status.OK, down.status, up.status)
    crossed = (status == Status.OK) & ~(np.asarray(up.upper) > down.lower)
    status = np.where(crossed, np.int8(Status.NO_HYSTERESIS), status)
    good = status == Status.OK
    upper, lower = (np.where(good, trip, np.nan)[()] for trip in (up.upper, down.lower))
    return replace(
        up,
        upper=upper,
        lower=lower,
        width=upper - lower,
        middle=(upper + lower) / 2,
        status=status[()],
    )

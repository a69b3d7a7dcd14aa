"""The measured quantity about the middle of the band, and the volts that belong to it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from scipy.optimize import brentq

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.cycle.result import Cycle
from hystkit.base.errors import DesignError, Fault
from hystkit.base.quantity import show_own
from hystkit.circuit.design import Design
from hystkit.circuit.signals import Signal
from hystkit.numeric.measurand import load_edges
from hystkit.numeric.trips import TripPoints, trip_points

#: Without a signal nothing says how far the quantity goes: as many present widths are searched.
_WIDTHS = 100.0
#: Step for the slope of a signal, as a share of the longest width.
_STEP = 1e-5


def unit_faults(plant: Plant, unit: str) -> list[Fault]:
    """Check that a plant is in the unit of the trips.

    Parameters
    ----------
    plant : Plant
        One that states no unit is in any.
    unit : str
        Of the trips.

    Returns
    -------
    list of Fault
        Empty where it is.
    """
    if plant.unit in ("", unit):
        return []
    return [
        Fault(
            "plant and signal have different units.",
            asked=f"plant in {plant.unit}",
            have=f"signal in {unit}",
            remedy="one unit for both",
        )
    ]


@dataclass(frozen=True)
class Axis:
    """Widths about a middle that stays, in the unit of the signal, or in volts without one.

    Attributes
    ----------
    unit : str
        Of the quantity.
    name : str
        Of the quantity.
    middle : float
        Middle of the band, in `unit`.
    width : float
        Width of the design as it is, in `unit`.
    on_is_low : bool
        Whether the load switches on at the low end of the band.
    signal : Signal or None
        Quantity <-> volts.
    """

    unit: str
    name: str
    middle: float
    width: float
    on_is_low: bool
    signal: Signal | None

    @classmethod
    def of(cls, design: Design, load: str) -> Axis:
        """Take the axis of a design.

        Parameters
        ----------
        design : Design
            Gives the middle.
        load : {"high", "low"}
            Output state in which the load is on.

        Returns
        -------
        Axis
            In the measurand where the design has a signal.

        Raises
        ------
        DesignError
            If the design does not switch, or not within the reach of its signal.
        """
        trips = trip_points(design)
        on_at, off_at = _edges(design, trips, load)
        if not math.isfinite(on_at + off_at):
            raise DesignError(
                "a width window needs a design that switches.",
                asked=design.name or design.stage.title,
                have="no trip points within the reach of the signal",
                remedy="hk.review(design) tells why",
            )
        signal = design.signal
        if signal is not None:
            _check_span(signal, (on_at + off_at) / 2)
        return cls(
            unit="V" if signal is None else signal.unit,
            name="signal" if signal is None else signal.name,
            middle=(on_at + off_at) / 2,
            width=abs(off_at - on_at),
            on_is_low=on_at < off_at,
            signal=signal,
        )

    @cached_property
    def longest(self) -> float:
        """Longest width that is looked at: what the span of the signal holds, in `unit`."""
        if self.signal is None:
            return _WIDTHS * self.width
        low, high = self.signal.span
        return 2 * min(self.middle - low, high - self.middle)

    def edges(self, width: float) -> tuple[float, float]:
        """Give where the load switches on and off.

        Parameters
        ----------
        width : float or ndarray
            In `unit`.

        Returns
        -------
        tuple of float or ndarray
            On and off, in `unit`.
        """
        half = width / 2 if self.on_is_low else -width / 2
        return self.middle - half, self.middle + half

    def volts(self, width: float) -> float:
        """Give the distance of the trip points.

        Parameters
        ----------
        width : float
            In `unit`.

        Returns
        -------
        float
            [V].
        """
        on_at, off_at = self.edges(width)
        return abs(float(self._volts(off_at) - self._volts(on_at)))

    def width_of(self, volts: float) -> float:
        """Give the width whose trip points lie this far apart.

        Parameters
        ----------
        volts : float
            Distance of the trip points [V].

        Returns
        -------
        float
            In `unit`; infinite beyond `longest`.
        """
        if volts <= 0:
            return 0.0
        if not self.volts(self.longest) >= volts:
            return math.inf
        return float(brentq(lambda width: self.volts(width) - volts, 0.0, self.longest))

    def slope(self, quantity: Any) -> Any:
        """Volts per unit of the quantity, without their sign.

        Parameters
        ----------
        quantity : float or ndarray
            In `unit`.

        Returns
        -------
        float or ndarray
            [V/unit].
        """
        step = _STEP * self.longest
        return np.abs(self._volts(quantity + step) - self._volts(quantity - step)) / (2 * step)

    def passage(self, cycle: Cycle, width: Any) -> Any:
        """Give the slope of the signal where a cycle passes the trips, the slower one of both.

        Parameters
        ----------
        cycle : Cycle
            Between the edges of the width.
        width : float or ndarray
            In `unit`.

        Returns
        -------
        float or ndarray
            [V/s]; NaN where there is no cycle.
        """
        rates = zip((cycle.rate_at_on, cycle.rate_at_off), self.edges(width), strict=True)
        on, off = (np.abs(rate) * self.slope(at) for rate, at in rates)
        return np.minimum(on, off)

    def _volts(self, quantity: Any) -> Any:
        return quantity if self.signal is None else self.signal.volts(quantity)


def _edges(design: Design, trips: TripPoints, load: str) -> tuple[float, float]:
    measurand = trips.measurand
    if measurand is not None:
        on_at, off_at = measurand.switching(load)
        return float(on_at), float(off_at)
    on, off = load_edges(design.stage.sense, load)
    return float(getattr(trips, on)), float(getattr(trips, off))


def _check_span(signal: Signal, middle: float) -> None:
    low, high = signal.span
    if not low < middle < high:
        raise DesignError(
            "the middle of the band lies outside the signal's span.",
            asked=f"a band about {show_own(middle, signal.unit)}",
            have=f"a span of {show_own(low)} to {show_own(high, signal.unit)}",
            remedy="other trips, or the span that the quantity really has",
        )

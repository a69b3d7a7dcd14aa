"""How trip points are written down: in volts and, with a signal, in the measurand."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

from hystkit.base.digits import trip_digits
from hystkit.base.quantity import show
from hystkit.circuit.signals import Signal


@dataclass(frozen=True)
class TripTexts:
    """Both trip points of a design, ready to be written.

    Attributes
    ----------
    upper, lower : float
        At the signal source [V].
    signal : Signal or None
        Quantity <-> volts.

    Examples
    --------
    >>> trips = TripTexts(2.5005, 2.49944)
    >>> {name: trips.shown(name) for name in ("upper", "lower", "width")}
    {'upper': '2.5005 V', 'lower': '2.4994 V', 'width': '1.06 mV'}
    """

    upper: float
    lower: float
    signal: Signal | None = None

    @cached_property
    def volts(self) -> dict[str, float]:
        """Upper, lower, width and middle [V]."""
        upper, lower = self.upper, self.lower
        middle = (upper + lower) / 2
        return {"upper": upper, "lower": lower, "width": upper - lower, "middle": middle}

    @cached_property
    def quantities(self) -> dict[str, float]:
        """The same in the signal's own unit; none without a signal."""
        if self.signal is None:
            return {}
        ends = ("upper", "lower", "middle")
        found = {name: float(self.signal.quantity(self.volts[name])) for name in ends}
        return found | {"width": abs(found["upper"] - found["lower"])}

    def digits(self, name: str) -> int:
        """Tell with how many digits a voltage is written, so that the width shows in it.

        Parameters
        ----------
        name : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        int
            Significant digits.
        """
        return _digits(self.volts, name)

    def shown(self, name: str) -> str:
        """Write a voltage.

        Parameters
        ----------
        name : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        str
            Such as "2.286 V".
        """
        return show(self.volts[name], "V", self.digits(name))

    def number(self, name: str) -> str:
        """Write a quantity without its unit.

        Parameters
        ----------
        name : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        str
            Such as "1.405"; empty without a signal, a dash where the sensor has no such voltage.
        """
        if not self.quantities:
            return ""
        return show(self.quantities[name], "", _digits(self.quantities, name))

    def quantity(self, name: str) -> str:
        """Tell what a trip point is in the measurand.

        Parameters
        ----------
        name : {"upper", "lower", "width", "middle"}
            Which of the four.

        Returns
        -------
        str
            Such as "level 1.405 m", or "0.6038 m" for the width; empty without a signal.
        """
        if self.signal is None:
            return ""
        if math.isnan(self.quantities[name]):
            return f"{self.signal.name} not known there"
        # Without a prefix: quantities in one table stay in one unit.
        shown = f"{self.number(name)} {self.signal.unit}".strip()
        return shown if name == "width" else f"{self.signal.name} {shown}"


def _digits(values: dict[str, float], name: str) -> int:
    return 4 if name == "width" else trip_digits(values[name], values["width"])

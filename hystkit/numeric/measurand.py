"""Trip points in the unit of the signal, and which of them switches a load on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Literal, NamedTuple

import numpy as np

from hystkit.base.digits import span_digits
from hystkit.base.errors import UnknownNameError
from hystkit.base.fields import Field, Viewed
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show_own

Trip = Literal["lower", "upper"]
LOADS = ("high", "low")


class Edges(NamedTuple):
    """Which trip point switches a load on, and which switches it off."""

    on_at: Trip
    off_at: Trip


class Switching(NamedTuple):
    """Where a load switches on and off, in the signal's own unit."""

    on_at: Any
    off_at: Any


@dataclass(frozen=True)
class Measurand(Viewed):
    """Trip points in the signal's own unit, in order of the quantity.

    Attributes
    ----------
    low, high, width : float or ndarray
        In `unit`; low < high also where the sensor's voltage falls.
    low_is : {"lower", "upper"}
        Which trip point stands at `low`.
    unit, name : str
        Unit and name of the quantity.
    sense : {"inverting", "non-inverting"}
        Of the stage: an inverting one goes high at its lower trip point.
    """

    low: Any
    high: Any
    width: Any
    low_is: Trip
    unit: str
    name: str
    sense: str

    @property
    def high_at(self) -> str:
        """At which of "low" and "high" the output goes high; it goes low at the other one."""
        return "low" if load_edges(self.sense).on_at == self.low_is else "high"

    def switching(self, load: str = "high") -> Switching:
        """Tell where a load switches.

        Parameters
        ----------
        load : {"high", "low"}, default "high"
            Output state in which the load is on.

        Returns
        -------
        Switching
            `on_at` and `off_at`, in `unit`.

        Raises
        ------
        UnknownNameError
            If there is no such output state.

        Examples
        --------
        >>> from hystkit.circuit.demo import header_tank
        >>> from hystkit.numeric.trips import trip_points
        >>> level = trip_points(header_tank()).measurand
        >>> [f"{at:.2f} {level.unit}" for at in level.switching(load="high")]
        ['0.80 m', '1.41 m']
        """
        ends = {self.low_is: self.low, _other(self.low_is): self.high}
        return Switching(*(ends[trip] for trip in load_edges(self.sense, load)))

    def _fields(self) -> Sequence[Field]:
        goes = dict.fromkeys(("low", "high"), "low") | {self.high_at: "high"}
        trips = {"low": self.low_is, "high": _other(self.low_is)}
        ends = [
            Field(
                f"{self.name}, {end}",
                shown_span(getattr(self, end), self.unit),
                note=f"{trips[end]} trip point; the output goes {goes[end]} here",
            )
            for end in ("low", "high")
        ]
        return [*ends, Field(f"{self.name}, width", shown_span(self.width, self.unit))]


def load_edges(sense: str, load: str = "high") -> Edges:
    """Tell at which trip point a load switches on, and at which off.

    Parameters
    ----------
    sense : {"inverting", "non-inverting"}
        Of the stage.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.

    Returns
    -------
    Edges
        Names of trip points. The output of an inverting stage goes high where the signal's
        voltage falls to the lower one, of any other where it rises to the upper one.

    Raises
    ------
    UnknownNameError
        If there is no such output state.
    """
    if load not in LOADS:
        fault = unknown_name_fault("output state", str(load), LOADS)
        raise UnknownNameError.of("this load", [fault])
    on_at: Trip = "lower" if (sense == "inverting") == (load == "high") else "upper"
    return Edges(on_at, _other(on_at))


def span_of(values: Any) -> float | tuple[float, float]:
    """Give the span that a view shows of values.

    Parameters
    ----------
    values : float or array_like
        Of any shape.

    Returns
    -------
    float or tuple of float
        A scalar as it is; of an array the lowest and the highest possible element.
    """
    if np.ndim(values) == 0:
        return float(values)
    possible = np.asarray(values)[np.isfinite(values)]
    if possible.size == 0:
        return float("nan")
    low, high = float(possible.min()), float(possible.max())
    return low if low == high else (low, high)


def shown_span(values: Any, unit: str) -> str:
    """Write the span of values in the unit itself: a level in m does not turn into mm.

    Parameters
    ----------
    values : float or array_like
        Of any shape.
    unit : str
        Their unit.

    Returns
    -------
    str
        Such as "0.79 m", or "0.79 to 1.43 m" of an array; a dash where nothing is possible.
    """
    found = span_of(values)
    if not isinstance(found, tuple):
        return show_own(found, unit)
    digits = span_digits(*found)
    return f"{show_own(found[0], digits=digits)} to {show_own(found[1], unit, digits)}"


def _other(trip: Trip) -> Trip:
    return "upper" if trip == "lower" else "lower"

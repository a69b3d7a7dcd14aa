"""What is wanted: both trip points, in volts or in the measurand, as numbers or as windows."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.signal import Signal
from hystkit.numeric.views import Interval

Wanted = float | str | tuple[float | str, float | str]


@dataclass(frozen=True)
class Target:
    """Wanted trip points [V].

    Attributes
    ----------
    upper, lower : tuple of float
        Window of each trip; both ends are equal where a number was given.
    """

    upper: Interval
    lower: Interval

    @property
    def has_windows(self) -> bool:
        """Whether both trips were given as windows."""
        return self.upper[0] < self.upper[1] and self.lower[0] < self.lower[1]

    def error(self, upper: Any, lower: Any) -> Any:
        """Largest distance of a trip from the middle of its window.

        Parameters
        ----------
        upper, lower : float or ndarray
            Trip points [V].

        Returns
        -------
        float or ndarray
            [V]; where both are windows, in half-widths of the window, without unit.
        """
        distances = [
            np.abs(trip - (a + b) / 2) / ((b - a) / 2 if self.has_windows else 1.0)
            for trip, (a, b) in ((upper, self.upper), (lower, self.lower))
        ]
        # A point without trips is as far away as can be, and must not hide behind NaN.
        return np.nan_to_num(np.maximum(*distances), nan=math.inf)

    def margin(self, upper: Interval, lower: Interval) -> float:
        """Smallest distance of the worst cases from the ends of their windows.

        Parameters
        ----------
        upper, lower : tuple of float
            Lowest and highest of each trip [V].

        Returns
        -------
        float
            [V]; negative where a window does not hold, NaN without windows.
        """
        if not self.has_windows:
            return math.nan
        pairs = ((upper, self.upper), (lower, self.lower))
        return min(min(found[0] - a, b - found[1]) for found, (a, b) in pairs)

    def widened(self, by: float) -> Target:
        """Move the ends of both windows outwards.

        Parameters
        ----------
        by : float
            How far each end moves [V].

        Returns
        -------
        Target
            The wider windows.
        """
        (a, b), (c, d) = self.upper, self.lower
        return Target((a - by, b + by), (c - by, d + by))


def volt_target(upper: Wanted, lower: Wanted) -> Target:
    """Read wanted trips in volts.

    Parameters
    ----------
    upper, lower : float, str or pair
        Number or window of each trip [V].

    Returns
    -------
    Target
        With the upper trip above the lower.

    Raises
    ------
    InputError
        If they cannot be read, or the upper is not above the lower.
    """
    target = Target(_window("upper", upper), _window("lower", lower))
    if sum(target.upper) <= sum(target.lower):
        raise InputError(
            "the upper trip is not above the lower.",
            asked=f"upper {upper}, lower {lower} [V]",
            rule="upper > lower: the width is their difference",
            remedy="exchange them",
        )
    return target


def measurand_target(
    on_at: Wanted, off_at: Wanted, signal: Signal, sense: str, load: str
) -> Target:
    """Turn wanted switching points of a load into wanted trips.

    Parameters
    ----------
    on_at, off_at : float, str or pair
        Where the load switches on and off, in the signal's unit; number or window.
    signal : Signal
        Quantity <-> volts.
    sense : {"inverting", "non-inverting"}
        Of the stage.
    load : {"high", "low"}
        Output state in which the load is on.

    Returns
    -------
    Target
        Wanted trips [V].

    Raises
    ------
    InputError
        If a stage of this sense cannot switch the load in this order.
    """
    on, off = (_volts(name, w, signal) for name, w in (("on_at", on_at), ("off_at", off_at)))
    goes_high_at = "lower" if sense == "inverting" else "upper"
    on_is_lower = (goes_high_at == "lower") == (load == "high")
    lower, upper = (on, off) if on_is_lower else (off, on)
    if sum(upper) <= sum(lower):
        other = "non-inverting" if sense == "inverting" else "inverting"
        raise InputError(
            f"a stage that is {sense} cannot switch the load in this order.",
            asked=f"on at {on_at}, off at {off_at} {signal.unit}".rstrip(),
            have=f"the load is on with the output {load}, at {'low' if on_is_lower else 'high'}"
            " signal voltage",
            rule="the load goes on at the one trip and off at the other",
            remedy=f"a stage that is {other}, or the load on with the output "
            f"{'low' if load == 'high' else 'high'}",
        )
    return Target(upper, lower)


def _volts(name: str, wanted: Wanted, signal: Signal) -> Interval:
    low, high = sorted(float(signal.volts(end)) for end in _ends(name, wanted, signal.unit))
    return low, high


def _window(name: str, wanted: Wanted) -> Interval:
    return _ends(name, wanted, "V")


def _ends(name: str, wanted: Wanted, unit: str) -> Interval:
    ends = wanted if isinstance(wanted, (tuple, list)) else (wanted, wanted)
    numbers = [read(end, unit=unit, name=name) for end in ends]
    if len(numbers) != 2 or numbers[0] > numbers[1]:
        fault = Fault(
            f"{name} is neither a number nor a window.",
            asked=f"{name} = {wanted!r}",
            rule="a number, or two numbers with the lower one first",
            remedy=f"{name}=(low, high)",
        )
        raise InputError.of("this request", [fault])
    return numbers[0], numbers[1]


@dataclass(frozen=True)
class Limits:
    """What a design must keep, at both trips and in both output states.

    Parameters
    ----------
    supply_current : float, optional
        Most that network and output may draw from V_CC [A].
    input_resistance : float, optional
        Most that either input may see [Ohm].
    output_current : float, optional
        Most that the output may source or sink [A].
    """

    supply_current: float = math.inf
    input_resistance: float = math.inf
    output_current: float = math.inf

    @classmethod
    def of(cls, given: Limits | Mapping[str, float | str] | None) -> Limits:
        """Read limits from a mapping of their names.

        Parameters
        ----------
        given : Limits, mapping or None
            Names to numbers or text such as "1 mA".

        Returns
        -------
        Limits
            Without limit where none is given.

        Raises
        ------
        InputError
            If a name is unknown or a number cannot be read.
        """
        if isinstance(given, Limits):
            return given
        units = {"supply_current": "A", "input_resistance": "Ω", "output_current": "A"}
        unknown = [name for name in given or {} if name not in units]
        if unknown:
            fault = Fault(
                f"there is no limit {unknown[0]!r}.",
                asked=", ".join(unknown),
                have=", ".join(units),
                remedy="one of these names",
            )
            raise InputError.of("these limits", [fault])
        return cls(**{n: read(v, unit=units[n], name=n) for n, v in (given or {}).items()})

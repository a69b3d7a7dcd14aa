"""What is wanted: both trip points, in volts or where a load switches, as numbers or windows."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import product

import numpy as np

from hystkit.analyses.sizing.target import Target
from hystkit.base.errors import InfeasibleError, InputError
from hystkit.base.quantity import show, show_own
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity
from hystkit.circuit.signals import Signal
from hystkit.numeric.measurand import load_edges
from hystkit.numeric.views import Interval

#: A number, or a window (low, high).
Wanted = Quantity | tuple[Quantity, Quantity]
#: The part that stands for the resistance of the signal's source.
SOURCE = "R_S"
# Quantities in a window at which the source resistance is looked at.
_PLACES = 9
# Resistances are compared to this ratio.
_CLOSE = 1e-9
# A tolerance of one would let a resistance be zero.
_ALMOST_ALL = 0.999


@dataclass(frozen=True)
class Requirement:
    """Wanted switching points.

    Attributes
    ----------
    first, second : tuple of float
        Windows of the upper and the lower trip [V]; or of where the load switches on and off, in
        the signal's unit. Both ends are equal where a number was given.
    load : {"high", "low"} or None
        Output state in which the load is on; None for trips in volts.
    """

    first: Interval
    second: Interval
    load: str | None = None

    @property
    def names(self) -> tuple[str, str]:
        """What the two windows are called as arguments."""
        return ("upper", "lower") if self.load is None else ("on_at", "off_at")

    @property
    def has_windows(self) -> bool:
        """Whether windows were given."""
        return self.first[0] < self.first[1]

    @property
    def arguments(self) -> dict[str, Wanted]:
        """The two as arguments of `size`."""
        wanted = [w if self.has_windows else w[0] for w in (self.first, self.second)]
        return dict(zip(self.names, wanted, strict=True))

    def text(self, unit: str) -> str:
        """Say it in one line.

        Parameters
        ----------
        unit : str
            Of the signal; volts otherwise.

        Returns
        -------
        str
            Such as "upper 2.6 V to 2.8 V, lower 2.2 V to 2.4 V".
        """
        unit = "V" if self.load is None else unit
        pairs = zip(self.names, (self.first, self.second), strict=True)
        return ", ".join(f"{n.replace('_', ' ')} {shown_window(w, unit)}" for n, w in pairs)

    def widened(self, factor: float) -> Requirement:
        """Give windows that are wider about the same middles.

        Parameters
        ----------
        factor : float
            How many times as wide, >= 1; ends are rounded outwards to four digits of the width.

        Returns
        -------
        Requirement
            The wider windows.
        """
        return Requirement(_wider(self.first, factor), _wider(self.second, factor), self.load)

    def target(self, sense: str, signal: Signal | None, v_cc: float) -> Target:
        """Turn it into trips in volts, for stages of one sense.

        Parameters
        ----------
        sense : {"inverting", "non-inverting"}
            Of the stage.
        signal : Signal or None
            Needed where a load is to switch at quantities.
        v_cc : float
            Nominal supply, which the windows of a ratiometric signal follow [V].

        Returns
        -------
        Target
            Wanted trips [V]. Windows of a signal with tolerances are those that hold with every
            value of its parameters.

        Raises
        ------
        InputError
            If a stage of this sense cannot switch in this order.
        InfeasibleError
            If the signal's own tolerances leave nothing of a window.
        """
        if self.load is None:
            return Target(self.first, self.second)
        assert signal is not None
        self._check_order(sense, signal)
        on, off = (
            _volts(name, window, signal)
            for name, window in zip(self.names, (self.first, self.second), strict=True)
        )
        lower, upper = (on, off) if self.edges(sense)["on_at"] == "lower" else (off, on)
        return Target(upper, lower, v_cc if signal.ratiometric else None)

    def source_resistance(self, signal: Signal | None) -> Part | None:
        """Take the resistance of the signal's source as a part.

        Parameters
        ----------
        signal : Signal or None
            Whose source resistance may depend on the quantity and on its parameters.

        Returns
        -------
        Part or None
            Its tolerance covers every quantity in both windows, and every value of the
            parameters; None where the source has no resistance, or trips in volts are wanted.
        """
        if signal is None or self.load is None:
            return None
        found = [
            signal.source_resistance(np.linspace(*window, _PLACES), **corner)
            for window in (self.first, self.second)
            for corner in signal_corners(signal)
        ]
        low, high = float(np.min(found)), float(np.max(found))
        if high <= 0:
            return None
        return Part((low + high) / 2, tol=min((high - low) / (high + low), _ALMOST_ALL))

    def edges(self, sense: str) -> dict[str, str]:
        """Tell at which trip the load switches on, and off.

        Parameters
        ----------
        sense : {"inverting", "non-inverting"}
            Of the stage.

        Returns
        -------
        dict
            "on_at" and "off_at" to "upper" or "lower"; empty for trips in volts.
        """
        return {} if self.load is None else load_edges(sense, self.load)._asdict()

    def _check_order(self, sense: str, signal: Signal) -> None:
        middles = [sum(window) / 2 for window in (self.first, self.second)]
        on, off = (float(signal.volts(middle)) for middle in middles)
        low_first = self.edges(sense)["on_at"] == "lower"
        if (on < off) == low_first:
            return
        other = "non-inverting" if sense == "inverting" else "inverting"
        at = "falls to the lower" if low_first else "rises to the upper"
        raise InputError(
            f"a stage that is {sense} cannot switch the load in this order.",
            asked=self.text(signal.unit),
            have=f"the load is on with the output {self.load}: it goes on where the signal's "
            f"voltage {at} trip; on at {show(on, 'V')}, off at {show(off, 'V')}",
            rule="the load goes on at the one trip and off at the other",
            remedy=f'a stage that is {other}, or load="{"low" if self.load == "high" else "high"}"',
        )


def is_source(part: Part | None, signal: Signal | None) -> bool:
    """Tell whether a resistance can be that of a signal's source.

    Parameters
    ----------
    part : Part or None
        R_S of a design, where it has one.
    signal : Signal or None
        Of the same design.

    Returns
    -------
    bool
        Whether the source has this resistance somewhere in its span, with some value of its
        parameters.
    """
    if part is None or signal is None:
        return False
    places = np.linspace(*signal.span, _PLACES)
    found = [signal.source_resistance(places, **corner) for corner in signal_corners(signal)]
    return bool(np.min(found) * (1 - _CLOSE) <= part.value <= np.max(found) * (1 + _CLOSE))


def signal_corners(signal: Signal) -> list[dict[str, float]]:
    """Give every combination of the ends of a signal's uncertain parameters.

    Parameters
    ----------
    signal : Signal
        Of any kind.

    Returns
    -------
    list of dict
        Parameter to value; one empty dict where nothing about it is uncertain.
    """
    ends = {n: (p.low, p.high) for n, p in signal.parameters.items() if p.low < p.high}
    return [dict(zip(ends, corner, strict=True)) for corner in product(*ends.values())]


def shown_window(window: Interval, unit: str, digits: int = 6) -> str:
    """Write a window, or the number that it is.

    Parameters
    ----------
    window : pair of float
        Both ends.
    unit : str
        Of both.
    digits : int, default 6
        Significant digits.

    Returns
    -------
    str
        Such as "2.6 V to 2.8 V".
    """
    # A percent of a measured quantity counts as 1.
    write = show_own if unit == "%" else show
    low, high = (write(end, unit, digits) for end in window)
    return low if window[0] == window[1] else f"{low} to {high}"


def _volts(name: str, window: Interval, signal: Signal) -> Interval:
    """Give the window in volts that holds with every value of the signal's parameters."""
    low_end, high_end = sorted(window, key=lambda end: float(signal.volts(end)))
    if low_end == high_end:
        at = float(signal.volts(low_end))
        return at, at
    corners = signal_corners(signal)
    low = max(float(signal.volts(low_end, **corner)) for corner in corners)
    high = min(float(signal.volts(high_end, **corner)) for corner in corners)
    if low < high:
        return low, high
    raise InfeasibleError(
        f"the signal's own tolerances take the whole window of {name}.",
        asked=f"{name} = {shown_window(window, signal.unit)}",
        have=f"at {show(low_end, signal.unit)} the signal may be as high as {show(low, 'V')}, "
        f"at {show(high_end, signal.unit)} as low as {show(high, 'V')}",
        rule="a trip point inside the window lies between the two",
        remedy="a wider window, or a sensor with closer tolerances",
    )


def _wider(window: Interval, factor: float) -> Interval:
    middle, half = sum(window) / 2, (window[1] - window[0]) / 2 * factor
    if half == 0:
        return window
    step = 10.0 ** (math.floor(math.log10(half)) - 3)
    ends = np.floor((middle - half) / step) * step, np.ceil((middle + half) / step) * step
    # Through text, so that the ends are the numbers that are shown.
    low, high = (float(f"{end:.12g}") for end in ends)
    return low, high

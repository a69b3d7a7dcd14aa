"""How a signal reads volts over the box of its own parameters."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.kinds import kind_of
from hystkit.circuit.signals.platinum import Rtd
from hystkit.circuit.signals.thermistor import T_25, ZERO_CELSIUS, Ntc, NtcCoefficients
from hystkit.numeric.uncertain import Quantity
from hystkit.numeric.views import Interval

Array = NDArray[np.float64]

#: A signal counts as a straight line where it bends by less than this share of its travel.
_STRAIGHT = 1e-12
# Points at which the parameters of an unknown signal are looked at, all together.
_MOST_POINTS = 4096
# A parameter that both trip points and the width are in proportion to, and one that shifts them.
_SCALE, _SHIFT = "V_X", "table_error"


@dataclass(frozen=True, eq=False)
class Reader:
    """A signal with the ranges of its parameters.

    Attributes
    ----------
    signal : Signal
        Quantity <-> volts; a ratiometric one at the nominal supply.
    parameters : dict of str to Quantity
        What is uncertain about it.
    labels : dict of str to str
        Parameter to what it is called beside the quantities of a design.

    Notes
    -----
    Volts at another supply are referred to the nominal one before a ratiometric signal reads
    them: what counts is their share of V_CC.
    """

    signal: Signal
    parameters: dict[str, Quantity]
    labels: dict[str, str]

    @cached_property
    def is_known(self) -> bool:
        r"""Whether the reading of a voltage is monotone in each parameter, by proof.

        For the signals of this package, with the others held: a line V = z + s x reads
        (V - z)/s; a loop V/R less its error; an attenuator V (1 + R_XT/R_XB); a track V/V_X less
        its error; a table what its curve reads at V less the error. A resistive sensor in a
        divider has R_X times a function of V/V_X, a driven one V/I_X, and reads it through
        ln(R/R_25)/B, through R over its factor, or as t = x + p (a + b \|x\|), with b < 1. Each is
        a chain of monotone functions of one parameter, so that corners suffice, as they do in
        `hystkit.numeric.extremes.corners`.
        """
        sensor = getattr(self.signal, "sensor", None)
        known = kind_of(self.signal) is not None and (sensor is None or kind_of(sensor) is not None)
        return known or not self.parameters

    @cached_property
    def points(self) -> dict[str, Array]:
        """Values of the parameters, shape (points, 1): corners, or a grid where those may fail."""
        count = len(self.parameters)
        steps = 2 if self.is_known else max(2, int(_MOST_POINTS ** (1 / count) + 1e-9))
        return grid(self.parameters, steps)

    def read(self, volts: Any, points: Mapping[str, Array] | None = None) -> Array:
        """Read volts at points of the parameters.

        Parameters
        ----------
        volts : array_like, shape (n,)
            At the nominal supply [V].
        points : mapping of str to ndarray, shape (points, 1), optional
            Values of parameters; `points` of this reader when left out.

        Returns
        -------
        ndarray, shape (points, n)
            Quantity, in the signal's unit.
        """
        points = self.points if points is None else points
        rows = next((len(p) for p in points.values()), 1)
        found = self.signal.quantity(np.asarray(volts, dtype=float), **points)
        return np.broadcast_to(found, (rows, np.size(volts)))

    def slopes(self, low: float, high: float) -> Array | None:
        """Give the slope of the reading, where it is a straight line.

        Parameters
        ----------
        low, high : float
            Range of voltages [V].

        Returns
        -------
        ndarray, shape (points,), or None
            Magnitude at each of the points [unit/V]; None where the signal bends at any of them.
        """
        if not high > low:
            return None
        shares = np.linspace(0.0, 1.0, 65)
        read = self.read(low + (high - low) * shares)
        travel = read[:, -1] - read[:, 0]
        off = np.abs(read - (read[:, :1] + travel[:, None] * shares)).max(axis=1)
        scale = np.maximum(np.abs(travel), np.abs(read).max(axis=1))
        return np.abs(travel) / (high - low) if np.all(off <= _STRAIGHT * scale) else None

    def widths_settle(self, lowest: float, highest: float) -> bool:
        """Tell whether the distance of two readings is monotone in each remaining parameter.

        Parameters
        ----------
        lowest, highest : float
            Range of readings, in the signal's unit.

        Returns
        -------
        bool
            By proof; for the parameters that `carried` leaves.

        Notes
        -----
        With x = ln R, which R_X, I_X, R_25 and a factor on R only shift, the distance of the
        readings at x_1 and x_2 changes with the shift as q'(x_1) - q'(x_2), which keeps its sign
        where q' is monotone. NTC by B: q' = -T^2/B, monotone; with B it changes as that of
        T - T^2/298 K over B, monotone in T above 149 K. NTC by coefficients: q' = -T^2
        (b + 3 c x^2), monotone in x if 3/4 a^2 c < b^3. Platinum: q' = R/R', rising, for R'
        falls; its tolerance stretches readings on one side of 0 °C alike.
        """
        sensor, left = getattr(self.signal, "sensor", None), self._left
        if not left:
            return True
        if isinstance(sensor, Ntc):
            return lowest + ZERO_CELSIUS > T_25 / 2
        if isinstance(sensor, NtcCoefficients):
            return 0.75 * sensor.a**2 * sensor.c < sensor.b**3
        if isinstance(sensor, Rtd):
            return lowest * highest > 0 or "class_position" not in left
        return False

    def carried(self, ranges: Mapping[str, Interval]) -> tuple[Reader, dict[str, Interval]]:
        """Let the volts carry what parameters do that only scale or shift them.

        Parameters
        ----------
        ranges : mapping of str to pair of float
            Of "upper", "lower" and "width" [V].

        Returns
        -------
        Reader
            With the other parameters only.
        dict of str to pair of float
            Ranges in which the width is in proportion, too [V].
        """
        found = dict(ranges)
        if not self.is_known:
            return self, found
        if _SCALE in self.parameters:
            one = self.parameters[_SCALE]
            factors = (one.nominal / one.low, one.nominal / one.high)
            found = {k: hull(e * f for e in pair for f in factors) for k, pair in found.items()}
        if _SHIFT in self.parameters:
            one = self.parameters[_SHIFT]
            for kind in ("upper", "lower"):
                low, high = found[kind]
                found[kind] = (low - one.high, high - one.low)
        return Reader(self.signal, self._left, self.labels), found

    @property
    def _left(self) -> dict[str, Quantity]:
        """Parameters that do more than to scale or shift the voltage."""
        if not self.is_known:
            return self.parameters
        return {n: one for n, one in self.parameters.items() if n not in (_SCALE, _SHIFT)}


def grid(parameters: Mapping[str, Quantity], steps: int) -> dict[str, Array]:
    """Give every combination of equally spaced values of parameters.

    Parameters
    ----------
    parameters : mapping of str to Quantity
        With their ranges.
    steps : int
        Values of each, both ends among them.

    Returns
    -------
    dict of str to ndarray, shape (steps ** parameters, 1)
        The last parameter changes fastest; empty without parameters.
    """
    axes = [np.linspace(one.low, one.high, steps) for one in parameters.values()]
    columns = np.meshgrid(*axes, indexing="ij")
    return {name: one.reshape(-1, 1) for name, one in zip(parameters, columns, strict=True)}


def hull(values: Iterable[float]) -> Interval:
    """Give the lowest and the highest of some numbers."""
    found = sorted(values)
    return found[0], found[-1]

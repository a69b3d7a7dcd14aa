"""Spread in the unit of the measured quantity."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import hypot
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.circuit.signals import Signal
from hystkit.numeric.trips import trip_points
from hystkit.numeric.views import Interval
from hystkit.numeric.yields import Window, Yield, yield_of

if TYPE_CHECKING:
    from hystkit.analyses.spread.result import Spread

Array = NDArray[np.float64]
_CELLS = 4096
#: A signal counts as a straight line where it bends by less than this share of its travel.
_STRAIGHT = 1e-12


@dataclass(frozen=True)
class MeasurandSpread(Viewed):
    """The spread in the unit of the measured quantity.

    Attributes
    ----------
    spread : Spread
        In volts.
    signal : Signal
        Quantity <-> volts, taken as exact.
    """

    spread: Spread
    signal: Signal

    @property
    def unit(self) -> str:
        """Unit of the quantity."""
        return self.signal.unit

    @property
    def low_is(self) -> str:
        """Which trip point stands at the low end of the quantity: "lower" or "upper"."""
        return ordered(self.signal)["low"]

    @cached_property
    def extremes(self) -> Named[Interval]:
        """Lowest and highest "low", "high" and "width" over the whole box, in `unit`."""
        ranges = self.spread.extremes
        found = {
            end: converted(self.signal, ranges[kind]) for end, kind in ordered(self.signal).items()
        }
        nothing = (float("nan"), float("nan"))
        possible = self.spread.switches
        width = width_interval(self.signal, ranges) if possible else nothing
        return Named({**found, "width": width})

    @cached_property
    def gap(self) -> float:
        """How far the extremes of the width may lie beyond what is attained, in `unit`."""
        corners = [
            corner
            for bound in self.spread.bounds.values()
            for corner in (bound.at_lowest, bound.at_highest)
        ]
        names = self.spread.box.quantities
        grid = {name: np.array([corner[name] for corner in corners]) for name in names}
        trips = trip_points(self.spread.design, **grid)
        attained = np.abs(self.signal.quantity(trips.upper) - self.signal.quantity(trips.lower))
        low, high = self.extremes["width"]
        gap = float(max(high - np.max(attained), np.min(attained) - low))
        return gap if gap > 1e-12 * high else 0.0

    @cached_property
    def rss(self) -> Named[float]:
        """Root sum square of "low", "high" and "width", in `unit`."""
        nominal: Any = trip_points(self.spread.design)
        trips = {"upper": float(nominal.upper), "lower": float(nominal.lower)}
        rss = self.spread.rss
        found = {
            end: abs(secant(self.signal, trips[kind], rss[kind])) * rss[kind]
            for end, kind in ordered(self.signal).items()
        }
        width = width_rss(self.signal, trips, rss, self.spread.effects)
        return Named({**found, "width": width})

    @cached_property
    def samples(self) -> Named[Array]:
        """Monte Carlo samples of "low", "high" and "width", each of shape (count,), in `unit`."""
        found = {
            end: np.asarray(self.signal.quantity(self.spread.samples[kind]))
            for end, kind in ordered(self.signal).items()
        }
        return Named({**found, "width": found["high"] - found["low"]})

    def yield_within(
        self,
        *,
        low: Window | None = None,
        high: Window | None = None,
        width: Window | None = None,
        confidence: float = 0.95,
    ) -> Yield:
        """Give the share of units within all windows at once.

        Parameters
        ----------
        low, high, width : pair of float, optional
            Lowest and highest value allowed, in `unit`; None leaves an end open.
        confidence : float, default 0.95
            Of the interval of the yield [1].

        Returns
        -------
        Yield
            As `Spread.yield_within`.
        """
        return yield_of(self.samples, {"low": low, "high": high, "width": width}, confidence)

    def _fields(self) -> Sequence[Field]:
        name = self.signal.name
        return [
            Field(f"{name}, {end}", pair, self.unit, f"± {self.rss[end]:.3g} {self.unit} rss")
            for end, pair in self.extremes.items()
        ]


def ordered(signal: Signal) -> dict[str, str]:
    """Tell which trip point stands at the low and which at the high end of the quantity.

    Parameters
    ----------
    signal : Signal
        Its voltage may rise or fall with the quantity.

    Returns
    -------
    dict
        "low" and "high" to "lower" or "upper".
    """
    low, high = ("upper", "lower") if signal.decreasing else ("lower", "upper")
    return {"low": low, "high": high}


def converted(signal: Signal, interval: Interval) -> Interval:
    """Convert a range of volts, exactly, since the signal is monotone.

    Parameters
    ----------
    signal : Signal
        Quantity <-> volts.
    interval : pair of float
        [V].

    Returns
    -------
    tuple of float
        Lowest and highest quantity, in the signal's unit.
    """
    ends = [float(signal.quantity(volts)) for volts in interval]
    return min(ends), max(ends)


def width_interval(signal: Signal, ranges: Mapping[str, Interval]) -> Interval:
    """Bound the width in the measurand.

    Parameters
    ----------
    signal : Signal
        Quantity <-> volts.
    ranges : mapping of str to pair of float
        Exact ranges of "upper", "lower" and "width" [V].

    Returns
    -------
    tuple of float
        In the signal's unit: exact where the signal is a straight line; elsewhere nothing lies
        outside, but the ends need not be attained.

    Notes
    -----
    The range of the lower trip point is cut into cells; in each the quantity at either end of the
    width is bounded by the ends of the cell, the widths and the range of the upper trip point.
    """
    (l0, l1), (u0, u1), (w0, w1) = (ranges[kind] for kind in ("lower", "upper", "width"))
    slope = _straight_slope(signal, l0, u1)
    if slope is not None:
        return abs(slope) * w0, abs(slope) * w1
    sign = -1.0 if signal.decreasing else 1.0
    cuts = np.linspace(l0, l1, _CELLS + 1)
    start, stop = cuts[:-1], cuts[1:]
    nearest, farthest = np.maximum(start + w0, u0), np.minimum(stop + w1, u1)
    real = nearest <= farthest

    def risen(volts: Any) -> NDArray[np.float64]:
        return np.asarray(sign * np.asarray(signal.quantity(volts)), dtype=float)

    lowest = risen(nearest) - risen(np.minimum(stop, nearest))
    highest = risen(farthest) - risen(start)
    return float(lowest[real].min()), float(highest[real].max())


def secant(signal: Signal, volts: float, reach: float) -> float:
    """Slope of the quantity over a range of volts.

    Parameters
    ----------
    signal : Signal
        Quantity <-> volts.
    volts, reach : float
        Middle and half of the range [V].

    Returns
    -------
    float
        [unit/V], zero where the range is empty.
    """
    if not reach:
        return 0.0
    ends = (float(signal.quantity(volts + end)) for end in (-reach, reach))
    low, high = ends
    return (high - low) / (2 * reach)


def width_rss(
    signal: Signal,
    trips: Mapping[str, float],
    rss: Mapping[str, float],
    effects: Mapping[str, Mapping[str, float]],
) -> float:
    """Root sum square of the width in the measurand.

    Parameters
    ----------
    signal : Signal
        Quantity <-> volts.
    trips, rss : mapping of str to float
        Nominal trip points and their root sum squares [V].
    effects : mapping of str to mapping
        First-order effect of each quantity on either trip point [V].

    Returns
    -------
    float
        In the signal's unit, with its slope at each trip point taken across plus and minus one
        root sum square.
    """
    up, down = (secant(signal, trips[kind], rss[kind]) for kind in ("upper", "lower"))
    pairs = zip(effects["upper"].values(), effects["lower"].values(), strict=True)
    return hypot(*(up * upper - down * lower for upper, lower in pairs))


def _straight_slope(signal: Signal, low: float, high: float) -> float | None:
    """Slope where the signal is a straight line between two voltages [unit/V]."""
    volts = np.linspace(low, high, 65)
    quantity = np.asarray(signal.quantity(volts), dtype=float)
    travel = quantity[-1] - quantity[0]
    chord = quantity[0] + travel * np.linspace(0.0, 1.0, 65)
    scale = np.abs(quantity).max()
    if high > low and np.all(np.abs(quantity - chord) <= _STRAIGHT * max(abs(travel), scale)):
        return float(travel / (high - low))
    return None

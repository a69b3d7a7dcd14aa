"""Spread in the unit of the measured quantity, the tolerances of the signal included."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, partial
from math import isnan
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.spread import linear
from hystkit.analyses.spread.bounds import Bound
from hystkit.analyses.spread.reader import Reader
from hystkit.analyses.spread.sensed import sensed_bounds, sensed_ends
from hystkit.analyses.spread.signal_box import joint_box, labels, signal_quantities
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.quantity import show_own
from hystkit.circuit.signals import Signal
from hystkit.numeric.measurand import shown_span
from hystkit.numeric.sampling import blocks
from hystkit.numeric.trips import trip_points
from hystkit.numeric.uncertain import Box, Quantity
from hystkit.numeric.views import Interval
from hystkit.numeric.yields import Window, Yield, yield_of

if TYPE_CHECKING:
    from hystkit.analyses.spread.result import Spread

Array = NDArray[np.float64]
#: Step of a derivative, as a share of the size of what moves.
_STEP = 1e-3


@dataclass(frozen=True)
class MeasurandSpread(Viewed):
    """The spread in the unit of the measured quantity, over stage and signal together.

    Everything is computed when it is first asked for. A ratiometric signal takes V_CC from the
    same sample, or the same corner, as the stage. A resistance of the signal's source counts as
    the design has it fitted, as R_S; see `hystkit.trips_at_source`.

    Attributes
    ----------
    spread : Spread
        In volts.
    signal : Signal
        Quantity <-> volts, with the limits of its parameters.
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

    @property
    def ends(self) -> dict[str, str]:
        """Which end of the quantity each trip point stands at; "width" is the width."""
        return {**{kind: end for end, kind in ordered(self.signal).items()}, "width": "width"}

    @property
    def adds(self) -> bool:
        """Whether the signal changes the spread: by limits of its own, or a supply it shares."""
        shares = self.signal.ratiometric and "V_CC" in self.spread.box.quantities
        return bool(self._parameters) or shares

    @cached_property
    def box(self) -> Box:
        """Uncertain quantities of the design, then the parameters of its signal."""
        return joint_box(self.spread.box, self._parameters)

    @cached_property
    def bounds(self) -> Named[Bound]:
        """Range of "low", "high" and "width" over the whole box, in `unit`.

        Each with its proof and where it is attained.
        """
        reader = Reader(self.signal, self._parameters, self._labels)
        of = self.spread
        found = sensed_bounds(reader, of.design, of.box.intervals, of.bounds, of.effects["lower"])
        return Named(found)

    @cached_property
    def trip_extremes(self) -> Named[Interval]:
        """Lowest and highest "low" and "high" alone, as in `extremes` but sooner, in `unit`."""
        reader = Reader(self.signal, self._parameters, self._labels)
        of = self.spread
        found = sensed_ends(reader, of.design, of.box.intervals, of.bounds)
        return Named({end: bound.interval for end, bound in found.items()})

    @property
    def extremes(self) -> Named[Interval]:
        """Lowest and highest "low", "high" and "width" over the whole box, in `unit`.

        NaN where not every combination in the box switches, or a trip point has no reading.
        """
        return Named({end: bound.interval for end, bound in self.bounds.items()})

    @property
    def proof(self) -> Named[str]:
        """How each pair of extremes is known.

        "corners", "control points" or "bisection" as in volts; "cells": nothing lies outside, and
        the ends are attained within `gap`; "grid": the farthest on a grid of the parameters of a
        signal of one's own.
        """
        return Named({end: bound.proof for end, bound in self.bounds.items()})

    @property
    def gap(self) -> Named[float]:
        """How far the extremes may lie beyond what is attained, in `unit`; 0 where exact."""
        return Named({end: bound.gap for end, bound in self.bounds.items()})

    @cached_property
    def effects(self) -> dict[str, dict[str, float]]:
        """First-order effect of half the range of each quantity, by end and name, in `unit`."""
        nominal = trip_points(self.spread.design)
        found = {}
        for end, kind in ordered(self.signal).items():
            volts = dict(self.spread.effects[kind])
            at = float(getattr(nominal, kind))
            if self.signal.ratiometric and "V_CC" in volts:
                # What counts is the share of V_CC: a trip that follows the supply reads the same.
                supply = self.spread.box.quantities["V_CC"]
                volts["V_CC"] -= at / supply.nominal * supply.half
            # A trip point near 0 V has no size of its own.
            slope = self._slope(at, max(abs(nominal.upper), abs(nominal.lower)))
            found[end] = {name: float(slope * effect) for name, effect in volts.items()}
            found[end] |= self._effects_of_signal(at)
        low, high = found["low"], found["high"]
        return {**found, "width": {name: high[name] - low[name] for name in high}}

    @cached_property
    def rss(self) -> Named[float]:
        """Root sum square of the effects on "low", "high" and "width", in `unit`.

        With half ranges taken as `sigmas` standard deviations, as many standard deviations of
        the result, to first order.
        """
        return linear.root_sum_square(self.effects)

    @cached_property
    def contributions(self) -> Named[Named[float]]:
        """Share of each quantity and parameter in the variance, by end and name [1].

        Normalised squared sensitivities: they sum to 1 for each end, the largest first.
        """
        return linear.shares(self.effects)

    @cached_property
    def samples(self) -> Named[Array]:
        """Monte Carlo samples of "low", "high" and "width", each of shape (count,), in `unit`.

        The same place in each array is the same unit of stage and signal. With parameters to draw
        for the signal these are other units than in `Spread.samples`; without, the same.
        """
        found = {end: np.full(self.spread.plan.count, np.nan) for end in ordered(self.signal)}
        for start, drawn in blocks(self.box, self.spread.plan):
            left = self.spread.plan.count - start
            rows = {name: row[:left] for name, row in drawn.items()}
            part = slice(start, start + max(map(len, rows.values()), default=left))
            own = {name: rows.pop(label) for name, label in self._labels.items()}
            trips = trip_points(self.spread.design, **rows)
            shared = {"V_CC": trips.v_cc} if self.signal.ratiometric else {}
            for end, kind in ordered(self.signal).items():
                found[end][part] = self.signal.quantity(getattr(trips, kind), **own, **shared)
        return Named({**found, "width": found["high"] - found["low"]})

    def yield_within(
        self,
        *,
        low: Window | None = None,
        high: Window | None = None,
        width: Window | None = None,
        confidence: float = 0.95,
    ) -> Yield:
        """Give the share of units, stage and signal together, within all windows at once.

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

    def yield_at(
        self, *, upper: Window | None = None, lower: Window | None = None, confidence: float = 0.95
    ) -> Yield:
        """Give the share of units within windows that are stated in volts.

        Parameters
        ----------
        upper, lower : pair of float, optional
            Lowest and highest voltage of each trip point [V]; None leaves an end open. They stand
            for the quantities that the signal, as stated, has there.
        confidence : float, default 0.95
            Of the interval of the yield [1].

        Returns
        -------
        Yield
            As `yield_within`: unlike that of `Spread`, with the tolerances of the signal.
        """
        windows = {"upper": upper, "lower": lower}
        read = {self.ends[kind]: self._read_window(window) for kind, window in windows.items()}
        return yield_of(self.samples, read, confidence)

    def _read_window(self, window: Window | None) -> Window | None:
        if window is None:
            return None
        read = [None if end is None else float(self.signal.quantity(end)) for end in window]
        # Where no quantity gives the voltage of an end, none of them can lie beyond it.
        low, high = (None if end is None or isnan(end) else end for end in read)
        return (high, low) if self.signal.decreasing else (low, high)

    @cached_property
    def _parameters(self) -> dict[str, Quantity]:
        return signal_quantities(self.signal, self.spread.box.excursion)

    @cached_property
    def _labels(self) -> dict[str, str]:
        return labels(self.spread.box, self._parameters)

    def _slope(self, volts: float, scale: float) -> float:
        """Slope of the reading at a voltage [unit/V]."""
        return linear.derivative(self.signal.quantity, volts, _STEP * scale)

    def _effects_of_signal(self, volts: float) -> dict[str, float]:
        """Effect of half the range of each parameter on the reading of a voltage."""
        found = {}
        for name, one in self._parameters.items():
            # An error that is zero has no size but that of its limits.
            step = _STEP * abs(one.nominal) if one.half <= abs(one.nominal) else one.half / 8
            read = partial(self._read, volts, name)
            found[self._labels[name]] = linear.derivative(read, one.nominal, step) * one.half
        return found

    def _read(self, volts: float, name: str, value: float) -> Any:
        return self.signal.quantity(volts, **{name: value})

    def _fields(self) -> Sequence[Field]:
        name, unit = self.signal.name, self.unit
        rows = []
        for end, bound in self.bounds.items():
            gap = f", within {show_own(bound.gap, unit, 1)}" if bound.gap else ""
            note = f"{bound.proof}{gap}; ± {show_own(self.rss[end], unit, 3)} rss"
            rows.append(Field(f"{name}, {end}", shown_span(bound.interval, unit), "", note))
        for end in ("low", "high", "width"):
            text = linear.largest(self.contributions[end])
            rows.append(Field(f"{name}, {end} depends on", text, "", linear.MEASURE))
        return rows


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

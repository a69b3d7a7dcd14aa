"""What parts, supply, device and temperature make of the trip points: the result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.spread import linear
from hystkit.analyses.spread.bounds import Bound, bounds
from hystkit.analyses.spread.measurand import MeasurandSpread
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.numeric.extremes import KINDS, corners
from hystkit.numeric.sampling import Plan, Samples, sampled
from hystkit.numeric.status import Status
from hystkit.numeric.trips import trip_points
from hystkit.numeric.uncertain import Box
from hystkit.numeric.views import Interval
from hystkit.numeric.yields import Window, Yield, yield_of

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Spread(Viewed):
    """How far the trip points of a design spread.

    Everything is computed when it is first asked for.

    Attributes
    ----------
    design : Design
        That was examined.
    box : Box
        Its uncertain quantities with their ranges.
    plan : Plan
        How `samples` are drawn.
    temperature : pair of float or None
        Range in service [°C]; None where drift was left out.
    """

    design: Design
    box: Box
    plan: Plan
    temperature: Interval | None = None

    @cached_property
    def bounds(self) -> Named[Bound]:
        """Exact range of each kind over the box, with its proof and where it is attained."""
        return Named(bounds(self.design, self.box.intervals))

    @property
    def extremes(self) -> Named[Interval]:
        """Lowest and highest "upper", "lower", "width" and "middle" over the whole box [V].

        NaN where not every combination in the box switches.
        """
        return Named({kind: bound.interval for kind, bound in self.bounds.items()})

    @property
    def proof(self) -> Named[str]:
        """How each pair of extremes is known: "corners", "control points" or "bisection"."""
        return Named({kind: bound.proof for kind, bound in self.bounds.items()})

    @property
    def gap(self) -> Named[float]:
        """How far the extremes may lie beyond what is attained [V]; 0 unless by bisection."""
        return Named({kind: bound.gap for kind, bound in self.bounds.items()})

    @property
    def switches(self) -> bool:
        """Whether every combination in the box has an upper trip point above its lower one."""
        return bool(np.isfinite(self.bounds["width"].interval[0]))

    @cached_property
    def message(self) -> str:
        """What is wrong, and where, if not every combination in the box switches."""
        if self.switches:
            return ""
        worst = corners(self.design, self.box.intervals).at("width")[0]
        status = Status(int(trip_points(self.design, **worst).status))
        problem = "" if status is Status.OK else f": {status.message}"
        values = ", ".join(
            f"{name} = {show(value, self.box.quantities[name].unit)}"
            for name, value in worst.items()
        )
        return f"not everywhere within the tolerances{problem} at {values or 'the stated values'}"

    @cached_property
    def effects(self) -> dict[str, dict[str, float]]:
        """First-order effect of half the range of each quantity, by kind and name [V]."""
        return linear.effects(self.design, self.box)

    @cached_property
    def rss(self) -> Named[float]:
        """Root sum square of the effects, by kind [V].

        With half ranges taken as `sigmas` standard deviations, as many standard deviations of
        the result, to first order.
        """
        return linear.root_sum_square(self.effects)

    @cached_property
    def contributions(self) -> Named[Named[float]]:
        """Share of each quantity in the variance, by kind and name [1].

        Normalised squared sensitivities: they sum to 1 for each kind, the largest first.
        """
        return linear.shares(self.effects)

    @cached_property
    def per_volt(self) -> Named[float]:
        """Derivative by V_CC with all that follows the rail, by kind [V/V]."""
        return linear.per_volt(self.design)

    @cached_property
    def per_kelvin(self) -> Named[linear.Drift]:
        """Drift with temperature, by kind: worst case and root sum square [V/K]."""
        return linear.per_kelvin(self.design)

    @cached_property
    def samples(self) -> Samples:
        """Monte Carlo samples by kind, each of shape (count,) [V].

        The same place in each array is the same sample, so that all correlations are kept. NaN
        where a sample cannot switch.
        """
        return sampled(self.design, self.box, self.plan)

    def yield_within(
        self,
        *,
        upper: Window | None = None,
        lower: Window | None = None,
        width: Window | None = None,
        middle: Window | None = None,
        confidence: float = 0.95,
    ) -> Yield:
        """Give the share of units within all windows at once.

        Parameters
        ----------
        upper, lower, width, middle : pair of float, optional
            Lowest and highest value allowed [V]; None leaves an end open. Without any window,
            the share that switches at all.
        confidence : float, default 0.95
            Of the interval of the yield [1].

        Returns
        -------
        Yield
            With the interval of Clopper and Pearson. A sample that cannot switch is a failure.

        Raises
        ------
        InputError
            Naming every window that is not an interval.
        """
        windows = {"upper": upper, "lower": lower, "width": width, "middle": middle}
        return yield_of(self.samples, windows, confidence)

    @cached_property
    def measurand(self) -> MeasurandSpread | None:
        """The same in the unit of the signal, its own tolerances included; None without one."""
        signal = self.design.signal
        return None if signal is None else MeasurandSpread(self, signal)

    @property
    def _title(self) -> str:
        ends = self.temperature
        drift = "no drift" if ends is None else f"{ends[0]:g} to {ends[1]:g} °C"
        name = self.design.name or self.design.stage.title
        return f"Spread of {name}, {len(self.box.quantities)} uncertain quantities, {drift}"

    def _fields(self) -> Sequence[Field]:
        rows = [] if self.switches else [Field("switches", self.message)]
        for kind, bound in self.bounds.items():
            how = bound.proof if not bound.gap else f"{bound.proof}, within {bound.gap:.1g} V"
            rows.append(Field(kind, bound.interval, "V", how, rf"V_{{\mathrm{{{kind}}}}}"))
        sigma = f"{self.plan.sigmas:g} sigma, first order"
        rows += [Field(f"{kind} ±", self.rss[kind], "V", sigma) for kind in ("upper", "width")]
        for kind in ("upper", "width"):
            text = linear.largest(self.contributions[kind])
            rows.append(Field(f"{kind} depends on", text, "", linear.MEASURE))
        rows += [Field(f"{k} per volt of V_CC", self.per_volt[k], "V/V") for k in KINDS[:2]]
        rows += [Field(f"{k} per kelvin", self.per_kelvin[k].worst, "V/K") for k in KINDS[:2]]
        return rows + (list(self.measurand._fields()) if self.measurand else [])

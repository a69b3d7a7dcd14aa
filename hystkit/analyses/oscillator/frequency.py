"""How far period, frequency and duty of an oscillator spread: the result."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import fsum, isfinite, nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.oscillator.search import climbed, corner_grid
from hystkit.analyses.oscillator.swing import Oscillates, oscillates, swing
from hystkit.base.errors import DesignError
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.numeric.compile import kernel
from hystkit.numeric.fractions import gains
from hystkit.numeric.measurand import span_of
from hystkit.numeric.sampling import Plan, blocks
from hystkit.numeric.trips import overridden
from hystkit.numeric.uncertain import Box
from hystkit.numeric.views import Interval

#: What the capacitor is called among the uncertain quantities.
CAPACITOR = "C_X"
#: What is told of an oscillation, and its unit.
KINDS = {"period": "s", "frequency": "Hz", "high_time": "s", "low_time": "s", "duty": "%"}
#: What the shares in `contributions` are shares of.
MEASURE = "normalised squared sensitivities"
#: More uncertain quantities than this would need too many corners.
MAX_QUANTITIES = 16
_LABELS = {"high_time": "output high", "low_time": "output low"}
# Step of a derivative along the imaginary axis, where no difference loses digits.
_STEP = 1e-30

Array = NDArray[np.float64]


@dataclass(frozen=True)
class FrequencySpread(Viewed):
    """How far period, frequency, times and duty of an oscillator spread.

    Everything is computed when it is first asked for. Kinds are "period" [s], "frequency" [Hz],
    "high_time", "low_time" [s] and "duty" [1].

    Attributes
    ----------
    design : Design
        The circuit with its timing resistor.
    capacitor : Part
        Its value [F], tolerance and temperature coefficient.
    box : Box
        The uncertain quantities with their ranges, the capacitor C_X among them.
    plan : Plan
        How `samples` are drawn.
    """

    design: Design
    capacitor: Part
    box: Box
    plan: Plan

    @cached_property
    def extremes(self) -> Named[Interval]:
        """Lowest and highest value of each kind over the box; NaN unless all corners oscillate.

        Notes
        -----
        Attained: each is the value of a unit that the tolerances allow, the best corner of the
        box and what a search along the quantities finds from there. The period does not rise or
        fall with every part throughout, since its two halves may work against each other, so that
        this is no bound for units elsewhere in the box.

        Along the capacitor an end of its range is proved to be the extreme of the period. Let D be
        the distance between the voltages at which it settles in the two states, x that of the trip
        just passed from the former one, y that of the next trip from the present one, and
        u = t_d / R C of the former state. A half period less the delay is R C ln((D - x e^-u) / y);
        its derivative by C is R g(u) with g(0) = ln((D - x) / y) > 0 and
        g'(u) = u D x e^-u / (D - x e^-u)^2 >= 0.
        """
        if len(self.box.quantities) > MAX_QUANTITIES:
            raise DesignError(
                "this oscillator has too many uncertain quantities for its corners.",
                have=f"{len(self.box.quantities)}: {', '.join(self.box.quantities)}",
                rule=f"at most {MAX_QUANTITIES}, of which all combinations of ends are evaluated",
                remedy="no tolerance on those that matter least; samples need no corners",
            )
        corners = corner_grid(self.box.intervals)
        found = self._evaluated(corners)
        if not np.all(np.isfinite(found["period"])):
            return Named(dict.fromkeys(KINDS, (nan, nan)))
        ends = {kind: self._extreme(kind, corners, found[kind]) for kind in KINDS}
        shortest, longest = ends["period"]
        return Named({**ends, "frequency": (1 / longest, 1 / shortest)})

    def _extreme(self, kind: str, corners: dict[str, Array], values: Array) -> Interval:
        """Search from the lowest and from the highest corner."""
        lowest, highest = (
            {name: float(line[place]) for name, line in corners.items()}
            for place in (np.argmin(values), np.argmax(values))
        )
        box = self.box.intervals
        low = -climbed(lambda given: -self._evaluated(given)[kind], box, lowest)
        return low, climbed(lambda given: self._evaluated(given)[kind], box, highest)

    @property
    def oscillates(self) -> bool:
        """Whether every corner of the box oscillates."""
        return isfinite(self.extremes["period"][0])

    @cached_property
    def effects(self) -> Named[Named[float]]:
        """First-order effect of half the range of each quantity, by kind and name.

        Exact derivatives, with their sign.
        """
        by_name = {name: self._slopes(name) for name in self.box.quantities}
        return Named(
            {
                kind: Named(
                    {n: slopes[kind] * self.box.quantities[n].half for n, slopes in by_name.items()}
                )
                for kind in KINDS
            }
        )

    @cached_property
    def rss(self) -> Named[float]:
        """Root sum square of the effects, by kind."""
        return Named(
            {k: float(np.hypot.reduce([0.0, *e.values()])) for k, e in self.effects.items()}
        )

    @cached_property
    def contributions(self) -> Named[Named[float]]:
        """Share of each quantity in the variance, by kind and name [1].

        Normalised squared sensitivities: they sum to 1 for each kind, the largest first; all zero
        where nothing acts.
        """
        return Named({kind: Named(_shares(found)) for kind, found in self.effects.items()})

    @cached_property
    def samples(self) -> Named[Array]:
        """Monte Carlo samples by kind, each of shape (count,); the same place is the same unit.

        NaN where a sample does not oscillate.
        """
        # Without anything uncertain, all samples are the stated values.
        stated = self._evaluated({})
        found = {kind: np.full(self.plan.count, value) for kind, value in stated.items()}
        for start, drawn in blocks(self.box, self.plan):
            rows = {name: row[: self.plan.count - start] for name, row in drawn.items()}
            for kind, values in self._evaluated(rows).items() if rows else ():
                found[kind][start : start + values.size] = values
        return Named(found)

    def _evaluated(self, given: Mapping[str, Any]) -> dict[str, Any]:
        """Every kind at given values of the uncertain quantities; NaN without oscillation."""
        others = {name: value for name, value in given.items() if name != CAPACITOR}
        values = overridden(self.design, others)
        stage = self.design.stage
        with np.errstate(all="ignore"):
            upper, lower = kernel(stage).trips(values)
        farads = given.get(CAPACITOR, self.capacitor.value)
        found = swing(stage, values, (upper, lower), farads, self.design.device.delay)
        high = values.get("V_OH", values.get("V_PU", np.inf))
        possible = np.greater(upper, lower) & np.greater(high, values["V_OL"])
        works = oscillates(stage, found, possible) == Oscillates.OK
        return _kinds(self.design, np.where(works, found.up_time, np.nan), found.down_time)

    def _slopes(self, name: str) -> dict[str, float]:
        """Differentiate every kind by one quantity."""
        values: dict[str, Any] = dict(self.design.values)
        farads: Any = self.capacitor.value
        step = _STEP * max(abs(self.box.quantities[name].half), 1e-12)
        if name == CAPACITOR:
            farads = farads + 1j * step
        else:
            for symbol, gain in gains(self.design, name).items():
                values[symbol] = values[symbol] + 1j * step * gain
        stage = self.design.stage
        trips = kernel(stage).trips(values)
        found = swing(stage, values, trips, farads, self.design.device.delay)
        kinds = _kinds(self.design, found.up_time, found.down_time)
        return {kind: float(np.imag(value)) / step for kind, value in kinds.items()}

    @property
    def _title(self) -> str:
        drift = f"drift over {self.box.excursion:g} K" if self.box.excursion else "no drift"
        return f"Spread of the frequency, {len(self.box.quantities)} uncertain quantities, {drift}"

    def _fields(self) -> Sequence[Field]:
        rows = [Field("oscillates", "not in every corner of the tolerances")]
        rows = [] if self.oscillates else rows
        rows += [
            Field(_LABELS.get(k, k), span_of(self.extremes[k]), unit, "attained")
            for k, unit in KINDS.items()
        ]
        rows += [Field(f"{k} ±", self.rss[k], KINDS[k], f"{self.plan.sigmas:g} sigma, first order")
                 for k in ("period", "frequency")]  # fmt: skip
        ranked = [
            (n, share) for n, share in self.contributions["frequency"].items() if share > 0.005
        ]
        text = ", ".join(f"{name} {share:.0%}" for name, share in ranked[:4])
        return [*rows, Field("frequency depends on", text or None, "", MEASURE)]


def _kinds(design: Design, up_time: Any, down_time: Any) -> dict[str, Any]:
    inverting = design.stage.sense == "inverting"
    high, low = (up_time, down_time) if inverting else (down_time, up_time)
    period = high + low
    return dict(zip(KINDS, (period, 1 / period, high, low, high / period), strict=True))


def _shares(effects: Mapping[str, float]) -> dict[str, float]:
    total = fsum(effect**2 for effect in effects.values())
    ranked = sorted(effects.items(), key=lambda pair: -abs(pair[1]))
    return {name: effect**2 / total if total else 0.0 for name, effect in ranked}

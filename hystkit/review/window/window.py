"""The width window of a design: floors and ceilings on one axis, and what binds."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.load_step.result import LoadStep
from hystkit.analyses.noise.model import Noise
from hystkit.analyses.spread.spread import spread
from hystkit.base.errors import InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show_own
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, is_kind, wrong_kind
from hystkit.numeric.views import Interval
from hystkit.review.axis import Axis
from hystkit.review.evidence import Evidence
from hystkit.review.service import at
from hystkit.review.trip_checks import error_move
from hystkit.review.window.bound import Bound
from hystkit.review.window.conditions import Conditions, read_conditions
from hystkit.review.window.evaluate import evaluated, feasible, limits
from hystkit.review.window.openings import Opening, openings

#: Trips that lie off by less than this share of the width do so by rounding.
_ROUNDING = 1e-9


@dataclass(frozen=True)
class WidthWindow(Viewed):
    """What the width must be at least and may be at most.

    Attributes
    ----------
    asked : Conditions
        Requirements, and the axis on which they stand.
    bounds : tuple of Bound
        Floors from the highest, then ceilings from the lowest.
    """

    asked: Conditions
    bounds: tuple[Bound, ...]

    @property
    def unit(self) -> str:
        """Unit of every width here."""
        return self.asked.axis.unit

    @property
    def width(self) -> float:
        """Width of the design as it is, in `unit`."""
        return self.asked.axis.width

    @property
    def middle(self) -> float:
        """Middle of the band, which stays, in `unit`."""
        return self.asked.axis.middle

    @property
    def floor(self) -> Bound | None:
        """The floor that binds; None where nothing asks for a width."""
        return limits(self.bounds)[0]

    @property
    def ceiling(self) -> Bound | None:
        """The ceiling that binds; None where nothing limits the width."""
        return limits(self.bounds)[1]

    @property
    def feasible(self) -> Interval | None:
        """Least and greatest width that meet everything, in `unit`; None where none does."""
        return feasible(self.bounds)

    @property
    def inside(self) -> bool:
        """Whether the design's own width meets everything."""
        return self.feasible is not None and self.feasible[0] <= self.width <= self.feasible[1]

    @property
    def target(self) -> float | None:
        """A width as many times above the floor as below the ceiling; None in an empty window."""
        if self.feasible is None:
            return None
        low, high = self.feasible
        if not math.isfinite(high):
            return max(self.width, low)
        return math.sqrt(low * high) if low > 0 else high / 2

    @property
    def edges(self) -> tuple[float, float] | None:
        """Where the load switches on and off at the width `target`, for `size`, in `unit`."""
        return None if self.target is None else self.asked.axis.edges(self.target)

    @cached_property
    def openings(self) -> tuple[Opening, ...]:
        """In an empty window the smallest changes that open it, each tried; else nothing."""
        if self.feasible is not None:
            return ()
        found = openings(self.asked, self.bounds)
        return tuple({opening.text: opening for opening in found}.values())

    def __getitem__(self, name: str) -> Bound:
        """Return the bound of this name."""
        return next(bound for bound in self.bounds if bound.name == name)

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field(f"{bound.kind}: {bound.name}", self._plain(bound.width), "", bound.text)
            for bound in self.bounds
        ]
        found = self.feasible
        verdict = "none" if found is None else " to ".join(self._plain(end) for end in found)
        rows.append(Field("feasible", verdict, "", self._binding()))
        where = "inside" if self.inside else "outside"
        rows.append(Field("width of the design", self._plain(self.width), "", where))
        for opening in self.openings:
            then = " to ".join(self._plain(end) for end in opening.feasible)
            rows.append(Field("would open it", then, "", opening.text))
        return rows

    def _binding(self) -> str:
        names = [bound.name for bound in (self.floor, self.ceiling) if bound is not None]
        return f"bound by {' and '.join(names)}" if names else ""

    def _plain(self, width: float) -> str:
        if math.isinf(width):
            return "beyond reach"
        return show_own(width, self.unit)


def width_window(
    design: Design,
    *,
    load: str = "high",
    noise: Noise | None = None,
    probability: Quantity | None = None,
    slope: Quantity | None = None,
    hum: tuple[Quantity, Quantity] | None = None,
    load_step: LoadStep | Quantity | None = None,
    plant: Plant | None = None,
    starts_per_hour: Quantity | None = None,
    min_on: Quantity | None = None,
    min_off: Quantity | None = None,
    swing: Quantity | None = None,
    accuracy: Quantity | None = None,
    uncertainty: Quantity | None = None,
    error_share: Quantity | None = None,
    temperature: Interval | None = None,
) -> WidthWindow:
    """Put everything that bounds the width of the hysteresis on one axis.

    Parameters
    ----------
    design : Design
        Gives the middle of the band, which stays, and the unit: that of its signal, or V.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    noise : Noise, optional
        On the signal [V].
    probability : float or str, optional
        Allowed probability of a further transition per passage; 1e-3 unless given.
    slope : float or str, optional
        Of the signal at the trips [V/s]; that of the plant's cycle unless given.
    hum : pair of float or str, optional
        Amplitude [V] and frequency [Hz] of hum on the signal.
    load_step : LoadStep, float or str, optional
        What the load's own step takes of the width [V]; found again for another design.
    plant : Plant, optional
        What the load acts on, in the unit of the signal.
    starts_per_hour : float or str, optional
        At most.
    min_on, min_off : float or str, optional
        Shortest time on and off [s].
    swing : float or str, optional
        Largest swing of the process value, in the unit of the signal.
    accuracy : float or str, optional
        Largest distance of either trip from the middle, in the unit of the signal.
    uncertainty : float or str, optional
        How far either trip may lie off, in the unit of the signal; by the design's tolerances
        unless given.
    error_share : float or str, optional
        Share of the width that offset and bias currents may take; a tenth unless given.
    temperature : pair of float, optional
        Range in service [°C], as for `spread`.

    Returns
    -------
    WidthWindow
        Bounds, the feasible widths and, where there are none, what would open the window.

    Raises
    ------
    InputError
        Naming everything that cannot be used, or is missing for what is asked.
    DesignError
        If the design has no trip points.

    Notes
    -----
    Cycle bounds come from the exact steady cycle. Noise, hum and the load's step act at one time:
    each has its floor, and the sum of what they need is a floor too. Where the plant gives the
    slope, it is that at the width found. The uncertainty is taken at the design's own width.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> from hystkit.analyses.cycle.plants import Integrating
    >>> tank = Integrating(rate_on="0.5 mm/s", rate_off="-0.2 mm/s", unit="m")
    >>> window = width_window(header_tank(), plant=tank, starts_per_hour=2, accuracy="0.5 m")
    >>> [f"{width:.2f} m" for width in window.feasible]
    ['0.26 m', '0.96 m']
    """
    if not is_kind(design, Design):
        fault = wrong_kind("design", design, "a Design", "hk.width_window(hk.Design(...), ...)")
        raise InputError.of("this width window", [fault])
    axis = Axis.of(design, load)
    given = {
        "noise": noise,
        "probability": probability,
        "slope": slope,
        "hum": hum,
        "load_step": at(load_step, design) if isinstance(load_step, LoadStep) else load_step,
        "plant": plant,
        "starts_per_hour": starts_per_hour,
        "min_on": min_on,
        "min_off": min_off,
        "swing": swing,
        "accuracy": accuracy,
        "uncertainty": uncertainty,
        "error_share": error_share,
    }
    read = read_conditions(given, axis.unit)
    if read["uncertainty"] is None:
        read["uncertainty"] = _uncertainty(design, axis, temperature)
    error = error_move(Evidence(design, load))
    stated: dict[str, Any] = {name: value for name, value in read.items() if value is not None}
    asked = Conditions(design, axis, error=error, **stated)
    return WidthWindow(asked, evaluated(asked))


def _uncertainty(design: Design, axis: Axis, temperature: Interval | None) -> float:
    """How far either trip lies off at most over all tolerances, in the unit of the axis."""
    found = spread(design, temperature=temperature)
    sensed = found.measurand
    extremes = found.extremes if sensed is None else sensed.trip_extremes
    names = ("lower", "upper") if sensed is None else ("low", "high")
    nominal = sorted(axis.edges(axis.width))
    pairs = zip(names, nominal, strict=True)
    off = max(abs(end - at) for name, at in pairs for end in extremes[name])
    return 0.0 if off <= _ROUNDING * axis.width else off

"""What the plant's cycle asks of the width: starts, times, swing, reach."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cached_property
from math import nan
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.steady import steady_cycle
from hystkit.base.quantity import show, show_own
from hystkit.review.window.bound import Bound
from hystkit.review.window.conditions import Conditions
from hystkit.review.window.search import Flags, Requirement, first_widths, limiting_widths


@dataclass(frozen=True)
class Survey:
    """The cycles of a plant over all widths, evaluated once for everything that needs them.

    Attributes
    ----------
    asked : Conditions
        With a plant.
    widths : ndarray
        In the unit of the axis.
    cycle : Cycle
        At these widths.
    """

    asked: Conditions
    widths: NDArray[np.float64]
    cycle: Cycle

    @classmethod
    def of(cls, asked: Conditions) -> Survey:
        """Evaluate the cycles.

        Parameters
        ----------
        asked : Conditions
            With a plant.
        """
        widths = first_widths(asked.axis.longest)
        return cls(asked, widths, cycle_at(asked, widths))

    def passage(self, width: float) -> float:
        """Give the slope of the signal where it passes the trips, the slower one of both.

        Parameters
        ----------
        width : float
            In the unit of the axis.

        Returns
        -------
        float
            [V/s], between the widths of the survey by a spline; NaN where the plant does not cycle.
        """
        return float(np.exp(self._slopes(math.log(width)))) if self._slopes and width > 0 else nan

    @cached_property
    def _slopes(self) -> Callable[[float], Any] | None:
        slopes = np.asarray(self.asked.axis.passage(self.cycle, self.widths))
        known = slopes > 0
        if np.count_nonzero(known) < 2:
            return None
        spline: Callable[[float], Any] = CubicSpline(
            np.log(self.widths[known]), np.log(slopes[known]), extrapolate=False
        )
        return spline


def cycle_bounds(survey: Survey) -> list[Bound]:
    """Give every bound that the cycle of the plant sets.

    Parameters
    ----------
    survey : Survey
        Cycles over all widths.

    Returns
    -------
    list of Bound
        Floors and ceilings, in the unit of the axis.
    """
    asked = survey.asked
    limits = list(_limits(asked))
    widths = limiting_widths(
        lambda tried: cycle_at(asked, tried),
        [limit.requirement for limit in limits],
        (survey.widths, survey.cycle),
    )
    return [limit.bound(asked, width) for limit, width in zip(limits, widths, strict=True)]


def cycle_at(asked: Conditions, width: Any) -> Cycle:
    """Give the steady cycle at a width.

    Parameters
    ----------
    asked : Conditions
        With a plant.
    width : float or ndarray
        In the unit of the axis.

    Returns
    -------
    Cycle
        Of the shape of `width`.
    """
    assert asked.plant is not None
    on_at, off_at = asked.axis.edges(width)
    return steady_cycle(asked.plant, on_at=on_at, off_at=off_at)


def swing_of(asked: Conditions, cycle: Cycle) -> Any:
    """Give how far the process value swings, with both trips as far out as they may be.

    Parameters
    ----------
    asked : Conditions
        Gives the uncertainty of the trips.
    cycle : Cycle
        Between the nominal trips.

    Returns
    -------
    ndarray
        In the unit of the axis, of the shape of `cycle`.
    """
    return np.asarray(cycle.high) - np.asarray(cycle.low) + 2 * asked.uncertainty


@dataclass(frozen=True)
class _Limit:
    """One bound that is to be found."""

    name: str
    requirement: Requirement[Cycle]
    text: str

    def bound(self, asked: Conditions, width: float) -> Bound:
        if self.requirement.least:
            return Bound(self.name, "floor", width, self.text)
        width, text = min(width, asked.axis.longest), self.text
        if width == 0 and self.name == "swing":
            text += "; dead time and lag alone take more"
        elif width == 0:
            text = f"no cycle: {cycle_at(asked, asked.axis.width).message}"
        return Bound(self.name, "ceiling", width, text)


def _limits(asked: Conditions) -> Iterator[_Limit]:
    # Where the plant does not cycle, "reach" says so, and nothing else does.
    if asked.starts_per_hour is not None:
        text = f"at most {show_own(asked.starts_per_hour)} starts per hour"
        yield _at_most("cycling", "starts_per_hour", asked.starts_per_hour, text)
    for name, least in (("on", asked.min_on), ("off", asked.min_off)):
        if least is not None:
            text = f"{name} for {show(least, 's', 4)} at least"
            yield _at_least(f"minimum {name} time", f"{name}_time", least, text)
    if asked.swing is not None:
        yield _swing(asked, asked.swing)
    text = "further apart plant or signal do not reach both trips"
    yield _Limit("reach", Requirement(lambda cycle: np.asarray(cycle.ok), least=False), text)


def _at_most(name: str, what: str, most: float, text: str) -> _Limit:
    def meets(cycle: Cycle) -> Flags:
        return ~(np.asarray(getattr(cycle, what)) > most)

    return _Limit(name, Requirement(meets, least=True), text)


def _at_least(name: str, what: str, least: float, text: str) -> _Limit:
    def meets(cycle: Cycle) -> Flags:
        return ~(np.asarray(getattr(cycle, what)) < least)

    return _Limit(name, Requirement(meets, least=True), text)


def _swing(asked: Conditions, most: float) -> _Limit:
    def meets(cycle: Cycle) -> Flags:
        return ~(np.asarray(swing_of(asked, cycle)) > most)

    shown = show_own(most, asked.axis.unit)
    text = f"the process value swings by {shown} at most{asked.spread_text}"
    return _Limit("swing", Requirement(meets, least=False), text)

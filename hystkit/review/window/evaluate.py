"""Every bound on the width that is asked for, and what remains between them."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from hystkit.base.quantity import show, show_own
from hystkit.numeric.views import Interval
from hystkit.review.window.bound import Bound
from hystkit.review.window.conditions import Conditions
from hystkit.review.window.cycling import Survey, cycle_bounds
from hystkit.review.window.disturbances import disturbance_floors


def evaluated(asked: Conditions) -> tuple[Bound, ...]:
    """Evaluate every bound that is asked for.

    Parameters
    ----------
    asked : Conditions
        Requirements on the width.

    Returns
    -------
    tuple of Bound
        Floors from the highest, then ceilings from the lowest.
    """
    survey = None if asked.plant is None else Survey.of(asked)
    found = [*disturbance_floors(asked, survey), *_errors(asked)]
    found += [] if survey is None else cycle_bounds(survey)
    floors = sorted((b for b in found if b.kind == "floor"), key=lambda b: -b.width)
    ceilings = sorted((b for b in found if b.kind == "ceiling"), key=lambda b: b.width)
    return (*floors, *ceilings)


def limits(bounds: Sequence[Bound]) -> tuple[Bound | None, Bound | None]:
    """Give the highest floor and the lowest ceiling.

    Parameters
    ----------
    bounds : sequence of Bound
        As `evaluated` gives them.

    Returns
    -------
    tuple of Bound or None
        None where there is no bound of the kind; a floor that any width meets is none.
    """
    floor = next((b for b in bounds if b.kind == "floor" and b.width > 0), None)
    ceiling = next((b for b in bounds if b.kind == "ceiling"), None)
    return floor, ceiling


def feasible(bounds: Sequence[Bound]) -> Interval | None:
    """Give the widths that meet all bounds.

    Parameters
    ----------
    bounds : sequence of Bound
        As `evaluated` gives them.

    Returns
    -------
    tuple of float or None
        Least and greatest; None where there is no such width.
    """
    floor, ceiling = limits(bounds)
    low = floor.width if floor else 0.0
    high = ceiling.width if ceiling else math.inf
    return (low, high) if low <= high and high > 0 and math.isfinite(low) else None


def _errors(asked: Conditions) -> Iterator[Bound]:
    """Bounds that follow from how far the trips may lie off."""
    axis, unit = asked.axis, asked.axis.unit
    if asked.error:
        text = (
            f"offset and bias currents move a trip by {show(asked.error, 'V', 3)}, at most"
            f" {asked.error_share:.3g} of the width"
        )
        yield Bound("offset", "floor", axis.width_of(asked.error / asked.error_share), text)
    if asked.accuracy is not None:
        width = max(2 * (asked.accuracy - asked.uncertainty), 0.0)
        text = f"trips within ± {show_own(asked.accuracy, unit)} of {show_own(axis.middle, unit)}"
        yield Bound("accuracy", "ceiling", width, text + asked.spread_text)
    if asked.plant is None and axis.signal is not None:
        low, high = axis.signal.span
        text = f"the signal spans {show_own(low)} to {show_own(high, unit)}"
        yield Bound("reach", "ceiling", axis.longest, text)

"""What disturbs the signal while it passes the trips, and the width that each needs."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from functools import cache

from hystkit.analyses.noise.hum import hum_width
from hystkit.analyses.noise.inverse import width_for
from hystkit.base.quantity import show
from hystkit.review.window.bound import Bound
from hystkit.review.window.conditions import Conditions
from hystkit.review.window.cycling import Survey, cycle_at

#: Name of the floor for everything that disturbs the signal at one time.
TOGETHER = "all disturbances"
NAMES = ("noise", "hum", "load step", TOGETHER)
#: The width follows from the slope and the slope from the width; what is left of a change this
#: small, as a share, is a hundred times smaller.
_SETTLED = 1e-3
_ROUNDS = 50

Share = Callable[[float], float]


def disturbance_floors(asked: Conditions, survey: Survey | None) -> Iterator[Bound]:
    """Give the floor of each disturbance, and that of all of them together.

    Parameters
    ----------
    asked : Conditions
        Requirements on the width.
    survey : Survey or None
        Cycles of the plant over all widths; None without a plant.

    Yields
    ------
    Bound
        Least width, in the unit of the axis.
    """
    shares = needs(asked)

    def slope_at(width: float) -> float:
        if asked.slope is not None or survey is None:
            return math.nan if asked.slope is None else asked.slope
        return survey.passage(width)

    for name, share in shares.items():
        yield _floor(asked, name, {name: share}, slope_at)
    if len(shares) > 1:
        yield _floor(asked, TOGETHER, shares, slope_at)


def needs(asked: Conditions) -> dict[str, Share]:
    """Give what each disturbance needs, as a function of the slope.

    Parameters
    ----------
    asked : Conditions
        Requirements on the width.

    Returns
    -------
    dict
        Name to a function of the slope [V/s] that gives a distance of the trip points [V], NaN
        where the plant does not cycle and has no slope.
    """
    found: dict[str, Share] = {}
    noise, hum, step = asked.noise, asked.hum, asked.load_step
    if noise is not None:
        # In an array a slope that is not known is no fault: the width is not known then, too.
        found["noise"] = cache(
            lambda slope: float(
                width_for(probability=asked.probability, noise=noise, slope=[slope])[0]
            )
        )
    if hum is not None:
        found["hum"] = lambda slope: float(hum_width(*hum, [slope])[0])
    if step is not None:
        found["load step"] = lambda _: step
    return found


def passage(asked: Conditions, width: float) -> float:
    """Give the slope of the signal where it passes the trips, the slower one of both.

    Parameters
    ----------
    asked : Conditions
        With a slope, or with a plant whose cycle tells it.
    width : float
        In the unit of the axis.

    Returns
    -------
    float
        [V/s]; NaN where the plant does not cycle.
    """
    if asked.slope is not None:
        return asked.slope
    if asked.plant is None:
        return math.nan
    return float(asked.axis.passage(cycle_at(asked, width), width))


def _floor(asked: Conditions, name: str, shares: Mapping[str, Share], slope_at: Share) -> Bound:
    def need(slope: float) -> float:
        return math.fsum(share(slope) for share in shares.values())

    width, slope = _self_consistent(asked, need, slope_at)
    if not math.isfinite(width):
        return Bound(name, "floor", width, "more than plant and signal leave room for")
    text = " + ".join(f"{part} {show(f(slope), 'V', 3)}" for part, f in shares.items())
    if any(part != "load step" for part in shares):
        text += f" at {show(slope, 'V/s', 3)}"
    if name == "noise":
        text += f", one further transition in {1 / asked.probability:,.0f} passages"
    return Bound(name, "floor", width, text)


def _self_consistent(asked: Conditions, need: Share, slope_at: Share) -> tuple[float, float]:
    """Find the width whose own slope asks for it; it hardly depends on the one tried."""
    tried = asked.axis.width
    for _ in range(_ROUNDS):
        slope = slope_at(tried)
        wanted = asked.axis.width_of(need(slope))
        if not math.isfinite(wanted) or abs(wanted - tried) <= _SETTLED * wanted:
            break
        tried = wanted
    return wanted, slope

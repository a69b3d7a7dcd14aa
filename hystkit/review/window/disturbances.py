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
from hystkit.review.window.cycling import cycle_at

#: Name of the floor for everything that disturbs the signal at one time.
TOGETHER = "all disturbances"
NAMES = ("noise", "hum", "load step", TOGETHER)
#: The width follows from the slope and the slope from the width: they settle within this share.
_SETTLED = 1e-7
_ROUNDS = 50

Share = Callable[[float], float]


def disturbance_floors(asked: Conditions) -> Iterator[Bound]:
    """Give the floor of each disturbance, and that of all of them together.

    Parameters
    ----------
    asked : Conditions
        Requirements on the width.

    Yields
    ------
    Bound
        Least width, in the unit of the axis.
    """
    shares = needs(asked)
    for name, share in shares.items():
        yield _floor(asked, name, {name: share})
    if len(shares) > 1:
        yield _floor(asked, TOGETHER, shares)


def needs(asked: Conditions) -> dict[str, Share]:
    """Give what each disturbance needs, as a function of the slope.

    Parameters
    ----------
    asked : Conditions
        Requirements on the width.

    Returns
    -------
    dict
        Name to a function of the slope [V/s] that gives a distance of the trip points [V].
    """
    found: dict[str, Share] = {}
    noise, hum, step = asked.noise, asked.hum, asked.load_step
    if noise is not None:
        found["noise"] = cache(
            lambda slope: float(width_for(probability=asked.probability, noise=noise, slope=slope))
        )
    if hum is not None:
        found["hum"] = lambda slope: float(hum_width(*hum, slope))
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
    return asked.axis.passage(cycle_at(asked, width), width)


def _floor(asked: Conditions, name: str, shares: Mapping[str, Share]) -> Bound:
    width, slope = _self_consistent(asked, lambda at: math.fsum(f(at) for f in shares.values()))
    if not math.isfinite(width):
        return Bound(name, "floor", width, "more than plant and signal leave room for")
    text = " + ".join(f"{part} {show(f(slope), 'V', 3)}" for part, f in shares.items())
    if any(part != "load step" for part in shares):
        text += f" at {show(slope, 'V/s', 3)}"
    if name == "noise":
        text += f", one further transition in {1 / asked.probability:,.0f} passages"
    return Bound(name, "floor", width, text)


def _self_consistent(asked: Conditions, need: Share) -> tuple[float, float]:
    """Find the width whose own slope asks for it."""
    width = asked.axis.width
    for _ in range(_ROUNDS):
        slope = passage(asked, width)
        wanted = asked.axis.width_of(need(slope))
        if not abs(wanted - width) > _SETTLED * asked.axis.longest or math.isinf(wanted):
            break
        width = wanted
    return wanted, slope

"""When no width meets everything: the smallest changes after which one does."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from scipy.optimize import brentq

from hystkit.analyses.noise.chatter import chatter
from hystkit.base.frozen import Named
from hystkit.base.quantity import show, show_own
from hystkit.numeric.views import Interval
from hystkit.review.window.bound import Bound
from hystkit.review.window.conditions import Conditions
from hystkit.review.window.cycling import cycle_at, swing_of
from hystkit.review.window.disturbances import NAMES, TOGETHER, needs, passage
from hystkit.review.window.evaluate import evaluated, feasible, limits

#: Digits that a suggested limit is written with, rounded to the side that opens the window.
_DIGITS = 3
#: A probability above this is no requirement any more.
_USELESS = 0.5
#: Shares of the dead time that are tried.
_DEAD_TIMES = np.linspace(0.99, 0.01, 99)


@dataclass(frozen=True)
class Opening:
    """A change after which a width meets everything, as was tried.

    Attributes
    ----------
    text : str
        What to change.
    changes : mapping of str to object
        The same as arguments of `width_window`.
    feasible : tuple of float
        Widths that meet everything after it.
    """

    text: str
    changes: Named[Any]
    feasible: Interval


@dataclass(frozen=True)
class _Change:
    """One condition relaxed."""

    text: str
    changes: dict[str, Any]


def openings(asked: Conditions, bounds: Sequence[Bound]) -> Iterator[Opening]:
    """Try the smallest changes, each by running it.

    Parameters
    ----------
    asked : Conditions
        That no width meets.
    bounds : sequence of Bound
        As `evaluated` gives them.

    Yields
    ------
    Opening
        Of each kind of change the smallest that opens the window.
    """
    for width in _targets(asked, bounds):
        for change in _changes(asked, bounds, width):
            then = feasible(evaluated(asked.changed(**change.changes)))
            if then is not None:
                yield Opening(change.text, Named(change.changes), then)


def _targets(asked: Conditions, bounds: Sequence[Bound]) -> list[float]:
    """Widths at which the window may open: at its ceiling, at its floor, else where it is."""
    floor, ceiling = limits(bounds)
    ends = [bound.width for bound in (ceiling, floor) if bound and not bound.hopeless]
    reachable = [width for width in ends if 0 < width <= asked.axis.longest]
    return reachable or [asked.axis.width]


def _changes(asked: Conditions, bounds: Sequence[Bound], width: float) -> Iterator[_Change]:
    """Give what relaxes every bound that a width violates."""
    violated = [b for b in bounds if (b.width > width if b.kind == "floor" else b.width < width)]
    names = dict.fromkeys(TOGETHER if b.name in NAMES else b.name for b in violated)
    options = [list(_RELAXED[name](asked, width)) for name in names if name in _RELAXED]
    if len(options) != len(names) or not all(options):
        return
    if len(options) == 1:
        yield from options[0]
        return
    first = [each[0] for each in options]
    merged = {name: value for change in first for name, value in change.changes.items()}
    yield _Change(", and ".join(change.text for change in first), merged)


def _quieter(asked: Conditions, width: float) -> Iterator[_Change]:
    volts, slope = asked.axis.volts(width), passage(asked, width)
    shares = {name: share(slope) for name, share in needs(asked).items()}
    left = {name: volts - (math.fsum(shares.values()) - share) for name, share in shares.items()}
    if asked.noise is not None and left["noise"] > 0:
        noise = asked.noise
        share = _scaled(
            lambda k: needs(asked.changed(noise=noise.scaled(k)))["noise"](slope),
            left["noise"],
        )
        if share is not None:
            quieter = noise.scaled(_down(share * noise.rms) / noise.rms)
            yield _Change(f"noise of at most {show(quieter.rms, 'V', 3)} rms", {"noise": quieter})
        often = _up(float(chatter(left["noise"], asked.noise, slope).probability))
        if often < _USELESS:
            text = f"one further transition in {1 / often:,.0f} passages allowed"
            yield _Change(text, {"probability": often})
    if asked.hum is not None and left["hum"] > 0:
        amplitude, frequency = asked.hum
        share = _scaled(
            lambda k: needs(asked.changed(hum=(k * amplitude, frequency)))["hum"](slope),
            left["hum"],
        )
        if share is not None:
            smaller = _down(share * amplitude)
            text = f"hum of at most {show(smaller, 'V', 3)} amplitude"
            yield _Change(text, {"hum": (smaller, frequency)})
    if asked.load_step is not None and left["load step"] > 0:
        smaller = _down(left["load step"])
        text = f"a load step that takes at most {show(smaller, 'V', 3)}"
        yield _Change(text, {"load_step": smaller})


def _rarer(asked: Conditions, width: float) -> Iterator[_Change]:
    starts = _up(float(cycle_at(asked, width).starts_per_hour))
    if math.isfinite(starts):
        yield _Change(f"{show_own(starts)} starts per hour allowed", {"starts_per_hour": starts})


def _shorter_on(asked: Conditions, width: float) -> Iterator[_Change]:
    time = _down(float(cycle_at(asked, width).on_time))
    if time > 0:
        yield _Change(f"on for {show(time, 's', 4)} allowed", {"min_on": time})


def _shorter_off(asked: Conditions, width: float) -> Iterator[_Change]:
    time = _down(float(cycle_at(asked, width).off_time))
    if time > 0:
        yield _Change(f"off for {show(time, 's', 4)} allowed", {"min_off": time})


def _larger_share(asked: Conditions, width: float) -> Iterator[_Change]:
    share = _up(asked.error / asked.axis.volts(width))
    if share < 1:
        text = f"{share:.3g} of the width for offset and bias currents"
        yield _Change(text, {"error_share": share})


def _less_accurate(asked: Conditions, width: float) -> Iterator[_Change]:
    unit, accuracy = asked.axis.unit, _up(width / 2 + asked.uncertainty)
    yield _Change(f"trips allowed within ± {show_own(accuracy, unit)}", {"accuracy": accuracy})
    if asked.accuracy is not None:
        yield from _closer(asked, asked.accuracy - width / 2)


def _more_swing(asked: Conditions, width: float) -> Iterator[_Change]:
    unit, needed = asked.axis.unit, float(swing_of(asked, cycle_at(asked, width)))
    if not math.isfinite(needed) or asked.swing is None:
        return
    swing = _up(needed)
    yield _Change(f"a swing of {show_own(swing, unit)} allowed", {"swing": swing})
    yield from _closer(asked, asked.uncertainty - (needed - asked.swing) / 2)
    yield from _prompter(asked, width, asked.swing)


def _closer(asked: Conditions, uncertainty: float) -> Iterator[_Change]:
    if 0 < uncertainty < asked.uncertainty:
        closer = _down(uncertainty)
        text = f"closer tolerances: trips within ± {show_own(closer, asked.axis.unit, 3)}"
        yield _Change(text, {"uncertainty": closer})


def _prompter(asked: Conditions, width: float, swing: float) -> Iterator[_Change]:
    """Less dead time: the longest one, in steps of a hundredth, with which the swing is kept."""
    plant: Any = asked.plant
    on, off = plant.dead_time
    if not (on or off):
        return
    tried = replace(plant, dead_time=(on * _DEAD_TIMES, off * _DEAD_TIMES))
    kept = np.flatnonzero(swing_of(asked, cycle_at(asked.changed(plant=tried), width)) <= swing)
    if kept.size == 0:
        return
    share = float(_DEAD_TIMES[kept[0]])
    prompter = replace(plant, dead_time=(on * share, off * share))
    times = " and ".join(dict.fromkeys(show(time * share, "s", 3) for time in (on, off)))
    yield _Change(f"a dead time of at most {times}", {"plant": prompter})


_RELAXED: dict[str, Callable[[Conditions, float], Iterator[_Change]]] = {
    TOGETHER: _quieter,
    "cycling": _rarer,
    "minimum on time": _shorter_on,
    "minimum off time": _shorter_off,
    "offset": _larger_share,
    "accuracy": _less_accurate,
    "swing": _more_swing,
}


def _scaled(need: Callable[[float], float], volts: float) -> float | None:
    """Find the scale of a disturbance at which it needs just this many volts."""
    least, most = 1e-4, 1.0
    if not need(most) > volts or need(least) > volts:
        return None
    return float(brentq(lambda k: need(k) - volts, least, most, rtol=1e-6))


def _up(value: float) -> float:
    return _rounded(value, math.ceil)


def _down(value: float) -> float:
    return _rounded(value, math.floor)


def _rounded(value: float, whole: Callable[[float], int]) -> float:
    if not math.isfinite(value) or value <= 0:
        return value
    unit = 10.0 ** (math.floor(math.log10(value)) - _DIGITS + 1)
    # A value that already has few digits stays, whatever the division made of it.
    return float(f"{whole(round(value / unit, 6)) * unit:.{_DIGITS}g}")

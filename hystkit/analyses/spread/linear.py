"""First-order spread: root sum square, contributions, and what supply and temperature do."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from math import fsum, hypot
from typing import Any

from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.numeric.fractions import slopes
from hystkit.numeric.uncertain import Box

#: What the shares in `contributions` are shares of.
MEASURE = "normalised squared sensitivities"

ByKind = Named[float]


@dataclass(frozen=True)
class Drift:
    """What one kelvin does to a trip point at most.

    Attributes
    ----------
    worst : float
        All temperature coefficients with the worst signs [V/K].
    rss : float
        Their root sum square [V/K].
    """

    worst: float
    rss: float


def effects(design: Design, box: Box) -> dict[str, dict[str, float]]:
    """First-order effect of half the range of each quantity.

    Parameters
    ----------
    design : Design
        Gives the point at which the exact derivatives are taken.
    box : Box
        Gives the ranges.

    Returns
    -------
    dict
        "upper", "lower", "width" and "middle" to a dict of name to effect [V], with its sign.
    """
    found = slopes(design, box.quantities)
    return {
        kind: {name: slope * box.quantities[name].half for name, slope in by_name.items()}
        for kind, by_name in found.items()
    }


def root_sum_square(found: Mapping[str, Mapping[str, float]]) -> ByKind:
    """Root sum square of effects.

    Parameters
    ----------
    found : mapping of str to mapping
        As from `effects`.

    Returns
    -------
    Named of float
        By kind [V]: as many sigma of the result as half a range is of each quantity.
    """
    return Named({kind: hypot(*by_name.values()) for kind, by_name in found.items()})


def shares(found: Mapping[str, Mapping[str, float]]) -> Named[Named[float]]:
    """Share of each quantity in the variance, to first order.

    Parameters
    ----------
    found : mapping of str to mapping
        As from `effects`.

    Returns
    -------
    Named of Named
        By kind, then by name: squared effect over the sum of all [1], the largest first. All zero
        where nothing acts, or the effects are not known.
    """
    return Named({kind: Named(_shares(by_name)) for kind, by_name in found.items()})


def per_volt(design: Design) -> ByKind:
    """Give the derivative by the supply voltage, all that follows the rail moving along.

    Parameters
    ----------
    design : Design
        Levels that it gives do not follow; those left out do.

    Returns
    -------
    Named of float
        By kind [V/V], with V_EE held.
    """
    return Named({kind: by_name["V_CC"] for kind, by_name in slopes(design, ["V_CC"]).items()})


def per_kelvin(design: Design) -> Named[Drift]:
    """Give the drift with temperature, to first order.

    Parameters
    ----------
    design : Design
        Temperature coefficients of parts and levels and the drift of the offset, each a magnitude
        with unknown sign.

    Returns
    -------
    Named of Drift
        By kind.
    """
    rates = {n: abs(p.value * p.tempco) for n, p in {**design.parts, **design.levels}.items()}
    rates["offset"] = design.device.offset_drift
    moving = [name for name, rate in rates.items() if rate]
    return Named(
        {
            kind: _drift(slope * rates[name] for name, slope in by_name.items())
            for kind, by_name in slopes(design, moving).items()
        }
    )


def derivative(function: Callable[[float], Any], at: float, step: float) -> float:
    """Differentiate a function that is known by its values only.

    Parameters
    ----------
    function : callable
        Of one number.
    at, step : float
        Where, and distance of the points that are taken.

    Returns
    -------
    float
        By the central difference of sixth order, whose error falls with the sixth power of the
        step.
    """
    reaches = {1: 3 / 4, 2: -3 / 20, 3: 1 / 60}
    pairs = ((w, function(at + n * step), function(at - n * step)) for n, w in reaches.items())
    return fsum(weight * float(above - below) for weight, above, below in pairs) / step


def largest(by_name: Mapping[str, float], count: int = 4) -> str | None:
    """Write the largest shares in one line.

    Parameters
    ----------
    by_name : mapping of str to float
        Shares, the largest first.
    count : int, default 4
        How many.

    Returns
    -------
    str or None
        Such as "V_CC 88%, R_B 8%"; None where nothing acts.
    """
    ranked = [(name, share) for name, share in by_name.items() if share > 0]
    return ", ".join(f"{name} {share:.0%}" for name, share in ranked[:count]) or None


def _shares(by_name: Mapping[str, float]) -> dict[str, float]:
    total = fsum(effect**2 for effect in by_name.values())
    ranked = sorted(by_name.items(), key=lambda pair: -(pair[1] ** 2))
    return {name: effect**2 / total if total > 0 else 0.0 for name, effect in ranked}


def _drift(rates: Iterable[float]) -> Drift:
    listed = [abs(rate) for rate in rates]
    return Drift(fsum(listed), hypot(*listed))

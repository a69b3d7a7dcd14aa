"""Evaluate how far an oscillator's frequency spreads over tolerances and temperature."""

from __future__ import annotations

from collections.abc import Iterator
from math import isfinite
from numbers import Integral, Real
from typing import Any

from hystkit.analyses.oscillator.frequency import CAPACITOR, FrequencySpread
from hystkit.base.errors import DesignError, Fault, InputError
from hystkit.base.frozen import Named
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.numeric.sampling import DISTRIBUTIONS, Plan
from hystkit.numeric.uncertain import SORTED_OUT, Box, Quantity, uncertain
from hystkit.numeric.views import Interval


def frequency_spread(
    design: Design,
    capacitor: Part,
    temperature: Interval | None,
    samples: int,
    seed: int,
    distribution: str,
    sigmas: float,
) -> FrequencySpread:
    """Evaluate how far an oscillator's frequency spreads.

    Parameters
    ----------
    design : Design
        With its timing resistor.
    capacitor : Part
        Its value [F], tolerance and temperature coefficient.
    temperature : pair of float or None
        Range in service [°C].
    samples, seed : int
        Of the Monte Carlo samples.
    distribution : {"normal", "uniform", "binned"}
        Of each quantity over its range.
    sigmas : float
        Standard deviations in half a range.

    Returns
    -------
    FrequencySpread
        Computes each part of the result when it is first asked for.

    Raises
    ------
    InputError
        Naming every argument that cannot be used.
    DesignError
        If drift takes a part to zero.
    """
    if faults := [*_faults(temperature, samples, seed, distribution, sigmas)]:
        raise InputError.of("this spread", faults)
    ends = None if temperature is None else (float(temperature[0]), float(temperature[1]))
    box = uncertain(design, ends)
    quantities = {**box.quantities, **_capacitor(capacitor, box.excursion)}
    plan = Plan(int(samples), int(seed), distribution, float(sigmas))
    return FrequencySpread(design, capacitor, Box(Named(quantities), box.excursion), plan)


def _capacitor(part: Part, excursion: float) -> dict[str, Quantity]:
    """Give the range of the capacitor, by its name; empty where its value is certain."""
    drift = abs(part.tempco) * excursion
    if drift >= 1:
        raise DesignError(
            f"{CAPACITOR} would drift to zero.",
            asked=f"{part.tempco:g} 1/K over {excursion:g} K",
            rule="temperature coefficient times temperature difference < 1",
            remedy="the coefficient in 1/K: 100 ppm/K is 100e-6",
        )
    low, high = (part.value * (1 + s * part.tol) * (1 + s * drift) for s in (-1, 1))
    if low == high:
        return {}
    # As for resistors: drift carries parts from the edge of the hole into it.
    hole = max(0.0, (SORTED_OUT * part.tol - drift) * part.value / ((high - low) / 2))
    return {CAPACITOR: Quantity(CAPACITOR, part.value, low, high, "F", hole)}


def _faults(
    temperature: Any, samples: Any, seed: Any, distribution: Any, sigmas: Any
) -> Iterator[Fault]:
    if temperature is not None and not _is_range(temperature):
        yield Fault(
            "the temperature is not a range.",
            asked=f"temperature={temperature!r}",
            rule="two numbers in °C, the lower one first",
            remedy="temperature=(-20, 60), or None to leave drift out",
        )
    for name, value, least in (("samples", samples, 1), ("seed", seed, 0)):
        if isinstance(value, bool) or not isinstance(value, Integral) or int(value) < least:
            yield Fault(
                f"{name} is not a whole number of at least {least}.",
                asked=f"{name}={value!r}",
                remedy=f"a number such as {name}={65536 if least else 0}",
            )
    if distribution not in DISTRIBUTIONS:
        yield unknown_name_fault("distribution", str(distribution), DISTRIBUTIONS)
    if not isinstance(sigmas, Real) or not 0 < float(sigmas) <= 8:
        yield Fault(
            "sigmas is not a number of standard deviations.",
            asked=f"sigmas={sigmas!r}",
            rule="0 < sigmas <= 8: half a range, such as a tolerance, in standard deviations",
            remedy="sigmas=3",
        )


def _is_range(ends: Any) -> bool:
    if isinstance(ends, str) or not hasattr(ends, "__len__") or len(ends) != 2:
        return False
    return all(isinstance(end, Real) and isfinite(end) for end in ends) and ends[0] <= ends[1]

"""Evaluate how far an oscillator's frequency spreads over tolerances and temperature."""

from __future__ import annotations

from hystkit.analyses.oscillator.frequency import CAPACITOR, FrequencySpread
from hystkit.base.errors import DesignError, InputError
from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.numeric.sampling import Plan, request_faults
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
    if faults := request_faults(temperature, samples, seed, distribution, sigmas):
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

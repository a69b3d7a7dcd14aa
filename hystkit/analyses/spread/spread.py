"""The spread of a design: exact extremes, root sum square, Monte Carlo and yield."""

from __future__ import annotations

from math import isfinite
from numbers import Integral, Real
from typing import Any

from hystkit.analyses.spread.result import Spread
from hystkit.analyses.spread.signal_box import signal_quantities
from hystkit.base.errors import Fault, InputError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.numeric.sampling import DISTRIBUTIONS, Plan
from hystkit.numeric.uncertain import uncertain
from hystkit.numeric.views import Interval


def spread(
    design: Design,
    *,
    temperature: Interval | None = None,
    samples: int = 65536,
    seed: int = 0,
    distribution: str = "normal",
    sigmas: float = 3.0,
) -> Spread:
    """Examine how far the trip points of a design spread.

    Parameters
    ----------
    design : Design
        Tolerances and temperature coefficients stand at its parts and levels, a tolerance at its
        supply, limits and the offset's drift at its device; those of its signal count in the
        measurand.
    temperature : pair of float, optional
        Range in service [°C]; values and tolerances hold at 25 °C. Without it nothing drifts.
    samples : int, default 65536
        Number of Monte Carlo samples.
    seed : int, default 0
        The same seed gives the same samples.
    distribution : {"normal", "uniform", "binned"}, default "normal"
        Of each quantity over its range: normal truncated at the ends, uniform, or as normal with
        parts from which the better ones were sorted out, uniform in the outer half of their
        tolerance on either side.
    sigmas : float, default 3
        Standard deviations in half a range, for the normal distribution and for `Spread.rss`.

    Returns
    -------
    Spread
        Computes each part of the result when it is first asked for.

    Raises
    ------
    InputError
        Naming every argument that cannot be used.
    DesignError
        If drift takes a resistance, or a part of the signal, to zero, or more resistances have a
        tolerance than all combinations can be evaluated of.

    Notes
    -----
    Quantities are independent of each other; what follows from one (levels from a rail) moves
    along with it. Samples are drawn over the whole range of each quantity, drift at its farthest
    included. Static: delay and noise are outside.

    Examples
    --------
    >>> from hystkit.circuit.parts import Part
    >>> from hystkit.circuit.stage import Stage
    >>> parts = {"R_T": "100k", "R_B": "100k", "R_F": "576k"}
    >>> toleranced = {name: Part(value, tol="1 %") for name, value in parts.items()}
    >>> s = spread(Design(Stage("inverting"), toleranced, supply=5.0))
    >>> [round(end, 5) for end in s.extremes["upper"]], round(s.rss["upper"], 5)
    ([2.67482, 2.7245], 0.01642)
    """
    faults = _faults(temperature, samples, seed, distribution, sigmas)
    if faults:
        raise InputError.of("this spread", faults)
    ends = None if temperature is None else (float(temperature[0]), float(temperature[1]))
    plan = Plan(int(samples), int(seed), distribution, float(sigmas))
    box = uncertain(design, ends)
    if design.signal is not None:
        # Refuses a drift to zero, as the line above does for the parts of the stage.
        signal_quantities(design.signal, box.excursion)
    return Spread(design, box, plan, ends)


def _faults(
    temperature: Any, samples: Any, seed: Any, distribution: Any, sigmas: Any
) -> list[Fault]:
    faults = []
    if temperature is not None and not _is_range(temperature):
        faults.append(
            Fault(
                "the temperature is not a range.",
                asked=f"temperature={temperature!r}",
                rule="two numbers in °C, the lower one first",
                remedy="temperature=(-20, 60), or None to leave drift out",
            )
        )
    for name, value, least in (("samples", samples, 1), ("seed", seed, 0)):
        if not _is_whole(value, least):
            faults.append(
                Fault(
                    f"{name} is not a whole number of at least {least}.",
                    asked=f"{name}={value!r}",
                    remedy=f"a number such as {name}={65536 if least else 0}",
                )
            )
    if distribution not in DISTRIBUTIONS:
        faults.append(unknown_name_fault("distribution", str(distribution), DISTRIBUTIONS))
    if not isinstance(sigmas, Real) or not 0 < float(sigmas) <= 8:
        faults.append(
            Fault(
                "sigmas is not a number of standard deviations.",
                asked=f"sigmas={sigmas!r}",
                rule="0 < sigmas <= 8: half a range, such as a tolerance, in standard deviations",
                remedy="sigmas=3",
            )
        )
    return faults


def _is_whole(value: Any, least: int) -> bool:
    return not isinstance(value, bool) and isinstance(value, Integral) and int(value) >= least


def _is_range(ends: Any) -> bool:
    if isinstance(ends, str) or not hasattr(ends, "__len__") or len(ends) != 2:
        return False
    return all(isinstance(end, Real) and isfinite(end) for end in ends) and ends[0] <= ends[1]

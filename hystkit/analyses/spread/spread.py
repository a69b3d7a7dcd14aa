"""The spread of a design: exact extremes, root sum square, Monte Carlo and yield."""

from __future__ import annotations

from hystkit.analyses.spread.result import Spread
from hystkit.analyses.spread.signal_box import signal_quantities
from hystkit.base.errors import InputError
from hystkit.circuit.design import Design
from hystkit.numeric.sampling import Plan, request_faults
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
    if faults := request_faults(temperature, samples, seed, distribution, sigmas):
        raise InputError.of("this spread", faults)
    ends = None if temperature is None else (float(temperature[0]), float(temperature[1]))
    plan = Plan(int(samples), int(seed), distribution, float(sigmas))
    box = uncertain(design, ends)
    if design.signal is not None:
        # Refuses a drift to zero, as the line above does for the parts of the stage.
        signal_quantities(design.signal, box.excursion)
    return Spread(design, box, plan, ends)

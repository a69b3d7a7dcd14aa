"""Monte Carlo over a box: scrambled Sobol points, evaluated in blocks that stay in cache."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache
from math import isfinite
from numbers import Integral, Real
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from hystkit.base.errors import Fault, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.numeric.compile import kernel
from hystkit.numeric.extremes import KINDS
from hystkit.numeric.status import Status, status_of
from hystkit.numeric.trips import overridden
from hystkit.numeric.uncertain import Box, Quantity

#: How the value of a quantity is distributed over its range.
DISTRIBUTIONS = ("normal", "uniform", "binned")
# Small enough for temporaries to be taken from memory already in use.
_BLOCK = 8192
# Equally likely values of a quantity: few enough for their table to stay in cache as well.
_STEPS = 16384
# What decides, beside the trips themselves, whether a stage switches.
_LEVELS = ("V_CC", "V_EE", "V_OH", "V_OL", "V_PU")

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Plan:
    """How a box is sampled.

    Attributes
    ----------
    count : int
        Number of samples.
    seed : int
        Of the scrambling; the same seed gives the same samples.
    distribution : {"normal", "uniform", "binned"}
        See `blocks`.
    sigmas : float
        Half of a range in standard deviations of the normal distribution before truncation.
    """

    count: int
    seed: int
    distribution: str
    sigmas: float


@dataclass(frozen=True, eq=False)
class Samples(Mapping[str, Array]):
    """Monte Carlo samples: the same place in each array is the same sample.

    Indexed by "upper", "lower", "width" and "middle", in volts.

    Attributes
    ----------
    upper, lower : ndarray, shape (count,)
        Trip points [V], NaN where a sample cannot switch.
    status : ndarray of int8, shape (count,)
        A `Status` code for each sample.
    """

    upper: Array
    lower: Array
    status: NDArray[np.int8]

    def __getitem__(self, kind: str) -> Array:
        """Return the samples of a kind [V]."""
        if kind not in KINDS:
            raise UnknownNameError.of("this lookup", [unknown_name_fault("kind", kind, KINDS)])
        if kind in ("upper", "lower"):
            return self.upper if kind == "upper" else self.lower
        return self.upper - self.lower if kind == "width" else (self.upper + self.lower) / 2

    def __iter__(self) -> Iterator[str]:
        """Iterate over the kinds."""
        return iter(KINDS)

    def __len__(self) -> int:
        """Return the number of kinds."""
        return len(KINDS)


def sampled(design: Design, box: Box, plan: Plan) -> Samples:
    """Evaluate a design at random points of a box.

    Parameters
    ----------
    design : Design
        Gives every value that the box leaves out.
    box : Box
        The uncertain quantities.
    plan : Plan
        How many points, and how they are distributed.

    Returns
    -------
    Samples
        One for each point.
    """
    upper, lower = np.empty(plan.count), np.empty(plan.count)
    status = np.empty(plan.count, dtype=np.int8)
    trips = kernel(design.stage).trips
    for start, drawn in blocks(box, plan):
        part = slice(start, min(start + _BLOCK, plan.count))
        left = plan.count - start
        known = overridden(design, {name: row[:left] for name, row in drawn.items()})
        with np.errstate(all="ignore"):
            upper[part], lower[part] = trips(known)
        # Within a box every value is finite, and every resistance positive.
        levels = {name: value for name, value in known.items() if name in _LEVELS}
        status[part] = status_of(levels, (), upper[part], lower[part])
    if status.any():
        upper[status != Status.OK] = lower[status != Status.OK] = np.nan
    return Samples(upper, lower, status)


def blocks(box: Box, plan: Plan) -> Iterator[tuple[int, dict[str, Array]]]:
    r"""Draw values, one block after the other.

    Parameters
    ----------
    box : Box
        The uncertain quantities.
    plan : Plan
        "normal": normal with the half range as `sigmas` standard deviations, truncated at the ends
        of the range; where the stated value is not in the middle, each side has its own half
        range and half of the samples. "uniform": every value in the range alike. "binned": as
        normal, but parts with a tolerance are uniform in the outer half of it, the better ones
        having been sorted out of the lot.

    Yields
    ------
    tuple of int and dict
        Number of the first sample, and name to values, shape (block,). The arrays are used again
        for the next block.

    Notes
    -----
    Each quantity takes 16384 equally likely values, the quantiles of its distribution in the
    middle of as many equal steps; see `values`.
    """
    if not box.quantities:
        yield from ((start, {}) for start in range(0, plan.count, _BLOCK))
        return
    from scipy.stats import qmc  # slow to load, and only samples need it

    tables = [values(quantity, plan) for quantity in box.quantities.values()]
    points = qmc.Sobol(len(tables), scramble=True, seed=np.random.default_rng(plan.seed))
    first = np.ascontiguousarray(_steps(points.random(_BLOCK)))
    steps, rows = first.copy(), np.empty(first.shape)
    for start in range(0, plan.count, _BLOCK):
        if start:
            # A Sobol sequence is linear in binary digits: one point tells all of its block.
            head = _steps(points.random(1))
            points.fast_forward(_BLOCK - 1)
            np.bitwise_xor(first, first[:, :1] ^ head, out=steps)
        for table, step, row in zip(tables, steps, rows, strict=True):
            np.take(table, step, out=row, mode="clip")
        yield start, dict(zip(box.quantities, rows, strict=True))


def _steps(shares: Array) -> NDArray[np.intp]:
    """Numbers of the steps that shares in [0, 1) fall into, one row a quantity."""
    return (shares * _STEPS).astype(np.intp).T


def values(quantity: Quantity, plan: Plan) -> Array:
    """Give the values that a quantity takes, all equally likely.

    Parameters
    ----------
    quantity : Quantity
        With its range.
    plan : Plan
        With the distribution.

    Returns
    -------
    ndarray, shape (16384,)
        Ascending, in the unit of the quantity.
    """
    if plan.distribution == "uniform":
        return (quantity.low + quantity.high) / 2 + quantity.half * _flat(0.0)
    is_binned = plan.distribution == "binned" and quantity.hole > 0
    deviation = _flat(quantity.hole) if is_binned else _normal(plan.sigmas)
    below, above = quantity.nominal - quantity.low, quantity.high - quantity.nominal
    found: Array = quantity.nominal + deviation * np.where(deviation < 0, below, above)
    return found


def _flat(hole: float) -> Array:
    """Deviation in half ranges: uniform on both sides of an empty middle."""
    lower = hole + (1 - hole) * (1 - 2 * _shares())
    return np.concatenate([-lower, lower[::-1]])


@lru_cache(maxsize=8)
def _normal(sigmas: float) -> Array:
    """Deviation in half ranges: normal, truncated at so many sigmas."""
    tail = ndtr(-sigmas)
    lower = ndtri(tail + (1 - 2 * tail) * _shares()) / sigmas
    return np.concatenate([lower, -lower[::-1]])


def _shares() -> Array:
    """Middles of the steps in the lower half of a distribution."""
    return (np.arange(_STEPS // 2) + 0.5) / _STEPS


def request_faults(
    temperature: Any, samples: Any, seed: Any, distribution: Any, sigmas: Any
) -> list[Fault]:
    """Check what a spread is asked for.

    Parameters
    ----------
    temperature : object
        Range in service [°C], or None.
    samples, seed, distribution, sigmas : object
        Of a `Plan`, as given.

    Returns
    -------
    list of Fault
        One for each argument that cannot be used.
    """
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

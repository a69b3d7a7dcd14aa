"""The least and the greatest widths that meet requirements, found on grids that close in."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Generic, TypeVar

import numpy as np
from numpy.typing import NDArray

#: Widths tried in the first call, spaced by a ratio, and for each requirement in the others.
_FIRST, _NEXT = 96, 32
_STEPS = 3
#: Shortest width that is tried, as a share of the longest.
_SHORTEST = 1e-6

Widths = NDArray[np.float64]
Flags = NDArray[np.bool_]
Outcome = TypeVar("Outcome")


@dataclass(frozen=True)
class Requirement(Generic[Outcome]):
    """Something that the outcome at a width has to meet.

    Attributes
    ----------
    meets : callable
        Tells for the outcome at an array of widths which of them meet it.
    least : bool
        Whether the least width from which on it is met is wanted, or the greatest up to which.
    """

    meets: Callable[[Outcome], Flags]
    least: bool


def first_widths(longest: float) -> Widths:
    """Give the widths to begin with.

    Parameters
    ----------
    longest : float
        Longest width that is tried.

    Returns
    -------
    ndarray
        Ascending, spaced by a ratio.
    """
    return np.geomspace(_SHORTEST * longest, longest, _FIRST)


def limiting_widths(
    evaluate: Callable[[Widths], Outcome],
    requirements: Sequence[Requirement[Outcome]],
    begun: tuple[Widths, Outcome],
) -> list[float]:
    """Find the limiting width of each requirement.

    Parameters
    ----------
    evaluate : callable
        Gives the outcome at an array of widths; called a few times only, for all requirements.
    requirements : sequence of Requirement
        What the outcome has to meet.
    begun : pair of ndarray and outcome
        The widths to begin with, and the outcome at them.

    Returns
    -------
    list of float
        Of a least width zero where every width will do and infinite where the longest will not;
        of a greatest width infinite where every width will do and zero where the shortest will
        not. Between them the last width of the grid that meets the requirement.
    """
    widths, outcome = begun
    found = [_close(one, widths, np.asarray(one.meets(outcome))) for one in requirements]
    for _ in range(_STEPS):
        between = [ends for ends in found if isinstance(ends, tuple)]
        grids = [np.linspace(min(ends), max(ends), _NEXT) for ends in between]
        if not grids:
            break
        widths = np.concatenate(grids)
        outcome, start = evaluate(widths), 0
        for place, one in enumerate(requirements):
            if isinstance(found[place], tuple):
                own = slice(start, start := start + _NEXT)
                found[place] = _close(one, widths[own], np.asarray(one.meets(outcome))[own])
    return [ends[1] if isinstance(ends, tuple) else ends for ends in found]


def _close(
    requirement: Requirement[Outcome], widths: Widths, meets: Flags
) -> float | tuple[float, float]:
    """Give the neighbours between which it changes, failing and good, or the limit itself."""
    least = requirement.least
    failed = np.flatnonzero(~meets)
    if failed.size == 0:
        return 0.0 if least else math.inf
    at = int(failed[-1 if least else 0])
    beyond = at + 1 if least else at - 1
    if beyond in (-1, widths.size):
        return math.inf if least else 0.0
    return float(widths[at]), float(widths[beyond])

"""Sizing three free parts, against every combination of the same values in the same run."""

from __future__ import annotations

from itertools import product
from typing import Any

import numpy as np

import hystkit as hk
from hystkit.circuit.preferred import values
from hystkit.numeric.compile import kernel
from hystkit.numeric.tolerances import toleranced
from tests.benchmarks.measure import Comparison, alternating

STAGE = hk.Stage("inverting")
FREE = ("R_T", "R_B", "R_F")
DECADES = (1e3, 1e6)
TOL = 0.01


def comparisons() -> list[Comparison]:
    return [
        compared("E96", numbers, rounds=3, at_least=4.0),
        compared("E96", windows, rounds=1, at_least=10.0),
    ]


def numbers(turn: int) -> dict[str, Any]:
    """Wanted trips that change from round to round [V]."""
    return {"upper": 2.71 + 0.013 * turn, "lower": 2.33 - 0.007 * turn}


def windows(turn: int) -> dict[str, Any]:
    """The same as windows over all tolerances."""
    return {name: (at - 0.06, at + 0.06) for name, at in numbers(turn).items()}


def compared(series: str, wanted: Any, *, rounds: int, at_least: float) -> Comparison:
    """Time of the search and of visiting every combination, which have to agree."""
    found: dict[str, dict[int, float]] = {"search": {}, "every": {}}

    def search(turn: int) -> None:
        found["search"][turn] = searched(series, wanted(turn))

    def every(turn: int) -> None:
        found["every"][turn] = visited(series, wanted(turn))

    time, reference = alternating(search, every, rounds=rounds)
    for turn, best in found["every"].items():
        assert np.isclose(found["search"][turn], best, rtol=1e-9, atol=1e-12), (series, turn)
    subject = f"{series}, 3 decades, 3 parts, {wanted.__name__}"
    return Comparison(subject, time, "every combination", reference, limit=1.0, at_least=at_least)


def searched(series: str, wanted: dict[str, Any]) -> float:
    """Smallest error that the search finds."""
    found = hk.size(STAGE, supply=5.0, series=series, ranges=DECADES, tol=TOL, suggest=False,
                    **wanted)  # fmt: skip
    return found[0].worst_error if found[0].target.has_windows else found[0].error


def visited(series: str, wanted: dict[str, Any]) -> float:
    """Smallest error over every combination, in blocks that stay in cache."""
    axis = np.array(values(series, *DECADES))
    template = hk.Design(STAGE, {n: hk.Part(1e4, tol=TOL) for n in FREE}, supply=5.0)
    ends = [wanted[n] if isinstance(wanted[n], tuple) else (wanted[n],) * 2 for n in wanted]
    is_window = ends[0][0] < ends[0][1]
    box = toleranced(template) if is_window else {}
    corners = [
        {n: end / 1e4 for n, end in zip(box, corner, strict=True)}
        for corner in product(*box.values())
    ]
    best = np.inf
    rows, columns = (grid.ravel() for grid in np.meshgrid(axis, axis))
    for r_t in axis:
        worst: Any = 0.0
        for corner in corners:
            point = {"R_T": r_t, "R_B": rows, "R_F": columns}
            moved = {n: value * corner.get(n, 1.0) for n, value in point.items()}
            trips = kernel(STAGE).trips({**template.values, **moved})
            for trip, (a, b) in zip(trips, ends, strict=True):
                unit = (b - a) / 2 if is_window else 1.0
                worst = np.maximum(worst, np.abs(trip - (a + b) / 2) / unit)
        best = min(best, float(worst.min()))
    return best

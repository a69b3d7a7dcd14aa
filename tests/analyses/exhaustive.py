"""The oracle of the sizing tests: every combination of the grid, every corner of the tolerances."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

import hystkit as hk
from hystkit.circuit.preferred import values
from hystkit.numeric.operating import input_resistance, operating_point
from hystkit.numeric.tolerances import toleranced

Array = NDArray[np.float64]
Pair = tuple[float, float]


def grid(free: tuple[str, ...], series: str, ranges: Pair) -> dict[str, Array]:
    """Every combination: part to values, shape (combinations,)."""
    axes = [np.array(values(series, *ranges)) for _ in free]
    return dict(zip(free, map(np.ravel, np.meshgrid(*axes, indexing="ij")), strict=True))


def nominal_errors(
    template: hk.Design, points: dict[str, Array], upper: float, lower: float
) -> Array:
    """Largest distance of a trip from what is wanted [V]; infinite without trips."""
    trips = hk.trip_points(template, **points)
    errors = np.maximum(abs(trips.upper - upper), abs(trips.lower - lower))
    return np.nan_to_num(errors, nan=np.inf)


def worst_errors(
    template: hk.Design,
    points: Mapping[str, Any],
    upper: Pair,
    lower: Pair,
    excursion: float = 0.0,
    scaled: bool = False,
) -> Array:
    """Largest distance in half-widths of the windows, over every corner of the box.

    With `scaled` the windows move with V_CC.
    """
    box = toleranced(template, excursion)
    worst: Any = 0.0
    for ends in product(*box.values()):
        corner: dict[str, Any] = dict(zip(box, ends, strict=True))
        scale = corner.get("V_CC", template.supply.v_cc) / template.supply.v_cc if scaled else 1.0
        for name, nominal in points.items():
            deviation = corner.get(name, template.parts[name].value) / template.parts[name].value
            corner[name] = nominal * deviation
        trips = hk.trip_points(template, **corner)
        for trip, (a, b) in ((trips.upper, upper), (trips.lower, lower)):
            off = abs(trip - scale * (a + b) / 2) / (scale * (b - a) / 2)
            worst = np.maximum(worst, np.nan_to_num(off, nan=np.inf))
    return np.asarray(worst)


def loads(template: hk.Design, points: Mapping[str, Any]) -> dict[str, Array]:
    """Largest supply current, input resistance and output current, in both states at both trips."""
    trips = hk.trip_points(template, **points)
    known = {**template.values, **points}
    found: dict[str, Any] = dict.fromkeys(
        ("supply_current", "input_resistance", "output_current"), 0.0
    )
    for state in ("high", "low"):
        for pin in ("plus", "minus"):
            seen = input_resistance(template.stage, pin, state, known)
            found["input_resistance"] = np.maximum(found["input_resistance"], seen)
        for trip in (trips.upper, trips.lower):
            at = operating_point(template.stage, state, known, trip)
            for name, value in (
                ("supply_current", at.supply_current),
                ("output_current", abs(at.output_current)),
            ):
                found[name] = np.fmax(found[name], value)
    return found

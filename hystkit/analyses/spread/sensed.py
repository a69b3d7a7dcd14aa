"""Extremes in the measurand, over the box of a design and that of its signal together."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from math import nan

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.spread.bounds import BISECTION, CONTROL_POINTS, CORNERS, Bound, bounds
from hystkit.analyses.spread.reader import Reader, grid, hull
from hystkit.circuit.design import Design
from hystkit.numeric.trips import trip_points
from hystkit.numeric.views import Interval

Array = NDArray[np.float64]

#: What an extreme in the measurand rests on beside the proofs of `bounds`; see `sensed_bounds`.
CELLS, GRID = "cells", "grid"
# What a reading needs of the trips.
_KINDS = ("upper", "lower", "width")
# Into how many cells the range of the lower trip point is cut; fewer where many boxes are, too.
_CELLS, _FEW_CELLS = 512, 64
# Into how many parts the range of a parameter is cut where corners are not proved to suffice.
_PARTS = 8
# A box is cut into so many slices where the gap is more than this share of the range.
_SLICES, _SMALL_GAP = 8, 0.05
# Below this share a difference is rounding.
_ROUNDING = 1e-12
_IMPOSSIBLE = Bound((nan, nan), CORNERS, nan, {}, {})


@dataclass(frozen=True)
class View:
    """The trips over a box, as a signal reads them.

    Attributes
    ----------
    scale : float
        From the voltages of this view to those at the nominal supply [1].
    bounds : mapping of str to Bound
        Of "upper", "lower" and "width" at least [V].
    """

    scale: float
    bounds: Mapping[str, Bound]

    def ends(self, kind: str) -> list[tuple[float, dict[str, float]]]:
        """Give both extremes of a kind, referred to the nominal supply [V], and where they lie."""
        bound = self.bounds[kind]
        places = (bound.at_lowest, bound.at_highest)
        return [(self.scale * end, at) for end, at in zip(bound.interval, places, strict=True)]


def views(
    design: Design, box: dict[str, Interval], stated: Mapping[str, Bound]
) -> tuple[View, ...]:
    """Look at the trips as the signal of a design reads them.

    Parameters
    ----------
    design : Design
        With a signal.
    box : dict of str to pair of float
        Lowest and highest value by name.
    stated : mapping of str to Bound
        `bounds` of the same design and box.

    Returns
    -------
    tuple of View
        One; or two, at either end of V_CC, where the signal shares an uncertain supply.

    Notes
    -----
    A signal in proportion to V_CC reads the share V/V_CC. With all else held, a trip point, the
    width and the middle are a + b V_CC, of which the share a/V_CC + b is monotone in V_CC: its
    extremes lie at the ends of the supply. What follows the supply on both sides cancels there.
    """
    if design.signal is None or not design.signal.ratiometric or "V_CC" not in box:
        return (View(1.0, stated),)
    nominal = design.supply.v_cc
    return tuple(
        View(nominal / v, bounds(design, box | {"V_CC": (v, v)}, _KINDS)) for v in box["V_CC"]
    )


def sensed_bounds(
    reader: Reader,
    design: Design,
    box: dict[str, Interval],
    stated: Mapping[str, Bound],
    moves: Mapping[str, float],
) -> dict[str, Bound]:
    """Exact or guaranteed ranges of "low", "high" and "width" in the measurand.

    Parameters
    ----------
    reader : Reader
        The signal with its uncertain parameters.
    design : Design
        That it belongs to.
    box : dict of str to pair of float
        Lowest and highest value by name.
    stated : mapping of str to Bound
        `bounds` of the same design and box.
    moves : mapping of str to float
        How far each quantity of the box moves the lower trip point, roughly [V].

    Returns
    -------
    dict
        To `Bound`, in the unit of the signal; all NaN where not every combination switches, or a
        trip point has no reading. Proofs are those of `bounds` and

        - "corners": monotone in each quantity and each parameter, `Reader.is_known` has the proof;
        - "cells": nothing lies outside, and an end lies within `gap` of a value that is attained;
        - "grid": the farthest values on a grid of the parameters of a signal that this package
          does not know; a value between its points may lie outside.

    Notes
    -----
    Along a straight line the width is the width in volts times the slope. Elsewhere the range of
    the lower trip point is cut into cells, in each of which the quantity at either end of the
    width is bounded by the ends of the cell, the widths and the range of the upper trip point;
    this for every corner of the parameters where these are proved to suffice, else for parts of
    their ranges within each of which the reading is monotone in each parameter. Where that leaves
    more than a small gap, the box is cut along the quantity that moves the trip points most, for
    the two move together.
    """
    seen = views(design, box, stated)
    ends = _ends(reader, seen)
    if ends is None:
        return dict.fromkeys(("low", "high", "width"), _IMPOSSIBLE)
    low, high = ends
    span = (low.interval[0], high.interval[1])
    width = _width(reader, design, [seen], span)
    small = _SMALL_GAP * (width.interval[1] - width.interval[0])
    free = [name for name in moves if name != "V_CC" or len(seen) == 1]
    if free and width.gap > small and reader.widths_settle(*span):
        cut = max(free, key=lambda name: abs(moves[name]))
        slices = [views(design, one, bounds(design, one, _KINDS)) for one in _slices(box, cut)]
        width = _width(reader, design, slices, span)
    return {"low": low, "high": high, "width": width}


def sensed_ends(
    reader: Reader, design: Design, box: dict[str, Interval], stated: Mapping[str, Bound]
) -> dict[str, Bound]:
    """Exact or guaranteed ranges of "low" and "high" alone, without the effort for the width.

    Parameters
    ----------
    reader, design, box, stated
        As for `sensed_bounds`.

    Returns
    -------
    dict
        To `Bound`, as `sensed_bounds` gives them.
    """
    low, high = _ends(reader, views(design, box, stated)) or (_IMPOSSIBLE, _IMPOSSIBLE)
    return {"low": low, "high": high}


def _ends(reader: Reader, seen: Sequence[View]) -> tuple[Bound, Bound] | None:
    """Both ends; None where not every combination switches, or a trip point has no reading."""
    if any(np.isnan(view.bounds["width"].interval[0]) for view in seen):
        return None
    kinds = ("upper", "lower") if reader.signal.decreasing else ("lower", "upper")
    low, high = (_end(reader, seen, kind) for kind in kinds)
    return None if any(np.isnan(bound.interval[0]) for bound in (low, high)) else (low, high)


def _end(reader: Reader, seen: Sequence[View], kind: str) -> Bound:
    """Range of the reading of one trip point."""
    places = [place for view in seen for place in view.ends(kind)]
    read = reader.read([volts for volts, _ in places])
    proof = CORNERS if reader.is_known else GRID
    return _attained(reader, read, [at for _, at in places], proof)


def _width(
    reader: Reader, design: Design, parts: Sequence[Sequence[View]], span: Interval
) -> Bound:
    """Range of the distance of both readings, which lie within a span, over parts of a box."""
    seen = [view for part in parts for view in part]
    places = [at for view in seen for kind in view.bounds for _, at in view.ends(kind)]
    found = _attained(reader, _widths_at(reader, design, places), places, CELLS)
    left, ranges = reader.carried(_ranges(seen))
    slopes = left.slopes(ranges["lower"][0], ranges["upper"][1])
    if slopes is None:
        cells = max(_CELLS // len(parts), _FEW_CELLS)
        bounded = [_in_cells(*reader.carried(_ranges(part)), span, cells) for part in parts]
        least, most = hull(end for interval in bounded for end in interval)
        proof = CELLS
    else:
        least, most = slopes.min() * ranges["width"][0], slopes.max() * ranges["width"][1]
        proofs = [view.bounds["width"].proof for view in seen]
        proof = max(proofs, key=(CORNERS, CONTROL_POINTS, BISECTION).index)
    gap = float(max(found.interval[0] - least, most - found.interval[1]))
    return replace(
        found,
        interval=(float(least), float(most)),
        proof=proof if reader.is_known else GRID,
        gap=gap if gap > _ROUNDING * most else 0.0,
    )


def _ranges(seen: Sequence[View]) -> dict[str, Interval]:
    """Ranges of the trip points and of the width, referred to the nominal supply [V]."""
    return {kind: hull(volts for view in seen for volts, _ in view.ends(kind)) for kind in _KINDS}


def _slices(box: dict[str, Interval], name: str) -> list[dict[str, Interval]]:
    """Cut a box along one quantity."""
    cuts = np.linspace(*box[name], _SLICES + 1).tolist()
    return [box | {name: pair} for pair in pairwise(cuts)]


def _widths_at(reader: Reader, design: Design, places: Sequence[dict[str, float]]) -> Array:
    """Distance of both readings at points of the box, for all points of the parameters."""
    trips = trip_points(design, **{n: np.array([at[n] for at in places]) for n in places[0]})
    shares = design.supply.v_cc / trips.v_cc if reader.signal.ratiometric else 1.0
    up, down = (reader.read(trip * shares + np.zeros(len(places))) for trip in
                (trips.upper, trips.lower))  # fmt: skip
    return np.abs(up - down)


def _attained(
    reader: Reader, values: Array, places: Sequence[dict[str, float]], proof: str
) -> Bound:
    """Extremes of values, shape (points, places), with where they are attained."""
    if not np.all(np.isfinite(values)):
        return _IMPOSSIBLE
    found, at = [], []
    for flat in (int(values.argmin()), int(values.argmax())):
        point, place = np.unravel_index(flat, values.shape)
        found.append(float(values[point, place]))
        own = {reader.labels[name]: float(row[point, 0]) for name, row in reader.points.items()}
        at.append({**places[int(place)], **own})
    return Bound((found[0], found[1]), proof, 0.0, at[0], at[1])


def _in_cells(
    reader: Reader, ranges: Mapping[str, Interval], span: Interval, cells: int
) -> Interval:
    """Bound the width where the signal bends."""
    whole = not reader.is_known or reader.widths_settle(*span)
    (l0, l1), (u0, u1), (w0, w1) = (ranges[kind] for kind in ("lower", "upper", "width"))
    cuts = np.linspace(l0, l1, (cells if whole else _FEW_CELLS) + 1)
    start, stop = cuts[:-1], cuts[1:]
    nearest, farthest = np.maximum(start + w0, u0), np.minimum(stop + w1, u1)
    real = nearest <= farthest
    points = reader.points if whole else grid(reader.parameters, _PARTS + 1)
    sign = -1.0 if reader.signal.decreasing else 1.0
    at, near, far = (sign * reader.read(volts, points) for volts in (cuts, nearest, farthest))
    # A cell may be longer than the width; its upper end then stops at the nearest.
    stops = np.where(stop <= nearest, at[:, 1:], near)
    starts = at[:, :-1]
    if not whole:
        axes = len(reader.parameters)
        (near, _), (_, stops) = _over_parts(near, axes), _over_parts(stops, axes)
        (_, far), (starts, _) = _over_parts(far, axes), _over_parts(starts, axes)
    lowest, highest = (near - stops)[:, real], (far - starts)[:, real]
    return max(float(lowest.min()), 0.0), float(highest.max())


def _over_parts(values: Array, axes: int) -> tuple[Array, Array]:
    """Lowest and highest over the corners of each part, from values on the grid of its corners."""
    low = high = values.reshape(*(_PARTS + 1,) * axes, -1)
    for axis in range(axes):
        before, after = (
            tuple(slice(None) if a != axis else cut for a in range(axes))
            for cut in (slice(None, -1), slice(1, None))
        )
        low = np.minimum(low[before], low[after])
        high = np.maximum(high[before], high[after])
    return low.reshape(-1, values.shape[-1]), high.reshape(-1, values.shape[-1])

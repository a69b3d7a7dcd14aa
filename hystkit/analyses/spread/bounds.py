"""Exact extremes of the four formulas over a box, each with its proof."""

from __future__ import annotations

import heapq
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import count
from math import nan

from hystkit.circuit.design import Design
from hystkit.numeric.control import ControlNet, control_net
from hystkit.numeric.extremes import KINDS, Corners, corners
from hystkit.numeric.fractions import Fraction, fractions, gains
from hystkit.numeric.views import Interval

#: What an extreme rests on; see `Bound`.
CORNERS, CONTROL_POINTS, BISECTION = "corners", "control points", "bisection"
#: Bisection ends where the bracket is this small a share of the largest value met.
CLOSE_ENOUGH = 1e-10
#: Below this share a difference is rounding.
_ROUNDING = 1e-13
#: Bisection also ends after so many boxes; the gap that is left is stated.
_MAX_BOXES = 4000
#: Nets with more numbers than this are not built.
_MAX_POINTS = 3_000_000


@dataclass(frozen=True)
class Bound:
    """The range of one formula over a box.

    Attributes
    ----------
    interval : pair of float
        Lowest and highest value [V]; nothing in the box lies outside.
    proof : {"corners", "control points", "bisection"}
        How it is known: the formula is monotone in each quantity by itself; or its control points
        over the whole box reach no farther than its corners; or the box was divided until upper
        and lower bounds met within `gap`.
    gap : float
        Largest distance of an end of the interval from a value that is attained [V].
    at_lowest, at_highest : dict of str to float
        The quantities in the box where the extremes, or the nearest attained values, lie.
    """

    interval: Interval
    proof: str
    gap: float
    at_lowest: dict[str, float]
    at_highest: dict[str, float]


@dataclass(frozen=True)
class _Maximum:
    bound: float
    best: float
    at: dict[str, float]
    boxes: int


def bounds(
    design: Design, box: dict[str, Interval], kinds: Sequence[str] = KINDS
) -> dict[str, Bound]:
    """Exact range of upper, lower, width and middle over a box.

    Parameters
    ----------
    design : Design
        Gives every value that the box leaves out.
    box : dict of str to pair of float
        Lowest and highest value by name.
    kinds : sequence of str, default all four
        Which of them, "width" among them.

    Returns
    -------
    dict
        "upper", "lower", "width" and "middle" to `Bound`; all NaN where not every combination in
        the box switches.

    Notes
    -----
    `upper` and `lower` take their extremes in corners, see `hystkit.numeric.extremes.corners`.
    `width` and `middle` are a difference and a mean of two fractions. In a resistance that occurs
    in the reduced fraction to the first power only they are linear-fractional too; where that
    holds for all uncertain resistances (a push-pull output with equal resistances that are not
    uncertain, no load), corners suffice again. Otherwise control points bound them, in the whole
    box and, where that is not enough, in ever smaller parts of it.
    """
    found = corners(design, box)
    formulas = fractions(design, box)
    ranges = {kind: _bound(kind, formulas[kind], found, design, box) for kind in kinds}
    if found.possible and ranges["width"].interval[0] > -ranges["width"].gap:
        return ranges
    impossible = Bound((nan, nan), CORNERS, nan, {}, {})
    return dict.fromkeys(kinds, impossible)


def is_monotone(fraction: Fraction, design: Design, box: dict[str, Interval]) -> bool:
    """Tell whether corners suffice, from the form of a fraction alone.

    Parameters
    ----------
    fraction : Fraction
        Reduced.
    design : Design
        Tells which symbols the box moves.
    box : dict of str to pair of float
        Lowest and highest value by name.

    Returns
    -------
    bool
        Whether every resistance of the box occurs to the first power at most.
    """
    moved = (symbol for name in box for symbol in gains(design, name))
    return all(fraction.degrees.get(symbol, 0) < 2 for symbol in moved)


def _bound(
    kind: str, fraction: Fraction, found: Corners, design: Design, box: dict[str, Interval]
) -> Bound:
    if not found.possible or kind in ("upper", "lower") or is_monotone(fraction, design, box):
        at_lowest, at_highest = found.at(kind) if found.possible else ({}, {})
        return Bound(found.interval(kind), CORNERS, 0.0, at_lowest, at_highest)
    net = control_net(fraction, design, box)
    high, low = _maximum(net), _maximum(net.mirrored())
    gap = max(high.bound - high.best, low.bound - low.best)
    proof = CONTROL_POINTS if high.boxes == low.boxes == 1 else BISECTION
    nominal = {name: sum(pair) / 2 for name, pair in box.items()}
    return Bound(
        (-low.bound, high.bound), proof, gap, {**nominal, **low.at}, {**nominal, **high.at}
    )


def _maximum(net: ControlNet) -> _Maximum:
    """Best-first bisection: the box with the highest bound is always the one that is divided."""
    scale = float(abs(net.highest).max())
    best = net
    number = count(1)
    heap = [(-net.bound, 0, net)]
    boxes = 1
    while boxes < _MAX_BOXES:
        bound, _, top = heap[0]
        close = CLOSE_ENOUGH if boxes > 1 else _ROUNDING
        if -bound - best.best <= close * scale:
            break
        heapq.heappop(heap)
        for half in top.halved(top.axis_to_halve()):
            boxes += 1
            best = max(best, half, key=lambda one: one.best)
            heapq.heappush(heap, (-half.bound, next(number), half))
    highest = max(-heap[0][0], best.best)
    if highest - best.best <= _ROUNDING * scale:
        highest = best.best
    return _Maximum(highest, best.best, best.best_at, boxes)

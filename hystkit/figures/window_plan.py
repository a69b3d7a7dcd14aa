"""What a width window says in words, in what order its bounds stand, and how far its axis goes."""

from __future__ import annotations

import math

from hystkit.figures.graduation import outward, step_for
from hystkit.figures.lettering import MINUS, short_unit, written
from hystkit.review.window import Bound, WidthWindow

#: Order of the rows, so that none changes its place while a value moves; others follow.
_ORDER = (
    "noise", "hum", "load step", "all disturbances", "offset",
    "cycling", "minimum on time", "minimum off time", "swing", "accuracy", "reach",
)  # fmt: skip
#: Room right of the last value that has to be seen, and how far a further ceiling may lie.
_BEYOND, _FAR = 1.1, 1.6
#: Steps of the length of the axis, as a share of it.
_STEPS = 10
_DIGITS = 4


def ordered(found: WidthWindow) -> tuple[Bound, ...]:
    """Return the bounds as they stand below each other: floors, then ceilings."""

    def place(bound: Bound) -> tuple[bool, int]:
        known = bound.name in _ORDER
        return bound.kind == "ceiling", _ORDER.index(bound.name) if known else len(_ORDER)

    return tuple(sorted(found.bounds, key=place))


def extent(found: WidthWindow) -> float:
    """Return the width at which the axis ends, which changes only in coarse steps.

    Floors, the lowest ceiling, the target and the width of the design are always seen; of the
    other ceilings those that are not far beyond.
    """
    ceilings = sorted(b.width for b in found.bounds if b.kind == "ceiling" and b.width > 0)
    seen = [found.width, found.target or 0.0, *ceilings[:1]]
    seen += [b.width for b in found.bounds if b.kind == "floor"]
    end = max((width for width in seen if math.isfinite(width)), default=0.0)
    far = _FAR * end
    end = max([end, *(width for width in ceilings if width <= far)])
    if not end > 0:
        return 1.0
    return outward(0.0, _BEYOND * end, step_for(end, _STEPS))[1]


def unit_of(found: WidthWindow) -> str:
    """Return the unit of every width, cut where it is too long to stand beside a mark."""
    signal = found.asked.axis.signal
    return found.unit if signal is None else short_unit(signal)


def shown(width: float, unit: str) -> str:
    """Return a width, or where its end lies, with the unit; only volts take a prefix."""
    if unit == "V":
        return written(width, unit, _DIGITS)
    return f"{width:.{_DIGITS}g} {unit}".rstrip().replace("-", MINUS)


def bound_text(bound: Bound, unit: str) -> str:
    """Return what stands beside the mark of a bound."""
    if bound.hopeless:
        return "no width"
    if bound.kind == "floor":
        return f"≥ {shown(bound.width, unit)}" if bound.width > 0 else "any width"
    return f"≤ {shown(bound.width, unit)}" if math.isfinite(bound.width) else "any width"


def verdict(found: WidthWindow) -> str:
    """Return which widths meet everything, or why none does."""
    if found.feasible is not None:
        low, high = found.feasible
        if not math.isfinite(high):
            return (
                f"feasible from {shown(low, unit_of(found))}"
                if low > 0
                else "any width is feasible"
            )
        if low == 0:
            return f"feasible up to {shown(high, unit_of(found))}"
        return f"feasible {_span(low, high, unit_of(found))}"
    hopeless = [bound for bound in (found.floor, found.ceiling) if bound and bound.hopeless]
    if hopeless:
        return f"no width meets {' and '.join(bound.name for bound in hopeless)}"
    floor, ceiling = found.floor, found.ceiling
    assert floor is not None
    assert ceiling is not None
    return (
        f"no width meets both {floor.name}, {bound_text(floor, unit_of(found))},"
        f" and {ceiling.name}, {bound_text(ceiling, unit_of(found))}"
    )


def gap(found: WidthWindow) -> tuple[float, float] | None:
    """Return the binding ceiling and the binding floor of an empty window, where both are seen."""
    pair = (found.ceiling, found.floor)
    if found.feasible is not None or any(bound is None or bound.hopeless for bound in pair):
        return None
    ceiling, floor = pair
    assert ceiling is not None
    assert floor is not None
    return ceiling.width, floor.width


def described(found: WidthWindow) -> str:
    """Return one sentence on the whole window."""
    where = "inside" if found.inside else "outside"
    words = [verdict(found)]
    if found.feasible is not None:
        binding = [bound.name for bound in (found.floor, found.ceiling) if bound is not None]
        words += [f"bound by {' and '.join(binding)}"] if binding else []
    if found.target is not None:
        words.append(f"target {shown(found.target, unit_of(found))}")
    words.append(f"the design has {shown(found.width, unit_of(found))}, {where}")
    words += [f"{bound.name} {bound_text(bound, unit_of(found))}" for bound in ordered(found)]
    return f"Width of {found.asked.axis.name}: {'; '.join(words)}."


def _span(low: float, high: float, unit: str) -> str:
    first, last = shown(low, unit), shown(high, unit)
    number, _, tail = first.partition(" ")
    return f"{number if last.endswith(f' {tail}') else first} to {last}"

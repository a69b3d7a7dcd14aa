"""What of the ruler stays while the trips move: the range of the axis, its ticks and rows."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from hystkit.circuit.signals import Signal
from hystkit.figures.graduation import (
    Scale,
    number,
    outward,
    roundness,
    step_for,
    ticks,
)
from hystkit.figures.lettering import (
    MINUS,
    one_line,
    prefix_for,
    short_unit,
    span_in_measurand,
    width_px,
    written_span,
)
from hystkit.figures.placement import Span, Want, place, thinned
from hystkit.figures.theme import symbol
from hystkit.numeric.views import Levels

EDGE = 8.0
NO_TRIPS = "no trip points with these values"
_GUTTER = (62.0, 128.0)
_COLUMN = (64.0, 128.0)
_TICK_GAP = 7.0


@dataclass(frozen=True)
class Ticks:
    """Ticks of one edge of the ruler [px], and the numbers at some of them."""

    major: tuple[float, ...]
    minor: tuple[float, ...]
    numbers: tuple[tuple[float, str], ...]


@dataclass(frozen=True)
class Plan:
    """The background of a ruler; equal plans look the same.

    Attributes
    ----------
    rails : tuple of (float, str)
        Supply rails and their names; empty where the supply makes no sense.
    scale : Scale
        Volts -> px.
    volts : Ticks
        Lower edge.
    volt_unit : str
        Unit of its numbers.
    measurand : Ticks or None
        Upper edge; None without a signal description.
    measurand_name, measurand_span : str
        What stands left and right of it.
    signal_span, common_mode : tuple of float or None
        Bars [V].
    message : str
        What takes the place of the trips; empty where the stage switches.
    levels_row : bool
        Whether there are output levels or a reference to show.
    """

    rails: tuple[tuple[float, str], ...]
    scale: Scale
    volts: Ticks
    volt_unit: str
    measurand: Ticks | None
    measurand_name: str
    measurand_span: str
    signal_span: Span | None
    common_mode: Span | None
    message: str
    levels_row: bool


@dataclass(frozen=True)
class Rows:
    """Heights on the page [px], from the top; texts by their baseline, bars by their middle."""

    rail_names: float
    rail_top: float
    measurand_numbers: float
    span_bar: float
    trip_names: float
    trip_markers: float
    width: float
    axis: float
    volt_numbers: float
    below: float
    common_mode: float
    margin: float
    level_markers: float
    level_names: float
    rail_bottom: float
    height: float


def finite(*values: float | None) -> list[float]:
    """Return those of the values that can be drawn."""
    return [float(v) for v in values if v is not None and math.isfinite(v)]


def switches(levels: Levels) -> bool:
    """Whether there are trips to draw."""
    return levels.ok and len(finite(levels.lower, levels.upper)) == 2 and _supplied(levels)


def plan_for(levels: Levels, width_px: int) -> Plan:
    """Return the background for these levels."""
    low, high = _range(levels)
    factor, unit = prefix_for(low, high, "V")
    names = [_signal_name(levels.signal), "common mode", f"voltage / {unit}"]
    start = EDGE + _room(names, _GUTTER) + 12
    span = _drawable(levels.signal_span)
    reach = _drawable(levels.common_mode)
    column = [
        span_in_measurand(levels.signal) if levels.signal else "",
        written_span(*reach) if reach else "",
    ]
    end = width_px - EDGE - _room(column, _COLUMN) - 12
    scale = Scale(low, high, start, end)
    rails = _rails(levels)
    return Plan(
        rails=rails,
        scale=scale,
        volts=_volt_ticks(scale, factor, [value for value, _ in rails]),
        volt_unit=unit,
        measurand=_measurand_ticks(scale, levels.signal),
        measurand_name=names[0],
        measurand_span=one_line(column[0], _COLUMN[1], "small"),
        signal_span=span,
        common_mode=reach,
        message="" if switches(levels) else levels.message or NO_TRIPS,
        levels_row=bool(finite(levels.output_high, levels.output_low, levels.reference)),
    )


def rows_for(plan: Plan) -> Rows:
    """Return the heights of all rows."""
    numbers, bar, top = 41.0, 53.0, 60.0
    if plan.measurand is None:
        bar, top = (37.0, 44.0) if plan.signal_span else (26.0, 26.0)
    names = top + 17
    markers = names + (29 if plan.measurand else 14)
    axis = markers + 46
    below = axis + 28
    common = below + 10
    margin = common + 20
    reached = margin + 12 if plan.common_mode else below
    levels = reached + 9
    bottom = levels + 25 if plan.levels_row else reached + 4
    return Rows(
        rail_names=18.0,
        rail_top=24.0,
        measurand_numbers=numbers,
        span_bar=bar,
        trip_names=names,
        trip_markers=markers,
        width=markers + 23,
        axis=axis,
        volt_numbers=axis + 20,
        below=below,
        common_mode=common,
        margin=margin,
        level_markers=levels,
        level_names=levels + 20,
        rail_bottom=bottom,
        height=bottom + EDGE,
    )


def _supplied(levels: Levels) -> bool:
    return len(finite(levels.v_ee, levels.v_cc)) == 2 and levels.v_cc > levels.v_ee


def _drawable(span: Span | None) -> Span | None:
    """Return a range in ascending order, None where it cannot be drawn."""
    if span is None or len(finite(*span)) < 2:
        return None
    return min(span), max(span)


def _rails(levels: Levels) -> tuple[tuple[float, str], ...]:
    if not _supplied(levels):
        return ()
    low = "GND" if levels.v_ee == 0 else symbol("V_EE")
    return ((levels.v_ee, low), (levels.v_cc, symbol("V_CC")))


def _range(levels: Levels) -> Span:
    """Return the range of the axis: the rails, a little more, and whatever lies outside."""
    if not _supplied(levels):
        return 0.0, 1.0
    v_ee, v_cc = levels.v_ee, levels.v_cc
    swing = v_cc - v_ee
    content = finite(
        v_ee, v_cc, levels.output_high, levels.output_low, levels.reference,
        *(levels.signal_span or ()),
    )  # fmt: skip
    if switches(levels):
        ends = (levels.lower_interval or (), levels.upper_interval or ())
        content += finite(levels.lower, levels.upper, *(end for pair in ends for end in pair))
    low, high = min(content), max(content)
    pad = 0.05 * (high - low)
    if low >= v_ee - 0.02 * swing and high <= v_cc + 0.02 * swing:
        # An input range may end a little outside the rails; further out, its bar is left open.
        inputs = finite(*(levels.common_mode or ()))
        near = [v for v in inputs if v_ee - 0.15 * swing <= v <= v_cc + 0.15 * swing]
        low, high = min(low, *near, v_ee - 0.03 * swing), max(high, *near, v_cc + 0.03 * swing)
        return low - 0.02 * swing, high + 0.02 * swing
    return outward(low - pad, high + pad, step_for(high - low, 10))


def _signal_name(signal: Signal | None) -> str:
    if signal is None:
        return "signal"
    unit = short_unit(signal)
    tail = f" / {unit}" if unit else ""
    return one_line(signal.name, _GUTTER[1] - width_px(tail, "small"), "small") + tail


def _room(texts: list[str], limits: Span) -> float:
    widest = max(width_px(text, "small") for text in texts)
    return min(max(widest, limits[0]), limits[1])


def _volt_ticks(scale: Scale, factor: float, rails: list[float]) -> Ticks:
    """Return the ticks of the lower edge; the rails are always numbered."""
    room = scale.end - scale.start
    step = step_for((scale.high - scale.low) / factor, room / 62)
    major = ticks(scale.low / factor, scale.high / factor, step)
    minor = ticks(scale.low / factor, scale.high / factor, step / 5)
    at_rails = _rail_numbers(scale, factor, rails, step)
    taken = [extent for _, _, extent in at_rails]
    extents = [_extent(scale.px(value * factor), number(value, step)) for value in major]
    order = sorted(range(len(major)), key=lambda k: -roundness(major[k], step))
    kept = thinned(extents, order, taken=taken, gap=_TICK_GAP)
    shown = [(scale.px(major[k] * factor), number(major[k], step)) for k in kept]
    return Ticks(
        tuple(scale.px(value * factor) for value in major),
        tuple(scale.px(value * factor) for value in minor),
        tuple(shown + [(middle, text) for middle, text, _ in at_rails]),
    )


def _rail_numbers(
    scale: Scale, factor: float, rails: list[float], step: float
) -> list[tuple[float, str, Span]]:
    texts = [_rail_number(value / factor, step) for value in rails]
    widths = [width_px(text, "small") for text in texts]
    wants = [Want.centred(scale.px(v), w) for v, w in zip(rails, widths, strict=True)]
    starts = place(wants, (scale.start - 12, scale.end + 12), gap=_TICK_GAP) or ()
    return [
        (start + width / 2, text, (start, start + width))
        for start, width, text in zip(starts, widths, texts, strict=False)
    ]


def _rail_number(value: float, step: float) -> str:
    """Return the number at a rail, like its neighbours where it stands on a tick."""
    if abs(value / step - round(value / step)) < 1e-6:
        return number(value, step)
    return f"{value:.4g}".replace("-", MINUS)


def _extent(middle: float, text: str) -> Span:
    half = width_px(text, "small") / 2
    return middle - half, middle + half


def _measurand_ticks(scale: Scale, signal: Signal | None) -> Ticks | None:
    """Return the ticks of the upper edge; a curved sensor spaces them unevenly."""
    if signal is None:
        return None
    low, high = signal.span
    room = abs(_px(scale, signal, high) - _px(scale, signal, low))
    step = step_for(high - low, max(room / 56, 2))
    major = ticks(low, high, step)
    minor = ticks(low, high, step / (2 if str(f"{step:e}")[0] == "2" else 5))
    places = [_px(scale, signal, value) for value in major]
    extents = [_extent(x, number(v, step)) for x, v in zip(places, major, strict=True)]
    order = sorted(range(len(major)), key=lambda k: -roundness(major[k], step))
    beside = [(-math.inf, scale.start - 10), (scale.end + 10, math.inf)]
    kept = thinned(extents, order, taken=beside, gap=_TICK_GAP)
    return Ticks(
        tuple(places),
        tuple(_px(scale, signal, value) for value in minor),
        tuple((places[k], number(major[k], step)) for k in kept),
    )


def _px(scale: Scale, signal: Signal, value: float) -> float:
    volts = float(np.asarray(signal.volts(value)))
    return scale.inside(volts) if math.isfinite(volts) else scale.start

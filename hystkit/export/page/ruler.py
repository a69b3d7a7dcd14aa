"""The ruler of the page: the same axis, rows and marks as in the figures, for any width.

The script draws the very same picture (`assets/ruler.js`); a test compares the two mark by mark.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from hystkit.export.page.marks import (
    CLEARANCE,
    EDGE,
    dimension,
    level_marker,
    message,
    tag_starts,
    trip_tags,
)
from hystkit.export.page.pen import SMALL, TEXT, Pen, cut, symbol_width, text_width
from hystkit.figures.graduation import Scale, number, roundness, step_for, ticks
from hystkit.figures.lettering import (
    MINUS,
    prefix_for,
    short_unit,
    span_in_measurand,
    written,
    written_span,
)
from hystkit.figures.placement import Want, place, thinned
from hystkit.figures.ruler import Margin, nearest_margin
from hystkit.figures.ruler_plan import NO_TRIPS, finite, plan_for, switches
from hystkit.numeric.views import Interval, Levels

#: Below this width names and numbers stand above their rows, not beside them [px].
SLIM = 560.0
_GUTTER = (62.0, 128.0)
_TICK_GAP = 7.0
_LEVELS = (("output_low", "V_OL"), ("output_high", "V_OH"), ("reference", "V_REF"))


@dataclass(frozen=True)
class Rows:
    """Heights [px]: texts by their baseline, bars by their middle."""

    measurand_head: float
    measurand_numbers: float
    span_bar: float
    trip_names: float
    trip_markers: float
    axis: float
    volt_numbers: float
    below: float
    common_head: float
    common_mode: float
    margin: float
    level_markers: float
    bottom: float


def draw_ruler(levels: Levels, width: float) -> Pen:
    """Draw the ruler.

    Parameters
    ----------
    levels : Levels
        What to show.
    width : float
        Of the picture [px]; the height follows.

    Returns
    -------
    Pen
        The marks.
    """
    return _Ruler(levels, width).drawn()


class _Ruler:
    """One picture while it is drawn."""

    def __init__(self, levels: Levels, width: float) -> None:
        self.levels = levels
        self.slim = width < SLIM
        self.pen = Pen(width)
        self.switches = switches(levels)
        # Range of the axis, bars and message as the figures decide them.
        plan = plan_for(levels, 900)
        self.plan = plan
        self.factor, self.unit = prefix_for(plan.scale.low, plan.scale.high, "V")
        self.heads = _heads(levels, self.unit)
        self.tails = _tails(levels, plan.common_mode)
        start, end = self._ends(width)
        self.scale = Scale(plan.scale.low, plan.scale.high, start, end)
        supplied = bool(plan.rails)
        self.rails = [levels.v_ee, levels.v_cc] if supplied else []
        self.walls = [self.scale.px(value) for value in self.rails]
        self.rows = self._rows()
        self.pen.height = self.rows.bottom + EDGE

    def _ends(self, width: float) -> tuple[float, float]:
        if self.slim:
            return EDGE + 12, width - EDGE - 12
        left = max(text_width(head) for head in self.heads)
        right = max(text_width(tail) for tail in self.tails)
        return EDGE + _clamped(left) + 12, width - EDGE - _clamped(right) - 12

    def _rows(self) -> Rows:
        extra = 15.0 if self.slim else 0.0
        numbers, bar, top = 41.0, 53.0, 60.0
        if self.levels.signal is None:
            extra, bar, top = 0.0, 26.0, 26.0
        names = top + extra + 17
        markers = names + (14 if self.levels.signal is None else 29)
        axis = markers + 46
        below = axis + (43 if self.slim else 28)
        common = below + (22 if self.slim else 10)
        margin = common + 20
        reached = margin + 12 if self.plan.common_mode else below
        level_markers = reached + 9
        bottom = level_markers + 25 if self.plan.levels_row else reached + 4
        return Rows(
            38.0,
            numbers + extra,
            bar + extra,
            names,
            markers,
            axis,
            axis + 20,
            below,
            below + 10,
            common,
            margin,
            level_markers,
            bottom,
        )

    def drawn(self) -> Pen:
        """Draw everything, in the order of painting."""
        self._shades()
        self._rails()
        self._volts()
        self._measurand()
        self._common_mode()
        self._trips()
        self._levels()
        return self.pen

    # -- what stays while the trips move ----------------------------------------------------

    def _rails(self) -> None:
        names = ["GND" if self.levels.v_ee == 0 else "V_EE", "V_CC"][: len(self.rails)]
        widths = [text_width(n, TEXT) if n == "GND" else symbol_width(n, size=TEXT) for n in names]
        wants = [Want.centred(x, w) for x, w in zip(self.walls, widths, strict=True)]
        starts = place(wants, (EDGE, self.pen.width - EDGE), gap=8) or ()
        for x, name, start in zip(self.walls, names, starts, strict=False):
            if name == "GND":
                self.pen.text("letters", start, 18, name)
            else:
                self.pen.symbol("letters", start, 18, name)
            for top, bottom in self._rail_pieces(x):
                self.pen.line("rail", x, top, x, bottom)

    def _rail_pieces(self, x: float) -> list[tuple[float, float]]:
        """Stop the rail where it would run through a text."""
        rows = self.rows
        gaps = []
        if any(abs(at - x) < 26 for at, _ in self._measurand_numbers()):
            gaps.append((rows.measurand_numbers - 12, rows.measurand_numbers + 4))
        if self.plan.message or self._tags_cross():
            gaps.append((rows.trip_names - 14, rows.trip_names + 30))
        gaps.append((rows.axis + 7, rows.bottom if self.slim else rows.below))
        tops = [24.0, *(end for _, end in gaps)]
        bottoms = [*(start for start, _ in gaps), rows.bottom]
        return [(top, end) for top, end in zip(tops, bottoms, strict=True) if end > top]

    def _tags_cross(self) -> bool:
        """Whether the labels of the trips find no room beside the rails."""
        places = self._trip_places()
        return places is not None and not tag_starts(
            self.levels, places, self.pen.width, self.walls
        )

    def _trip_places(self) -> tuple[float, float] | None:
        if not self.switches:
            return None
        return self.scale.px(self.levels.lower), self.scale.px(self.levels.upper)

    def _volts(self) -> None:
        pen, scale, y = self.pen, self.scale, self.rows.axis
        pen.line("axis", scale.start, y, scale.end, y)
        step = step_for((scale.high - scale.low) / self.factor, (scale.end - scale.start) / 62)
        for value in ticks(scale.low / self.factor, scale.high / self.factor, step / 5):
            pen.line(
                "minor", scale.px(value * self.factor), y, scale.px(value * self.factor), y + 4
            )
        values = ticks(scale.low / self.factor, scale.high / self.factor, step)
        for value in values:
            pen.line("tick", scale.px(value * self.factor), y, scale.px(value * self.factor), y + 7)
        taken = self._rail_numbers(step)
        texts = [number(value, step) for value in values]
        spans = [_extent(scale.px(v * self.factor), t) for v, t in zip(values, texts, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        for k in thinned(spans, order, taken=taken, gap=_TICK_GAP):
            x = scale.px(values[k] * self.factor)
            pen.text("number", x, self.rows.volt_numbers, texts[k], "middle")
        if self.slim:
            pen.text("head", EDGE, self.rows.axis + 36, self.heads[2])
        else:
            pen.text("head", EDGE, self.rows.volt_numbers, self.heads[2])

    def _rail_numbers(self, step: float) -> list[tuple[float, float]]:
        """Write the numbers at both rails and give what they take of the row."""
        texts = [_rail_number(value / self.factor, step) for value in self.rails]
        widths = [text_width(text) for text in texts]
        wants = [Want.centred(x, w) for x, w in zip(self.walls, widths, strict=True)]
        row = (self.scale.start - 12, self.scale.end + 12)
        starts = place(wants, row, gap=_TICK_GAP) or ()
        taken = []
        for text, w, start in zip(texts, widths, starts, strict=False):
            self.pen.text("number", start + w / 2, self.rows.volt_numbers, text, "middle")
            taken.append((start, start + w))
        return taken

    def _measurand_step(self) -> float:
        assert self.levels.signal is not None
        low, high = self.levels.signal.span
        room = abs(self._at(high) - self._at(low))
        return step_for(high - low, max(room / 56, 2))

    def _measurand_numbers(self) -> list[tuple[float, str]]:
        """Give the numbers of the upper edge and where they stand."""
        signal = self.levels.signal
        if signal is None:
            return []
        step = self._measurand_step()
        values = ticks(*signal.span, step)
        texts = [number(value, step) for value in values]
        spans = [_extent(self._at(v), t) for v, t in zip(values, texts, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        beside = [(-math.inf, self.scale.start - 10), (self.scale.end + 10, math.inf)]
        kept = thinned(spans, order, taken=beside, gap=_TICK_GAP)
        return [(self._at(values[k]), texts[k]) for k in kept]

    def _at(self, quantity: float) -> float:
        assert self.levels.signal is not None
        volts = float(self.levels.signal.volts(quantity))
        return self.scale.inside(volts) if math.isfinite(volts) else self.scale.start

    def _measurand(self) -> None:
        pen, rows, signal = self.pen, self.rows, self.levels.signal
        if signal is None or self.plan.signal_span is None:
            return
        left, right = (self.scale.inside(end) for end in self.plan.signal_span)
        pen.box("span", left, rows.span_bar - 2, right, rows.span_bar + 2)
        step = self._measurand_step()
        minor = step / (2 if f"{step:e}"[0] == "2" else 5)
        top = rows.span_bar - 2
        for look, each, reach in (("minor", minor, 4), ("tick", step, 7)):
            for value in ticks(*signal.span, each):
                x = self._at(value)
                pen.line(f"{look} signal", x, top, x, top - reach)
        for x, text in self._measurand_numbers():
            pen.text("number", x, rows.measurand_numbers, text, "middle")
        if not self.slim:
            pen.text("head", EDGE, rows.span_bar + 4, self.heads[0])
            pen.text("number", self.scale.end + 12, rows.span_bar + 4, self.tails[0])
            return
        text = cut(f"{self.heads[0]}, {self.tails[0]}", pen.width - 4 * EDGE)
        start = self._placed(text_width(text), EDGE) or (EDGE,)
        pen.text("head", start[0], rows.measurand_head, text)

    def _placed(self, room: float, want: float) -> tuple[float, ...] | None:
        row = (EDGE, self.pen.width - EDGE)
        return place([Want(want, room)], row, walls=self.walls, clearance=CLEARANCE)

    def _common_mode(self) -> None:
        if self.plan.common_mode is None:
            return
        pen, scale, y = self.pen, self.scale, self.rows.common_mode
        low, high = self.plan.common_mode
        left, right = scale.inside(low), scale.inside(high)
        pen.box("common", left, y - 5, right, y + 5)
        for side in (y - 5, y + 5):
            pen.line("common-edge", left, side, right, side)
        # An end that lies beyond the axis is left open.
        for end in (low, high):
            if scale.low <= end <= scale.high:
                pen.line("common-end", scale.px(end), y - 6, scale.px(end), y + 6)
        margin = nearest_margin(self.levels)
        self._common_texts(margin)
        if margin is not None:
            self._margin(margin)

    def _common_texts(self, margin: Margin | None) -> None:
        pen, rows, x = self.pen, self.rows, self.scale.end + 12
        look = "number warning" if margin is not None and margin.small else "number"
        text = f"{'! ' if margin.small else ''}{written(margin.value, digits=3)}" if margin else ""
        if self.slim:
            pen.text("head", EDGE, rows.common_head, f"{self.heads[1]} {self.tails[1]}")
            if text:
                end = pen.width - EDGE
                pen.text(look, end, rows.common_head, f"margin {text}", "end")
            return
        pen.text("head", EDGE, rows.common_mode + 4, self.heads[1])
        pen.text("number", x, rows.common_mode + 4, self.tails[1])
        if not self.plan.message:
            pen.text("head", EDGE, rows.margin + 4, "margin")
        pen.text(look, x, rows.margin + 4, text)

    def _margin(self, margin: Margin) -> None:
        rows, scale = self.rows, self.scale
        ends = sorted((scale.inside(margin.pin), scale.inside(margin.limit)))
        look = "warning" if margin.small else "plain"
        dimension(self.pen, look, ends[0], ends[1], rows.margin)
        if margin.value < 0:
            x, y = scale.inside(margin.pin), rows.common_mode
            self.pen.line("cross", x - 4, y - 4, x + 4, y + 4)
            self.pen.line("cross", x - 4, y + 4, x + 4, y - 4)

    # -- what moves ------------------------------------------------------------------------

    def _shades(self) -> None:
        if not self.switches:
            return
        levels, px, rows = self.levels, self.scale.px, self.rows
        self.pen.box("band", px(levels.lower), rows.trip_markers, px(levels.upper), rows.axis)
        for trip, span in (("lower", levels.lower_interval), ("upper", levels.upper_interval)):
            if span is not None and len(finite(*span)) == 2:
                self.pen.box(f"{trip} over", px(span[0]), rows.trip_markers, px(span[1]), rows.axis)

    def _witnesses(self, pins: Interval) -> None:
        """Lead the trips down to the input range, or the pins where they do not see the trips."""
        levels, rows = self.levels, self.rows
        at_trips = levels.signal_at_pin
        ends = (levels.lower, levels.upper) if at_trips else pins
        top = rows.common_mode - 10 if self.slim else rows.below
        for trip, volts in zip(("lower", "upper"), ends, strict=True):
            x = self.scale.px(volts)
            self.pen.line(f"{trip if at_trips else 'pin'} witness", x, top, x, rows.margin + 8)

    def _trips(self) -> None:
        if not self.switches:
            message(self.pen, self.plan.message or NO_TRIPS, self.rows.trip_names)
            return
        levels, rows, px = self.levels, self.rows, self.scale.px
        for trip in ("lower", "upper"):
            x = px(getattr(levels, trip))
            self.pen.line(f"{trip} stem", x, rows.axis, x, rows.trip_markers)
        if self.plan.common_mode is not None and levels.pins is not None:
            self._witnesses(levels.pins)
        trip_tags(
            self.pen,
            levels,
            (px(levels.lower), px(levels.upper)),
            rows.trip_names,
            rows.trip_markers,
            self.walls,
        )
        self._width(px(levels.lower), px(levels.upper))

    def _width(self, lower: float, upper: float) -> None:
        text = f"width {written(self.levels.width, digits=3)}"
        room, y = text_width(text, bold=True), self.rows.trip_markers + 23
        inner = place(
            [Want.centred((lower + upper) / 2, room)],
            (lower + 24, max(upper - 24, lower + 24)),
            walls=self.walls,
            clearance=CLEARANCE,
        )
        if inner:
            dimension(self.pen, "width", lower, upper, y, cut=(inner[0] - 5, inner[0] + room + 5))
            self.pen.text("width bold", inner[0], y + 4, text)
            return
        start = self._beside(room, lower - 21, upper + 21)
        if start is None:
            dimension(self.pen, "width", lower, upper, y)
            return
        reach = start - 5 if start > lower else start + room + 5
        dimension(self.pen, "width", lower, upper, y, reach=reach)
        self.pen.text("width bold", start, y + 4, text)

    def _beside(self, room: float, left: float, right: float) -> float | None:
        """Place the width outside the band: where it moves least, in doubt on the right."""
        end = self.pen.width - EDGE
        sides = ((Want(right, room), (right, end)), (Want(left - room, room), (EDGE, left)))
        best: tuple[float, float] | None = None
        for want, row in sides:
            starts = place([want], row, walls=self.walls, clearance=CLEARANCE)
            if starts and (best is None or abs(starts[0] - want.start) < best[0]):
                best = (abs(starts[0] - want.start), starts[0])
        return None if best is None else best[1]

    def _levels(self) -> None:
        rows, scale, pen = self.rows, self.scale, self.pen
        shown = []
        for name, sign in _LEVELS:
            for value in finite(getattr(self.levels, name)):
                text = written(value)
                shown.append((scale.px(value), name, sign, text, symbol_width(sign, text)))
        shown.sort(key=lambda entry: entry[0])
        row = (EDGE if self.slim else scale.start - 10, pen.width - EDGE)
        walls = [] if self.slim else self.walls
        wants = [Want.centred(entry[0], entry[4]) for entry in shown]
        starts = place(wants, row, walls=walls, gap=10, clearance=CLEARANCE) or ()
        top, bottom = rows.level_markers + 6, rows.level_markers + 10
        for (x, name, sign, text, room), start in zip(shown, starts, strict=False):
            level_marker(pen, name, x, rows.level_markers)
            near = min(max(x, start + 3), start + room - 3)
            if abs(x - near) > 1:
                pen.line("lead", x, top, near, bottom)
            pen.symbol("number", start, rows.level_markers + 20, sign, text)
        if shown and not self.slim:
            pen.text("head", EDGE, rows.level_markers + 4, "levels")


def _heads(levels: Levels, unit: str) -> tuple[str, str, str]:
    name, signal = "signal", levels.signal
    if signal is not None:
        tail = f" / {short_unit(signal)}" if short_unit(signal) else ""
        name = cut(signal.name, _GUTTER[1] - text_width(tail)) + tail
    return cut(name, _GUTTER[1]), "common mode", f"voltage / {unit}"


def _tails(levels: Levels, reach: tuple[float, float] | None) -> tuple[str, str]:
    measurand = span_in_measurand(levels.signal) if levels.signal else ""
    return cut(measurand, _GUTTER[1]), written_span(*reach) if reach else ""


def _clamped(width: float) -> float:
    return min(max(width, _GUTTER[0]), _GUTTER[1])


def _extent(middle: float, text: str) -> tuple[float, float]:
    half = text_width(text, SMALL) / 2
    return middle - half, middle + half


def _rail_number(value: float, step: float) -> str:
    if abs(value / step - round(value / step)) < 1e-6:
        return number(value, step)
    return f"{value:.4g}".replace("-", MINUS)

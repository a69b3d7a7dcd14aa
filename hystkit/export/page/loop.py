"""The switching loop of the page: the same frame, paths and labels as in the figures.

The script draws the very same picture (`assets/loop.js`); a test compares the two mark by mark.
"""

from __future__ import annotations

import math

import numpy as np

from hystkit.export.page.marks import EDGE, PITCH, level_marker, message, tip, trip_tags
from hystkit.export.page.pen import SMALL, Pen, symbol_width, text_width
from hystkit.figures.frame import OFFSET, padded
from hystkit.figures.graduation import (
    Scale,
    number,
    outward,
    roundness,
    step_for,
    ticks,
)
from hystkit.figures.lettering import prefix_for, written, written_span
from hystkit.figures.placement import Want, spread_out, thinned
from hystkit.figures.ruler_plan import NO_TRIPS, finite, switches
from hystkit.figures.trip_tags import trips_in_words
from hystkit.numeric.views import Loop

#: Below this width the output levels are named inside the frame [px].
SLIM = 440.0
_OUTPUTS = (("output_high", "V_OH"), ("output_low", "V_OL"))
_PATHS = (("rising", "upper", 0.36), ("falling", "lower", 0.36))
_LEAST_JUMP = 26.0
_LEAST_BAND = 44.0
_TIP = 13.0


def draw_loop(data: Loop, width: float) -> Pen:
    """Draw the switching loop.

    Parameters
    ----------
    data : Loop
        What to show.
    width : float
        Of the picture [px]; the height follows.

    Returns
    -------
    Pen
        The marks.
    """
    return _LoopDrawing(data, width).drawn()


def loop_words(data: Loop) -> str:
    """Put the loop into one sentence.

    Parameters
    ----------
    data : Loop
        What is shown.

    Returns
    -------
    str
        With numbers.
    """
    levels = data.levels
    return (
        f"Output against signal from {written_span(*data.axis)}; {trips_in_words(levels)}; "
        f"output high {written(levels.output_high)}, low {written(levels.output_low)}."
    )


class _LoopDrawing:
    """One picture while it is drawn."""

    def __init__(self, data: Loop, width: float) -> None:
        self.data = data
        self.levels = data.levels
        self.slim = width < SLIM
        self.switches = switches(data.levels)
        height = min(max(0.56 * width, 270.0), 440.0)
        self.pen = Pen(width, height)
        top = 62.0 if self.levels.signal is not None or not self.switches else 47.0
        self.up = Scale(*self._range(), height - (48.0 if self.slim else 34.0), top)
        self.numbers = _up_numbers(self.up)
        widest = max((text_width(text) for text in self.numbers[2].values()), default=0.0)
        title, least = (EDGE, 46.0) if self.slim else (26.0, 62.0)
        left = max(widest + 8 + OFFSET + title, least)
        self.across = Scale(*_steady(data.axis), left, width - (22.0 if self.slim else 118.0))

    def _range(self) -> tuple[float, float]:
        levels = self.levels
        outputs = [float(v) for v in (*self.data.rising[1], *self.data.falling[1])]
        values = finite(levels.v_ee, levels.v_cc, levels.output_low, levels.output_high, *outputs)
        return padded(values, 0.13 if self.slim else 0.06)

    def drawn(self) -> Pen:
        """Draw everything, in the order of painting."""
        if self.switches:
            self._band()
        self._across()
        self._up()
        self._outputs()
        self._paths()
        if self.switches:
            places = tuple(self.across.inside(v) for v in (self.levels.lower, self.levels.upper))
            trip_tags(self.pen, self.levels, (places[0], places[1]), 17, self.up.end - 8)
        else:
            message(self.pen, self.levels.message or NO_TRIPS, 17)
        return self.pen

    def _band(self) -> None:
        lower, upper = (self.across.inside(v) for v in (self.levels.lower, self.levels.upper))
        top, bottom = self.up.end - 8, self.up.start
        self.pen.box("band", lower, top, upper, bottom)
        for trip, x in (("lower", lower), ("upper", upper)):
            self.pen.line(f"{trip} witness", x, top, x, bottom)

    def _across(self) -> None:
        pen, scale, y = self.pen, self.across, self.up.start + OFFSET
        pen.line("frame", scale.start, y, scale.end, y)
        factor, unit = prefix_for(scale.low, scale.high, "V")
        intervals = (scale.end - scale.start) / 70
        step = step_for((scale.high - scale.low) / factor, intervals)
        values = ticks(scale.low / factor, scale.high / factor, step)
        places = [scale.px(value * factor) for value in values]
        for x in places:
            pen.line("tick", x, y, x, y + 5)
        texts = [number(value, step) for value in values]
        halves = [text_width(text, SMALL) / 2 for text in texts]
        spans = [(x - half, x + half) for x, half in zip(places, halves, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        for k in thinned(spans, order, gap=8):
            pen.text("number", places[k], y + 18, texts[k], "middle")
        if self.slim:
            pen.text("head", scale.end, y + 34, f"signal / {unit}", "end")
        else:
            pen.text("head", scale.end + 16, y + 18, f"signal / {unit}")

    def _up(self) -> None:
        pen, scale, x = self.pen, self.up, self.across.start - OFFSET
        pen.line("frame", x, scale.end, x, scale.start)
        factor, unit, texts = self.numbers
        for value, text in texts.items():
            y = scale.px(value * factor)
            pen.line("tick", x - 5, y, x, y)
            pen.text("number", x - 8, y + 4, text, "end")
        if self.slim:
            pen.text("head", EDGE, self.up.start + OFFSET + 34, f"output / {unit}")
        else:
            pen.upright("head", 17, (scale.start + scale.end) / 2, f"output / {unit}")

    def _outputs(self) -> None:
        """Draw a guide, the marker, the name and the value of each output level."""
        found = [(n, sign, getattr(self.levels, n)) for n, sign in _OUTPUTS]
        shown = [(self.up.inside(v), n, sign, v) for n, sign, v in found if math.isfinite(v)]
        shown.sort(key=lambda entry: entry[0])
        wants = [Want.centred(entry[0], 16) for entry in shown]
        starts = spread_out(wants, (self.up.end - 10, self.up.start + 10)) or ()
        left, right = self.across.start, self.across.end
        for (y, name, sign, value), start in zip(shown, starts, strict=False):
            self.pen.line("guide", left, y, right + (6 if self.slim else 4), y)
            level_marker(self.pen, name, right + (12 if self.slim else 9), y)
            text = written(value)
            if self.slim:
                x = left + 4 if self._right_heavy() else right - symbol_width(sign, text)
                baseline = y - 8 if name == "output_high" else y + PITCH + 2
                self.pen.symbol("number", x, baseline, sign, text)
            else:
                self.pen.symbol("number", right + 18, start + 12, sign, text)

    def _right_heavy(self) -> bool:
        """Whether the trips stand in the right half, so that the left one has room."""
        middle = (self.across.low + self.across.high) / 2
        return self.switches and self.levels.lower + self.levels.upper > 2 * middle

    def _paths(self) -> None:
        for way, trip, share in _PATHS:
            signal, output = getattr(self.data, way)
            points = [
                (self.across.px(float(x)), self.up.px(float(y)))
                for x, y in zip(signal, output, strict=True)
            ]
            if all(math.isfinite(place) for point in points for place in point):
                self.pen.trace(f"{trip} path", points)
                self._tips(trip, points, share)

    def _tips(self, trip: str, points: list[tuple[float, float]], share: float) -> None:
        """Point one tip along the jump of a path, and one along its part inside the band."""
        if not self.switches:
            return
        (before, here), (_, there) = points[1], points[2]
        drop = there - here
        if abs(drop) >= _LEAST_JUMP:
            sign = 1 if drop > 0 else -1
            tip(self.pen, trip, before, here + share * drop + sign * 5, 0, sign, _TIP)
        ends = [self.across.px(v) for v in (self.levels.lower, self.levels.upper)]
        if ends[1] - ends[0] >= _LEAST_BAND:
            middle, ascending = (ends[0] + ends[1]) / 2, points[3][0] > points[0][0]
            ordered = points if ascending else points[::-1]
            xs, ys = zip(*ordered, strict=True)
            height = float(np.interp(middle, xs, ys))
            sign = 1 if ascending else -1
            tip(self.pen, trip, middle + 5 * sign, height, sign, 0, _TIP)


def _up_numbers(scale: Scale) -> tuple[float, str, dict[float, str]]:
    """Give factor and unit of the upright axis, and its numbers; a low one takes them closer."""
    factor, unit = prefix_for(scale.low, scale.high, "V")
    for pitch in (28.0, 16.0):
        step = step_for((scale.high - scale.low) / factor, (scale.start - scale.end) / pitch)
        values = ticks(scale.low / factor, scale.high / factor, step)
        if len(values) > 2:
            break
    return factor, unit, {value: number(value, step) for value in values}


def _steady(axis: tuple[float, float]) -> tuple[float, float]:
    """Give the axis in steps, so that it stays while the trips move."""
    if len(finite(*axis)) < 2 or not axis[1] > axis[0]:
        return 0.0, 1.0
    return outward(*axis, step_for(axis[1] - axis[0], 20))

"""What stands below the samples of a spread: both axes, limits, windows and the yield in words."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from matplotlib.axes import Axes

from hystkit.circuit.signals import Signal
from hystkit.figures.drafting import Ink, Tag, lettered, level_marker, segments
from hystkit.figures.graduation import Scale, number, roundness, step_for, ticks
from hystkit.figures.lettering import MINUS, one_line, prefix_for, short_unit, trip_digits
from hystkit.figures.lettering import width_px as length_of
from hystkit.figures.placement import thinned
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Theme
from hystkit.numeric.yields import Window, Yield, percent

if TYPE_CHECKING:
    from hystkit.figures.spread import WindowedSpread

_TITLE_ROOM = 96.0
_NUMBER_GAP = 8.0
_MEASURAND_BELOW = 30.0
# From here on limits and window of a trip stand on one line.
_ONE_LINE = 640
_NAME, _LIMITS = 14.0, 62.0
_TRIPS = ("upper", "lower")


def axis_titles(low: float, high: float, signal: Signal | None) -> tuple[str, ...]:
    """Return the titles of the volt axis and, with a signal, of the axis of the measurand."""
    titles = [f"signal / {prefix_for(low, high, 'V')[1]}"]
    if signal is not None:
        unit = short_unit(signal)
        tail = f" / {unit}" if unit else ""
        room = _TITLE_ROOM - length_of(tail, "small")
        titles.append(one_line(signal.name, room, "small") + tail)
    return tuple(titles)


def draw_axes(page: Axes, theme: Theme, scale: Scale, y: float, signal: Signal | None) -> None:
    """Draw the volt axis at the height `y`, and the axis of the measurand below it."""
    titles = axis_titles(scale.low, scale.high, signal)
    factor, _ = prefix_for(scale.low, scale.high, "V")
    step = step_for((scale.high - scale.low) / factor, (scale.end - scale.start) / 70)
    volts = ticks(scale.low / factor, scale.high / factor, step)
    at = {value: scale.px(value * factor) for value in volts}
    _draw_axis(page, theme, (scale, y + 1), at, step, titles[0], theme.line)
    if signal is not None:
        y += _MEASURAND_BELOW
        step, places = measurand_places(scale, signal)
        _draw_axis(page, theme, (scale, y), places, step, titles[1], theme.signal)


def measurand_places(scale: Scale, signal: Signal) -> tuple[float, dict[float, float]]:
    """Return the step of the measurand and the place of each multiple of it [px]."""
    # The axis cuts the span of the signal; a sensor may have no reading at an end of it.
    at_ends = (float(signal.quantity(volts)) for volts in (scale.low, scale.high))
    seen = sorted(end for end in at_ends if math.isfinite(end))
    low = max([min(signal.span), *seen[:1]]) if len(seen) == 2 else min(signal.span)
    high = min([max(signal.span), *seen[1:]]) if len(seen) == 2 else max(signal.span)
    if not high > low:
        return 1.0, {}
    room = abs(scale.inside(float(signal.volts(high))) - scale.inside(float(signal.volts(low))))
    step = step_for(high - low, max(room / 60, 1))
    places = {value: float(signal.volts(value)) for value in ticks(low, high, step)}
    inside = {q: v for q, v in places.items() if scale.low <= v <= scale.high}
    return step, {q: scale.px(v) for q, v in inside.items()}


def _draw_axis(
    page: Axes,
    theme: Theme,
    at: tuple[Scale, float],
    places: dict[float, float],
    step: float,
    title: str,
    colour: str,
) -> None:
    scale, y = at
    segments(page, [((scale.start, y), (scale.end, y))], colour, 1.4)
    segments(page, [((x, y), (x, y + 5)) for x in places.values()], colour, 1.2)
    values = list(places)
    texts = [number(value, step) for value in values]
    halves = [length_of(text, "small") / 2 for text in texts]
    spans = [(places[v] - half, places[v] + half) for v, half in zip(values, halves, strict=True)]
    order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
    beside = [(-math.inf, 0.0), (scale.end + 12, math.inf)]
    for k in thinned(spans, order, taken=beside, gap=_NUMBER_GAP / 2):
        lettered(page, texts[k], (places[values[k]], y + 17), Ink(theme.text, "small"), "center")
    lettered(page, title, (scale.end + 16, y + 17), Ink(theme.muted, "small"))


class Key:
    """One line for each trip and one for the yield.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    width_px : int
        Of the page.
    top : float
        Upper end [px].
    data : WindowedSpread
        Tells which lines there are.
    moving : callable
        Registers an artist with the picture.
    """

    pitch = 17.0

    def __init__(
        self,
        page: Axes,
        theme: Theme,
        width_px: int,
        top: float,
        data: WindowedSpread,
        moving: Callable[[Any], Any],
    ) -> None:
        self._width = width_px
        self._limits, self._windows, self._sensed = {}, {}, {}
        self._baselines: dict[str, float] = {}
        self._sensed_baselines: dict[str, float] = {}
        y = top + 13
        for trip in _TRIPS:
            colour = getattr(theme, trip)
            mark = level_marker(page, trip, colour, theme.background, 8)
            mark.set_data([EDGE + 4], [y - 4])
            ink = Ink(colour, "small", bold=True)
            lettered(page, trip, (EDGE + _NAME, y), ink)
            self._limits[trip] = Tag(page, [[Ink(theme.text, "small")]], moving, "limits")
            self._baselines[trip] = y
            if data.window(trip) is not None:
                self._windows[trip] = Tag(page, [[Ink(theme.text, "small")]], moving, "window")
                y += 0 if self._one_line else self.pitch
            y += self.pitch
            if data.sensed is not None:
                self._sensed[trip] = Tag(page, [[Ink(theme.signal, "small")]], moving, "sensed")
                self._sensed_baselines[trip] = y
                y += self.pitch
        inks = [[Ink(theme.band, "small", bold=True), Ink(theme.text, "small")]]
        self._yield = Tag(page, inks, moving, "yield")
        self._yield_baseline = y
        self._sensed_yield = Tag(page, inks, moving, "yield with signal")

    @staticmethod
    def rows(width_px: int, data: WindowedSpread) -> int:
        """Return how many lines there are."""
        windows = sum(data.window(trip) is not None for trip in _TRIPS)
        sensed = 0 if data.sensed is None else len(_TRIPS) + bool(windows)
        return 2 + sensed + bool(windows) + (0 if width_px >= _ONE_LINE else windows)

    @property
    def _one_line(self) -> bool:
        return self._width >= _ONE_LINE

    def move(self, data: WindowedSpread) -> None:
        """Set all lines."""
        left = EDGE + _LIMITS
        for trip in _TRIPS:
            limits, y = data.limits(trip), self._baselines[trip]
            text = "no limits: " + data.spread.message
            text = f"exact limits {span_text(*limits)}" if limits else text
            window = data.window(trip)
            beside = self._one_line and window is not None
            end = left + 250 if beside else self._width - EDGE
            self._limits[trip].write([one_line(text, end - left, "small")])
            self._limits[trip].put(left, y)
            if window is not None:
                at = (end + 10, y) if beside else (left, y + self.pitch)
                text = f"window {window_text(window)}{_verdict(data, trip)}"
                room = self._width - EDGE - at[0]
                self._windows[trip].write([one_line(text, room, "small")])
                self._windows[trip].put(*at)
            if trip in self._sensed:
                text = one_line(sensed_text(data, trip), self._width - EDGE - left, "small")
                self._sensed[trip].write([text])
                self._sensed[trip].put(left, self._sensed_baselines[trip])
        y = self._yield_baseline
        below = y + self.pitch
        self._move_yield(self._yield, "yield", data.share, y, is_first=True)
        self._move_yield(self._sensed_yield, "with the signal", data.sensed_share, below)

    def _move_yield(
        self, tag: Tag, name: str, share: Yield | None, baseline: float, is_first: bool = False
    ) -> None:
        if share is None:
            tag.hide()
            return
        name = f"{name} {percent(share.value)}"
        confidence = f", {100 * share.confidence:g} % confidence" if is_first else ""
        text = f"({percent(share.low)} to {percent(share.high)}{confidence})"
        room = self._width - 2 * EDGE - length_of(name, "small", bold=True) - Tag.space
        tag.write([name, one_line(text, room, "small")])
        tag.put(EDGE, baseline)


def span_text(low: float, high: float, unit: str = "V") -> str:
    """Return a range with as many digits as tell its ends apart."""
    factor, prefixed = prefix_for(low, high, unit)
    digits = trip_digits(max(abs(low), abs(high)), high - low)
    ends = (f"{end / factor:.{digits}g}".replace("-", MINUS) for end in (low, high))
    return f"{' to '.join(ends)} {prefixed}"


def sensed_text(data: WindowedSpread, trip: str) -> str:
    """Return the limits of a trip in the measurand, where the signal has a part in them."""
    if data.sensed is None or data.limits(trip) is None:
        return ""
    low, high = data.sensed.extremes[data.sensed.ends[trip]]
    if math.isnan(low):
        return "no reading at some limits of the signal"
    digits = trip_digits(max(abs(low), abs(high)), high - low)
    ends = (f"{end:.{digits}g}".replace("-", MINUS) for end in (low, high))
    return f"{' to '.join(ends)} {short_unit(data.sensed.signal)}".rstrip() + " with the signal"


def window_text(window: Window) -> str:
    """Return a window in words; an open end is left out."""
    low, high = window
    if low is not None and high is not None:
        return span_text(low, high)
    if low is not None:
        return f"from {span_text(low, low).split(' to ')[1]}"
    return f"up to {span_text(high, high).split(' to ')[1]}" if high is not None else "anything"


def _verdict(data: WindowedSpread, trip: str) -> str:
    """Say whether the exact limits lie within the window."""
    limits, window = data.limits(trip), data.window(trip)
    if limits is None or window is None:
        return ""
    low, high = window
    held = (low is None or low <= limits[0]) and (high is None or limits[1] <= high)
    return ": ✓ always held" if held else ": ! not always held"

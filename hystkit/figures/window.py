"""The width window: every floor and ceiling on one axis, and what remains between them."""

from __future__ import annotations

import math
from collections.abc import Hashable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from hystkit.figures.drafting import (
    GUIDE,
    MARK,
    SHADE,
    TRACE,
    Dimension,
    Ink,
    Tag,
    box,
    lettered,
    line,
    marker,
    point_tip,
    segments,
    stretch,
    tip,
)
from hystkit.figures.frame import draw_message
from hystkit.figures.graduation import Scale, number, roundness, step_for, ticks
from hystkit.figures.lettering import one_line, prefix_for, width_px, wrapped
from hystkit.figures.picture import Picture
from hystkit.figures.placement import Want, place, thinned
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Mark, Theme
from hystkit.figures.window_plan import (
    bound_text,
    described,
    extent,
    gap,
    ordered,
    shown,
    unit_of,
    verdict,
)
from hystkit.review.window import Bound, WidthWindow

#: From here on names and values stand left of the bars, else above each.
_BESIDE = 640
_BAR, _PITCH, _STACKED_PITCH = 11.0, 22.0, 34.0
# Baselines of the verdict, of the design's own width and of the target; room of the axis [px].
_VERDICT, _OWN, _TARGET, _AXIS = 17.0, 35.0, 53.0, 42.0
_TOP = _TARGET + 12
#: Height of a picture that only says why there is no window [px].
_MESSAGE = 60.0
_GAP, _INDENT, _CLEARANCE = 12.0, 10.0, 5.0
_NUMBER_GAP = 8.0
#: Distance of the strokes on a bar [px].
_STROKES = 8.0
#: Digits of the longest value, for the room that values take.
_LONGEST = 8.888e-08
#: Lean of the strokes, dashes of the edge and marker of each kind: told apart without the colour.
_LEAN = {"floor": 1.0, "ceiling": -1.0}
_EDGE: dict[str, Any] = {"floor": "-", "ceiling": (0, (4, 2))}
_MARKERS = {"floor": ">", "ceiling": "<"}


@dataclass(frozen=True)
class _Row:
    """Where a bound stands on the page [px]."""

    baseline: float
    top: float
    bottom: float


class WindowPicture(Picture[WidthWindow | str]):
    """Floors from zero on, ceilings to the end, the feasible widths and the design's own.

    Where there is no window, a text in its place says why.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: WidthWindow | str) -> Hashable:
        if isinstance(data, str):
            return data
        self._bounds = tuple((bound.name, bound.kind) for bound in ordered(data))
        self._end, self._empty = extent(data), data.feasible is None
        axis = data.asked.axis
        return self._bounds, self._end, self._empty, axis.unit, axis.name

    def _lay_out(self, data: WidthWindow | str) -> None:
        if isinstance(data, str):
            self._resize(_MESSAGE)
            draw_message(self._page(), data, self._theme, self._width_px, _VERDICT + 4)
            return
        theme, unit = self._theme, unit_of(data)
        beside = self._width_px >= _BESIDE
        inks = {bound: (Ink(theme.text, "small"), Ink(theme.text, "small", bold=True))
                for bound in self._bounds}  # fmt: skip
        widest = max((both[1].width(_named(n, True)) for (n, _), both in inks.items()), default=0)
        room = width_px(f"≥ {shown(_LONGEST, unit)}", "small", bold=True)
        self._values_end = EDGE + widest + _GAP + room if beside else self._width_px - EDGE
        start = (self._values_end + _GAP if beside else EDGE) + _INDENT
        self._scale = Scale(0.0, self._end, start, self._width_px - EDGE - _INDENT)
        # The verdict of an empty window takes two lines where there is little room.
        self._lines = 2 if self._empty and not beside else 1
        self._down = (self._lines - 1) * Tag.pitch
        self._rows = _rows(len(self._bounds), _TOP + self._down, beside)
        bottom = self._rows[-1].bottom + 5 if self._rows else _TOP + self._down + 8
        self._span = (_TOP + self._down - 4, bottom)
        self._pieces = [self._span] if beside else [(r.top - 3, r.bottom + 3) for r in self._rows]
        self._resize(bottom + _AXIS)
        page = self._page()
        self._draw_axis(page, bottom + 2, data)
        self._make_band(page)
        self._marks = [
            _BoundMark(page, theme, kind, inks[name, kind], self._moving)
            for name, kind in self._bounds
        ]
        self._make_widths(page)

    def _draw_axis(self, page: Axes, y: float, data: WidthWindow) -> None:
        theme, scale, unit = self._theme, self._scale, unit_of(data)
        factor, unit = prefix_for(0.0, self._end, "V") if unit == "V" else (1.0, unit)
        step = step_for(self._end / factor, (scale.end - scale.start) / 60)
        values = ticks(0.0, self._end / factor, step)
        places = [scale.px(value * factor) for value in values]
        segments(page, [((scale.start, y), (scale.end, y))], theme.line, 1.4)
        segments(page, [((x, y), (x, y + 5)) for x in places], theme.line, 1.2)
        texts = [number(value, step) for value in values]
        halves = [width_px(text, "small") / 2 for text in texts]
        spans = [(x - half, x + half) for x, half in zip(places, halves, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        room = (-math.inf, 0.0), (float(self._width_px), math.inf)
        for k in thinned(spans, order, taken=room, gap=_NUMBER_GAP):
            lettered(page, texts[k], (places[k], y + 17), Ink(theme.text, "small"), "center")
        tail = f" / {unit}" if unit else ""
        room_px = scale.end - scale.start - width_px(tail, "small")
        title = one_line(f"width of {data.asked.axis.name}", room_px, "small") + tail
        lettered(page, title, (scale.end, y + 33), Ink(theme.muted, "small"), "right")

    def _make_band(self, page: Axes) -> None:
        theme, moving = self._theme, self._moving
        colour = theme.warning if self._empty else theme.band
        self._band = moving(box(page, colour, theme.band_alpha, SHADE - 1))
        self._band.set_gid("band")
        self._band_edges = moving(line(page, colour, 1.2, GUIDE, linestyle=(0, (1, 2))))
        self._gap = Dimension(page, theme.warning, moving)
        self._verdict = Tag(page, [[Ink(colour)]] * self._lines, moving, "verdict")

    def _make_widths(self, page: Axes) -> None:
        theme, moving = self._theme, self._moving
        self._own_line = moving(line(page, theme.text, 1.8, TRACE, gid="own width"))
        self._own = Tag(page, [[Ink(theme.text, "small", bold=True)]], moving, "own width")
        dashes = (0, (6, 2, 1, 2))
        self._target_line = moving(line(page, theme.band, 1.8, TRACE, linestyle=dashes))
        self._target_line.set_gid("target")
        colour = theme.warning if self._empty else theme.band
        self._target = Tag(page, [[Ink(colour, "small", bold=True)]], moving, "target")

    def _move(self, data: WidthWindow | str) -> None:
        if isinstance(data, str):
            return
        binding = (data.floor, data.ceiling)
        bounds = ordered(data)
        for mark, row, bound in zip(self._marks, self._rows, bounds, strict=True):
            mark.move(bound, row, self._scale)
            mark.write(bound, row, unit_of(data), self._values_end, bound in binding)
        self._move_band(data)
        own = self._scale.inside(data.width)
        where = "✓ inside" if data.inside else "! outside"
        self._across(self._own_line, own, _OWN + self._down + 4)
        text = f"design {shown(data.width, unit_of(data))}, {where}"
        self._put(self._own, text, own, _OWN + self._down)
        self._move_target(data, own)

    def _move_band(self, data: WidthWindow) -> None:
        apart = gap(data)
        span = apart or data.feasible
        for artist in (self._band, self._band_edges):
            artist.set_visible(span is not None)
        row = (EDGE, self._width_px - EDGE)
        if span is not None:
            left, right = (self._scale.inside(end) for end in span)
            stretch(self._band, left, self._span[0], right, self._span[1])
            xs, ys = _broken([left, right], self._pieces)
            self._band_edges.set_data(xs, ys)
        room = row[1] - row[0]
        if self._empty:
            rows = (*wrapped(f"✗ {verdict(data)}", room, self._lines), "")
            self._verdict.write(*([text] for text in rows[: self._lines]))
            self._verdict.put(EDGE, _VERDICT)
            return
        length = self._verdict.write([one_line(verdict(data), room)])
        (start,) = place([Want.centred((left + right) / 2, length)], row) or (EDGE,)
        self._verdict.put(start, _VERDICT)

    def _move_target(self, data: WidthWindow, own: float) -> None:
        apart, target = gap(data), data.target
        baseline = _TARGET + self._down
        self._target_line.set_visible(target is not None)
        self._gap.hide()
        if target is not None:
            x = self._scale.inside(target)
            self._across(self._target_line, x, baseline + 4)
            self._put(self._target, f"target {shown(target, unit_of(data))}", x, baseline, own)
        elif apart is not None:
            left, right = (self._scale.inside(width) for width in apart)
            self._gap.show(left, right, baseline + 9)
            text = f"{shown(apart[1] - apart[0], unit_of(data))} apart"
            self._put(self._target, text, (left + right) / 2, baseline, own)
        else:
            self._target.hide()

    def _across(self, artist: Any, x: float, top: float) -> None:
        """Draw a line from its label down over the bars, not over what stands between them."""
        first = (top, self._span[0])
        artist.set_data(*_broken([x], [first, *self._pieces]))

    def _put(
        self, tag: Tag, text: str, x: float, baseline: float, wall: float | None = None
    ) -> None:
        """Put a label over its line, beside the line that comes from the row above."""
        length = tag.write([text])
        walls = [] if wall is None else [wall]
        row = (EDGE, self._width_px - EDGE)
        wants = [Want.centred(x, length)]
        (start,) = place(wants, row, walls=walls, clearance=_CLEARANCE) or (EDGE,)
        tag.put(start, baseline)

    def _describe(self, data: WidthWindow | str) -> str:
        return data if isinstance(data, str) else described(data)


class _BoundMark:
    """One bound: its bar over the widths that it forbids, the mark at its end, name and value."""

    def __init__(
        self, page: Axes, theme: Theme, kind: str, inks: tuple[Ink, Ink], moving: Any
    ) -> None:
        colour = theme.lower if kind == "floor" else theme.upper
        self._bar = moving(box(page, colour, 0.22, SHADE))
        self._bar.set_gid(f"bar {kind}")
        # A line is drawn ten times as fast as the hatch of a patch.
        self._strokes = moving(line(page, colour, 1.2, SHADE + 0.5))
        self._lean = _LEAN[kind]
        self._edge = moving(line(page, colour, 2, TRACE, linestyle=_EDGE[kind]))
        self._edge.set_gid(f"edge {kind}")
        self._points = {
            bold: moving(
                marker(page, Mark("-", _MARKERS[kind], bold), colour, theme.background, 8, MARK)
            )
            for bold in (False, True)
        }
        self._beyond = moving(tip(page, colour))
        plain, strong = inks
        self._names = {
            bold: Tag(page, [[ink]], moving, "bound")
            for bold, ink in ((False, plain), (True, strong))
        }
        self._values = {
            bold: Tag(page, [[ink]], moving, "value")
            for bold, ink in ((False, plain), (True, strong))
        }

    def move(self, bound: Bound, row: _Row, scale: Scale) -> None:
        """Set bar and edge."""
        width = scale.high if bound.hopeless and bound.kind == "floor" else bound.width
        seen = 0 <= width <= scale.high and not bound.hopeless
        x = scale.inside(width)
        ends = (scale.start, x) if bound.kind == "floor" else (x, scale.end)
        middle = (row.top + row.bottom) / 2
        stretch(self._bar, ends[0], row.top, ends[1], row.bottom)
        self._strokes.set_data(*_strokes(ends, row, self._lean))
        self._edge.set_data([x, x], [row.top - 2, row.bottom + 2])
        self._edge.set_visible(seen)
        self._seen, self._at = seen, (x, middle)
        # A ceiling beyond the end of the axis is pointed at.
        self._beyond.set_visible(width > scale.high)
        point_tip(self._beyond, (scale.end, middle), "right")

    def write(self, bound: Bound, row: _Row, unit: str, end: float, binds: bool) -> None:
        """Set marker, name and value; what binds is bold, and its marker solid."""
        for bold in (False, True):
            point, name, value = self._points[bold], self._names[bold], self._values[bold]
            point.set_visible(self._seen and bold == binds)
            point.set_data([self._at[0]], [self._at[1]])
            if bold != binds:
                name.hide()
                value.hide()
                continue
            name.write([_named(bound.name, binds)])
            name.put(EDGE, row.baseline)
            length = value.write([bound_text(bound, unit)])
            value.put(end - length, row.baseline)


def _strokes(ends: tuple[float, float], row: _Row, lean: float) -> tuple[Any, Any]:
    """Return slanting strokes over a bar as one polyline with gaps."""
    height = row.bottom - row.top
    first = np.arange(ends[0], ends[1] - height, _STROKES)
    xs = np.stack([first, first + height, np.full_like(first, math.nan)], axis=1).ravel()
    ys = [row.bottom, row.top, math.nan] if lean > 0 else [row.top, row.bottom, math.nan]
    return xs, np.tile(ys, first.size)


def _named(name: str, binds: bool) -> str:
    return f"{name}, binds" if binds else name


def _rows(count: int, top: float, beside: bool) -> list[_Row]:
    """Return where the bounds stand, names beside the bars or above them."""
    if beside:
        tops = [top + k * _PITCH + (_PITCH - _BAR) / 2 for k in range(count)]
        return [_Row(y + _BAR / 2 + 4, y, y + _BAR) for y in tops]
    tops = [top + k * _STACKED_PITCH + _STACKED_PITCH - _BAR - 2 for k in range(count)]
    return [_Row(y - 7, y, y + _BAR) for y in tops]


def _broken(
    xs: Sequence[float], pieces: Sequence[tuple[float, float]]
) -> tuple[list[float], list[float]]:
    """Return upright lines over some pieces of the page as one polyline with gaps."""
    nan = math.nan
    across = [place for x in xs for _ in pieces for place in (x, x, nan)]
    return across, [y for _ in xs for piece in pieces for y in (*piece, nan)]


def window(
    found: WidthWindow, *, theme: str | Theme = "light", width_px: int = 900
) -> WindowPicture:
    """Return the picture of a width window.

    Parameters
    ----------
    found : WidthWindow
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.

    Returns
    -------
    WindowPicture
    """
    return WindowPicture.of(found, theme, width_px)

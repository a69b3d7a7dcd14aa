"""What stands beside and below a cycle: trips and true extremes, and the cycle in words."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

from matplotlib.axes import Axes

from hystkit.figures.cycle_axes import duration, quantity
from hystkit.figures.drafting import (
    GUIDE,
    MARK,
    Ink,
    Tag,
    lettered,
    level_marker,
    line,
    marker,
    segments,
)
from hystkit.figures.frame import Frame
from hystkit.figures.lettering import one_line, width_px
from hystkit.figures.placement import Want, spread_out
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Mark, Theme
from hystkit.figures.trip_tags import trip_rows
from hystkit.review.cycling import Cycling

TRIPS = ("upper", "lower")
#: A true extreme of the process value: hollow, so that the trace shows through.
EXTREME = Mark("-", "o", filled=False)
ENDS = {"highest": True, "lowest": False}
# From this width on names stand beside the values.
_NAMED = 560
# Labels begin here, right of the area, and their room grows in such steps [px].
_LABELS, _STEP = 24.0, 20.0


def trip_labels(data: Cycling, trip: str, page_px: int) -> list[list[str]]:
    """Return what stands at a trip: where the load is switched, and below it the trip in volts."""
    volts, sensed = (row[0] for row in trip_rows(data.levels, trip))
    does = data.edges.index(trip)
    value = sensed or volts.removeprefix(f"{trip}  ")
    if page_px < _NAMED:
        return [[f"{('on', 'off')[does]} {value}"], [""]]
    return [[f"{('on at', 'off at')[does]} {value}"], [volts if sensed else trip]]


def extreme_label(data: Cycling, name: str, page_px: int) -> str:
    """Return what stands at the highest or lowest true extreme; nothing where there is none."""
    value = data.furthest(high=ENDS[name])
    if math.isnan(value) or data.axis is None:
        return ""
    text = quantity(value, data.axis.width, data.levels.signal)
    return text if page_px < _NAMED else f"{name} {text}"


def room_for(data: Cycling, page_px: int) -> float:
    """Return the room for the labels right of the area [px]; in steps: it seldom changes."""
    labels = [trip_labels(data, trip, page_px) for trip in TRIPS]
    texts = [(row[0], number == 0) for rows in labels for number, row in enumerate(rows)]
    texts += [(extreme_label(data, name, page_px), False) for name in ENDS]
    widest = max(width_px(text, bold=bold) for text, bold in texts)
    return _LABELS + _STEP * math.ceil((widest + 6) / _STEP)


class SideLabels:
    """Trips and true extremes right of the area, each beside its height and none on another.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    frame : Frame
        The area.
    page_px : int
        Width of the page.
    moving : callable
        Registers an artist with the picture.
    """

    def __init__(
        self,
        page: Axes,
        theme: Theme,
        frame: Frame,
        page_px: int,
        moving: Callable[[Any], Any],
    ) -> None:
        self._frame, self._page_px = frame, page_px
        self._tags, self._marks, self._leads = {}, {}, {}
        for name in (*TRIPS, *ENDS):
            trip = name in TRIPS
            colour = getattr(theme, name) if trip else theme.text
            inks = [[Ink(colour, bold=True)], [Ink(colour)]] if trip else [[Ink(colour)]]
            self._tags[name] = Tag(page, inks, moving, name)
            self._leads[name] = moving(line(page, colour, 1, GUIDE))
            paper = theme.background
            made = (
                level_marker(page, name, colour, paper, 9)
                if trip
                else marker(page, EXTREME, colour, paper, 7, MARK)
            )
            self._marks[name] = moving(made)

    def move(self, data: Cycling) -> None:
        """Set all labels.

        Parameters
        ----------
        data : Cycling
            What is shown.
        """
        frame = self._frame
        values = {} if data.axis is None else dict(data.trips)
        values |= {name: data.furthest(high=high) for name, high in ENDS.items()}
        shown = [name for name, value in values.items() if not math.isnan(value)]
        for name in {*self._tags} - {*shown}:
            self._hide(name)
        heights = {name: frame.up.inside(values[name]) for name in shown}
        # Where two stand at one height, the highest is above and the lowest below.
        rank = {"highest": -1, "lowest": 1}
        shown.sort(key=lambda name: (heights[name], rank.get(name, 0)))
        wants = [Want.centred(heights[name], self._length(name)) for name in shown]
        starts = spread_out(wants, (frame.top - 12, frame.bottom + 12), gap=3) or ()
        for name, start in zip(shown, starts, strict=True):
            self._put(data, name, heights[name], start)

    def _length(self, name: str) -> float:
        return 31.0 if name in TRIPS and self._page_px >= _NAMED else 16.0

    def _put(self, data: Cycling, name: str, y: float, start: float) -> None:
        right, at = self._frame.right, start + 8
        if name in TRIPS:
            self._tags[name].write(*trip_labels(data, name, self._page_px))
        else:
            self._tags[name].write([extreme_label(data, name, self._page_px)])
        self._tags[name].put(right + _LABELS, start + 12)
        self._marks[name].set_data([right + 14], [at])
        self._leads[name].set_data([right, right + 10], [y, at])
        for artist in (self._marks[name], self._leads[name]):
            artist.set_visible(True)

    def _hide(self, name: str) -> None:
        self._tags[name].hide()
        for artist in (self._marks[name], self._leads[name]):
            artist.set_visible(False)


class CycleKey:
    """The steady cycle below the area: on and off time, period, starts per hour.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    page_px : int
        Width of the page.
    top : float
        Upper end [px].
    moving : callable
        Registers an artist with the picture.
    """

    pitch = 18.0
    _names = ("on", "off", "period", "starts")
    _head = "steady cycle"

    def __init__(
        self, page: Axes, theme: Theme, page_px: int, top: float, moving: Callable[[Any], Any]
    ) -> None:
        lettered(page, self._head, (EDGE, top + 13), Ink(theme.muted, "small"))
        columns = self._columns(page_px)
        indent = self._indent(page_px)
        self._room = (page_px - EDGE - indent) / columns
        self._tags, self._places = {}, {}
        first = 0 if indent > EDGE else 1
        for place, name in enumerate(self._names):
            x = indent + (place % columns) * self._room
            y = top + 13 + (first + place // columns) * self.pitch
            if name in ("on", "off"):
                ends = [((x, y - 4), (x + 12, y - 4))]
                segments(page, ends, theme.output, BAR_PX if name == "on" else LINE_PX)
                x += 18
            self._tags[name] = Tag(page, [[Ink(theme.text, "small")]], moving, name)
            self._places[name] = (x, y)

    @classmethod
    def rows(cls, page_px: int) -> int:
        """Return how many lines there are.

        Parameters
        ----------
        page_px : int
            Width of the page.
        """
        columns = cls._columns(page_px)
        return -(-len(cls._names) // columns) + (cls._indent(page_px) == EDGE)

    @staticmethod
    def _columns(page_px: int) -> int:
        return 4 if page_px >= _NAMED else 2

    @classmethod
    def _indent(cls, page_px: int) -> float:
        """Return where the first column starts: beside the heading, or below it."""
        return EDGE + width_px(cls._head, "small") + 18 if page_px >= _NAMED else EDGE

    def move(self, data: Cycling) -> None:
        """Set all lines.

        Parameters
        ----------
        data : Cycling
            That cycles.
        """
        for name, text in cycle_texts(data).items():
            x, y = self._places[name]
            room = self._room - (24 if name in ("on", "off") else 6)
            self._tags[name].write([one_line(text, room, "small")])
            self._tags[name].put(x, y)


#: Load on and off in the strip and in the key: a bar and a line [px].
BAR_PX, LINE_PX = 11.0, 1.6


def cycle_texts(data: Cycling) -> dict[str, str]:
    """Return the steady cycle in short: on and off time, period, starts per hour."""
    cycle = data.cycle
    if cycle is None:
        return {}
    period = float(cycle.period)
    times = {"on": cycle.on_time, "off": cycle.off_time, "period": period}
    told = {name: f"{name} {duration(float(time), period)}" for name, time in times.items()}
    return {**told, "starts": f"{float(cycle.starts_per_hour):.3g} starts/h"}

"""A plant between both trips: process and sensed value over time, and when the load is on."""

from __future__ import annotations

import math
from collections.abc import Hashable

import numpy as np
from matplotlib.axes import Axes

from hystkit.figures.cycle_axes import CycleFrame, duration, left_of, quantity
from hystkit.figures.cycle_key import (
    BAR_PX,
    EXTREME,
    LINE_PX,
    TRIPS,
    CycleKey,
    SideLabels,
    cycle_texts,
    room_for,
)
from hystkit.figures.drafting import (
    GUIDE,
    MARK,
    SHADE,
    TRACE,
    Ink,
    Tag,
    box,
    lettered,
    level_marker,
    line,
    marker,
    segments,
    stretch,
)
from hystkit.figures.frame import draw_message, ends_of, padded
from hystkit.figures.graduation import Scale
from hystkit.figures.lettering import short_unit, width_px
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import MARKS, Dashes, Theme
from hystkit.review.cycling import Cycling

#: The sensed value is told from the process value by its line, not by its colour alone.
_SENSED: Dashes = (0, (1.4, 1.4))
_STEP: Dashes = (0, (7, 3))
# Rows above the area, its limits, and from the area down to the strip and the time axis [px].
_LEGEND, _MESSAGE, _TOP = 24.0, 36.0, 14.0
_STRIP, _AXIS, _BELOW = 21.0, 36.0, 28.0
_NO_ROOM = 92.0


class CyclePicture(Picture[Cycling]):
    """Process and sensed value over several cycles, with both trips, true extremes and the load.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: Cycling) -> Hashable:
        self._trips = data.axis is not None
        self._lagged = not np.array_equal(data.waveform.process, data.waveform.sensed)
        values = [*ends_of(data.waveform.process), *ends_of(data.waveform.sensed)]
        up = padded([*values, *(data.trips.values() if self._trips else ())])
        signal = data.levels.signal
        unit = "V" if signal is None else short_unit(signal)
        name = "signal" if signal is None else signal.name
        self._disturbed = bool(data.disturbed)
        top = _TOP + (_MESSAGE if data.message else 0)
        top += _LEGEND if self._lagged or self._disturbed else 0
        height = min(max(0.26 * self._width_px, 150), 240)
        right = room_for(data, self._width_px) if self._trips else _NO_ROOM
        self._frame = CycleFrame(
            Scale(0.0, data.length, left_of(up, height, unit), self._width_px - right),
            Scale(*up, top + height, top),
            "time",
            name,
            up_unit=unit,
            axis_below=_AXIS,
        )
        self._message = data.message
        shown = (self._lagged, self._disturbed, self._trips, data.cycles)
        return self._frame, self._message, shown

    def _lay_out(self, data: Cycling) -> None:
        frame = self._frame
        key_top = frame.bottom + _AXIS + _BELOW
        rows = CycleKey.rows(self._width_px) if data.cycles else 0
        self._resize(key_top + rows * CycleKey.pitch + EDGE)
        page, theme, moving = self._page(), self._theme, self._moving
        frame.draw(page, theme)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, 17)
        self._draw_legend(page, theme)
        self._band = moving(box(page, theme.band, theme.band_alpha, SHADE))
        self._instants = moving(
            segments(page, [], theme.muted, 1, zorder=GUIDE, dashes=(0, (1, 2)))
        )
        self._steps = moving(
            segments(page, [], theme.muted, 1.4, zorder=GUIDE, dashes=_STEP, gid="step")
        )
        self._process = moving(line(page, theme.text, 2.2, TRACE, gid="process"))
        self._sensed = moving(line(page, theme.signal, 1.8, TRACE, gid="sensed", linestyle=_SENSED))
        frame.clip(page, self._process, self._sensed)
        self._turns = moving(marker(page, EXTREME, theme.text, theme.background, 6, MARK))
        self._make_trips(page, theme)
        self._make_strip(page, theme)
        self._labels = SideLabels(page, theme, frame, self._width_px, moving)
        self._key_rows = (
            CycleKey(page, theme, self._width_px, key_top, moving) if data.cycles else None
        )

    def _draw_legend(self, page: Axes, theme: Theme) -> None:
        y = self._frame.top - 14
        entries: list[tuple[str, str, float, Dashes]] = []
        if self._lagged:
            entries += [("process", theme.text, 2.2, "-"), ("sensed", theme.signal, 1.8, _SENSED)]
        if self._disturbed:
            entries += [("disturbance", theme.muted, 1.4, _STEP)]
        x = EDGE if len(entries) > 2 else self._frame.left
        for text, colour, width, dashes in entries:
            segments(page, [((x, y - 4), (x + 24, y - 4))], colour, width, dashes=dashes)
            lettered(page, text, (x + 30, y), Ink(theme.text, "small"))
            x += 30 + width_px(text, "small") + 14

    def _make_trips(self, page: Axes, theme: Theme) -> None:
        moving, paper = self._moving, theme.background
        self._lines, self._switches = {}, {}
        for trip in TRIPS:
            colour = getattr(theme, trip)
            self._lines[trip] = moving(line(page, colour, 1.6, GUIDE, linestyle=MARKS[trip].dashes))
            self._switches[trip] = moving(level_marker(page, trip, colour, paper, 8))

    def _make_strip(self, page: Axes, theme: Theme) -> None:
        """Make the strip that shows when the load is on: a bar for on, a line for off."""
        moving, y = self._moving, self._frame.bottom + _STRIP
        lettered(page, "load", (self._frame.left - 15, y + 4), Ink(theme.muted, "small"), "right")
        self._off = moving(segments(page, [], theme.output, LINE_PX, zorder=TRACE, gid="off"))
        self._on = moving(segments(page, [], theme.output, BAR_PX, zorder=TRACE, gid="on"))
        self._duty = Tag(page, [[Ink(theme.text, "small")]], moving, "duty")

    def _move(self, data: Cycling) -> None:
        frame, found = self._frame, data.waveform
        x = frame.across.px(found.time)
        self._process.set_data(x, frame.up.px(found.process))
        self._sensed.set_data(x, frame.up.px(found.sensed))
        self._sensed.set_visible(self._lagged)
        self._steps.set_segments(
            [
                np.array([(at, frame.top), (at, frame.bottom)])
                for at in map(frame.across.px, data.disturbed)
            ]
        )
        turns = data.turns
        self._turns.set_data(
            [frame.across.px(turn.time) for turn in turns],
            [frame.up.px(turn.value) for turn in turns],
        )
        self._labels.move(data)
        self._move_trips(data)
        self._move_switches(data)
        self._move_strip(data)
        if self._key_rows is not None:
            self._key_rows.move(data)

    def _move_trips(self, data: Cycling) -> None:
        frame = self._frame
        for artist in (self._band, *self._lines.values()):
            artist.set_visible(self._trips)
        if not self._trips:
            return
        heights = {trip: frame.up.inside(value) for trip, value in data.trips.items()}
        stretch(self._band, frame.left, min(heights.values()), frame.right, max(heights.values()))
        for trip, y in heights.items():
            self._lines[trip].set_data([frame.left, frame.right], [y, y])

    def _move_strip(self, data: Cycling) -> None:
        frame, y = self._frame, self._frame.bottom + _STRIP
        for strip, state in ((self._on, True), (self._off, False)):
            ends = [(phase.begin, phase.end) for phase in data.phases if phase.on == state]
            strip.set_segments([np.array([(frame.across.px(x), y) for x in pair]) for pair in ends])
        self._duty.write([_duty(data)])
        self._duty.put(frame.right + 24, y + 4)

    def _move_switches(self, data: Cycling) -> None:
        """Mark every command where the sensed value stands, and lead from there to the strip."""
        frame, found = self._frame, data.waveform
        places: dict[str, list[tuple[float, float]]] = {trip: [] for trip in TRIPS}
        for phase in data.phases:
            if phase.begin > 0:
                value = float(np.interp(phase.begin, found.time, found.sensed))
                trip = data.edges[0 if phase.on else 1]
                places[trip].append((frame.across.px(phase.begin), frame.up.px(value)))
        for trip, marks in places.items():
            self._switches[trip].set_data([x for x, _ in marks], [y for _, y in marks])
        end = frame.bottom + _STRIP
        self._instants.set_segments(
            [np.array([(x, y), (x, end)]) for marks in places.values() for x, y in marks]
        )

    def _describe(self, data: Cycling) -> str:
        if data.axis is None or data.cycle is None:
            return f"No cycle: {data.message}."
        signal, width = data.levels.signal, data.axis.width
        on_at, off_at = (quantity(data.trips[name], width, signal) for name in data.edges)
        words = [f"Process value over {duration(data.length)}", f"on at {on_at}, off at {off_at}"]
        for name, high in (("highest", True), ("lowest", False)):
            value = data.furthest(high=high)
            if not math.isnan(value):
                words.append(f"{name} {quantity(value, width, signal)}")
        if not data.cycles:
            return "; ".join([*words, data.message]) + "."
        told = [*cycle_texts(data).values(), _duty(data)]
        return "; ".join([*words, "steady cycle: " + ", ".join(told)]) + "."


def _duty(data: Cycling) -> str:
    """Return the share of time with the load on, in the steady cycle; nothing without one."""
    return f"{100 * float(data.cycle.duty):.3g} % on" if data.cycle and data.cycles else ""


def cycle(data: Cycling, *, theme: str | Theme = "light", width_px: int = 900) -> CyclePicture:
    """Return the picture of a plant under the control of a design.

    Parameters
    ----------
    data : Cycling
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.

    Returns
    -------
    CyclePicture
    """
    return CyclePicture.of(data, theme, width_px)

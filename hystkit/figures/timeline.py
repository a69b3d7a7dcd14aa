"""Signal and output against time."""

from __future__ import annotations

import math
from collections.abc import Hashable

import numpy as np
from matplotlib.axes import Axes

from hystkit.figures.drafting import (
    GUIDE,
    SHADE,
    TRACE,
    Ink,
    Tag,
    box,
    level_marker,
    line,
    segments,
    stretch,
)
from hystkit.figures.frame import Frame, OutputTags, draw_message, ends_of, left_for, padded
from hystkit.figures.graduation import Scale
from hystkit.figures.lettering import width_px, written
from hystkit.figures.picture import Picture
from hystkit.figures.placement import Want, spread_out
from hystkit.figures.ruler_plan import NO_TRIPS, finite, switches
from hystkit.figures.theme import MARKS, Theme
from hystkit.figures.trip_tags import trip_rows, trips_in_words
from hystkit.numeric.views import Levels, Response

_LEAST_RIGHT, _BELOW, _BETWEEN = 128.0, 34.0, 34.0
# Labels of the trips begin here, right of the area, and their room grows in such steps [px].
_LABELS, _STEP = 24.0, 20.0
_TRIPS = ("upper", "lower")


class TimelinePicture(Picture[Response]):
    """Signal with its trips above, output below, on one time axis.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 480.
    """

    min_width_px = 480

    def _layout_key(self, data: Response) -> Hashable:
        levels = data.levels
        self._drawn = switches(levels)
        self._message = "" if self._drawn else levels.message or NO_TRIPS
        trips = [levels.lower, levels.upper] if self._drawn else []
        signal = padded([*ends_of(data.signal), *trips])
        output = padded([
            *finite(levels.v_ee, levels.v_cc, levels.output_low, levels.output_high),
            *ends_of(data.output),
        ])  # fmt: skip
        time = ends_of(data.time)
        across = (time[0], time[1]) if len(time) == 2 and time[1] > time[0] else (0.0, 1.0)
        self._right = _room_for(levels) if self._drawn else _LEAST_RIGHT
        self._frames = self._framed(across, signal, output)
        return self._frames, self._message, levels.signal is None

    def _framed(
        self,
        across: tuple[float, float],
        signal: tuple[float, float],
        output: tuple[float, float],
    ) -> tuple[Frame, Frame]:
        top = 16.0 if self._drawn else 52.0
        upper = min(max(0.21 * self._width_px, 140), 230)
        lower = 0.55 * upper
        left = max(left_for(signal, upper), left_for(output, lower))
        ends = (*across, left, self._width_px - self._right)
        middle = top + upper
        bottom = middle + _BETWEEN + lower
        self._height = bottom + _BELOW
        return (
            Frame(Scale(*ends), Scale(*signal, middle, top), "", "signal", "s"),
            Frame(Scale(*ends), Scale(*output, bottom, middle + _BETWEEN), "time", "output", "s"),
        )

    def _lay_out(self, data: Response) -> None:
        self._resize(self._height)
        page, theme, moving = self._page(), self._theme, self._moving
        for frame in self._frames:
            frame.draw(page, theme)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, 17)
        self._band = moving(box(page, theme.band, theme.band_alpha, SHADE))
        self._instants = moving(
            segments(page, [], theme.muted, 1, zorder=GUIDE, dashes=(0, (1, 2)))
        )
        self._outputs = OutputTags(page, theme, self._frames[1], moving)
        self._signal = moving(line(page, theme.signal, 2, TRACE, gid="signal"))
        self._output = moving(line(page, theme.output, 2, TRACE, gid="output"))
        self._frames[0].clip(page, self._signal)
        self._frames[1].clip(page, self._output)
        self._make_trips(page, theme)

    def _make_trips(self, page: Axes, theme: Theme) -> None:
        moving = self._moving
        self._lines, self._leads, self._ends = {}, {}, {}
        self._tags, self._switches = {}, {}
        for trip in _TRIPS:
            colour, paper = getattr(theme, trip), theme.background
            self._lines[trip] = moving(line(page, colour, 1.6, GUIDE, linestyle=MARKS[trip].dashes))
            self._leads[trip] = moving(line(page, colour, 1, GUIDE))
            self._ends[trip] = moving(level_marker(page, trip, colour, paper, 9))
            self._switches[trip] = moving(level_marker(page, trip, colour, paper, 9))
            self._tags[trip] = Tag(page, [[Ink(colour, bold=True)], [Ink(colour)]], moving, trip)

    def _move(self, data: Response) -> None:
        signal, output = self._frames
        self._signal.set_data(signal.across.px(data.time), signal.up.px(data.signal))
        self._output.set_data(output.across.px(data.time), output.up.px(data.output))
        self._outputs.move(data.levels)
        self._move_switches(data)
        still = (self._lines, self._leads, self._ends)
        for artist in (self._band, *(artist for kind in still for artist in kind.values())):
            artist.set_visible(self._drawn)
        if self._drawn:
            self._move_trips(data.levels)
        else:
            for tag in self._tags.values():
                tag.hide()

    def _move_trips(self, levels: Levels) -> None:
        frame = self._frames[0]
        heights = {trip: frame.up.inside(getattr(levels, trip)) for trip in _TRIPS}
        stretch(self._band, frame.left, heights["upper"], frame.right, heights["lower"])
        length = 31.0 if levels.signal is not None else 16.0
        wants = [Want.centred(heights[trip], length) for trip in _TRIPS]
        starts = spread_out(wants, (frame.top - 12, frame.bottom + 24), gap=2) or (0.0, 0.0)
        for trip, start in zip(_TRIPS, starts, strict=True):
            y = heights[trip]
            mark = start + 8
            self._lines[trip].set_data([frame.left, frame.right], [y, y])
            self._leads[trip].set_data([frame.right, frame.right + 10], [y, mark])
            self._ends[trip].set_data([frame.right + 14], [mark])
            self._tags[trip].write(*trip_rows(levels, trip))
            self._tags[trip].put(frame.right + _LABELS, start + 12)

    def _move_switches(self, data: Response) -> None:
        """Mark the instants at which the output changes, each with the trip that it passes."""
        signal, output = self._frames
        times = data.switches[np.isfinite(data.switches)] if self._drawn else np.empty(0)
        values = np.interp(times, data.time, data.signal) if times.size else np.empty(0)
        at_upper = np.abs(values - data.levels.upper) <= np.abs(values - data.levels.lower)
        x, y = signal.across.px(times), signal.up.px(values)
        for trip, chosen in (("upper", at_upper), ("lower", ~at_upper)):
            self._switches[trip].set_data(x[chosen], y[chosen])
        self._instants.set_segments(
            [np.array([(a, b), (a, output.bottom)]) for a, b in zip(x, y, strict=True)]
        )

    def _describe(self, data: Response) -> str:
        count = int(data.switches.size)
        length = written(float(data.time[-1] - data.time[0]), "s") if data.time.size else "0 s"
        return (
            f"Signal and output over {length}; {trips_in_words(data.levels)}; "
            f"the output changes state {count} {'time' if count == 1 else 'times'}."
        )


def _room_for(levels: Levels) -> float:
    """Return the room for the labels of the trips; in steps, so that it seldom changes."""
    widest = max(
        width_px(text, bold=number == 0)
        for trip in _TRIPS
        for number, (text,) in enumerate(trip_rows(levels, trip))
    )
    return max(_LABELS + _STEP * math.ceil((widest + 6) / _STEP), _LEAST_RIGHT)


def timeline(
    response: Response, *, theme: str | Theme = "light", width_px: int = 900
) -> TimelinePicture:
    """Return the picture of a signal and the output that follows it.

    Parameters
    ----------
    response : Response
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 480.

    Returns
    -------
    TimelinePicture
    """
    return TimelinePicture.of(response, theme, width_px)

"""The switching loop: output against signal, both ways."""

from __future__ import annotations

from collections.abc import Hashable

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from numpy.typing import NDArray

from hystkit.figures.drafting import (
    GUIDE,
    MARK,
    SHADE,
    TRACE,
    box,
    line,
    point_tip,
    stretch,
    tip,
)
from hystkit.figures.frame import Frame, OutputTags, draw_message, ends_of, left_for, padded
from hystkit.figures.graduation import Scale, outward, step_for
from hystkit.figures.lettering import written, written_span
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE, NO_TRIPS, finite, switches
from hystkit.figures.theme import MARKS, Theme
from hystkit.figures.trip_tags import TripTags, trips_in_words
from hystkit.numeric.views import Loop

_RIGHT, _BELOW = 118.0, 34.0
#: Path, the trip it ends at, and where on its jump the arrow stands. The jumps run in opposite
#: directions, so that with a share below one half the arrows of a narrow band are kept apart.
PATHS = (("rising", "upper", 0.36), ("falling", "lower", 0.36))
_LEAST_JUMP = 26.0
_LEAST_BAND = 44.0


class LoopPicture(Picture[Loop]):
    """Output against signal, with the path of each direction.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.
    """

    min_width_px = 360

    def _layout_key(self, data: Loop) -> Hashable:
        levels = data.levels
        self._drawn = switches(levels)
        across = _steady(data.axis)
        up = padded([
            *finite(levels.v_ee, levels.v_cc, levels.output_low, levels.output_high),
            *(end for _, output in (data.rising, data.falling) for end in ends_of(output)),
        ])  # fmt: skip
        self._message = "" if self._drawn else levels.message or NO_TRIPS
        self._frame = self._framed(across, up, two_rows=levels.signal is not None)
        return self._frame, self._message

    def _framed(
        self, across: tuple[float, float], up: tuple[float, float], *, two_rows: bool
    ) -> Frame:
        self._height = min(max(0.56 * self._width_px, 270), 440)
        top = 62.0 if two_rows or not self._drawn else 47.0
        bottom = self._height - _BELOW
        return Frame(
            Scale(*across, left_for(up, bottom - top), self._width_px - _RIGHT),
            Scale(*up, bottom, top),
            "signal",
            "output",
        )

    def _lay_out(self, data: Loop) -> None:
        self._resize(self._height)
        page, theme, moving = self._page(), self._theme, self._moving
        self._frame.draw(page, theme)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, 17)
        self._band = moving(box(page, theme.band, theme.band_alpha, SHADE))
        self._guides = {
            trip: moving(line(page, getattr(theme, trip), 1, GUIDE, linestyle=(0, (2, 2))))
            for trip in ("lower", "upper")
        }
        self._outputs = OutputTags(page, theme, self._frame, moving)
        self._make_paths(page, theme)
        self._trips = TripTags(page, theme, moving)

    def _make_paths(self, page: Axes, theme: Theme) -> None:
        self._paths, self._tips = {}, {}
        for way, trip, _ in PATHS:
            colour = getattr(theme, trip)
            self._paths[way] = self._moving(
                line(page, colour, 2.4, TRACE, linestyle=MARKS[trip].dashes, gid=way)
            )
            self._paths[way].set_dash_capstyle("butt")
            self._tips[way] = [self._moving(tip(page, colour, 13, MARK)) for _ in range(2)]
            self._frame.clip(page, self._paths[way])

    def _move(self, data: Loop) -> None:
        frame = self._frame
        self._outputs.move(data.levels)
        for way, _, share in PATHS:
            signal, output = getattr(data, way)
            x, y = frame.across.px(signal), frame.up.px(output)
            self._paths[way].set_data(x, y)
            self._point_tips(self._tips[way], x, y, share, data)
        for artist in (self._band, *self._guides.values()):
            artist.set_visible(self._drawn)
        if self._drawn:
            self._move_trips(data)
        else:
            self._trips.hide()

    def _move_trips(self, data: Loop) -> None:
        frame, levels = self._frame, data.levels
        lower, upper = (frame.across.inside(v) for v in (levels.lower, levels.upper))
        marks = frame.top - 8
        stretch(self._band, lower, marks, upper, frame.bottom)
        for trip, x in (("lower", lower), ("upper", upper)):
            self._guides[trip].set_data([x, x], [marks, frame.bottom])
        row = (EDGE, self._width_px - EDGE)
        self._trips.move(levels, (lower, upper), row, 17, marks)

    def _point_tips(
        self,
        tips: list[Line2D],
        x: NDArray[np.float64],
        y: NDArray[np.float64],
        share: float,
        data: Loop,
    ) -> None:
        """Point one tip along the jump of a path, and one along its part inside the band."""
        for artist in tips:
            artist.set_visible(False)
        if not self._drawn or x.size < 2:
            return
        jump = int(np.nanargmax(np.abs(np.diff(y))))
        drop = y[jump + 1] - y[jump]
        if abs(drop) >= _LEAST_JUMP:
            at = (float(x[jump]), float(y[jump] + share * drop + np.sign(drop) * 5))
            point_tip(tips[0], at, "down" if drop > 0 else "up")
            tips[0].set_visible(True)
        ends = [self._frame.across.px(v) for v in (data.levels.lower, data.levels.upper)]
        if ends[1] - ends[0] >= _LEAST_BAND:
            middle = (ends[0] + ends[1]) / 2
            ascending = bool(x[-1] > x[0])
            height = np.interp(middle, x, y) if ascending else np.interp(middle, x[::-1], y[::-1])
            point = middle + (5 if ascending else -5)
            point_tip(tips[1], (point, float(height)), "right" if ascending else "left")
            tips[1].set_visible(True)

    def _describe(self, data: Loop) -> str:
        levels = data.levels
        return (
            f"Output against signal from {written_span(*data.axis)}; {trips_in_words(levels)}; "
            f"output high {written(levels.output_high)}, low {written(levels.output_low)}."
        )


def _steady(axis: tuple[float, float]) -> tuple[float, float]:
    """Return the axis in steps, so that it stays while the trips move."""
    if len(finite(*axis)) < 2 or not axis[1] > axis[0]:
        return 0.0, 1.0
    return outward(*axis, step_for(axis[1] - axis[0], 20))


def loop(data: Loop, *, theme: str | Theme = "light", width_px: int = 900) -> LoopPicture:
    """Return the picture of a switching loop.

    Parameters
    ----------
    data : Loop
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.

    Returns
    -------
    LoopPicture
    """
    return LoopPicture.of(data, theme, width_px)

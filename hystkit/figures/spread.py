"""The spread of both trips: samples, exact limits and wanted windows on one volt axis."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from matplotlib.patches import Polygon, Rectangle

from hystkit.analyses.spread.measurand import MeasurandSpread
from hystkit.analyses.spread.result import Spread
from hystkit.figures.drafting import GUIDE, SHADE, TRACE, box, line, stretch
from hystkit.figures.frame import draw_message
from hystkit.figures.graduation import Scale, outward, step_for
from hystkit.figures.lettering import width_px
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE, NO_TRIPS, finite, switches
from hystkit.figures.spread_key import (
    Key,
    axis_titles,
    draw_axes,
    sensed_text,
    span_text,
    window_text,
)
from hystkit.figures.theme import MARKS, Theme
from hystkit.figures.trip_tags import TripTags, trips_in_words
from hystkit.numeric.levels import levels
from hystkit.numeric.views import Interval, Levels
from hystkit.numeric.yields import Window, Yield, percent

TRIPS = ("lower", "upper")
_BAR_PX = 2.0
_CAP = 4.0
# Room of the limits above the samples, and of both axes below them [px].
_LIMITS, _AXIS, _SECOND_AXIS = 26.0, 26.0, 27.0


@dataclass(frozen=True)
class WindowedSpread:
    """What a `SpreadPicture` shows.

    Attributes
    ----------
    spread : Spread
        Of a design.
    levels : Levels
        Of the same design; the nominal trips and the signal are taken from them.
    upper, lower : pair of float, or None
        Wanted windows [V]; an end that is None is open.
    """

    spread: Spread
    levels: Levels
    upper: Window | None = None
    lower: Window | None = None

    @cached_property
    def share(self) -> Yield | None:
        """Yield within both windows; None where none is wanted."""
        if self.upper is None and self.lower is None:
            return None
        return self.spread.yield_within(upper=self.upper, lower=self.lower)

    @cached_property
    def sensed_share(self) -> Yield | None:
        """The same with the tolerances of the signal; None where it changes nothing."""
        sensed = self.sensed
        if self.share is None or sensed is None:
            return None
        return sensed.yield_at(upper=self.upper, lower=self.lower)

    @property
    def sensed(self) -> MeasurandSpread | None:
        """The spread in the measurand, where its limits are not simply those of the volts."""
        found = self.spread.measurand
        return found if found is not None and found.adds else None

    def window(self, trip: str) -> Window | None:
        """Return the wanted window of a trip [V].

        Parameters
        ----------
        trip : {"upper", "lower"}
            Which.

        Returns
        -------
        pair of float, or None
        """
        found: Window | None = getattr(self, trip)
        return found

    def limits(self, trip: str) -> Interval | None:
        """Return the exact limits of a trip [V], None where not all combinations switch.

        Parameters
        ----------
        trip : {"upper", "lower"}
            Which.

        Returns
        -------
        pair of float, or None
        """
        return self.spread.extremes[trip] if self.spread.switches else None


class SpreadPicture(Picture[WindowedSpread]):
    """Samples of both trips, their exact limits and the wanted windows.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.
    """

    min_width_px = 360

    def _layout_key(self, data: WindowedSpread) -> Hashable:
        found = data.levels
        self._drawn = switches(found)
        self._message = "" if self._drawn else found.message or NO_TRIPS
        signal = found.signal
        titles = axis_titles(*_range(data), signal)
        right = self._width_px - 16 - max(width_px(t, "small") for t in titles) - EDGE
        self._across = Scale(*_range(data), EDGE + 10, right)
        self._marks = (43.0 if signal is not None else 28.0) + (4 if self._message else 0)
        self._top = self._marks + _LIMITS
        self._bottom = self._top + min(max(0.24 * self._width_px, 120), 190)
        self._key_top = self._bottom + _AXIS + (_SECOND_AXIS if signal is not None else 0)
        windows = tuple(data.window(trip) is not None for trip in TRIPS)
        # A window moves within the picture; that there is one changes the rows below.
        return self._across, titles, signal, self._message, windows, data.sensed is not None

    def _lay_out(self, data: WindowedSpread) -> None:
        rows = Key.rows(self._width_px, data)
        self._resize(self._key_top + rows * Key.pitch + EDGE)
        page, theme, moving = self._page(), self._theme, self._moving
        draw_axes(page, theme, self._across, self._bottom, data.levels.signal)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, 17)
        self._windows: dict[str, Rectangle] = {}
        self._fills: dict[str, Polygon] = {}
        self._edges: dict[str, Line2D] = {}
        self._outlines: dict[str, Line2D] = {}
        self._guides: dict[str, Line2D] = {}
        self._limits: dict[str, Line2D] = {}
        for trip in TRIPS:
            self._make_trip(page, trip)
        self._tags = TripTags(page, theme, moving)
        self._key_rows = Key(page, theme, self._width_px, self._key_top, data, moving)

    def _make_trip(self, page: Axes, trip: str) -> None:
        theme, moving = self._theme, self._moving
        colour, dashes = getattr(theme, trip), MARKS[trip].dashes
        self._windows[trip] = moving(box(page, colour, 0.12, SHADE - 1))
        self._windows[trip].set_gid(f"window {trip}")
        self._edges[trip] = moving(line(page, colour, 1.2, SHADE, linestyle=(0, (1, 2))))
        fill = Polygon([(0.0, 0.0)], facecolor=(colour, 0.38), linewidth=0, zorder=SHADE)
        page.add_patch(fill)
        fill.set_gid(f"samples {trip}")
        self._fills[trip] = moving(fill)
        self._outlines[trip] = moving(line(page, colour, 1.4, TRACE, linestyle=dashes))
        self._outlines[trip].set_dash_capstyle("butt")
        self._guides[trip] = moving(line(page, colour, 1, GUIDE, linestyle=(0, (2, 2))))
        self._limits[trip] = moving(line(page, colour, 1.8, TRACE, gid=f"limits {trip}"))

    def _move(self, data: WindowedSpread) -> None:
        counts = {trip: self._counted(data, trip) for trip in TRIPS}
        most = max(int(found.max(initial=0)) for found in counts.values())
        for trip in TRIPS:
            self._move_samples(trip, counts[trip], most)
            self._move_limits(trip, data.limits(trip))
            self._move_window(trip, data.window(trip))
            self._guides[trip].set_visible(self._drawn)
        if self._drawn:
            places = tuple(self._across.inside(getattr(data.levels, trip)) for trip in TRIPS)
            row = (EDGE, self._width_px - EDGE)
            self._tags.move(data.levels, (places[0], places[1]), row, 17, self._marks)
            for trip, x in zip(TRIPS, places, strict=True):
                self._guides[trip].set_data([x, x], [self._marks, self._bottom])
        else:
            self._tags.hide()
        self._key_rows.move(data)

    def _counted(self, data: WindowedSpread, trip: str) -> Any:
        """Count the samples of a trip under each bar."""
        values = data.spread.samples[trip]
        scale = self._across
        bars = int((scale.end - scale.start) / _BAR_PX)
        share = (values[np.isfinite(values)] - scale.low) / (scale.high - scale.low)
        places = np.clip((share * bars).astype(np.intp), 0, bars - 1)
        return np.bincount(places, minlength=bars)

    def _move_samples(self, trip: str, counts: Any, most: int) -> None:
        scale, shown = self._across, np.flatnonzero(counts)
        visible = bool(shown.size)
        self._fills[trip].set_visible(visible)
        self._outlines[trip].set_visible(visible)
        if not visible:
            return
        first, last = int(shown[0]), int(shown[-1]) + 1
        edges = np.linspace(scale.start, scale.end, counts.size + 1)[first : last + 1]
        heights = (self._bottom - self._top) * counts[first:last] / most
        x = np.repeat(edges, 2)
        y = self._bottom - np.concatenate([[0.0], np.repeat(heights, 2), [0.0]])
        self._fills[trip].set_xy(np.column_stack([x, y]))
        self._outlines[trip].set_data(x, y)

    def _move_limits(self, trip: str, limits: Interval | None) -> None:
        bracket = self._limits[trip]
        bracket.set_visible(limits is not None)
        if limits is None:
            return
        left, right = (self._across.inside(end) for end in limits)
        # The one stands above the other, for they may overlap.
        y = self._marks + (11 if trip == "upper" else 20)
        ends = [y - _CAP, y + _CAP, y, y, y - _CAP, y + _CAP]
        bracket.set_data([left, left, left, right, right, right], ends)

    def _move_window(self, trip: str, window: Window | None) -> None:
        for artist in (self._windows[trip], self._edges[trip]):
            artist.set_visible(window is not None)
        if window is None:
            return
        scale, top = self._across, self._marks + 5
        low, high = window
        left = scale.start if low is None else scale.inside(low)
        right = scale.end if high is None else scale.inside(high)
        stretch(self._windows[trip], left, top, right, self._bottom)
        # An end that is open has no edge.
        at = [x for x, end in ((left, low), (right, high)) if end is not None]
        nan = float("nan")
        self._edges[trip].set_data(
            [place for x in at for place in (x, x, nan)], [top, self._bottom, nan] * len(at)
        )

    def _describe(self, data: WindowedSpread) -> str:
        words = [f"Spread over {len(data.spread.box.quantities)} uncertain quantities"]
        words.append(trips_in_words(data.levels) if self._drawn else self._message.rstrip("."))
        for trip in TRIPS:
            limits, window = data.limits(trip), data.window(trip)
            if limits is not None:
                words.append(f"{trip} exactly within {span_text(*limits)}")
                words += filter(None, [sensed_text(data, trip)])
            if window is not None:
                words.append(f"wanted {window_text(window)}")
        if data.share is not None:
            words.append(f"yield {percent(data.share.value)}")
        if data.sensed_share is not None:
            words.append(f"with the signal {percent(data.sensed_share.value)}")
        if not data.spread.switches and self._drawn:
            words.append(data.spread.message)
        return "; ".join(words) + "."


def _range(data: WindowedSpread) -> tuple[float, float]:
    """Return the range of the axis; it follows what there is to show in coarse steps."""
    found = data.levels
    values = finite(found.lower, found.upper)
    for trip in TRIPS:
        samples = data.spread.samples[trip]
        kept = samples[np.isfinite(samples)]
        values += [float(kept.min()), float(kept.max())] if kept.size else []
        values += finite(*(data.limits(trip) or ()), *(data.window(trip) or ()))
    if not values:
        return 0.0, 1.0
    low, high = min(values), max(values)
    if not high > low:
        low, high = low - 0.5, high + 0.5
    pad = 0.04 * (high - low)
    return outward(low - pad, high + pad, step_for(high - low, 10))


def spread(
    found: Spread,
    *,
    upper: Window | None = None,
    lower: Window | None = None,
    theme: str | Theme = "light",
    width_px: int = 900,
) -> SpreadPicture:
    """Return the picture of a spread.

    Parameters
    ----------
    found : Spread
        What to show.
    upper, lower : pair of float, optional
        Wanted windows [V]; an end that is None is open.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.

    Returns
    -------
    SpreadPicture

    Raises
    ------
    InputError
        Naming every window that is not an interval.
    """
    picture = SpreadPicture(theme, width_px)
    picture.update(WindowedSpread(found, levels(found.design), upper, lower))
    return picture

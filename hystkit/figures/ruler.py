"""The ruler: everything of a design that must fit together, on one volt axis."""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass

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
    level_marker,
    line,
    marker,
    stretch,
)
from hystkit.figures.lettering import written, written_span
from hystkit.figures.picture import Picture
from hystkit.figures.placement import Want, place
from hystkit.figures.ruler_plan import EDGE, finite, plan_for, rows_for, switches
from hystkit.figures.ruler_scale import draw_scale
from hystkit.figures.theme import Mark, Theme, symbol
from hystkit.figures.trip_tags import TripTags, trips_in_words
from hystkit.numeric.views import Levels

#: A margin below this share of the supply is marked as small.
SMALL_MARGIN = 0.02
_RAIL_CLEARANCE = 5.0
_LEVELS = (("output_low", "V_OL"), ("output_high", "V_OH"), ("reference", "V_REF"))


@dataclass(frozen=True)
class Margin:
    """Distance from an input pin's voltage at a trip to the nearest end of its allowed range.

    Attributes
    ----------
    value : float
        [V]; negative where the pin lies outside.
    pin, limit : float
        Both ends [V].
    small : bool
        Whether it is less than `SMALL_MARGIN` of the supply.
    """

    value: float
    pin: float
    limit: float
    small: bool


def nearest_margin(levels: Levels) -> Margin | None:
    """Return the smallest margin to the common-mode range, None where there is none to draw."""
    if levels.common_mode is None or levels.pins is None or not switches(levels):
        return None
    low, high = levels.common_mode
    least, most = levels.pins
    pairs = [(least - low, least, low), (high - most, most, high)]
    drawable = [pair for pair in pairs if len(finite(*pair)) == 3]
    if not drawable:
        return None
    value, pin, limit = min(drawable)
    return Margin(value, pin, limit, value < SMALL_MARGIN * (levels.v_cc - levels.v_ee))


class RulerPicture(Picture[Levels]):
    """The ruler of a design, from below V_EE to above V_CC.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 640; the height follows from what there is to show.
    """

    min_width_px = 640

    def _layout_key(self, data: Levels) -> Hashable:
        self._plan = plan_for(data, self._width_px)
        return self._plan

    def _lay_out(self, data: Levels) -> None:
        plan = self._plan
        self._rows = rows_for(plan)
        self._resize(self._rows.height)
        page = self._page()
        draw_scale(page, plan, self._rows, self._theme, self._width_px)
        self._make_movers(page)

    def _make_movers(self, page: Axes) -> None:
        theme, moving = self._theme, self._moving
        self._band = moving(box(page, theme.band, theme.band_alpha, SHADE))
        self._spans = {}
        self._stems = {}
        self._witnesses = {}
        for trip in ("lower", "upper"):
            colour = getattr(theme, trip)
            self._spans[trip] = moving(box(page, colour, 0.30, SHADE))
            self._stems[trip] = moving(line(page, colour, 2.2, TRACE, gid="trip"))
            self._witnesses[trip] = moving(
                line(page, colour, 1.1, GUIDE, linestyle=(0, (2, 2)), alpha=0.85, gid="witness")
            )
        self._tags = TripTags(page, theme, moving)
        self._width = Dimension(page, theme.band, moving)
        self._width_tag = Tag(page, [[Ink(theme.band, "small", bold=True)]], moving, "width")
        self._margin = Dimension(page, theme.text, moving)
        self._margin_tag = Tag(page, [[Ink(theme.text, "small")]], moving, "margin")
        self._outside = moving(marker(page, Mark("-", "X"), theme.warning, theme.warning, 8, MARK))
        self._make_level_movers(page)

    def _make_level_movers(self, page: Axes) -> None:
        theme, moving = self._theme, self._moving
        paper = theme.background
        inks = [[Ink(theme.text, "small", math=True), Ink(theme.text, "small")]]
        self._level_marks = {
            name: moving(level_marker(page, name, theme.output, paper)) for name, _ in _LEVELS
        }
        self._level_tags = {name: Tag(page, inks, moving, name) for name, _ in _LEVELS}
        self._level_leads = moving(line(page, theme.muted, 1, GUIDE))

    def _move(self, data: Levels) -> None:
        drawn = switches(data)
        for artist in (self._band, *self._stems.values(), *self._witnesses.values()):
            artist.set_visible(drawn)
        self._move_intervals(data, drawn)
        if drawn:
            self._move_trips(data)
        else:
            self._tags.hide()
            self._width.hide()
            self._width_tag.hide()
        self._move_margin(nearest_margin(data))
        self._move_levels(data)

    def _move_intervals(self, data: Levels, drawn: bool) -> None:
        rows, px = self._rows, self._plan.scale.px
        for trip, span in (("lower", data.lower_interval), ("upper", data.upper_interval)):
            bar = self._spans[trip]
            bar.set_visible(drawn and span is not None)
            if drawn and span is not None:
                stretch(bar, px(span[0]), rows.trip_markers, px(span[1]), rows.axis)

    def _move_trips(self, data: Levels) -> None:
        rows, px = self._rows, self._plan.scale.px
        lower, upper = px(data.lower), px(data.upper)
        stretch(self._band, lower, rows.trip_markers, upper, rows.axis)
        for trip, x in (("lower", lower), ("upper", upper)):
            self._stems[trip].set_data([x, x], [rows.axis, rows.trip_markers])
        self._move_witnesses(data)
        self._tags.move(
            data,
            (lower, upper),
            (EDGE, self._width_px - EDGE),
            rows.trip_names,
            rows.trip_markers,
            walls=self._rail_places(),
        )
        self._move_width(data, lower, upper)

    def _move_witnesses(self, data: Levels) -> None:
        """Lead the trips down to the input range, or the pins where they do not see the trips."""
        rows, scale, theme = self._rows, self._plan.scale, self._theme
        at_trips = data.signal_at_pin
        values = (data.lower, data.upper) if at_trips or data.pins is None else data.pins
        for trip, value in zip(("lower", "upper"), values, strict=True):
            x = scale.inside(value) if math.isfinite(value) else math.nan
            self._witnesses[trip].set_data([x, x], (rows.below, rows.margin + 8))
            self._witnesses[trip].set_color(getattr(theme, trip) if at_trips else theme.text)
            self._witnesses[trip].set_visible(
                self._plan.common_mode is not None and data.pins is not None
            )

    def _move_width(self, data: Levels, lower: float, upper: float) -> None:
        rows = self._rows
        room = self._width_tag.write([f"width {written(data.width, digits=3)}"])
        rails = self._rail_places()
        inner = place(
            [Want.centred((lower + upper) / 2, room)],
            (lower + 24, max(upper - 24, lower + 24)),
            walls=rails,
            clearance=_RAIL_CLEARANCE,
        )
        if inner:
            cut = (inner[0] - 5, inner[0] + room + 5)
            self._width.show(lower, upper, rows.width, cut=cut)
            self._width_tag.put(inner[0], rows.width + 4)
            return
        tail = Dimension.tail + 5
        start = self._beside_the_band(room, lower - tail, upper + tail)
        if start is None:  # not reached with the widths that a page can have
            self._width_tag.hide()
            self._width.show(lower, upper, rows.width)
            return
        self._width_tag.put(start, rows.width + 4)
        reach = start - 5 if start > lower else start + room + 5
        self._width.show(lower, upper, rows.width, reach=reach)

    def _beside_the_band(self, room: float, left: float, right: float) -> float | None:
        """Place the width outside the band: where it moves least, in doubt on the right."""
        rails, end = self._rail_places(), self._width_px - EDGE
        sides = ((Want(right, room), (right, end)), (Want(left - room, room), (EDGE, left)))
        tried = [
            (abs(starts[0] - want.start), starts[0])
            for want, row in sides
            if (starts := place([want], row, walls=rails, clearance=_RAIL_CLEARANCE))
        ]
        return min(tried, key=lambda pair: pair[0])[1] if tried else None

    def _move_margin(self, margin: Margin | None) -> None:
        if self._plan.common_mode is None or margin is None:
            self._margin.hide()
            self._margin_tag.hide()
            self._outside.set_visible(False)
            return
        rows, scale = self._rows, self._plan.scale
        colour = self._theme.warning if margin.small else self._theme.text
        ends = sorted((scale.inside(margin.pin), scale.inside(margin.limit)))
        self._margin.colour(colour)
        self._margin.show(ends[0], ends[1], rows.margin)
        self._outside.set_visible(margin.value < 0)
        self._outside.set_data([scale.inside(margin.pin)], [rows.common_mode])
        sign = "! " if margin.small else ""
        self._margin_tag.colour(colour)
        self._margin_tag.write([sign + written(margin.value, digits=3)])
        self._margin_tag.put(scale.end + 12, rows.margin + 4)

    def _move_levels(self, data: Levels) -> None:
        rows, scale = self._rows, self._plan.scale
        shown = []
        for name, sign in _LEVELS:
            value = finite(getattr(data, name))
            self._level_marks[name].set_visible(bool(value))
            if value:
                self._level_marks[name].set_data([scale.px(value[0])], [rows.level_markers])
                room = self._level_tags[name].write([symbol(sign), written(value[0])])
                shown.append((scale.px(value[0]), name, room))
            else:
                self._level_tags[name].hide()
        shown.sort()
        starts = place(
            [Want.centred(x, room) for x, _, room in shown],
            (scale.start - 10, self._width_px - EDGE),
            walls=self._rail_places(),
            gap=10,
            clearance=_RAIL_CLEARANCE,
        )
        leads: list[tuple[float, float, float]] = []
        for (x, name, room), start in zip(shown, starts or (), strict=False):
            self._level_tags[name].put(start, rows.level_names)
            leads.append((x, min(max(x, start + 3), start + room - 3), 0))
        self._draw_leads([(x, near) for x, near, _ in leads if abs(x - near) > 1])

    def _draw_leads(self, leads: list[tuple[float, float]]) -> None:
        top, bottom = self._rows.level_markers + 5, self._rows.level_names - 10
        nan = float("nan")
        self._level_leads.set_data(
            [x for pair in leads for x in (*pair, nan)],
            [y for _ in leads for y in (top, bottom, nan)],
        )

    def _rail_places(self) -> list[float]:
        return [self._plan.scale.px(value) for value, _ in self._plan.rails]

    def _describe(self, data: Levels) -> str:
        return describe(data)


def ruler(levels: Levels, *, theme: str | Theme = "light", width_px: int = 900) -> RulerPicture:
    """Return the ruler of a design.

    Parameters
    ----------
    levels : Levels
        What to show; all of it stays as it is.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 640.

    Returns
    -------
    RulerPicture
    """
    return RulerPicture.of(levels, theme, width_px)


def describe(levels: Levels) -> str:
    """Return the ruler in one sentence."""
    parts = [f"Volt axis with V_EE at {written(levels.v_ee)} and V_CC at {written(levels.v_cc)}"]
    parts.append(trips_in_words(levels))
    if len(finite(levels.output_low, levels.output_high)) == 2:
        parts.append(f"output {written_span(levels.output_low, levels.output_high)}")
    if levels.reference is not None:
        parts.append(f"reference {written(levels.reference)}")
    if levels.common_mode is not None:
        parts.append(f"common-mode range {written_span(*levels.common_mode)}")
    margin = nearest_margin(levels)
    if margin is not None:
        parts.append(f"margin of the input pins {written(margin.value, digits=3)}")
    return "; ".join(parts) + "."

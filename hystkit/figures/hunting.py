"""A load that turns back the stage which switches it: signal, both trips, output and load."""

from __future__ import annotations

import math
from collections.abc import Hashable

import numpy as np
from matplotlib.axes import Axes
from matplotlib.patches import Polygon

from hystkit.analyses.load_step.hunting import Hunting
from hystkit.base.digits import trip_digits
from hystkit.base.errors import Fault, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.figures.drafting import (
    GUIDE,
    SHADE,
    TRACE,
    Ink,
    Tag,
    lettered,
    level_marker,
    line,
    segments,
)
from hystkit.figures.frame import Frame, ends_of, left_for, padded
from hystkit.figures.graduation import Scale, outward, step_for
from hystkit.figures.hunting_passage import Array, Passage
from hystkit.figures.lettering import one_line, width_px, written
from hystkit.figures.picture import Picture
from hystkit.figures.placement import Want, spread_out
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import MARKS, Theme

WAYS = ("there", "back")
_TRIPS = ("upper", "lower")
# Room for each mark at a change [px].
_MARK_ROOM = 6.0
# Narrower than this, the labels of the trips stand above the picture [px].
_SIDE_FROM = 560
_LABELS, _STEP = 24.0, 20.0
# The two bars above the signal [px].
_ROW, _BAR, _GAP, _BELOW = 18.0, 10.0, 12.0, 34.0
_BARS = (("output on", "on"), ("load on", "load"))
_DOTS, _DOTTED = (0, (2, 2)), "without the load's effect"


class HuntingPicture(Picture[Passage]):
    """The signal as the stage sees it with both trips, and above it when output and load are on.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: Passage) -> Hashable:
        samples = data.samples
        trips = [volts for load in (False, True) for volts in data.trips(load).values()]
        volts = padded([*ends_of(samples.seen), *ends_of(samples.signal), *trips])
        start, end = (time - data.origin for time in data.window)
        across = outward(start, end, step_for(end - start, 50))
        self._beside = self._width_px >= _SIDE_FROM
        self._right = (
            _room_for(data) if self._beside else 16 + width_px("time / ms", "small") + EDGE
        )
        self._frame = self._framed(across, volts)
        return self._frame, self._beside

    def _framed(self, across: tuple[float, float], volts: tuple[float, float]) -> Frame:
        self._bars = EDGE + (2 if self._beside else 5) * Tag.pitch + 10
        top = self._bars + len(_BARS) * _ROW + _GAP
        height = min(max(0.24 * self._width_px, 150), 250)
        self._height = top + height + _BELOW
        named = max(width_px(name, "small") for name, _ in _BARS) + 8 + EDGE
        left = max(left_for(volts, height), named)
        return Frame(
            Scale(*across, left, self._width_px - self._right),
            Scale(*volts, top + height, top),
            "time",
            "signal",
            "s",
        )

    def _lay_out(self, data: Passage) -> None:
        self._resize(self._height)
        page, theme, moving = self._page(), self._theme, self._moving
        self._frame.draw(page, theme)
        self._draw_bars(page, theme)
        self._draw_key(page, theme)
        self._head = Tag(page, [[Ink(theme.text)]], moving, "head")
        self._outcome = Tag(page, [[Ink(theme.text)]], moving, "outcome")
        self._band = moving(
            Polygon(np.zeros((3, 2)), facecolor=(theme.band, theme.band_alpha), zorder=SHADE)
        )
        page.add_patch(self._band)
        self._rest = moving(line(page, theme.muted, 1.2, GUIDE, linestyle=_DOTS, gid="rest"))
        self._seen = moving(line(page, theme.signal, 2, TRACE, gid="seen"))
        self._make_trips(page, theme)
        self._frame.clip(page, self._band, self._rest, self._seen, *self._lines.values())

    def _draw_bars(self, page: Axes, theme: Theme) -> None:
        """Draw what stays of the two bars, and make what moves."""
        frame = self._frame
        self._states = {}
        for place, (name, state) in enumerate(_BARS):
            y = self._bars + (place + 0.5) * _ROW
            segments(page, [((frame.left, y), (frame.right, y))], theme.faint, 1.2)
            lettered(page, name, (frame.left - 8, y + 4), Ink(theme.text, "small"), "right")
            self._states[state] = self._moving(
                segments(page, [], theme.output, _BAR, zorder=TRACE, gid=state)
            )

    def _draw_key(self, page: Axes, theme: Theme) -> None:
        """Tell what the dotted line is."""
        row = 0 if self._beside else 4
        baseline = EDGE + 12 + row * Tag.pitch
        length = width_px(_DOTTED, "small")
        left = self._width_px - EDGE - length if self._beside else EDGE + 38
        y = baseline - 4
        segments(page, [((left - 38, y), (left - 8, y))], theme.muted, 1.2, dashes=_DOTS)
        lettered(page, _DOTTED, (left, baseline), Ink(theme.text, "small"))
        self._head_room = left - 38 - 2 * EDGE if self._beside else self._width_px - 2 * EDGE

    def _make_trips(self, page: Axes, theme: Theme) -> None:
        moving = self._moving
        self._lines, self._ends, self._leads, self._tags, self._marks = {}, {}, {}, {}, {}
        for trip in _TRIPS:
            colour, paper = getattr(theme, trip), theme.background
            self._lines[trip] = moving(
                line(page, colour, 1.6, GUIDE, linestyle=MARKS[trip].dashes, gid=trip)
            )
            self._leads[trip] = moving(line(page, colour, 1, GUIDE))
            self._ends[trip] = moving(level_marker(page, trip, colour, paper, 9))
            self._marks[trip] = moving(level_marker(page, trip, colour, paper, 7))
            inks = [[Ink(colour, bold=True)], [Ink(colour)]] if self._beside else [[Ink(colour)]]
            self._tags[trip] = Tag(page, inks, moving, trip)

    def _move(self, data: Passage) -> None:
        frame, samples = self._frame, data.samples
        x = self._at(data, samples.time)
        self._seen.set_data(x, frame.up.px(samples.seen))
        self._rest.set_data(x, frame.up.px(samples.signal))
        self._move_head(data)
        self._move_trips(data)
        self._move_changes(data)
        for place, (_, state) in enumerate(_BARS):
            y = self._bars + (place + 0.5) * _ROW
            ends = [self._at(data, np.array(span)) for span in data.spans(state)]
            self._states[state].set_segments([np.array([(a, y), (b, y)]) for a, b in ends])

    def _at(self, data: Passage, times: Array) -> Array:
        """Places of instants [px]."""
        return self._frame.across.px(times - data.origin)

    def _move_head(self, data: Passage) -> None:
        """Write what is seen and what comes of it; a sign stands beside the warning colour."""
        self._head.write([one_line(_what(data), self._head_room)])
        self._head.put(EDGE, EDGE + 12)
        self._outcome.write(
            [one_line(_outcome(data, short=not self._beside), self._width_px - 2 * EDGE)]
        )
        self._outcome.put(EDGE, EDGE + 12 + Tag.pitch)
        good = data.run.scene.margin > 0 and not data.run.hunts
        self._outcome.colour(self._theme.text if good else self._theme.warning)

    def _move_trips(self, data: Passage) -> None:
        frame = self._frame
        paths = {trip: _stepped(data, trip) for trip in _TRIPS}
        for trip, (times, volts) in paths.items():
            self._lines[trip].set_data(self._at(data, times), frame.up.px(volts))
        outline = [
            np.column_stack([self._at(data, t), frame.up.px(v)])[np.isfinite(t)]
            for t, v in paths.values()
        ]
        self._band.set_xy(np.vstack([outline[0], outline[1][::-1]]))
        if self._beside:
            self._label_beside(data)
        else:
            self._label_above(data)

    def _label_beside(self, data: Passage) -> None:
        frame = self._frame
        last = data.trips(data.legs[-1][2].load)
        heights = {trip: frame.up.inside(last[trip]) for trip in _TRIPS}
        wants = [Want.centred(heights[trip], 2 * Tag.pitch + 1) for trip in _TRIPS]
        starts = spread_out(wants, (frame.top - 12, frame.bottom + 24), gap=2) or (0.0, 0.0)
        end = frame.across.inside(data.window[1] - data.origin)
        for trip, start in zip(_TRIPS, starts, strict=True):
            y, mark = heights[trip], start + 8
            self._leads[trip].set_data([end, frame.right + 2, frame.right + 10], [y, y, mark])
            self._ends[trip].set_data([frame.right + 14], [mark])
            self._tags[trip].write(*([text] for text in _trip_texts(data, trip)))
            self._tags[trip].put(frame.right + _LABELS, start + 12)

    def _label_above(self, data: Passage) -> None:
        for place, trip in enumerate(_TRIPS):
            baseline = EDGE + 12 + (2 + place) * Tag.pitch
            text = ", ".join(filter(None, _trip_texts(data, trip)))
            self._tags[trip].write([one_line(text, self._width_px - 2 * EDGE - 16)])
            self._tags[trip].put(EDGE + 16, baseline)
            self._ends[trip].set_data([EDGE + 6], [baseline - 4])

    def _move_changes(self, data: Passage) -> None:
        """Mark where the signal that the stage sees meets a trip, where marks have room."""
        frame = self._frame
        roomy = frame.right - frame.left >= _MARK_ROOM * data.shown
        times, states = data.changes[0][: data.shown], data.changes[1][: data.shown]
        x = self._at(data, times)
        # The load switches on at the upper trip where it does so as the signal rises.
        at_upper = states == (data.run.scene.direction > 0)
        starts = [leg.start for leg in data.run.legs]
        # The load follows a change later, so that the leg which begins with it has the load of it.
        places = np.searchsorted(starts, times, side="right") - 1
        loads = [data.run.legs[place].load for place in places]
        for trip, chosen in (("upper", at_upper), ("lower", ~at_upper)):
            volts = np.array([data.trips(load)[trip] for load in loads])
            self._marks[trip].set_visible(roomy)
            self._marks[trip].set_data(x[chosen], frame.up.px(volts)[chosen] if times.size else [])

    def _describe(self, data: Passage) -> str:
        trips = []
        for trip in _TRIPS:
            off, on = _trip_texts(data, trip)
            trips.append(off.replace("  ", " trip ") + (f" ({on})" if on else ""))
        return f"{_what(data)}; {', '.join(trips)}; {_outcome(data).lstrip('! ')}."


def _what(data: Passage) -> str:
    """Tell what the signal does and how often the output changes."""
    count, shown = data.changes[0].size, data.shown
    way = "rises" if data.rises else "falls"
    # A simulation that ended early has seen so many changes at least.
    number = f"{count}{'' if data.run.complete else '+'} {'change' if count == 1 else 'changes'}"
    part = f"first {shown} of {number}" if shown < count else f"{number} of the output"
    return f"Signal {way}: {part}"


def _outcome(data: Passage, *, short: bool = False) -> str:
    """Tell the margin, and whether it hunts."""
    scene, period = data.run.scene, data.run.period
    margin = f"margin {written(scene.margin, digits=3)}"
    if short:
        margin = f"{margin}, no noise"
    else:
        width = written(abs(scene.trips[0][0] - scene.trips[0][1]))
        margin = f"{margin} of {width} without noise"
    if not data.run.hunts:
        return f"{margin}: holds" if scene.margin > 0 else f"! {margin}: too fast to hunt"
    every = f" every {written(period, 's', 3)}" if math.isfinite(period) else ""
    return f"! {margin}: hunts{every}"


def _trip_texts(data: Passage, trip: str) -> tuple[str, str]:
    """Return a trip without load, and with it where that differs."""
    off, on = data.trips(False), data.trips(True)
    digits = trip_digits(off[trip], off["upper"] - off["lower"])
    texts = [written(trips[trip], digits=digits) for trips in (off, on)]
    return f"{trip}  {texts[0]}", "" if texts[0] == texts[1] else f"{texts[1]} with load"


def _stepped(data: Passage, trip: str) -> tuple[Array, Array]:
    """Return a trip over the window, level in each leg, with a gap where it jumps."""
    times: list[float] = []
    volts: list[float] = []
    for start, end, leg in data.legs:
        level = data.trips(leg.load)[trip]
        if volts and volts[-1] != level:
            times.append(math.nan)
            volts.append(math.nan)
        times += [start, end]
        volts += [level, level]
    return np.array(times), np.array(volts)


def _room_for(data: Passage) -> float:
    """Return the room for the labels of the trips; in steps, so that it seldom changes."""
    widest = max(
        width_px(text, bold=number == 0)
        for trip in _TRIPS
        for number, text in enumerate(_trip_texts(data, trip))
    )
    return _LABELS + _STEP * math.ceil((widest + 6) / _STEP)


def hunting(
    run: Hunting, *, way: str = "there", theme: str | Theme = "light", width_px: int = 900
) -> HuntingPicture:
    """Return the picture of a load that switches on or off, and of what it does to its stage.

    Parameters
    ----------
    run : Hunting
        What to show, as `LoadStep.hunt` simulates it.
    way : {"there", "back"}, default "there"
        The way of the signal on which the load switches on, or the one on which it switches off.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.

    Returns
    -------
    HuntingPicture

    Raises
    ------
    UnknownNameError
        If there is no such way.
    InputError
        If the simulation ended before the way back.
    """
    if way not in WAYS:
        raise UnknownNameError.of("this picture", [unknown_name_fault("way", str(way), WAYS)])
    if way == "back" and not run.complete:
        fault = Fault(
            "the way back was not simulated.",
            have=f"{run.times.size} changes of the output on the way there",
            remedy="LoadStep.hunt(most=...) with more of them, or a faster slope",
        )
        raise InputError.of("this picture", [fault])
    return HuntingPicture.of(Passage(run, way), theme, width_px)

"""The labels of both trips, the same on the ruler, at the loop and against time."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from matplotlib.axes import Axes
from matplotlib.path import Path

from hystkit.figures.drafting import GUIDE, Ink, Tag, level_marker, line
from hystkit.figures.lettering import in_measurand, trip_digits, written, written_span
from hystkit.figures.placement import Span, Want, place
from hystkit.figures.theme import MARKS, Theme
from hystkit.numeric.views import Levels

_GAP = 14.0
_CLEARANCE = 5.0
_INSET = 5.0
_MARK = 10.0
# Two trips closer than a marker show the outer half of each, so that neither covers the other.
_HALVES = {
    "lower": Path([(0, -1), (0, 1), (-1, 1), (0, -1)], closed=True),
    "upper": Path([(0, 1), (0, -1), (1, -1), (0, 1)], closed=True),
}


def trip_rows(levels: Levels, trip: str) -> list[list[str]]:
    """Return what stands at a trip: its value, and below it the measurand."""
    value = float(getattr(levels, trip))
    rows = [[f"{trip}  {written(value, digits=trip_digits(value, levels.width))}"]]
    if levels.signal is not None:
        rows.append([in_measurand(levels.signal, value, (levels.lower, levels.upper))])
    else:
        rows.append([""])
    return rows


class TripTags:
    """Both labels above their markers, with a lead from one to the other.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    moving : callable
        Registers an artist with the picture.
    """

    def __init__(self, page: Axes, theme: Theme, moving: Callable[[Any], Any]) -> None:
        self._tags = {}
        self._leads = {}
        self._markers = {}
        for trip in ("lower", "upper"):
            colour = getattr(theme, trip)
            self._tags[trip] = Tag(page, [[Ink(colour, bold=True)], [Ink(colour)]], moving, trip)
            self._leads[trip] = moving(line(page, colour, 1, GUIDE))
            self._markers[trip] = moving(
                level_marker(page, trip, colour, theme.background, size=_MARK)
            )

    def hide(self) -> None:
        """Draw nothing."""
        for trip in ("lower", "upper"):
            self._tags[trip].hide()
            self._leads[trip].set_visible(False)
            self._markers[trip].set_visible(False)

    def move(
        self,
        levels: Levels,
        places: tuple[float, float],
        row: Span,
        baseline: float,
        markers: float,
        *,
        walls: Sequence[float] = (),
    ) -> None:
        """Set both labels.

        Parameters
        ----------
        levels : Levels
            With trips.
        places : tuple of float
            Where the lower and the upper trip stand [px].
        row : tuple of float
            Both ends of the row of the labels [px].
        baseline : float
            Of the first line [px].
        markers : float
            Height of the markers [px].
        walls : sequence of float, optional
            Lines that no label may cross [px].
        """
        names = ("lower", "upper") if places[0] <= places[1] else ("upper", "lower")
        at = dict(zip(("lower", "upper"), places, strict=True))
        rooms = {trip: self._tags[trip].write(*trip_rows(levels, trip)) for trip in names}
        first, second = names
        wants = [
            Want(at[first] + _INSET - rooms[first], rooms[first]),
            Want(at[second] - _INSET, rooms[second]),
        ]
        starts = place(wants, row, walls=walls, gap=_GAP, clearance=_CLEARANCE)
        bottom = baseline + 3 + (Tag.pitch if levels.signal is not None else 0)
        for trip, start, align in zip(names, starts or (), ("right", "left"), strict=False):
            self._tags[trip].put(start, baseline, "right" if align == "right" else "left")
            near = min(max(at[trip], start + _INSET), start + rooms[trip] - _INSET)
            self._leads[trip].set_data([at[trip], near], [markers - _MARK / 2 + 1, bottom])
            self._leads[trip].set_visible(True)
        halves = abs(places[1] - places[0]) < _MARK and names[0] == "lower"
        for trip in names:
            self._markers[trip].set_marker(_HALVES[trip] if halves else MARKS[trip].marker)
            self._markers[trip].set_data([at[trip]], [markers])
            self._markers[trip].set_visible(True)


def trips_in_words(levels: Levels) -> str:
    """Return both trips and the width as part of a sentence, or why there are none."""
    if not levels.ok or levels.width != levels.width:
        return levels.message.rstrip(".") or "no trip points"
    parts = []
    for trip, span in (("lower", levels.lower_interval), ("upper", levels.upper_interval)):
        rows = trip_rows(levels, trip)
        text = f"{trip} trip {rows[0][0].split('  ')[1]}"
        if rows[1][0]:
            text += f" ({rows[1][0]})"
        if span is not None:
            text += f" within {written_span(*span)}"
        parts.append(text)
    parts.append(f"width {written(levels.width, digits=3)}")
    return ", ".join(filter(None, (*parts, levels.not_evaluated)))

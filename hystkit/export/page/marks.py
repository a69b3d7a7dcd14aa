"""What ruler and loop of the page share: labels of the trips, markers, dimensions, a message.

The script has the same in `assets/marks.js`.
"""

from __future__ import annotations

import math

from hystkit.export.page.pen import TEXT, Pen, cut, text_width
from hystkit.figures.placement import Want, place
from hystkit.figures.trip_tags import trip_rows
from hystkit.numeric.views import Levels

#: Edge of a picture, length of an arrow tip, distance of two lines, space beside a rail [px].
EDGE = 8.0
TIP = 8.0
PITCH = 15.0
CLEARANCE = 5.0
_GAP = 14.0


def trip_tags(
    pen: Pen,
    levels: Levels,
    places: tuple[float, float],
    baseline: float,
    markers: float,
    walls: list[float] | None = None,
) -> None:
    """Label both trips above their markers, with a lead from one to the other.

    Parameters
    ----------
    pen : Pen
        Where to draw.
    levels : Levels
        With trips.
    places : tuple of float
        Where the lower and the upper trip stand [px].
    baseline, markers : float
        Height of the first line and of the markers [px].
    walls : list of float, optional
        Lines that no label may cross [px].
    """
    at = dict(zip(("lower", "upper"), places, strict=True))
    names = ("lower", "upper") if places[0] <= places[1] else ("upper", "lower")
    texts = {trip: _lines(levels, trip) for trip in names}
    rooms = {trip: _room(levels, trip) for trip in names}
    starts = tag_starts(levels, places, pen.width, walls or [])
    starts = (
        starts
        or tag_starts(levels, places, pen.width, [], gap=8)
        or tag_starts(levels, places, math.inf, [], gap=8)
        or ()
    )
    bottom = baseline + 3 + (0 if levels.signal is None else PITCH)
    halves = abs(places[1] - places[0]) < 10
    for trip, start, align in zip(names, starts, ("end", "start"), strict=True):
        x = start + rooms[trip] if align == "end" else start
        pen.text(f"{trip} title", x, baseline, texts[trip][0], align)
        pen.text(f"{trip} letters", x, baseline + PITCH, texts[trip][1], align)
        near = min(max(at[trip], start + 5), start + rooms[trip] - 5)
        pen.line(f"{trip} lead", at[trip], markers - 4, near, bottom)
        _trip_marker(pen, trip, at[trip], markers, half=halves)


def tag_starts(
    levels: Levels,
    places: tuple[float, float],
    width: float,
    walls: list[float],
    gap: float = _GAP,
) -> tuple[float, ...] | None:
    """Place the labels of both trips, the left one first.

    Parameters
    ----------
    levels : Levels
        With trips.
    places : tuple of float
        Where the lower and the upper trip stand [px].
    width : float
        Of the picture [px].
    walls : list of float
        Lines that no label may cross [px].
    gap : float
        Least distance of the two [px].

    Returns
    -------
    tuple of float, or None
        Start of each [px]; None where there is no room for both.
    """
    at = dict(zip(("lower", "upper"), places, strict=True))
    first, second = ("lower", "upper") if places[0] <= places[1] else ("upper", "lower")
    room = _room(levels, first)
    wants = [Want(at[first] + 5 - room, room), Want(at[second] - 5, _room(levels, second))]
    return place(wants, (EDGE, width - EDGE), walls=walls, gap=gap, clearance=CLEARANCE)


def _lines(levels: Levels, trip: str) -> tuple[str, str]:
    first, second = (row[0] for row in trip_rows(levels, trip))
    return " ".join(first.split()), second


def _room(levels: Levels, trip: str) -> float:
    first, second = _lines(levels, trip)
    return max(text_width(first, TEXT, bold=True), text_width(second, TEXT))


def _trip_marker(pen: Pen, trip: str, x: float, y: float, *, half: bool) -> None:
    """Two trips closer than a marker show the outer half of each."""
    tip, base = (y - 5, y + 5) if trip == "upper" else (y + 5, y - 5)
    left = x if half and trip == "upper" else x - 5
    right = x if half and trip == "lower" else x + 5
    pen.shape(f"{trip} mark", [(left, base), (right, base), (x, tip)])


def level_marker(pen: Pen, name: str, x: float, y: float) -> None:
    """Mark a level: a diamond, or a square for the reference.

    Parameters
    ----------
    pen : Pen
        Where to draw.
    name : str
        A field of `Levels`.
    x, y : float
        Middle of the marker [px].
    """
    look = "filled" if name == "output_high" else "hollow"
    if name == "reference":
        pen.shape(look, [(x - 4, y - 4), (x + 4, y - 4), (x + 4, y + 4), (x - 4, y + 4)])
    else:
        pen.shape(look, [(x - 5.5, y), (x, y - 5.5), (x + 5.5, y), (x, y + 5.5)])


def dimension(
    pen: Pen,
    look: str,
    left: float,
    right: float,
    y: float,
    *,
    reach: float | None = None,
    cut: tuple[float, float] | None = None,
) -> None:
    """Draw a distance: arrows inside where there is room, else outside.

    Parameters
    ----------
    pen : Pen
        Where to draw.
    look : str
        Class.
    left, right, y : float
        Both ends and the height [px].
    reach : float, optional
        How far the line goes on outside, to the number there [px].
    cut : tuple of float, optional
        Part of the line that is left free for the number inside [px].
    """
    inside = right - left >= 2 * TIP + 6
    pieces = [(left, cut[0]), (cut[1], right)] if inside and cut else [(left, right)]
    if not inside:
        pieces = [(left - 16, left), (right, right + 16)]
    if reach is not None:
        pieces.append((reach, left) if reach < left else (right, reach))
    for start, end in pieces:
        pen.line(f"{look} shaft", start, y, end, y)
    for x, outward in ((left, -1), (right, 1)):
        tip(pen, look, x, y, outward if inside else -outward, 0)


def tip(
    pen: Pen, look: str, x: float, y: float, along: float, down: float, size: float = TIP
) -> None:
    """Draw an arrow tip with its point on a place.

    Parameters
    ----------
    pen : Pen
        Where to draw.
    look : str
        Class.
    x, y : float
        Where the point lies [px].
    along, down : float
        Direction: 1 or -1 in one of them.
    size : float
        Length [px].
    """
    half = 0.38 * size
    back_x, back_y = x - along * size, y - down * size
    pen.shape(
        f"{look} tip",
        [(x, y), (back_x + down * half, back_y + along * half),
         (back_x - down * half, back_y - along * half)],
    )  # fmt: skip


def message(pen: Pen, text: str, baseline: float) -> None:
    """Write what is wrong in the place of the trips, on two lines at most.

    Parameters
    ----------
    pen : Pen
        Where to draw.
    text : str
        What is wrong.
    baseline : float
        Of the first line [px].
    """
    room = pen.width - 4 * EDGE
    words = f"! {text}".split()
    line = words.pop(0)
    while words and text_width(f"{line} {words[0]}", TEXT) <= room:
        line = f"{line} {words.pop(0)}"
    for row, each in enumerate((line, cut(" ".join(words), room, TEXT))):
        pen.text("warning letters", pen.width / 2, baseline + PITCH * row, each, "middle")

"""What is drawn on a page in px: texts, lines, arrow tips, labels that move."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle
from matplotlib.path import Path
from matplotlib.text import Text

from hystkit.figures.lettering import width_px
from hystkit.figures.stamp import Stamp
from hystkit.figures.theme import MARKS, PX_PER_INCH, Dashes, LetterSize, Mark, letters

Point = tuple[float, float]
Align = Literal["left", "center", "right"]

# Orders of drawing: whatever moves lies above everything that stays.
BACK, SCALE, LETTERS = 1.0, 2.0, 3.0
SHADE, GUIDE, TRACE, MARK, TAG = 11.0, 12.0, 13.0, 14.0, 15.0

_HALF_TIP = 0.38
#: Arrow tips: the point of the arrow lies on the place itself, so that a dimension is exact.
TIPS = {
    "right": Path([(0, 0), (-1, _HALF_TIP), (-1, -_HALF_TIP), (0, 0)], closed=True),
    "left": Path([(0, 0), (1, _HALF_TIP), (1, -_HALF_TIP), (0, 0)], closed=True),
    "down": Path([(0, 0), (-_HALF_TIP, 1), (_HALF_TIP, 1), (0, 0)], closed=True),
    "up": Path([(0, 0), (-_HALF_TIP, -1), (_HALF_TIP, -1), (0, 0)], closed=True),
}
TIP_PX = 8.0


def points(px: float) -> float:
    """Return px of the page as points, which matplotlib takes for widths and sizes."""
    return px * 72 / PX_PER_INCH


@dataclass(frozen=True)
class Ink:
    """How a text is set: colour, size, weight, and whether it is a symbol with an index."""

    colour: str
    size: LetterSize = "text"
    bold: bool = False
    math: bool = False

    def width(self, text: str) -> float:
        """Width of a text in this ink [px]."""
        return width_px(text, self.size, self.bold, self.math)


def lettered(
    page: Axes, text: str, at: Point, ink: Ink, align: Align = "left", zorder: float = LETTERS
) -> Text:
    """Write a text on its baseline."""
    return page.text(
        *at,
        text,
        color=ink.colour,
        fontproperties=letters(ink.size, ink.bold),
        ha=align,
        va="baseline",
        parse_math=ink.math,
        zorder=zorder,
    )


def line(page: Axes, colour: str, width: float, zorder: float, **style: object) -> Line2D:
    """Return an empty line that will move."""
    made = Line2D([], [], color=colour, linewidth=points(width), zorder=zorder, **style)  # type: ignore[arg-type]
    page.add_line(made)
    return made


def segments(
    page: Axes,
    ends: Sequence[tuple[Point, Point]],
    colour: str,
    width: float,
    *,
    zorder: float = SCALE,
    dashes: Dashes = "-",
    gid: str | None = None,
) -> LineCollection:
    """Draw straight lines in one go."""
    made = LineCollection(
        [np.asarray(pair, dtype=float) for pair in ends],
        colors=colour,
        linewidths=points(width),
        linestyles=[dashes],
        capstyle="butt",
        zorder=zorder,
        gid=gid,
    )
    page.add_collection(made, autolim=False)
    return made


def box(
    page: Axes, colour: str, alpha: float, zorder: float, *, edge: float = 0.0, hatch: str = ""
) -> Rectangle:
    """Return a rectangle without extent."""
    made = Rectangle(
        (0, 0), 0, 0, facecolor=(colour, alpha), edgecolor=colour, linewidth=points(edge),
        zorder=zorder, hatch=hatch or None,
    )  # fmt: skip
    page.add_patch(made)
    return made


def stretch(rectangle: Rectangle, left: float, top: float, right: float, bottom: float) -> None:
    """Give a rectangle its corners."""
    rectangle.set_bounds(left, top, right - left, bottom - top)


def marker(page: Axes, mark: Mark, colour: str, paper: str, size: float, zorder: float) -> Line2D:
    """Return a marker of a level; hollow ones are filled with the paper."""
    return line(
        page,
        colour,
        1.6,
        zorder,
        linestyle="none",
        marker=mark.marker,
        markersize=points(size),
        markerfacecolor=colour if mark.filled else paper,
        markeredgecolor=colour,
        markeredgewidth=points(1.6),
    )


def level_marker(page: Axes, level: str, colour: str, paper: str, size: float = 8.0) -> Line2D:
    """Return the marker of a named level, the same in every picture."""
    return marker(page, MARKS[level], colour, paper, size, MARK)


def tip(page: Axes, colour: str, size: float = TIP_PX, zorder: float = MARK) -> Line2D:
    """Return an arrow tip; `point_tip` sets it."""
    return line(
        page, colour, 0, zorder, linestyle="none", markersize=points(2 * size), markeredgewidth=0
    )


def point_tip(artist: Line2D, at: Point, direction: str) -> None:
    """Set an arrow tip with its point on a place, pointing right, left, up or down the page."""
    artist.set_marker(TIPS[direction])
    artist.set_data([at[0]], [at[1]])


class Dimension:
    """A distance between two places in a row, drawn as in a drawing office.

    Wide enough, the arrows stand inside and point outwards; narrow, they stand outside and point
    inwards, and the line goes on to the side where the number stands.
    """

    #: Least distance for arrows inside, and length of the tails outside [px].
    inside = 2 * TIP_PX + 6
    tail = 16.0

    def __init__(self, page: Axes, colour: str, moving: Callable[[Line2D], Line2D]) -> None:
        self._shaft = moving(line(page, colour, 1.2, GUIDE))
        self._tips = [moving(tip(page, colour)) for _ in range(2)]

    def colour(self, colour: str) -> None:
        """Change the colour."""
        for artist in (self._shaft, *self._tips):
            artist.set_color(colour)

    def hide(self) -> None:
        """Draw nothing."""
        for artist in (self._shaft, *self._tips):
            artist.set_visible(False)

    def show(
        self,
        left: float,
        right: float,
        y: float,
        *,
        reach: float | None = None,
        cut: Point | None = None,
    ) -> None:
        """Draw from `left` to `right` at the height `y`.

        Parameters
        ----------
        left, right : float
            Both ends [px].
        y : float
            Height on the page [px].
        reach : float, optional
            How far the line goes on outside, to the number there [px].
        cut : tuple of float, optional
            Part of the line that is left free for the number inside [px].
        """
        inside = right - left >= self.inside
        if inside:
            pieces = [(left, cut[0]), (cut[1], right)] if cut else [(left, right)]
        else:
            pieces = [(left - self.tail, left), (right, right + self.tail)]
        if reach is not None:
            pieces.append((reach, left) if reach < left else (right, reach))
        self._shaft.set_data(*_parted(pieces, y))
        for artist, x, outward in zip(self._tips, (left, right), ("left", "right"), strict=True):
            inward = "right" if outward == "left" else "left"
            point_tip(artist, (x, y), outward if inside else inward)
        for artist in (self._shaft, *self._tips):
            artist.set_visible(True)


def _parted(pieces: Sequence[Point], y: float) -> tuple[list[float], list[float]]:
    """Return level lines as one polyline with gaps."""
    xs = [x for piece in pieces for x in (*piece, math.nan)]
    return xs, [y] * len(xs)


class Tag:
    """A label that moves: one or more lines, each of pieces side by side.

    Parameters
    ----------
    page : Axes
        The page.
    inks : sequence of sequence of Ink
        One per piece, line by line.
    moving : callable
        Registers an artist with the picture.
    name : str
        Name of the label, kept on every text as its gid.
    """

    pitch = 15.0
    space = 4.0

    def __init__(
        self,
        page: Axes,
        inks: Sequence[Sequence[Ink]],
        moving: Callable[[Text], Text],
        name: str = "",
    ) -> None:
        self._inks = inks
        self._texts = [
            [Stamp(ink.colour, ink.size, ink.bold, ink.math, TAG) for ink in row] for row in inks
        ]
        for row in self._texts:
            for text in row:
                page.add_artist(moving(text))
                text.set_gid(name)
                text.set_clip_on(False)
        self._widths: list[list[float]] = []

    def write(self, *rows: Sequence[str]) -> float:
        """Set the texts of all pieces and return the width of the widest line [px]."""
        self._widths = []
        for texts, inks, row in zip(self._texts, self._inks, rows, strict=True):
            for text, piece in zip(texts, row, strict=True):
                text.set_text(piece)
            self._widths.append([ink.width(piece) for ink, piece in zip(inks, row, strict=True)])
        return max(self._length(row) for row in self._widths)

    def colour(self, colour: str) -> None:
        """Change the colour of all pieces."""
        for row in self._texts:
            for text in row:
                text.set_color(colour)

    def put(self, left: float, baseline: float, align: Align = "left") -> None:
        """Show the label with its left edge and its first baseline here [px]."""
        whole = max(self._length(row) for row in self._widths)
        share = {"left": 0.0, "center": 0.5, "right": 1.0}[align]
        for number, (texts, widths) in enumerate(zip(self._texts, self._widths, strict=True)):
            x = left + share * (whole - self._length(widths))
            for text, width in zip(texts, widths, strict=True):
                text.set_position((x, baseline + number * self.pitch))
                text.set_visible(bool(text.get_text()))
                x += width + self.space

    def hide(self) -> None:
        """Draw nothing."""
        for row in self._texts:
            for text in row:
                text.set_visible(False)

    def _length(self, widths: Sequence[float]) -> float:
        return sum(widths) + self.space * (len(widths) - 1)

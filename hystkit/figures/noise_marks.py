"""Widths that are marked across the curves of noise: the design's own, and what is needed."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from hystkit.figures.drafting import GUIDE, MARK, Ink, Tag, line, marker, segments
from hystkit.figures.lettering import one_line, short_unit, written
from hystkit.figures.noise_axes import LogArea
from hystkit.figures.placement import Want, spread_out
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import LetterSize, Mark, Theme
from hystkit.review.noise_scene import NoiseScene

#: How each is drawn: the design's own width, and what noise and hum need each.
MARKED = {
    "width": Mark("-", "D"),
    "noise": Mark((0, (5, 2)), "o", filled=False),
    "hum": Mark((0, (6, 2, 1, 2)), "s", filled=False),
}
_GAP, _LEAD, _INSET = 10.0, 14.0, 5.0
# Bold letters are wider.
_BOLD = 1.2
# From this width on labels have letters of full size [px].
_LARGE = 560


def marked(data: NoiseScene) -> dict[str, float]:
    """Return the widths that can be marked, by name [V]."""
    widths = {"width": data.width, "noise": data.needed}
    if data.hum is not None:
        widths["hum"] = data.needed_for_hum
    return {name: width for name, width in widths.items() if math.isfinite(width)}


def in_measurand(data: NoiseScene, width: float) -> str:
    """Return a width in the measurand; nothing where the signal has none."""
    value, signal = data.sensed(width), data.levels.signal
    if signal is None or math.isnan(value):
        return ""
    return f"{value:.3g} {short_unit(signal)}".rstrip()


class WidthMarks:
    """A line through all areas for each width, with a marker and a label above.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    areas : sequence of LogArea
        One below the other, on one axis of widths.
    page_px : int
        Width of the page.
    baseline : float
        Of the labels [px].
    sensed : bool
        Whether they have a second line, for the measurand.
    moving : callable
        Registers an artist with the picture.
    """

    def __init__(
        self,
        page: Axes,
        theme: Theme,
        areas: Sequence[LogArea],
        page_px: int,
        baseline: float,
        sensed: bool,
        moving: Callable[[Any], Any],
    ) -> None:
        self._areas, self._sensed = areas, sensed
        self._row = (EDGE, page_px - EDGE)
        self._baseline, self._top = baseline, baseline + self.height(sensed)
        self._size: LetterSize = "text" if page_px >= _LARGE else "small"
        colours = {"width": theme.band, "noise": theme.text, "hum": theme.muted}
        self.lines, self.tips, self._leads, self._tags = {}, {}, {}, {}
        for name, mark in MARKED.items():
            colour = colours[name]
            self.lines[name] = moving(
                segments(page, [], colour, 1.8, zorder=GUIDE, dashes=mark.dashes, gid=name)
            )
            self._leads[name] = moving(line(page, colour, 1, GUIDE))
            self.tips[name] = moving(marker(page, mark, colour, theme.background, 7, MARK))
            inks = [[Ink(colour, self._size, name == "width")], [Ink(colour, self._size)]]
            self._tags[name] = Tag(page, inks[: 1 + sensed], moving, name)

    @staticmethod
    def height(sensed: bool) -> float:
        """Return the height from the first baseline of the labels to the markers [px]."""
        return 3 + (Tag.pitch if sensed else 0) + _LEAD

    def move(self, data: NoiseScene) -> None:
        """Set all marks."""
        widths = marked(data)
        places = {name: self._areas[0].x(width) for name, width in widths.items()}
        for name in MARKED:
            for artist in (self.lines[name], self.tips[name], self._leads[name]):
                artist.set_visible(name in places)
            if name not in places:
                self._tags[name].hide()
        ends = [(area.top, area.bottom) for area in self._areas]
        ends[0] = (self._top, ends[0][1])
        for name, x in places.items():
            self.lines[name].set_segments([np.array([(x, a), (x, b)]) for a, b in ends])
            self.tips[name].set_data([x], [self._top])
        self._label(data, widths, places)

    def _label(self, data: NoiseScene, widths: dict[str, float], places: dict[str, float]) -> None:
        """Write each width above its marker, beside one another where they are close."""
        names = sorted(widths, key=lambda name: widths[name])
        lengths = self._written({name: self._texts(data, name, widths[name]) for name in names})
        wants = [Want.centred(places[name], lengths[name]) for name in names]
        starts = spread_out(wants, self._row, _GAP) or ()
        for name, start in zip(names, starts, strict=False):
            self._tags[name].put(start, self._baseline)
            near = min(max(places[name], start + _INSET), start + lengths[name] - _INSET)
            ends = [self._top - 4, self._top - _LEAD + 2]
            self._leads[name].set_data([places[name], near], ends)

    def _texts(self, data: NoiseScene, name: str, width: float) -> list[list[str]]:
        rows = [[f"{name} {written(width, digits=4 if name == 'width' else 3)}"]]
        return [*rows, [in_measurand(data, width)]] if self._sensed else rows

    def _written(self, texts: dict[str, list[list[str]]]) -> dict[str, float]:
        """Write all labels, cut where the row is too short for them, and return their lengths."""
        lengths = {name: self._tags[name].write(*rows) for name, rows in texts.items()}
        room = self._row[1] - self._row[0] - _GAP * (len(texts) - 1)
        if sum(lengths.values()) <= room:
            return lengths
        for name, rows in texts.items():
            share = room / len(texts) / (_BOLD if name == "width" else 1)
            cut = [[one_line(text, share, self._size)] for (text,) in rows]
            lengths[name] = self._tags[name].write(*cut)
        return lengths

"""Texts of a schematic: how big they are, where they hang, and the scale that fits them all in."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from hystkit.figures.schematic_sheet import Box, Label, Point, Sheet

#: Parts of the letter size: height of capitals, depth of a lowered index, distance of two lines.
_CAPITAL = 0.73
_DEPTH = 0.30
_LINE = 1.3
#: A name that would be cut shorter than this is left out; the text beside the picture has it.
_LEAST_LETTERS = 4
#: Empty edge on every side [px].
_MARGIN_PX = 8.0
#: A drawing narrower than this many units is not blown up to the full width.
_LEAST_UNITS = 9.0
#: Largest drawing [px per unit]; on wider paper it stands in the middle.
_MOST_SCALE = 75.0
#: Between an anchor and its text [px].
_GAP_PX = 4.0


@dataclass(frozen=True)
class Spot:
    """A measured text on its anchor.

    Parameters
    ----------
    label : Label
        What and where.
    text : str
        What is written.
    size_px, width_px : float
        Letter size, and the width that is kept for the text [px].
    line_px : float
        Distance of two text lines [px].
    """

    label: Label
    text: str
    size_px: float
    width_px: float
    line_px: float

    @property
    def offset(self) -> Point:
        """From the anchor to the aligned side and the baseline [px, upwards]."""
        dx = {"left": _GAP_PX, "center": 0.0, "right": -_GAP_PX}[self.label.align]
        level = self.label.level
        capital = _CAPITAL * self.size_px
        if level == 0:
            return (dx, -capital / 2)
        if level > 0:
            return (dx, _GAP_PX + 0.2 * self.size_px + (level - 1) * self.line_px)
        return (dx, -_GAP_PX - 1.0 - capital + (level + 1) * self.line_px)

    @property
    def box_px(self) -> Box:
        """Outline around the anchor [px, upwards]."""
        dx, dy = self.offset
        shift = {"left": 0.0, "center": 0.5, "right": 1.0}[self.label.align]
        left = dx - shift * self.width_px
        return (
            left,
            dy - _DEPTH * self.size_px,
            left + self.width_px,
            dy + _CAPITAL * self.size_px,
        )

    def box(self, scale: float) -> Box:
        """Outline in drawing units at a scale [px per unit]."""
        x, y = self.label.at
        left, bottom, right, top = (edge / scale for edge in self.box_px)
        return (x + left, y + bottom, x + right, y + top)


@dataclass(frozen=True)
class Lettering:
    """Letter sizes [px] and the ruler for texts."""

    name_px: float
    value_px: float
    width_of: Callable[[str, float, bool], float]

    def name(self, label: Label, text: str) -> Spot:
        """Measure a symbol."""
        width = self.width_of(text, self.name_px, "$" in text)
        return Spot(label, text, self.name_px, width, _LINE * self.name_px)

    def value(self, label: Label, text: str, room: str) -> Spot:
        """Measure a value by the room that is kept for it."""
        width = max(self.width_of(t, self.value_px, False) for t in (text, room))
        return Spot(label, text, self.value_px, width, _LINE * self.name_px)


@dataclass(frozen=True)
class Fit:
    """A sheet on paper.

    Attributes
    ----------
    sheet : Sheet
        The sheet.
    scale : float
        px per drawing unit.
    left, top : float
        Drawing units at the left and the top edge of the paper.
    height_px : float
        Height of the paper.
    spots : tuple of Spot
        Texts that are written.
    """

    sheet: Sheet
    scale: float
    left: float
    top: float
    height_px: float
    spots: tuple[Spot, ...]

    def place(self, spot: Spot) -> Point:
        """Where a text's aligned side and baseline stand, in drawing units."""
        (x, y), (dx, dy) = spot.label.at, spot.offset
        return (x + dx / self.scale, y + dy / self.scale)


def fitted(sheet: Sheet, spots: Sequence[Spot], lettering: Lettering, width_px: float) -> Fit:
    """Find the scale at which a sheet with its texts is just as wide as the paper.

    Parameters
    ----------
    sheet : Sheet
        What stands where.
    spots : sequence of Spot
        Its texts, measured.
    lettering : Lettering
        What they were measured with.
    width_px : float
        Width of the paper [px].

    Returns
    -------
    Fit
        Scale and place on the paper.
    """
    firm = [spot for spot in spots if spot.label.kind != "quantity"]
    low, high = 1.0, min(_MOST_SCALE, width_px / _LEAST_UNITS)
    for _ in range(40):
        scale = (low + high) / 2
        left, _, right, _ = _outline(sheet, firm, scale)
        if (right - left) * scale > width_px - 2 * _MARGIN_PX:
            high = scale
        else:
            low = scale
    scale = low
    for spot in spots:
        if spot.label.kind == "quantity":
            firm += _quantity(spot, sheet, firm, scale, lettering)
    left, bottom, right, top = _outline(sheet, firm, scale)
    left = (left + right - width_px / scale) / 2
    height = (top - bottom) * scale + 2 * _MARGIN_PX
    return Fit(sheet, scale, left, top + _MARGIN_PX / scale, height, tuple(firm))


def _outline(sheet: Sheet, spots: Sequence[Spot], scale: float) -> Box:
    left, bottom, right, top = zip(sheet.box, *(spot.box(scale) for spot in spots), strict=True)
    return (min(left), min(bottom), max(right), max(top))


def _quantity(
    spot: Spot, sheet: Sheet, others: Sequence[Spot], scale: float, lettering: Lettering
) -> list[Spot]:
    """Start the quantity's name under its symbol, and cut it where something stands."""
    beside = next(s for s in others if s.label.key == "V_IN")
    shift = beside.box_px[0] - spot.offset[0]
    x, y = spot.label.at
    spot = replace(spot, label=replace(spot.label, at=(x + shift / scale, y)))
    left, bottom, _, top = spot.box(scale)
    taken = [*obstacles(sheet), *(s.box(scale) for s in others)]
    walls = [b[0] for b in taken if b[2] > left and b[1] < top and b[3] > bottom]
    room = (min([*walls, sheet.box[2]]) - left) * scale - 2 * _GAP_PX
    if spot.width_px <= room:
        return [spot]
    text = spot.text
    while text and lettering.width_of(f"{text}…", spot.size_px, False) > room:
        text = text[:-1].rstrip()
    short = replace(spot, text=f"{text}…", width_px=room)
    return [short] if len(text) >= _LEAST_LETTERS else []


def obstacles(sheet: Sheet) -> tuple[Box, ...]:
    """Give the outline of everything that a text must not touch, lines as boxes of no width."""
    lines = [
        (min(x0, x1), min(y0, y1), max(x0, x1), max(y0, y1))
        for line in sheet.lines
        for (x0, y0), (x1, y1) in line.segments
    ]
    for body in sheet.bodies:
        (x0, y0), (x1, y1) = sorted((body.start, body.end))
        lines.append((x0, y0, x1, y1))
    bodies = (body.box for body in sheet.bodies)
    terminals = (terminal.box for terminal in sheet.terminals)
    return (*lines, *bodies, *terminals, sheet.comparator.box)


def is_crowded(fit: Fit) -> bool:
    """Tell whether a text touches another one or anything drawn."""
    boxes = [spot.box(fit.scale) for spot in fit.spots]
    return any(
        overlap(box, other)
        for number, box in enumerate(boxes)
        for other in (*boxes[:number], *obstacles(fit.sheet))
    )


def overlap(a: Box, b: Box) -> bool:
    """Tell whether two outlines share more than an edge."""
    return a[0] < b[2] and b[0] < a[2] and a[1] < b[3] and b[1] < a[3]

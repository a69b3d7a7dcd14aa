"""The ink of a schematic: symbols to IEC 60617 style, drawn with schemdraw into given axes."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from hystkit.figures.schematic_sheet import (
    BAR,
    BODY_WIDTH,
    CIRCLE,
    GROUND,
    PIN,
    TRIANGLE_HALF,
    TRIANGLE_LENGTH,
    Body,
    Comparator,
    Point,
    Sheet,
    Terminal,
)

if TYPE_CHECKING:
    from collections.abc import Iterable

    from matplotlib.axes import Axes

DOT = 0.065
_STYLE = {
    "unit": 1.0,
    "inches_per_unit": 1.0,
    "lblofst": 0.1,
    "margin": 0.0,
    "fill": None,
    "ls": "-",
}
_SIGN = 0.12
_SIGN_AT = 0.32
_DIAMOND = 0.145
_DIAMOND_AT = TRIANGLE_LENGTH - 0.66


def draw_sheet(sheet: Sheet, axes: Axes, *, colour: str, line_width: float) -> None:
    """Draw everything of a schematic but its texts.

    Parameters
    ----------
    sheet : Sheet
        What stands where.
    axes : Axes
        Axes whose data units are drawing units; nothing else of matplotlib is touched.
    colour : str
        Colour of all lines.
    line_width : float
        In points.
    """
    # Here and not above: schemdraw loads pyplot, which only a drawn schematic should cost.
    import schemdraw
    from schemdraw import elements

    drawing = schemdraw.Drawing(canvas=axes, show=False)
    # All of it, so that nobody's own schemdraw style leaks in.
    drawing.dwgparams.clear()
    drawing.dwgparams.update(_STYLE, color=colour, lw=line_width)
    for body in sheet.bodies:
        drawing.add(_resistor(elements, body))
    strokes = [line.points for line in sheet.lines]
    strokes += comparator_strokes(sheet.comparator)
    for terminal in sheet.terminals:
        strokes += terminal_strokes(terminal)
    drawing.add(_stroked(elements, strokes))
    for terminal in sheet.terminals:
        if terminal.kind.startswith("open"):
            left, bottom, right, top = terminal.box
            centre = ((left + right) / 2, (bottom + top) / 2)
            drawing.add(elements.Dot(radius=CIRCLE).at(centre).fill(False))
    for point in sheet.dots:
        drawing.add(elements.Dot(radius=DOT).at(point))
    drawing.draw(canvas=axes, show=False)


def _resistor(elements: Any, body: Body) -> Any:
    # schemdraw's own body is 0.5 wide; ours is slimmer.
    return elements.ResistorIEC().endpoints(body.start, body.end).scaley(2 * BODY_WIDTH / 0.5)


def _stroked(elements: Any, strokes: Iterable[Iterable[Point]]) -> Any:
    """Make one element of many strokes."""
    from schemdraw.segments import Segment

    element = elements.Element().at((0, 0)).theta(0)
    element.segments.extend(Segment(tuple(points)) for points in strokes)
    return element


def comparator_strokes(comparator: Comparator) -> list[tuple[Point, ...]]:
    """Outline a comparator.

    Parameters
    ----------
    comparator : Comparator
        Where it stands, and whether its output is open.

    Returns
    -------
    list of tuple of Point
        Polylines in drawing units: triangle, signs of the inputs, mark of an open output.
    """
    x, y = comparator.back
    top, tip, bottom = (x, y + TRIANGLE_HALF), (x + TRIANGLE_LENGTH, y), (x, y - TRIANGLE_HALF)
    left, right = x + _SIGN_AT - _SIGN, x + _SIGN_AT + _SIGN
    strokes: list[tuple[Point, ...]] = [
        # Begun in the middle of an edge, so that all three corners are joined.
        ((x, y), top, tip, bottom, (x, y)),
        ((left, y + PIN), (right, y + PIN)),
        ((left, y - PIN), (right, y - PIN)),
        ((x + _SIGN_AT, y - PIN - _SIGN), (x + _SIGN_AT, y - PIN + _SIGN)),
    ]
    if comparator.open_collector:
        strokes += _open_collector((x + _DIAMOND_AT, y))
    return strokes


def _open_collector(at: Point) -> list[tuple[Point, ...]]:
    """Draw the diamond of an open output; the bar below says that it pulls down."""
    (x, y), d = at, _DIAMOND
    middle = (x - d / 2, y + d / 2)
    diamond = (middle, (x, y + d), (x + d, y), (x, y - d), (x - d, y), middle)
    return [diamond, ((x - d, y - d), (x + d, y - d))]


def terminal_strokes(terminal: Terminal) -> list[tuple[Point, ...]]:
    """Outline the end of a connection.

    Parameters
    ----------
    terminal : Terminal
        What it is and where.

    Returns
    -------
    list of tuple of Point
        Polylines in drawing units: the bar of a rail, the bars of ground; an open end is a
        circle and has none.
    """
    x, y = terminal.at
    if terminal.kind.startswith("rail"):
        return [((x - BAR, y), (x + BAR, y))]
    if terminal.kind == "ground":
        widths = (BAR, BAR * 0.62, BAR * 0.24)
        rows = (y - 0.02, y - GROUND / 2, y - GROUND)
        bars = (((x - w, row), (x + w, row)) for w, row in zip(widths, rows, strict=True))
        return [((x, y), (x, rows[0])), *bars]
    return []

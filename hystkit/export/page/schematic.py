"""The schematic as SVG text: values are texts that the script can set, colours come from the page.

What stands where is decided by the figures; only the ink differs.
"""

from __future__ import annotations

import html
from collections.abc import Iterator, Sequence

from hystkit.circuit.design import Design
from hystkit.circuit.elements import FIXED_NODES, Resistor
from hystkit.export.page.pen import rounded, symbol_spans, symbol_width, text_width
from hystkit.figures.schematic import sheets_of, value_texts
from hystkit.figures.schematic_sheet import CIRCLE, Body, Point, Sheet
from hystkit.figures.schematic_symbols import DOT, comparator_strokes, terminal_strokes
from hystkit.figures.schematic_text import Fit, Lettering, Spot, fitted, is_crowded
from hystkit.symbolic.symbols import split_name

#: Width for which it is laid out; it is scaled to the room that there is [px].
WIDTH = 400
_NAME, _VALUE = 14.0, 13.0
_PART_ROOM, _LEVEL_ROOM = "88k88", "−88.88 V"
_ANCHORS = {"left": "start", "center": "middle", "right": "end"}


def schematic_svg(design: Design) -> str:
    """Draw the schematic of a design.

    Parameters
    ----------
    design : Design
        Any built-in form with any of its optional parts, or a circuit of one's own.

    Returns
    -------
    str
        An ``svg`` element without styles. The text of a value carries the name of its part or
        level in ``data-value``.
    """
    fit = _fit(design)
    ink = "".join(f'<polyline points="{_places(fit, points)}"/>' for points in _strokes(fit.sheet))
    bodies = "".join(_body(fit, body) for body in fit.sheet.bodies)
    rings = "".join(_rings(fit))
    texts = "".join(_text(fit, spot) for spot in fit.spots)
    size = f"{WIDTH} {_number(fit.height_px)}"
    return (
        f'<svg class="hk-schematic" viewBox="0 0 {size}" role="img" '
        f'aria-label="{html.escape(schematic_words(design))}">{ink}{bodies}{rings}{texts}</svg>'
    )


def schematic_words(design: Design) -> str:
    """Put the circuit into words; the values stand in the table beside it.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    str
        One sentence for each element.
    """
    sentences = [f"Schematic: {design.stage.title}."]
    for element in design.elements:
        name = element.name if isinstance(element, Resistor) else "Wire"
        sentences.append(f"{name} from {_words(element.node_a)} to {_words(element.node_b)}.")
    return " ".join(sentences)


def _words(node: str) -> str:
    if node in FIXED_NODES and node not in ("signal", "ground"):
        return FIXED_NODES[node]
    pins = {"plus": "the plus input", "minus": "the minus input", "out": "the output"}
    return pins.get(node, {"signal": "the signal", "ground": "ground"}.get(node, f"node {node}"))


def _fit(design: Design) -> Fit:
    """Choose the drawing: the first one with room for its texts."""
    lettering = Lettering(_NAME, _VALUE, lambda text, size, _: text_width(text, size))
    for sheet in sheets_of(design):
        spots = [spot for spot in _spots(sheet, lettering, design) if spot]
        fit = fitted(sheet, spots, lettering, WIDTH)
        if not is_crowded(fit):
            break
    return fit


def _spots(sheet: Sheet, lettering: Lettering, design: Design) -> Iterator[Spot | None]:
    """Measure the texts of a sheet."""
    texts = value_texts(design)
    quantity = " ".join(design.signal.name.split()) if design.signal else ""
    line = lettering.name(sheet.labels[0], "").line_px
    for label in sheet.labels:
        if label.kind == "name":
            yield Spot(label, label.key, _NAME, symbol_width(label.key, size=_NAME), line)
        elif label.kind == "value":
            text = texts[label.key]
            room = _PART_ROOM if label.key in design.parts else _LEVEL_ROOM
            yield lettering.value(label, text, room)
        elif label.kind == "word":
            yield lettering.value(label, label.key, label.key)
        else:
            yield lettering.value(label, quantity, quantity) if quantity else None


def _strokes(sheet: Sheet) -> Iterator[Sequence[Point]]:
    for line in sheet.lines:
        yield line.points
    for body in sheet.bodies:
        left, bottom, right, top = body.box
        near, far = sorted((body.start, body.end))
        yield (near, (near[0], bottom) if body.is_vertical else (left, near[1]))
        yield ((far[0], top) if body.is_vertical else (right, far[1]), far)
    yield from comparator_strokes(sheet.comparator)
    for terminal in sheet.terminals:
        yield from terminal_strokes(terminal)


def _body(fit: Fit, body: Body) -> str:
    left, bottom, right, top = body.box
    x, y = _place(fit, (left, top))
    wide, high = (right - left) * fit.scale, (top - bottom) * fit.scale
    size = f'width="{_number(wide)}" height="{_number(high)}"'
    return f'<rect x="{_number(x)}" y="{_number(y)}" {size}/>'


def _rings(fit: Fit) -> Iterator[str]:
    """Draw terminal circles and the dots where connections meet."""
    for terminal in fit.sheet.terminals:
        if terminal.kind.startswith("open"):
            left, bottom, right, top = terminal.box
            yield _circle(fit, ((left + right) / 2, (bottom + top) / 2), CIRCLE, "ring")
    for point in fit.sheet.dots:
        yield _circle(fit, point, DOT, "dot")


def _circle(fit: Fit, centre: Point, radius: float, look: str) -> str:
    x, y = (_number(place) for place in _place(fit, centre))
    return f'<circle class="hk-{look}" cx="{x}" cy="{y}" r="{_number(radius * fit.scale)}"/>'


def _text(fit: Fit, spot: Spot) -> str:
    x, y = (_number(place) for place in _place(fit, fit.place(spot)))
    label = spot.label
    looks = f"hk-{label.kind}" + (" hk-signal" if label.key in ("V_IN", "signal") else "")
    anchor = _ANCHORS[label.align]
    where = f'x="{x}" y="{y}"' + (f' text-anchor="{anchor}"' if anchor != "start" else "")
    mark = f' data-value="{html.escape(label.key)}"' if label.kind == "value" else ""
    inner = html.escape(spot.text)
    if label.kind == "name":
        inner = symbol_spans(*split_name(label.key))
    return f'<text class="{looks}" {where}{mark}>{inner}</text>'


def _place(fit: Fit, point: Point) -> Point:
    return (point[0] - fit.left) * fit.scale, (fit.top - point[1]) * fit.scale


def _places(fit: Fit, points: Sequence[Point]) -> str:
    return " ".join(_number(place) for point in points for place in _place(fit, point))


def _number(value: float) -> str:
    return f"{rounded(value):.2f}".rstrip("0").rstrip(".")

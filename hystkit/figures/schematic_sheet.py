"""What stands where on a schematic: the drawing as data, in drawing units, without any ink."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Literal

from hystkit.circuit.elements import FIXED_NODES

Point = tuple[float, float]
Segment = tuple[Point, Point]
Box = tuple[float, float, float, float]
Align = Literal["left", "center", "right"]

#: Half the length and half the width of a resistor's body.
BODY_LENGTH = 0.5
BODY_WIDTH = 0.19
#: Radius of an open terminal circle, half the width of a rail bar, height of a ground symbol.
CIRCLE = 0.085
BAR = 0.22
GROUND = 0.26
#: Comparator: length, half height, distance of an input from the axis, place of the supply pins.
TRIANGLE_LENGTH = 2.2
TRIANGLE_HALF = 1.25
PIN = 0.7
SUPPLY_AT = 0.75


@dataclass(frozen=True)
class Body:
    """A drawn resistor: its body stands in the middle between two ends.

    Parameters
    ----------
    name : str
        Symbol of the part.
    start, end : Point
        The two ends, on one horizontal or vertical line.
    text : {"over", "above", "left", "right"}
        Name and value above and below the body, both above it, or stacked on one side of it.
    """

    name: str
    start: Point
    end: Point
    text: Literal["over", "above", "left", "right"] = "over"

    @property
    def centre(self) -> Point:
        """Middle of the body."""
        return ((self.start[0] + self.end[0]) / 2, (self.start[1] + self.end[1]) / 2)

    @property
    def is_vertical(self) -> bool:
        """Whether the body stands upright."""
        return self.start[0] == self.end[0]

    @property
    def box(self) -> Box:
        """Outline of the body: left, bottom, right, top."""
        (x, y), (a, b) = self.centre, (BODY_LENGTH, BODY_WIDTH)
        if self.is_vertical:
            a, b = b, a
        return (x - a, y - b, x + a, y + b)


@dataclass(frozen=True)
class Line:
    """A drawn connection along right-angled points."""

    points: tuple[Point, ...]

    @property
    def segments(self) -> tuple[Segment, ...]:
        """Its straight stretches."""
        return tuple(pairwise(self.points))


@dataclass(frozen=True)
class Terminal:
    """Where the drawing meets a node that something outside holds.

    Parameters
    ----------
    node : str
        Name of the node; the output node may have a terminal, too.
    at : Point
        Where the connection ends.
    kind : {"rail up", "rail down", "ground", "open left", "open right"}
        Symbol, and the side on which the label stands.
    valued : bool
        Whether the voltage, or the quantity that the signal measures, is written beside it.
    """

    node: str
    at: Point
    kind: Literal["rail up", "rail down", "ground", "open left", "open right"]
    valued: bool = True

    @property
    def box(self) -> Box:
        """Outline of the symbol: left, bottom, right, top."""
        x, y = self.at
        if self.kind == "ground":
            return (x - BAR, y - GROUND, x + BAR, y)
        if self.kind.startswith("rail"):
            return (x - BAR, y, x + BAR, y)
        x += CIRCLE if self.kind == "open right" else -CIRCLE
        return (x - CIRCLE, y - CIRCLE, x + CIRCLE, y + CIRCLE)


@dataclass(frozen=True)
class Comparator:
    """The comparator, pointing right, by the middle of its back edge."""

    back: Point
    open_collector: bool

    @property
    def pins(self) -> dict[str, Point]:
        """Where each node meets the triangle."""
        x, y = self.back
        edge = TRIANGLE_HALF * (1 - SUPPLY_AT / TRIANGLE_LENGTH)
        return {
            "minus": (x, y + PIN),
            "plus": (x, y - PIN),
            "out": (x + TRIANGLE_LENGTH, y),
            "cc": (x + SUPPLY_AT, y + edge),
            "ee": (x + SUPPLY_AT, y - edge),
        }

    @property
    def box(self) -> Box:
        """Outline: left, bottom, right, top."""
        x, y = self.back
        return (x, y - TRIANGLE_HALF, x + TRIANGLE_LENGTH, y + TRIANGLE_HALF)


@dataclass(frozen=True)
class Label:
    """A text and where it hangs.

    Parameters
    ----------
    kind : {"name", "value", "word", "quantity"}
        Symbol of `key`, its value, `key` itself, or the name of the measured quantity.
    key : str
        Symbol or text.
    at : Point
        Anchor.
    align : {"left", "center", "right"}
        Which side of the text the anchor touches.
    level : int
        Text line: 1 and 2 stand above the anchor, -1 and -2 below it, 0 is level with it.
    """

    kind: Literal["name", "value", "word", "quantity"]
    key: str
    at: Point
    align: Align
    level: int


@dataclass(frozen=True)
class Sheet:
    """A complete schematic.

    Parameters
    ----------
    comparator : Comparator
        The one comparator.
    bodies, lines, terminals : tuple
        Resistors, connections and terminals.
    """

    comparator: Comparator
    bodies: tuple[Body, ...]
    lines: tuple[Line, ...]
    terminals: tuple[Terminal, ...]

    @cached_property
    def dots(self) -> tuple[Point, ...]:
        """Points where three or more arms meet."""
        return tuple(p for p in self.joints if self.arms(p) > 2)

    @property
    def joints(self) -> tuple[Point, ...]:
        """Every point where something begins, ends or bends, each once."""
        return tuple(dict.fromkeys(_near(p) for p in self._joints()))

    def arms(self, point: Point) -> int:
        """Count what leaves a point: stretches of line, resistors, pins and terminals."""
        segments = [s for line in self.lines for s in line.segments]
        ends = [_near(p) for s in segments for p in s]
        ends += [_near(p) for body in self.bodies for p in (body.start, body.end)]
        ends += [_near(p) for p in self.comparator.pins.values()]
        ends += [_near(t.at) for t in self.terminals]
        return ends.count(point) + 2 * sum(passes(s, point) for s in segments)

    @cached_property
    def labels(self) -> tuple[Label, ...]:
        """All texts."""
        beside = [label for body in self.bodies for label in _body_labels(body)]
        at_ends = [label for terminal in self.terminals for label in _terminal_labels(terminal)]
        return (*beside, *at_ends, *self._quantity_label())

    @cached_property
    def box(self) -> Box:
        """Outline of everything but the texts: left, bottom, right, top."""
        boxes = [
            self.comparator.box,
            *(b.box for b in self.bodies),
            *(t.box for t in self.terminals),
        ]
        boxes += [(x, y, x, y) for x, y in self._joints()]
        left, bottom, right, top = zip(*boxes, strict=True)
        return (min(left), min(bottom), max(right), max(top))

    def _quantity_label(self) -> Iterator[Label]:
        """Give the measured quantity its line below the first signal terminal on the left."""
        for terminal in self.terminals:
            if terminal.node == "signal" and terminal.kind == "open left" and terminal.valued:
                left, _, _, _ = terminal.box
                yield Label("quantity", "signal", (left, terminal.at[1] - BODY_WIDTH), "left", -2)
                return

    def _joints(self) -> Iterator[Point]:
        for line in self.lines:
            yield from line.points
        for body in self.bodies:
            yield from (body.start, body.end)
        for terminal in self.terminals:
            yield terminal.at
        yield from self.comparator.pins.values()


def passes(segment: Segment, point: Point) -> bool:
    """Tell whether a stretch of line runs through a point, not counting its ends."""
    (x0, y0), (x1, y1) = (_near(p) for p in segment)
    x, y = point
    if x0 == x1 == x:
        return min(y0, y1) < y < max(y0, y1)
    return y0 == y1 == y and min(x0, x1) < x < max(x0, x1)


def _near(point: Point) -> Point:
    return (round(point[0], 6), round(point[1], 6))


def _body_labels(body: Body) -> Iterator[Label]:
    left, bottom, right, top = body.box
    x, y = body.centre
    if body.text == "over":
        yield Label("name", body.name, (x, top), "center", 1)
        yield Label("value", body.name, (x, bottom), "center", -1)
    elif body.text == "above":
        yield Label("name", body.name, (x, top), "right", 1)
        yield Label("value", body.name, (x, top), "left", 1)
    elif body.text == "left":
        yield from _stacked(body.name, (left, y), "right")
    else:
        yield from _stacked(body.name, (right, y), "left")


def _stacked(symbol: str, at: Point, align: Align) -> Iterator[Label]:
    yield Label("name", symbol, at, align, 1)
    yield Label("value", symbol, at, align, -1)


def _terminal_labels(terminal: Terminal) -> Iterator[Label]:
    if terminal.kind == "ground":
        return
    if terminal.kind.startswith("rail"):
        yield from _rail_labels(terminal)
        return
    left, _, right, _ = terminal.box
    y = terminal.at[1]
    at: Point = (left, y) if terminal.kind == "open left" else (right, y)
    align: Align = "right" if terminal.kind == "open left" else "left"
    symbol = FIXED_NODES.get(terminal.node)
    if symbol is None:
        yield Label("word", terminal.node, at, align, 0)
    elif terminal.node == "signal" or not terminal.valued:
        yield Label("name", symbol, at, align, 0)
    else:
        yield from _stacked(symbol, at, align)


def _rail_labels(terminal: Terminal) -> Iterator[Label]:
    symbol = FIXED_NODES[terminal.node]
    level = 1 if terminal.kind == "rail up" else -1
    yield Label("name", symbol, terminal.at, "right" if terminal.valued else "center", level)
    if terminal.valued:
        yield Label("value", symbol, terminal.at, "left", level)

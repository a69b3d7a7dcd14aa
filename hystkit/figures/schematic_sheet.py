"""What stands where on a schematic: the drawing as data, in drawing units, without any ink."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Literal

from hystkit.circuit.elements import FIXED_NODES

Point = tuple[float, float]
Segment = tuple[Point, Point]
Box = tuple[float, float, float, float]

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
    text : {"over", "left", "right"}
        Name and value above and below the body, or stacked on one side of it.
    """

    name: str
    start: Point
    end: Point
    text: Literal["over", "left", "right"] = "over"

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
        Whether the voltage is written beside the symbol.
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
    align: Literal["left", "center", "right"]
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
    notes : tuple of Label
        Texts beside those that bodies and terminals bring along.
    """

    comparator: Comparator
    bodies: tuple[Body, ...]
    lines: tuple[Line, ...]
    terminals: tuple[Terminal, ...]
    notes: tuple[Label, ...] = ()

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
        return (*beside, *at_ends, *self.notes)

    @cached_property
    def box(self) -> Box:
        """Outline of everything but the texts: left, bottom, right, top."""
        boxes = [self.comparator.box, *(b.box for b in self.bodies), *(t.box for t in self.terminals)]
        boxes += [(x, y, x, y) for x, y in self._joints()]
        left, bottom, right, top = zip(*boxes, strict=True)
        return (min(left), min(bottom), max(right), max(top))

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


def line(*points: Point) -> Line:
    """Connect points."""
    return Line(tuple(points))


def supply_pins(comparator: Comparator, *, split: bool) -> tuple[tuple[Line, ...], tuple[Terminal, ...]]:
    """Draw the supply of the comparator itself."""
    top, bottom = comparator.pins["cc"], comparator.pins["ee"]
    reach = TRIANGLE_HALF + 0.1
    up, down = (top[0], comparator.back[1] + reach), (bottom[0], comparator.back[1] - reach)
    lines = (line(top, up), line(bottom, down))
    return lines, (Terminal("cc", up, "rail up"), low_rail(down, split=split, valued=True))


def low_rail(at: Point, *, split: bool, valued: bool = False) -> Terminal:
    """Give the negative rail: a flag in a split supply, the ground symbol in a single one."""
    return Terminal("ee", at, "rail down", valued) if split else Terminal("ee", at, "ground")


def _near(point: Point) -> Point:
    return (round(point[0], 6), round(point[1], 6))


def _body_labels(body: Body) -> Iterable[Label]:
    left, bottom, right, top = body.box
    x, y = body.centre
    if body.text == "over":
        yield Label("name", body.name, (x, top), "center", 1)
        yield Label("value", body.name, (x, bottom), "center", -1)
        return
    at, align = ((left, y), "right") if body.text == "left" else ((right, y), "left")
    yield Label("name", body.name, at, align, 1)  # type: ignore[arg-type]
    yield Label("value", body.name, at, align, -1)  # type: ignore[arg-type]


def _terminal_labels(terminal: Terminal) -> Iterable[Label]:
    symbol = FIXED_NODES.get(terminal.node, terminal.node)
    left, _, right, _ = terminal.box
    y = terminal.at[1]
    if terminal.kind == "ground":
        return
    if terminal.kind.startswith("rail"):
        level = 1 if terminal.kind == "rail up" else -1
        yield Label("name", symbol, terminal.at, "right" if terminal.valued else "center", level)
        if terminal.valued:
            yield Label("value", symbol, terminal.at, "left", level)
        return
    at, align = ((left, y), "right") if terminal.kind == "open left" else ((right, y), "left")
    if terminal.node == "out":
        yield Label("word", "out", at, align, 0)  # type: ignore[arg-type]
    elif terminal.node == "signal":
        yield Label("name", symbol, at, align, 0)  # type: ignore[arg-type]
        yield Label("quantity", terminal.node, (left, y - BODY_WIDTH), "left", -2)
    else:
        yield Label("name", symbol, at, align, 1)  # type: ignore[arg-type]
        yield Label("value", symbol, at, align, -1)  # type: ignore[arg-type]

"""The pen that puts a schematic together, piece by piece."""

from __future__ import annotations

from typing import Literal

from hystkit.figures.schematic_sheet import (
    TRIANGLE_HALF,
    Body,
    Comparator,
    Line,
    Point,
    Sheet,
    Terminal,
)

Side = Literal["left", "right"]

#: From a lying connection to its rail bar or ground symbol.
_RISE = 0.25
_DROP = 0.15
_SUPPLY_REACH = TRIANGLE_HALF - 0.02


class Pen:
    """Collects what is drawn around the one comparator, whose back edge is at the origin.

    Parameters
    ----------
    split : bool
        Whether the supply has a negative rail; else its low side is ground.
    open_collector : bool
        Whether the comparator is marked so.
    """

    def __init__(self, *, split: bool, open_collector: bool) -> None:
        self.split = split
        self.comparator = Comparator((0.0, 0.0), open_collector)
        self.bodies: list[Body] = []
        self.lines: list[Line] = []
        self.terminals: list[Terminal] = []

    def wire(self, *points: Point) -> None:
        """Draw a connection."""
        self.lines.append(Line(tuple(points)))

    def upright(self, name: str, at: Point, length: float, side: Side) -> Point:
        """Stand a resistor on (length > 0) or hang it from a point; return its other end."""
        end = (at[0], at[1] + length)
        self.bodies.append(Body(name, at, end, side))
        return end

    def lying(self, name: str, at: Point, length: float) -> Point:
        """Lay a resistor to the right (length > 0) or left of a point; return its other end."""
        end = (at[0] + length, at[1])
        self.bodies.append(Body(name, at, end))
        return end

    def rail(self, node: str, at: Point, *, valued: bool = False) -> None:
        """End an upright connection at a rail or at ground."""
        if node == "ground" or (node == "ee" and not self.split):
            self.terminals.append(Terminal(node, at, "ground"))
        else:
            kind: Literal["rail up", "rail down"] = (
                "rail up" if node in ("cc", "pu") else "rail down"
            )
            self.terminals.append(Terminal(node, at, kind, valued))

    def circle(self, node: str, at: Point, side: Side, *, valued: bool = True) -> None:
        """End a connection at an open terminal that is labelled on one side."""
        kind: Literal["open left", "open right"] = "open left" if side == "left" else "open right"
        self.terminals.append(Terminal(node, at, kind, valued))

    def outside(self, node: str, at: Point, side: Side) -> None:
        """End a lying connection at a node that something outside holds."""
        if node == "ground" or (node == "ee" and not self.split):
            self._turned(node, at, -_DROP)
        elif node in ("cc", "ee"):
            self._turned(node, at, _RISE if node == "cc" else -_RISE)
        else:
            self.circle(node, at, side)

    def sheet(self) -> Sheet:
        """Add the supply of the comparator and return the drawing."""
        for node, reach in (("cc", _SUPPLY_REACH), ("ee", -_SUPPLY_REACH)):
            pin = self.comparator.pins[node]
            self.wire(pin, (pin[0], reach))
            self.rail(node, (pin[0], reach), valued=True)
        return Sheet(self.comparator, tuple(self.bodies), tuple(self.lines), tuple(self.terminals))

    def _turned(self, node: str, at: Point, rise: float) -> None:
        end = (at[0], at[1] + rise)
        self.wire(at, end)
        self.rail(node, end)

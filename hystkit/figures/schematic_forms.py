"""Where the parts of a built-in form stand, found from the names of its elements.

All forms share one skeleton. The comparator has its minus input on top. Below it runs the
feedback row: what leads to the plus input from the left, R_F to its right, the output column at
the end. The other input's circuit stands on the row of the minus pin.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from hystkit.circuit.elements import Element, Resistor
from hystkit.figures.schematic_sheet import (
    PIN,
    TRIANGLE_LENGTH,
    Body,
    Comparator,
    Line,
    Point,
    Sheet,
    Terminal,
    line,
    low_rail,
    supply_pins,
)

#: Row of the feedback resistor, and where the plus pin taps it.
ROW = -2.75
TAP = -0.45
#: Length of an upright and of a lying resistor with its leads.
UPRIGHT = 1.5
LYING = 1.6


@dataclass
class _Pen:
    """Collects what is drawn."""

    split: bool
    bodies: list[Body] = field(default_factory=list)
    lines: list[Line] = field(default_factory=list)
    terminals: list[Terminal] = field(default_factory=list)

    def wire(self, *points: Point) -> None:
        """Draw a connection, unless it has no length."""
        if len(set(points)) > 1:
            self.lines.append(line(*points))

    def upright(self, name: str, at: Point, length: float, text: Literal["left", "right"]) -> Point:
        """Stand a resistor on (length > 0) or hang it from a point; give its other end."""
        end = (at[0], at[1] + length)
        self.bodies.append(Body(name, at, end, text))
        return end

    def lying(self, name: str, at: Point, length: float) -> Point:
        """Lay a resistor to the right (length > 0) or left of a point; give its other end."""
        end = (at[0] + length, at[1])
        self.bodies.append(Body(name, at, end))
        return end

    def divider(self, at: Point) -> None:
        """Draw R_T and R_B at the divider node."""
        self.terminals.append(Terminal("cc", self.upright("R_T", at, UPRIGHT, "left"), "rail up", False))
        self.terminals.append(low_rail(self.upright("R_B", at, -UPRIGHT, "left"), split=self.split))


def form_sheet(
    elements: Iterable[Element], *, split: bool, open_collector: bool
) -> Sheet:
    """Lay out one built-in form.

    Parameters
    ----------
    elements : iterable of Resistor or Wire
        The elements of a built-in form, with any of its optional parts.
    split : bool
        Whether the supply has a negative rail.
    open_collector : bool
        Whether the comparator is marked so.

    Returns
    -------
    Sheet
        The drawing; it realises exactly these elements.
    """
    ends = {e.name: e.nodes for e in elements if isinstance(e, Resistor)}
    comparator = Comparator((0.0, 0.0), open_collector)
    pen = _Pen(split)
    if "R_I" in ends:
        _signal_to_plus(pen, ends)
        _reference_to_minus(pen, ends, elements)
    else:
        _signal_to_minus(pen, ends)
        _reference_to_plus(pen, ends)
    pen.wire((0.0, -PIN), (TAP, -PIN), (TAP, ROW))
    _output(pen, ends)
    lines, terminals = supply_pins(comparator, split=split)
    return Sheet(
        comparator, tuple(pen.bodies), (*pen.lines, *lines), (*pen.terminals, *terminals)
    )


Ends = dict[str, tuple[str, str]]


def _signal_to_minus(pen: _Pen, ends: Ends) -> None:
    """Lead the signal to the minus pin from the left."""
    near, far = (TAP, PIN), (TAP - LYING, PIN)
    if "R_S" in ends:
        pen.lying("R_S", near, -LYING)
    pen.wire((0.0, PIN), near if "R_S" in ends else far)
    pen.terminals.append(Terminal("signal", far, "open left"))


def _reference_to_plus(pen: _Pen, ends: Ends) -> None:
    """Draw the reference at the left end of the feedback row."""
    tap = (TAP, ROW)
    if "R_R" in ends:
        end = pen.lying("R_R", tap, -LYING)
        pen.terminals.append(Terminal("ref", end, "open left"))
        return
    node = (TAP - 1.2, ROW)
    pen.wire(tap, node)
    if "R_T" in ends:
        pen.divider(node)
    else:
        end = pen.upright("R_B", node, -UPRIGHT, "left")
        pen.terminals.append(Terminal("ground", end, "ground"))


def _signal_to_plus(pen: _Pen, ends: Ends) -> None:
    """Lead the signal to the feedback row from the left."""
    at = (TAP, ROW)
    if "R_G" in ends:
        at = (TAP - 0.7, ROW)
        pen.wire(at, (TAP, ROW))
        end = pen.upright("R_G", at, -UPRIGHT - 0.2, "right")
        pen.terminals.append(Terminal("ground", end, "ground"))
    at = pen.lying("R_I", at, -LYING)
    if "R_S" in ends:
        at = pen.lying("R_S", at, -LYING)
    pen.terminals.append(Terminal("signal", at, "open left"))


def _reference_to_minus(pen: _Pen, ends: Ends, elements: Iterable[Element]) -> None:
    """Draw the reference at the minus pin."""
    node = (TAP - 0.7, PIN)
    if "R_T" in ends:
        pen.wire((0.0, PIN), node)
        pen.divider(node)
        return
    grounded = any({"ground", "minus"} & set(e.nodes) == {"ground", "minus"} for e in elements)
    if not grounded:
        near = (TAP, PIN)
        end = pen.lying("R_R", near, -LYING) if "R_R" in ends else node
        pen.wire((0.0, PIN), near if "R_R" in ends else end)
        pen.terminals.append(Terminal("ref", end, "open left"))
    elif "R_R" in ends:
        pen.wire((0.0, PIN), node)
        end = pen.upright("R_R", node, -UPRIGHT, "left")
        pen.terminals.append(Terminal("ground", end, "ground"))
    else:
        end = (node[0], PIN - 0.5)
        pen.wire((0.0, PIN), node, end)
        pen.terminals.append(Terminal("ground", end, "ground"))


def _output(pen: _Pen, ends: Ends) -> None:
    """Draw pull-up, feedback, load and the output terminal, from left to right."""
    x = TRIANGLE_LENGTH + 0.55
    if "R_PU" in ends:
        top = pen.upright("R_PU", (x, 0.0), UPRIGHT, "right")
        pen.terminals.append(Terminal("pu", top, "rail up"))
        x += 0.55
    pen.wire((x, 0.0), (x, ROW))
    pen.lying("R_F", (TAP, ROW), x - TAP)
    if "R_L" in ends:
        x += 0.7
        end = pen.upright("R_L", (x, 0.0), -UPRIGHT, "right")
        pen.terminals.append(Terminal("load", end, "rail down"))
    pen.wire((TRIANGLE_LENGTH, 0.0), (x + 0.6, 0.0))
    pen.terminals.append(Terminal("out", (x + 0.6, 0.0), "open right"))

"""Where the parts of a built-in form stand, found from the names of its elements.

All forms share one skeleton. The comparator has its minus input on top. Below it runs the
feedback row: what leads to the plus input from the left, R_F to its right, the output column at
the end. The other input's circuit stands on the row of the minus pin.
"""

from __future__ import annotations

from collections.abc import Iterable

from hystkit.circuit.elements import Element, Resistor
from hystkit.figures.schematic_pen import Pen
from hystkit.figures.schematic_sheet import PIN, TRIANGLE_LENGTH, Point, Sheet

#: Row of the feedback resistor, and where the plus pin taps it.
ROW = -2.65
TAP = -0.45
#: Length of an upright and of a lying resistor with its leads.
UPRIGHT = 1.5
LYING = 1.6
#: The pull-up is longer, so that its label clears that of the comparator's supply.
PULL_UP = 1.8

Ends = dict[str, tuple[str, str]]


def form_sheet(elements: Iterable[Element], *, split: bool, open_collector: bool) -> Sheet:
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
    elements = tuple(elements)
    ends = {e.name: e.nodes for e in elements if isinstance(e, Resistor)}
    pen = Pen(split=split, open_collector=open_collector)
    if "R_I" in ends:
        _signal_to_plus(pen, ends)
        _reference_to_minus(pen, ends, elements)
    else:
        _signal_to_minus(pen, ends)
        _reference_to_plus(pen, ends)
    pen.wire((0.0, -PIN), (TAP, -PIN), (TAP, ROW))
    _output(pen, ends)
    return pen.sheet()


def _signal_to_minus(pen: Pen, ends: Ends) -> None:
    """Lead the signal to the minus pin from the left."""
    near, far = (TAP, PIN), (TAP - LYING, PIN)
    if "R_S" in ends:
        pen.lying("R_S", near, -LYING)
    pen.wire((0.0, PIN), near if "R_S" in ends else far)
    pen.circle("signal", far, "left")


def _reference_to_plus(pen: Pen, ends: Ends) -> None:
    """Draw the reference at the left end of the feedback row."""
    tap = (TAP, ROW)
    if "R_R" in ends:
        end = pen.lying("R_R", tap, -LYING)
        pen.circle("ref", end, "left")
        return
    node = (TAP - 1.2, ROW)
    pen.wire(tap, node)
    if "R_T" in ends:
        _divider(pen, node)
    else:
        end = pen.upright("R_B", node, -UPRIGHT, "left")
        pen.rail("ground", end)


def _signal_to_plus(pen: Pen, ends: Ends) -> None:
    """Lead the signal to the feedback row from the left."""
    at = (TAP, ROW)
    if "R_G" in ends:
        at = (TAP - 0.7, ROW)
        pen.wire(at, (TAP, ROW))
        end = pen.upright("R_G", at, -UPRIGHT - 0.2, "right")
        pen.rail("ground", end)
    at = pen.lying("R_I", at, -LYING)
    if "R_S" in ends:
        at = pen.lying("R_S", at, -LYING)
    pen.circle("signal", at, "left")


def _reference_to_minus(pen: Pen, ends: Ends, elements: Iterable[Element]) -> None:
    """Draw the reference at the minus pin."""
    node = (TAP - 0.7, PIN)
    if "R_T" in ends:
        pen.wire((0.0, PIN), node)
        _divider(pen, node)
        return
    grounded = any({"ground", "minus"} & set(e.nodes) == {"ground", "minus"} for e in elements)
    if not grounded:
        near = (TAP, PIN)
        end = pen.lying("R_R", near, -LYING) if "R_R" in ends else node
        pen.wire((0.0, PIN), near if "R_R" in ends else end)
        pen.circle("ref", end, "left")
    elif "R_R" in ends:
        pen.wire((0.0, PIN), node)
        end = pen.upright("R_R", node, -UPRIGHT, "left")
        pen.rail("ground", end)
    else:
        end = (node[0], PIN - 0.5)
        pen.wire((0.0, PIN), node, end)
        pen.rail("ground", end)


def _output(pen: Pen, ends: Ends) -> None:
    """Draw pull-up, feedback, load and the output terminal, from left to right."""
    x = TRIANGLE_LENGTH + 0.55
    if "R_PU" in ends:
        top = pen.upright("R_PU", (x, 0.0), PULL_UP, "right")
        pen.rail("pu", top, valued=True)
        x += 0.55
    pen.wire((x, 0.0), (x, ROW))
    pen.lying("R_F", (TAP, ROW), x - TAP)
    if "R_L" in ends:
        x += 0.7
        end = pen.upright("R_L", (x, 0.0), -UPRIGHT, "right")
        pen.rail("load", end, valued=True)
    pen.wire((TRIANGLE_LENGTH, 0.0), (x + 0.6, 0.0))
    pen.circle("out", (x + 0.6, 0.0), "right")


def _divider(pen: Pen, node: Point) -> None:
    """Draw R_T and R_B at their node."""
    pen.rail("cc", pen.upright("R_T", node, UPRIGHT, "left"))
    pen.rail("ee", pen.upright("R_B", node, -UPRIGHT, "left"))

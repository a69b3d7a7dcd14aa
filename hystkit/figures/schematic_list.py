"""A schematic of single resistors between named nodes, which holds any circuit on any paper."""

from __future__ import annotations

from collections.abc import Iterable

from hystkit.circuit.elements import FIXED_NODES, INPUT_NODES, OUTPUT_NODE, Element
from hystkit.circuit.netlist import netlist
from hystkit.figures.schematic_pen import Pen, Side
from hystkit.figures.schematic_sheet import BODY_LENGTH, TRIANGLE_LENGTH, Body, Point, Sheet

_FIRST_ROW = -2.9
_ROW = 1.15
_WIDTH = 4.7
_LEAD = 0.45
_PIN_LEAD = 0.5


def listed_sheet(
    elements: Iterable[Element], *, split: bool, open_collector: bool, columns: int = 1
) -> Sheet:
    """Draw each resistor by itself between the names of its nodes.

    Parameters
    ----------
    elements : iterable of Resistor or Wire
        A circuit that can switch.
    split : bool
        Whether the supply has a negative rail.
    open_collector : bool
        Whether the comparator is marked so.
    columns : int, default 1
        How many resistors stand side by side.

    Returns
    -------
    Sheet
        The drawing; what carries the same name is connected.
    """
    net = netlist(elements)
    pen = Pen(split=split, open_collector=open_collector)
    for pin in (*INPUT_NODES, OUTPUT_NODE):
        x, y = pen.comparator.pins[pin]
        side: Side = "right" if pin == OUTPUT_NODE else "left"
        end = (x + (_PIN_LEAD if side == "right" else -_PIN_LEAD), y)
        pen.wire((x, y), end)
        _named(pen, net.merged[pin], end, side)
    for number, resistor in enumerate(net.resistors):
        row, column = divmod(number, columns)
        x = TRIANGLE_LENGTH / 2 + (column - (columns - 1) / 2) * _WIDTH
        y = _FIRST_ROW - row * _ROW
        start, stop = (x - BODY_LENGTH - _LEAD, y), (x + BODY_LENGTH + _LEAD, y)
        pen.bodies.append(Body(resistor.name, start, stop, "above"))
        _named(pen, resistor.node_a, start, "left")
        _named(pen, resistor.node_b, stop, "right")
    return pen.sheet()


def _named(pen: Pen, node: str, at: Point, side: Side) -> None:
    is_ground = node == "ground" or (node == "ee" and not pen.split)
    if is_ground:
        pen.outside(node, at, side)
    else:
        # The rails' voltages stand at the comparator already.
        valued = node in FIXED_NODES and node not in ("cc", "ee", "signal")
        pen.circle(node, at, side, valued=valued)

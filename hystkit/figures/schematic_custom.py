"""Where the parts of one's own circuit stand.

`routed_sheet` draws columns and rungs; `listed_sheet` draws every resistor by itself between its
named nodes and holds any circuit on any paper.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import lru_cache
from typing import Literal

from hystkit.circuit.elements import FIXED_NODES, INPUT_NODES, OUTPUT_NODE, Element
from hystkit.circuit.netlist import Netlist, netlist
from hystkit.figures.schematic_routes import Chain, Plan, chains, planned, reach
from hystkit.figures.schematic_sheet import (
    BODY_LENGTH,
    PIN,
    TRIANGLE_LENGTH,
    Body,
    Comparator,
    Line,
    Point,
    Sheet,
    Terminal,
    line,
    supply_pins,
)

_TAP = -0.5
_FIRST_ROW = -1.9
_ROW = 1.5
_BODY = 2 * BODY_LENGTH
_LEAD = 0.35
#: Room for the symbol and text at the outer end of a stub.
_ROOM = {"cc": 0.75, "ee": 0.75, "ground": 0.45, "signal": 1.2}
_WIDE_ROOM = 2.4
_RAIL_RISE = 0.25
_LIST_ROW = 1.15
_LIST_WIDTH = 4.3


@lru_cache(maxsize=64)
def routed_sheet(elements: tuple[Element, ...], *, split: bool, open_collector: bool) -> Sheet:
    """Draw a circuit as columns and rungs.

    Parameters
    ----------
    elements : tuple of Resistor or Wire
        A circuit that can switch.
    split : bool
        Whether the supply has a negative rail.
    open_collector : bool
        Whether the comparator is marked so.

    Returns
    -------
    Sheet
        The drawing; it realises exactly these elements.
    """
    return _Router(netlist(elements), split, open_collector).sheet()


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
    comparator = Comparator((0.0, 0.0), open_collector)
    lines, terminals = supply_pins(comparator, split=split)
    drawn, ends = list(lines), list(terminals)
    for pin in (*INPUT_NODES, OUTPUT_NODE):
        x, y = comparator.pins[pin]
        side: Literal["open left", "open right"] = "open right" if pin == OUTPUT_NODE else "open left"
        end = (x + (0.5 if pin == OUTPUT_NODE else -0.5), y)
        drawn.append(line((x, y), end))
        ends.append(Terminal(net.merged[pin], end, side))
    bodies = []
    middle = TRIANGLE_LENGTH / 2
    for number, resistor in enumerate(net.resistors):
        row, column = divmod(number, columns)
        x = middle + (column - (columns - 1) / 2) * _LIST_WIDTH
        y = -2.9 - row * _LIST_ROW
        a, b = (x - _BODY / 2 - 0.25, y), (x + _BODY / 2 + 0.25, y)
        bodies.append(Body(resistor.name, a, b, "above"))
        ends += [Terminal(resistor.node_a, a, "open left"), Terminal(resistor.node_b, b, "open right")]
    return Sheet(comparator, tuple(bodies), tuple(drawn), tuple(ends))


class _Router:
    """Places one circuit on columns and rows."""

    def __init__(self, net: Netlist, split: bool, open_collector: bool) -> None:
        self.net = net
        self.split = split
        self.comparator = Comparator((0.0, 0.0), open_collector)
        self.bodies: list[Body] = []
        self.lines: list[Line] = []
        self.terminals: list[Terminal] = []

    def sheet(self) -> Sheet:
        """Draw it."""
        found = list(chains(self.net))
        minus = self.net.merged["minus"]
        at_pin = next((c for c in found if minus in c.ends and _is_stub(c)), None)
        if minus not in FIXED_NODES and at_pin:
            found.remove(at_pin)
        inner = {net for c in found for net in c.ends if net not in FIXED_NODES}
        plan = planned(found, sorted(inner - {"plus", OUTPUT_NODE}))
        x = self._columns(plan, at_pin if minus not in FIXED_NODES else None)
        self._minus_pin(minus, at_pin, x)
        self._verticals(plan, x)
        for chain, row in plan.rows.items():
            self._rung(chain, _FIRST_ROW - row * _ROW, x, plan)
        lines, terminals = supply_pins(self.comparator, split=self.split)
        return Sheet(
            self.comparator,
            tuple(self.bodies),
            (*self.lines, *lines),
            (*self.terminals, *terminals),
        )

    def _columns(self, plan: Plan, at_pin: Chain | None) -> dict[str, float]:
        """Place the columns, each gap as wide as its widest content."""
        needs = dict.fromkeys(plan.columns, 0.9)
        for chain in plan.rows:
            low, high = reach(chain, plan.columns)
            net = plan.columns[high]
            if not _is_stub(chain):
                needs[net] = max(needs[net], _length(chain) + _LEAD)
            elif net != OUTPUT_NODE and not _is_loose(chain):
                needs[net] = max(needs[net], _length(chain) + _room(_outer(chain)))
        right = TRIANGLE_LENGTH + 0.6
        x = {OUTPUT_NODE: right, "plus": min(_TAP, right - needs[OUTPUT_NODE])}
        for column, after in zip(plan.columns[-3::-1], plan.columns[-2:0:-1], strict=True):
            x[column] = x[after] - needs[after]
        return x

    def _minus_pin(self, minus: str, at_pin: Chain | None, x: dict[str, float]) -> None:
        """Lead the minus pin to its terminal, its stub and its column."""
        pin = self.comparator.pins["minus"]
        if minus in FIXED_NODES:
            end = (_TAP, PIN)
            self.lines.append(line(pin, end))
            self._outside(minus, end, "left")
            return
        at = (x.get(minus, _TAP), PIN)
        self.lines.append(line(pin, at))
        if at_pin:
            self._stub(at_pin.starting_at(minus), at, -1)

    def _verticals(self, plan: Plan, x: dict[str, float]) -> None:
        """Draw the columns from their pins or first rungs down to their last ones."""
        pins = self.comparator.pins
        for net, (first, last) in plan.spans().items():
            bottom = (x[net], _FIRST_ROW - last * _ROW)
            if net == "plus":
                self.lines.append(line(pins["plus"], (x[net], -PIN), bottom))
            elif net == "minus":
                self.lines.append(line((x[net], PIN), bottom))
            elif net == OUTPUT_NODE:
                end = (x[net] + 0.6, 0.0)
                self.lines += [line(pins[net], end), line((x[net], 0.0), bottom)]
                self.terminals.append(Terminal(OUTPUT_NODE, end, "open right"))
            elif last > first:
                self.lines.append(line((x[net], _FIRST_ROW - first * _ROW), bottom))

    def _rung(self, chain: Chain, y: float, x: dict[str, float], plan: Plan) -> None:
        """Draw a chain on its row."""
        if _is_loose(chain):
            left = min(x.values())
            self._outside(chain.start, (left, y), "left")
            self._stub(chain, (left, y), 1)
        elif _is_stub(chain):
            net = next(n for n in chain.ends if n not in FIXED_NODES)
            side = 1 if net == OUTPUT_NODE else -1
            self._stub(chain.starting_at(net), (x[net], y), side)
        else:
            low, high = (plan.columns[i] for i in reach(chain, plan.columns))
            inner = plan.columns[plan.columns.index(high) - 1]
            near, far = (x[inner], y), (x[high], y)
            if inner != low:
                self.lines.append(line((x[low], y), near))
            self._bodies(chain.starting_at(low), near, far)

    def _stub(self, chain: Chain, at: Point, side: Literal[-1, 1]) -> None:
        """Draw a chain from a point to something outside on its left (-1) or right (1)."""
        end = (at[0] + side * _length(chain), at[1])
        self._bodies(chain, at, end)
        self._outside(chain.end, end, "left" if side < 0 else "right")

    def _bodies(self, chain: Chain, a: Point, b: Point) -> None:
        """Space the resistors of a chain evenly between two points of a row."""
        step = (b[0] - a[0]) / len(chain.names)
        for number, name in enumerate(chain.names):
            start = a if number == 0 else (a[0] + number * step, a[1])
            end = b if number == len(chain.names) - 1 else (a[0] + (number + 1) * step, a[1])
            self.bodies.append(Body(name, start, end))

    def _outside(self, net: str, at: Point, side: Literal["left", "right"]) -> None:
        """End a connection at a node that something outside holds."""
        if net == "cc":
            top = (at[0], at[1] + _RAIL_RISE)
            self.lines.append(line(at, top))
            self.terminals.append(Terminal("cc", top, "rail up", valued=False))
        elif net == "ee" and self.split:
            bottom = (at[0], at[1] - _RAIL_RISE)
            self.lines.append(line(at, bottom))
            self.terminals.append(Terminal("ee", bottom, "rail down", valued=False))
        elif net in ("ee", "ground"):
            self.terminals.append(Terminal(net, at, "ground"))
        else:
            self.terminals.append(Terminal(net, at, f"open {side}"))  # type: ignore[arg-type]


def _is_stub(chain: Chain) -> bool:
    return any(net in FIXED_NODES for net in chain.ends)


def _is_loose(chain: Chain) -> bool:
    return all(net in FIXED_NODES for net in chain.ends)


def _outer(chain: Chain) -> str:
    return next(net for net in chain.ends if net in FIXED_NODES)


def _length(chain: Chain) -> float:
    return len(chain.names) * (_BODY + 2 * _LEAD)


def _room(net: str) -> float:
    return _ROOM.get(net, _WIDE_ROOM)

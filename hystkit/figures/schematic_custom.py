"""Where the parts of one's own circuit stand: columns for its nodes, rungs for its resistors."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache

from hystkit.circuit.elements import FIXED_NODES, OUTPUT_NODE, Element
from hystkit.circuit.netlist import netlist
from hystkit.figures.schematic_pen import Pen
from hystkit.figures.schematic_routes import Chain, Plan, chains, planned, reach
from hystkit.figures.schematic_sheet import (
    BODY_LENGTH,
    PIN,
    TRIANGLE_LENGTH,
    Body,
    Point,
    Sheet,
)

_TAP = -0.5
_FIRST_ROW = -1.9
_LEAD = 0.35
_OUT = TRIANGLE_LENGTH + 0.6
_PAST = 0.25
#: Least width of the gap before a column.
_GAP = 0.9
#: Room for the symbol and the text at the outer end of a stub.
_ROOM = {"cc": 0.95, "ee": 0.95, "ground": 0.7, "signal": 1.2}
_WIDE_ROOM = 2.4
#: Nodes whose symbol stands upright and must keep clear of the value below the resistor.
_UPRIGHT = ("cc", "ee", "ground")
_RAIL_LEAD = 0.25


@lru_cache(maxsize=64)
def routed_sheet(
    elements: tuple[Element, ...], *, split: bool, open_collector: bool, row_pitch: float = 1.5
) -> Sheet:
    """Draw a circuit as columns and rungs.

    Parameters
    ----------
    elements : tuple of Resistor or Wire
        A circuit that can switch.
    split : bool
        Whether the supply has a negative rail.
    open_collector : bool
        Whether the comparator is marked so.
    row_pitch : float, default 1.5
        Distance of two rows; small drawings need more for their texts.

    Returns
    -------
    Sheet
        The drawing; it realises exactly these elements.
    """
    net = netlist(elements)
    minus = net.merged["minus"]
    found = list(chains(net))
    at_pin = _at_minus_pin(found, minus)
    if at_pin:
        found = [chain for chain in found if at_pin.names[0] not in chain.names]
    loose = [chain for chain in found if _is_loose(chain)]
    tied = [chain for chain in found if not _is_loose(chain)]
    inner = {net for chain in tied for net in chain.ends if net not in FIXED_NODES}
    plan = planned(tied, sorted(inner - {"plus", OUTPUT_NODE}))
    pen = Pen(split=split, open_collector=open_collector)
    return _Router(pen, plan, at_pin, row_pitch).sheet(minus, loose)


class _Router:
    """Draws one plan."""

    def __init__(self, pen: Pen, plan: Plan, at_pin: Chain | None, row_pitch: float) -> None:
        self.pen = pen
        self.plan = plan
        self.row_pitch = row_pitch
        #: The chain on the row of the minus pin, and the column that it lifts up to there.
        self.at_pin = at_pin
        self.lifted = at_pin.end if at_pin and not _is_stub(at_pin) else ""
        self.x = _columns(plan)
        if at_pin and self.lifted:
            _make_room(self.x, self.lifted, _length(at_pin) + 0.2)

    def sheet(self, minus: str, loose: Sequence[Chain]) -> Sheet:
        """Draw it."""
        self._minus_pin(minus)
        self._verticals()
        for chain, row in self.plan.rows.items():
            self._rung(chain, self._y(row))
        below = max(self.plan.rows.values()) + 1
        for number, chain in enumerate(loose):
            at = (_TAP, self._y(below + number))
            self.pen.outside(chain.start, at, "left")
            self._stub(chain, at, 1)
        return self.pen.sheet()

    def _y(self, row: int) -> float:
        return _FIRST_ROW - row * self.row_pitch

    def _minus_pin(self, minus: str) -> None:
        """Lead the minus pin to its terminal, its chain and its column."""
        pin = self.pen.comparator.pins["minus"]
        if minus in FIXED_NODES:
            end = (_TAP - 1.1, PIN)
            self.pen.wire(pin, end)
            self.pen.outside(minus, end, "left")
        elif self.at_pin and self.lifted:
            far = (self.x[self.lifted], PIN)
            near = (far[0] + _length(self.at_pin), PIN)
            self.pen.wire(pin, near)
            self._bodies(self.at_pin.turned(), far, near)
        else:
            at = (self.x.get(minus, _TAP), PIN)
            self.pen.wire(pin, at)
            if self.at_pin:
                self._stub(self.at_pin, at, -1)

    def _verticals(self) -> None:
        """Draw the columns from their pins or first rungs down to their last ones."""
        pins = self.pen.comparator.pins
        for net, (first, last) in self.plan.spans().items():
            x, bottom = self.x[net], (self.x[net], self._y(last))
            if net == "plus":
                self.pen.wire(pins["plus"], (x, -PIN), bottom)
            elif net in ("minus", self.lifted):
                self.pen.wire((x, PIN), bottom)
            elif net == OUTPUT_NODE:
                self.pen.wire(pins[net], (x + 0.6, 0.0))
                self.pen.wire((x, 0.0), bottom)
                self.pen.circle(net, (x + 0.6, 0.0), "right")
            elif last > first:
                self.pen.wire((x, self._y(first)), bottom)

    def _rung(self, chain: Chain, y: float) -> None:
        """Draw a chain on its row."""
        if _is_stub(chain):
            net = next(n for n in chain.ends if n not in FIXED_NODES)
            side = 1 if net == OUTPUT_NODE else -1
            self._stub(chain.starting_at(net), (self.x[net], y), side)
        else:
            low, high = reach(chain, self.plan.columns)
            first, before, last = (self.plan.columns[i] for i in (low, high - 1, high))
            near = (self.x[first], y)
            if before != first:
                # Past the column that it crosses: a joint on it would connect the two.
                near = (self.x[before] + _PAST, y)
                self.pen.wire((self.x[first], y), near)
            self._bodies(chain.starting_at(first), near, (self.x[last], y))

    def _stub(self, chain: Chain, at: Point, side: int) -> None:
        """Draw a chain from a point to something outside on its left (-1) or right (1)."""
        end = (at[0] + side * _length(chain), at[1])
        self._bodies(chain, at, end)
        if chain.end in _UPRIGHT:
            near, end = end, (end[0] + side * _RAIL_LEAD, end[1])
            self.pen.wire(near, end)
        self.pen.outside(chain.end, end, "left" if side < 0 else "right")

    def _bodies(self, chain: Chain, a: Point, b: Point) -> None:
        """Space the resistors of a chain evenly between two points of a row."""
        count = len(chain.names)
        inner = [(a[0] + (b[0] - a[0]) * number / count, a[1]) for number in range(1, count)]
        points = [a, *inner, b]
        for number, name in enumerate(chain.names):
            self.pen.bodies.append(Body(name, points[number], points[number + 1]))


def _at_minus_pin(found: Sequence[Chain], minus: str) -> Chain | None:
    """Choose what stands on the row of the minus pin, seen from the pin."""
    if minus in FIXED_NODES:
        return None
    touching = [chain.starting_at(minus) for chain in found if minus in chain.ends]
    stubs = [chain for chain in touching if _is_stub(chain)]
    alone = [chain for chain in touching if chain.end not in ("plus", OUTPUT_NODE)]
    chosen = stubs or (alone if len(touching) == 1 else [])
    return chosen[0] if chosen else None


def _columns(plan: Plan) -> dict[str, float]:
    """Place the columns from the output to the left, each gap as wide as its widest content."""
    needs = dict.fromkeys(plan.columns, _GAP)
    for chain in plan.rows:
        net = plan.columns[reach(chain, plan.columns)[1]]
        if not _is_stub(chain):
            needs[net] = max(needs[net], _length(chain) + _PAST)
        elif net != OUTPUT_NODE:
            outer = next(n for n in chain.ends if n in FIXED_NODES)
            needs[net] = max(needs[net], _length(chain) + _ROOM.get(outer, _WIDE_ROOM))
    x = {OUTPUT_NODE: _OUT, "plus": min(_TAP, _OUT - needs[OUTPUT_NODE])}
    for column, after in zip(plan.columns[-3::-1], plan.columns[-2:0:-1], strict=True):
        x[column] = x[after] - needs[after]
    return x


def _make_room(x: dict[str, float], column: str, width: float) -> None:
    """Shift a column and all that stand left of it until `width` fits before the comparator."""
    shift = max(0.0, x[column] + width)
    for net in [net for net in x if x[net] <= x[column]]:
        x[net] -= shift


def _is_stub(chain: Chain) -> bool:
    return any(net in FIXED_NODES for net in chain.ends)


def _is_loose(chain: Chain) -> bool:
    return all(net in FIXED_NODES for net in chain.ends)


def _length(chain: Chain) -> float:
    return len(chain.names) * 2 * (BODY_LENGTH + _LEAD)

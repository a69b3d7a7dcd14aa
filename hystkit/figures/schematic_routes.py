"""Order of the columns and rows on which the schematic of one's own circuit stands.

Every free node is an upright column; every chain of resistors is a lying rung from a column to
another one, or a stub from a column to something outside. The search puts columns and rungs in
an order with few crossings and few rows.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import permutations

from hystkit.circuit.elements import FIXED_NODES, INPUT_NODES, OUTPUT_NODE
from hystkit.circuit.netlist import Netlist

#: More orders of columns than this are not tried out; four inner nodes give 120.
_MOST_ORDERS = 120
_MOST_SWAPS = 400


@dataclass(frozen=True)
class Chain:
    """Resistors in series, in order, from one net to another."""

    names: tuple[str, ...]
    start: str
    end: str

    @property
    def ends(self) -> tuple[str, str]:
        """Both nets."""
        return (self.start, self.end)

    def turned(self) -> Chain:
        """Give the same chain from the other end."""
        return Chain(self.names[::-1], self.end, self.start)

    def starting_at(self, net: str) -> Chain:
        """Give the chain with this net first."""
        return self if self.start == net else self.turned()


@dataclass(frozen=True)
class Plan:
    """Columns from left to right, the output last, and the row of each chain."""

    columns: tuple[str, ...]
    rows: dict[Chain, int]

    def spans(self) -> dict[str, tuple[int, int]]:
        """First and last row of each column; pins begin above the first row."""
        spans = {}
        for column in self.columns:
            rows = [row for chain, row in self.rows.items() if column in chain.ends]
            pinned = column in (*INPUT_NODES, OUTPUT_NODE)
            if rows:
                spans[column] = (-1 if pinned else min(rows), max(rows))
        return spans

    @property
    def crossings(self) -> int:
        """How often a rung crosses a column that it does not belong to."""
        spans, count = self.spans(), 0
        for chain, row in self.rows.items():
            low, high = reach(chain, self.columns)
            for column in self.columns[low + 1 : high]:
                first, last = spans.get(column, (0, -1))
                count += first < row < last
        return count

    @property
    def cost(self) -> tuple[int, int, int]:
        """Crossings first, then rows, then how low everything stands."""
        rows = self.rows.values()
        return (self.crossings, max(rows, default=0), sum(rows))


def chains(net: Netlist) -> tuple[Chain, ...]:
    """Join resistors that are in series at an inner node.

    Parameters
    ----------
    net : Netlist
        The circuit.

    Returns
    -------
    tuple of Chain
        Each resistor in exactly one of them.
    """
    found = [Chain((r.name,), r.node_a, r.node_b) for r in net.resistors]
    for node in sorted(net.free - {*INPUT_NODES, OUTPUT_NODE}):
        touching = [chain for chain in found if node in chain.ends]
        if len(touching) != 2:
            continue
        first, second = touching[0].starting_at(node).turned(), touching[1].starting_at(node)
        if first.start == second.end or node in (first.start, second.end):
            continue
        found[found.index(touching[0])] = Chain(first.names + second.names, first.start, second.end)
        found.remove(touching[1])
    return tuple(found)


def reach(chain: Chain, columns: Sequence[str]) -> tuple[int, int]:
    """Return the first and the last column that a chain touches; for a stub they are the same."""
    at = [columns.index(net) for net in chain.ends if net in columns]
    return (min(at), max(at))


def planned(found: Sequence[Chain], left: Sequence[str]) -> Plan:
    """Find the order of columns and rows.

    Parameters
    ----------
    found : sequence of Chain
        Everything that takes a row; each touches a free net.
    left : sequence of str
        Free nets left of the comparator, without plus; plus is always the last of them.

    Returns
    -------
    Plan
        The best order found; the same for the same circuit.
    """
    orders = [order for order, _ in zip(permutations(left), range(_MOST_ORDERS), strict=False)]
    plans = [_greedy(found, (*order, "plus", OUTPUT_NODE)) for order in orders]
    return _improved(min(plans, key=lambda plan: plan.cost))


def _greedy(found: Sequence[Chain], columns: tuple[str, ...]) -> Plan:
    def urgency(chain: Chain) -> tuple[bool, int, int]:
        low, high = reach(chain, columns)
        return (high > low and columns[high] == OUTPUT_NODE, high - low, -high)

    return _stacked(sorted(found, key=urgency), columns)


def _stacked(order: Sequence[Chain], columns: tuple[str, ...]) -> Plan:
    """Put each chain on the first row with room for it."""
    taken: list[list[tuple[float, float]]] = []
    rows: dict[Chain, int] = {}
    for chain in order:
        low, high = _occupied(chain, columns)
        # The comparator's supply flag hangs where the first row would pass below it.
        row = 1 if columns[-1] in chain.ends and low < high - 0.75 else 0
        while row < len(taken) and any(low <= b and a <= high for a, b in taken[row]):
            row += 1
        while len(taken) <= row:
            taken.append([])
        taken[row].append((low, high))
        rows[chain] = row
    return Plan(columns, rows)


def _occupied(chain: Chain, columns: tuple[str, ...]) -> tuple[float, float]:
    """Give the stretch of a row that a chain takes, in columns; a stub takes half a gap."""
    low, high = reach(chain, columns)
    if not any(net in FIXED_NODES for net in chain.ends):
        return (low, high)
    return (low, low + 0.5) if columns[low] == OUTPUT_NODE else (low - 0.5, low)


def _improved(plan: Plan) -> Plan:
    """Exchange two chains at a time for as long as that helps."""
    order = sorted(plan.rows, key=lambda chain: plan.rows[chain])
    swaps, improved = 0, True
    while improved:
        improved = False
        for i in range(len(order)):
            for j in range(i + 1, len(order)):
                swaps += 1
                if swaps > _MOST_SWAPS:
                    return plan
                order[i], order[j] = order[j], order[i]
                other = _stacked(order, plan.columns)
                if other.cost < plan.cost:
                    plan, improved = other, True
                else:
                    order[i], order[j] = order[j], order[i]
    return plan

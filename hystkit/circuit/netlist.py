"""The circuit as a graph: wires merged into nodes, and who is connected with whom."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from hystkit.circuit.elements import FIXED_NODES, INPUT_NODES, OUTPUT_NODE, Element, Resistor, Wire

_RANK = {name: rank for rank, name in enumerate((*FIXED_NODES, *INPUT_NODES, OUTPUT_NODE))}


@dataclass(frozen=True)
class Netlist:
    """Resistors between merged nodes.

    Attributes
    ----------
    resistors : tuple of Resistor
        In the order in which they were declared, their nodes replaced by the merged ones.
    merged : dict
        Every node that was named, and the node that stands for it: a fixed node where one is
        wired in, else an input, else the output, else the first name in the alphabet.
    groups : tuple of frozenset
        The sets of nodes that wires join, one node at least in each.
    """

    resistors: tuple[Resistor, ...]
    merged: dict[str, str]
    groups: tuple[frozenset[str], ...]

    @property
    def nodes(self) -> frozenset[str]:
        """All merged nodes."""
        return frozenset(self.merged.values())

    @property
    def free(self) -> frozenset[str]:
        """Merged nodes whose voltage the circuit decides."""
        return self.nodes - FIXED_NODES.keys()

    @property
    def signal_at_pin(self) -> bool:
        """Whether an input is the signal itself: wired, or joined to it by one resistor alone."""
        pins = {self.merged["plus"], self.merged["minus"]}
        alone = [touching[0] for pin in pins if len(touching := self.at(pin)) == 1]
        return "signal" in pins or any("signal" in resistor.nodes for resistor in alone)

    def at(self, node: str) -> tuple[Resistor, ...]:
        """Resistors that touch a merged node."""
        return tuple(r for r in self.resistors if node in r.nodes)

    def reach(self, start: str, *around: str) -> frozenset[str]:
        """Nodes that a voltage at `start` acts on: not past a fixed node, nor past `around`."""
        seen, front = {start}, [start]
        while front:
            node = front.pop()
            if node != start and (node in FIXED_NODES or node in around):
                continue
            for resistor in self.at(node):
                for other in resistor.nodes:
                    if other not in seen:
                        seen.add(other)
                        front.append(other)
        return frozenset(seen)


def netlist(elements: Iterable[Element]) -> Netlist:
    """Merge the nodes that wires join.

    Parameters
    ----------
    elements : iterable of Resistor or Wire
        The declared circuit.

    Returns
    -------
    Netlist
        The resistors between merged nodes.
    """
    elements = tuple(elements)
    group_of: dict[str, set[str]] = {}
    for element in elements:
        for node in element.nodes:
            group_of.setdefault(node, {node})
    for element in elements:
        if isinstance(element, Wire):
            joined = group_of[element.node_a] | group_of[element.node_b]
            for node in joined:
                group_of[node] = joined
    merged = {node: _representative(group) for node, group in group_of.items()}
    resistors = tuple(
        Resistor(e.name, merged[e.node_a], merged[e.node_b])
        for e in elements
        if isinstance(e, Resistor)
    )
    groups = tuple({id(group): frozenset(group) for group in group_of.values()}.values())
    return Netlist(resistors, merged, groups)


def _representative(group: set[str]) -> str:
    return min(group, key=lambda node: (_RANK.get(node, len(_RANK)), node))

"""The two kinds of element that a stage is wired from, and the nodes they join."""

from __future__ import annotations

from dataclasses import dataclass

#: Nodes held at a voltage that the circuit cannot move, and the symbol of that voltage.
FIXED_NODES: dict[str, str] = {
    "cc": "V_CC",
    "ee": "V_EE",
    "ground": "0",
    "ref": "V_REF",
    "pu": "V_PU",
    "load": "V_L",
    "signal": "V_IN",
}

#: Nodes that every stage has and whose voltage the circuit decides.
INPUT_NODES = ("plus", "minus")
OUTPUT_NODE = "out"


@dataclass(frozen=True)
class Resistor:
    """A resistor between two nodes.

    Parameters
    ----------
    name : str
        Symbol, dictionary key and label alike, such as ``"R_F"``.
    node_a, node_b : str
        The nodes it joins.
    """

    name: str
    node_a: str
    node_b: str

    @property
    def nodes(self) -> tuple[str, str]:
        """Both nodes."""
        return (self.node_a, self.node_b)


@dataclass(frozen=True)
class Wire:
    """A direct connection of two nodes, where nothing sits between them.

    Parameters
    ----------
    node_a, node_b : str
        The nodes it joins.
    """

    node_a: str
    node_b: str

    @property
    def nodes(self) -> tuple[str, str]:
        """Both nodes."""
        return (self.node_a, self.node_b)


Element = Resistor | Wire

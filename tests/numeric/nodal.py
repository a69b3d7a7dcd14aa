"""The independent oracle: a circuit solved by modified nodal analysis, in numbers only.

Written from the definition of a stage alone. It reads the declared elements and knows nothing of
the package's formulas: wires, held nodes and the output are voltage sources whose currents are
unknowns, so that neither a wire nor an output of 0 Ohm is a special case.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.circuit.elements import Element, Resistor

Array = NDArray[np.float64]

#: Node held at a voltage -> the symbol of that voltage; "ground" is 0 V, "signal" is the unknown.
HELD = {"cc": "V_CC", "ee": "V_EE", "ref": "V_REF", "pu": "V_PU", "load": "V_L"}


@dataclass
class Equations:
    """One linear system for each set of values: ``matrix @ unknowns = right``."""

    index: dict[Any, int]
    matrix: Array
    right: Array

    @classmethod
    def empty(cls, unknowns: Iterable[Any], count: int) -> Equations:
        index = {unknown: row for row, unknown in enumerate(dict.fromkeys(unknowns))}
        size = len(index)
        return cls(index, np.zeros((count, size, size)), np.zeros((count, size)))

    def add(self, row: Any, unknown: Any, coefficient: Any) -> None:
        self.matrix[:, self.index[row], self.index[unknown]] += coefficient

    def source(self, row: Any, value: Any) -> None:
        self.right[:, self.index[row]] += value

    def solve(self) -> dict[Any, Array]:
        found = np.linalg.solve(self.matrix, self.right[..., None])[..., 0]
        return {unknown: np.asarray(found[:, row]) for unknown, row in self.index.items()}


def trip(elements: Iterable[Element], output: str, state: str, values: Mapping[str, Any]) -> Array:
    """Signal voltage at which v(plus) - v(minus) = V_OS, the output still in `state`."""
    equations = _circuit(tuple(elements), output, state, values)
    equations.add("signal voltage", "plus", 1.0)
    equations.add("signal voltage", "minus", -1.0)
    equations.source("signal voltage", values["V_OS"])
    return equations.solve()["signal voltage"]


def voltages(
    elements: Iterable[Element], output: str, state: str, values: Mapping[str, Any], signal: Any
) -> dict[str, Array]:
    """Voltage of every node for a given signal voltage, the output in `state`."""
    solution = unknowns(elements, output, state, values, signal)
    return {node: solution[node] for node in _nodes(elements)}


def unknowns(
    elements: Iterable[Element], output: str, state: str, values: Mapping[str, Any], signal: Any
) -> dict[Any, Array]:
    """Node voltages, and currents into the circuit: "drive" at the output, ("held", node) there."""
    equations = _circuit(tuple(elements), output, state, values)
    equations.add("signal voltage", "signal voltage", 1.0)
    equations.source("signal voltage", signal)
    return equations.solve()


def _circuit(
    elements: tuple[Element, ...], output: str, state: str, values: Mapping[str, Any]
) -> Equations:
    """Everything but the last equation, which says what the signal voltage is."""
    nodes = _nodes(elements)
    wires = [e for e in elements if not isinstance(e, Resistor)]
    held = [node for node in nodes if node in {*HELD, "ground", "signal"}]
    driven = output == "push-pull" or state == "low"
    count = np.broadcast(*values.values()).size
    extra = [("wire", n) for n in range(len(wires))] + [("held", node) for node in held]
    system = Equations.empty([*nodes, *extra, "drive", "signal voltage"], count)

    for element in elements:
        if isinstance(element, Resistor):
            _resistor(system, element, 1 / np.asarray(values[element.name]))
    for number, wire in enumerate(wires):
        _branch(system, ("wire", number), wire.node_a, wire.node_b)
    for node in held:
        _branch(system, ("held", node), node)
        if node == "signal":
            system.add(("held", node), "signal voltage", -1.0)
        elif node != "ground":
            system.source(("held", node), values.get(HELD[node], 0.0))
    _drive(system, state, values, driven)
    for pin, current in (("plus", "I_BP"), ("minus", "I_BN")):
        system.source(pin, -np.asarray(values[current]))
    return system


def _drive(system: Equations, state: str, values: Mapping[str, Any], driven: bool) -> None:
    """Connect the device: V_O behind R_O at the output pin, or its leakage when it is off."""
    if not driven:
        system.add("drive", "drive", 1.0)
        system.source("out", -np.asarray(values["I_LK"]))
        return
    level, resistance = ("V_OH", "R_OH") if state == "high" else ("V_OL", "R_OL")
    _branch(system, "drive", "out")
    system.add("drive", "drive", values[resistance])
    system.source("drive", values[level])


def _resistor(system: Equations, resistor: Resistor, conductance: Array) -> None:
    ends = (resistor.node_a, resistor.node_b)
    for here, there in (ends, ends[::-1]):
        system.add(here, here, conductance)
        system.add(here, there, -conductance)


def _branch(system: Equations, branch: Any, node: str, other: str | None = None) -> None:
    """Let the branch's current enter `node` and leave `other`; its equation sums their voltages."""
    for end, sign in ((node, 1.0), (other, -1.0)):
        if end is not None:
            system.add(end, branch, -sign)
            system.add(branch, end, sign)


def _nodes(elements: Iterable[Element]) -> list[str]:
    return list(dict.fromkeys(node for element in elements for node in element.nodes))

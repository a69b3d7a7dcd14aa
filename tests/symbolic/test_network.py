"""Exact proof, in rational numbers: the laws satisfy the node equations of their circuit."""

from __future__ import annotations

import random
from collections.abc import Mapping
from fractions import Fraction
from itertools import pairwise, product

import pytest

import hystkit as hk
from hystkit.circuit.elements import FIXED_NODES
from hystkit.circuit.netlist import netlist
from hystkit.numeric.compile import kernel
from hystkit.symbolic.ledger import HIGH, LOW
from hystkit.symbolic.printing import fits
from hystkit.symbolic.symbols import NON_IDEAL
from tests.circuit.custom import BRIDGE, COUPLED, TAPPED
from tests.circuit.strategies import VARIANTS
from tests.numeric.circuits import random_stages, symbol_names

Values = Mapping[str, Fraction]
CUSTOM = (TAPPED, BRIDGE, *COUPLED, *random_stages(20, seed=11))


def rationals(stage: hk.Stage, ideal_output: bool) -> dict[str, Fraction]:
    """A random fraction for every symbol; no sign is spared the voltages and currents."""
    dice = random.Random(stage.title)
    values = {}
    for name in symbol_names(stage):
        low = 1 if name.startswith("R") else -(10**4)
        values[name] = Fraction(dice.randint(low, 10**4), dice.randint(1, 100))
    if ideal_output:
        values |= dict.fromkeys({"R_OH", "R_OL"} & values.keys(), Fraction(0))
    return values


def trips(stage: hk.Stage, values: Values) -> dict[str, Fraction]:
    """The trip that leaves each output state, in fractions."""
    law = hk.derive(stage)
    states = (law.upper_state, law.lower_state)
    return dict(zip(states, kernel(stage).trips(values), strict=True))


def voltages_of(stage: hk.Stage, state: str, values: Values, signal: Fraction) -> Values:
    """Voltage of every free node, in fractions."""
    found = kernel(stage).voltages(state, values, signal)
    return {node: Fraction(voltage) for node, voltage in found.items()}


def unbalanced(
    stage: hk.Stage, state: str, values: Values, voltages: Values, signal: Fraction
) -> list[str]:
    """Nodes at which the currents do not sum to exactly zero, and held ones off their voltage."""
    net = netlist(stage.elements)
    held = {n: values.get(symbol, Fraction(0)) for n, symbol in FIXED_NODES.items()}
    known = {**voltages, **held, "signal": signal}
    balance = dict.fromkeys(net.free, Fraction(0))
    for resistor in net.resistors:
        for here, there in (resistor.nodes, resistor.nodes[::-1]):
            if here in balance:
                balance[here] += (known[there] - known[here]) / values[resistor.name]
    for pin, current in (("plus", "I_BP"), ("minus", "I_BN")):
        if net.merged[pin] in balance:
            balance[net.merged[pin]] -= values[current]
    balance["out"] = _driven(stage, state, values, known["out"], balance["out"])
    return sorted(node for node, current in balance.items() if current != 0)


def _driven(
    stage: hk.Stage, state: str, values: Values, out: Fraction, current: Fraction
) -> Fraction:
    """What is left at the output once the device has taken its part."""
    if state == HIGH and stage.output == "open-collector":
        return current - values["I_LK"]
    level, resistance = ("V_OH", "R_OH") if state == HIGH else ("V_OL", "R_OL")
    off = values[level] - out
    return current + off / values[resistance] if values[resistance] else off


@pytest.mark.parametrize("stages", [VARIANTS, CUSTOM], ids=["forms", "custom"])
def test_node_equations_and_switching_condition_hold_exactly(stages: tuple[hk.Stage, ...]) -> None:
    for stage, ideal_output in product(stages, (False, True)):
        values = rationals(stage, ideal_output)
        for state, trip in trips(stage, values).items():
            for signal in (trip, Fraction(-37, 11)):
                voltages = voltages_of(stage, state, values, signal)
                assert unbalanced(stage, state, values, voltages, signal) == []
                if signal == trip:
                    assert voltages["plus"] - voltages["minus"] == values["V_OS"]


def test_every_free_node_has_its_voltage() -> None:
    for stage in (*VARIANTS, *CUSTOM):
        for state in (HIGH, LOW):
            voltages = hk.derive(stage).states[state].potentials
            assert voltages.keys() == netlist(stage.elements).free | {"plus", "minus"}


def test_names_of_nodes_and_definitions_never_collide() -> None:
    """Nodes named like the marks of states and like each other's concatenations."""
    nodes = ("H", "L", "2", "a", "b", "ab", "aH", "aL")
    inner = [f"n{node}" for node in nodes]
    inner[0] = "H"
    elements = [hk.Resistor(f"R_{n}", node, "plus") for n, node in enumerate(inner)]
    elements += [hk.Resistor(f"R_o{n}", "out", node) for n, node in enumerate(inner)]
    elements += [hk.Resistor(f"R_g{n}", node, "cc") for n, node in enumerate(inner)]
    elements += [hk.Resistor(f"R_m{n}", *pair) for n, pair in enumerate(pairwise(inner))]
    stage = hk.Stage.custom([*elements, hk.Wire("signal", "minus")])
    law = hk.derive(stage)
    names = [row.symbol.name for row in law.definitions]
    assert len(set(names)) == len(names)
    assert not set(names) & {*symbol_names(stage), "V_IN"}
    for state in (HIGH, LOW):
        values = rationals(stage, ideal_output=False)
        voltages = voltages_of(stage, state, values, Fraction(2))
        assert unbalanced(stage, state, values, voltages, Fraction(2)) == []


def test_a_definition_uses_only_what_stands_before_it() -> None:
    for stage in (*VARIANTS, *CUSTOM):
        names = {*symbol_names(stage)}
        for row in hk.derive(stage).definitions:
            assert {s.name for s in row.expression.free_symbols} <= names
            names.add(row.symbol.name)


@pytest.mark.parametrize("stage", COUPLED, ids=lambda stage: str(stage.name))
def test_trips_of_coupled_inputs_take_one_line(stage: hk.Stage) -> None:
    law = hk.derive(stage)
    for each in (law, law.without(NON_IDEAL)):
        assert all(fits(trip) for trip in each.named)


def test_what_the_trips_do_not_need_is_not_written_down() -> None:
    law = hk.derive(COUPLED[0])
    names = {left.name for left, _ in law.without(NON_IDEAL).rows}
    assert not [name for name in names if name.startswith(("K", "G"))]  # V_OS alone needs them
    assert {"K_plusminusH", "G_plusminus"} <= {left.name for left, _ in law.rows}

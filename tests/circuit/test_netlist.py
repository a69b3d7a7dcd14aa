"""Wires merge nodes, whatever the order in which they are declared."""

from __future__ import annotations

import hypothesis.strategies as st
from hypothesis import given

import hystkit as hk
from hystkit.circuit.netlist import netlist
from tests.circuit.strategies import VARIANTS

NODES = ("signal", "plus", "minus", "out", "cc", "ref", "a", "b", "c")
wires = st.builds(hk.Wire, st.sampled_from(NODES), st.sampled_from(NODES))


def joined(elements: list[hk.Wire]) -> set[frozenset[str]]:
    """Groups of joined nodes, by relabelling until nothing changes."""
    label = {node: node for wire in elements for node in wire.nodes}
    for _ in range(len(label)):
        for wire in elements:
            label[wire.node_a] = label[wire.node_b] = min(label[n] for n in wire.nodes)
    return {frozenset(n for n in label if label[n] == each) for each in label.values()}


@given(st.lists(wires, max_size=10))
def test_groups_are_the_connected_nodes(elements: list[hk.Wire]) -> None:
    assert set(netlist(elements).groups) == joined(elements)


@given(st.lists(wires, max_size=10), st.randoms(use_true_random=False))
def test_the_order_of_the_elements_does_not_count(elements: list[hk.Wire], random: object) -> None:
    shuffled = [hk.Wire(*reversed(wire.nodes)) for wire in elements]
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    assert netlist(shuffled).merged == netlist(elements).merged


def test_a_held_node_stands_for_its_group_and_an_input_for_inner_nodes() -> None:
    net = netlist([hk.Wire("a", "plus"), hk.Wire("minus", "b"), hk.Wire("b", "ref")])
    assert net.merged == {"a": "plus", "plus": "plus", "minus": "ref", "b": "ref", "ref": "ref"}
    assert net.free == {"plus"}


def test_a_voltage_acts_through_resistors_but_not_past_what_is_held() -> None:
    net = netlist(
        [
            hk.Resistor("R_1", "signal", "a"),
            hk.Resistor("R_2", "a", "ref"),
            hk.Resistor("R_3", "ref", "b"),
            hk.Resistor("R_4", "a", "plus"),
            hk.Resistor("R_5", "plus", "out"),
        ]
    )
    assert net.reach("signal") == {"signal", "a", "ref", "plus", "out"}
    assert net.reach("signal", "plus") == {"signal", "a", "ref", "plus"}
    assert net.reach("ref") == {"signal", "a", "ref", "b", "plus", "out"}


def test_resistors_keep_their_order_and_take_the_merged_nodes() -> None:
    for stage in VARIANTS:
        net = netlist(stage.elements)
        assert [r.name for r in net.resistors] == list(stage.parts)
        assert {node for r in net.resistors for node in r.nodes} <= net.nodes
        assert {r.name for r in net.at("out")} == {*stage.parts} & {"R_F", "R_PU", "R_L"}

"""Circuits that cannot switch are refused, with every reason named at once."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import pytest

import hystkit as hk
from hystkit.circuit.checks import SUFFIXES, circuit_faults, infer_sense
from hystkit.circuit.elements import Element
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import VARIANTS

R, W = hk.Resistor, hk.Wire

#: Inverting with a divider: sound, and broken below in one place at a time.
SOUND: tuple[Element, ...] = (
    R("R_T", "plus", "cc"),
    R("R_B", "plus", "ee"),
    R("R_F", "out", "plus"),
    W("signal", "minus"),
)
PULLED = (*SOUND, R("R_PU", "pu", "out"))
#: The signal drives plus, and minus stands on a reference.
NON_INVERTING: tuple[Element, ...] = (
    R("R_I", "signal", "plus"),
    R("R_F", "out", "plus"),
    W("minus", "ref"),
)


def problems(elements: Sequence[Element], output: str = "push-pull") -> list[str]:
    return [fault.problem for fault in circuit_faults(elements, output)]


def without(name: str, elements: Sequence[Element] = SOUND) -> list[Element]:
    return [e for e in elements if not (isinstance(e, R) and e.name == name)]


@pytest.mark.parametrize("elements", [SOUND, NON_INVERTING, TAPPED.elements])
def test_a_sound_circuit_has_no_faults(elements: Sequence[Element]) -> None:
    assert problems(elements) == []


def test_an_open_collector_with_its_pull_up_has_no_faults() -> None:
    assert problems(PULLED, "open-collector") == []
    assert problems(BRIDGE.elements, "open-collector") == []
    in_two = [*SOUND, R("R_P1", "pu", "tap"), R("R_P2", "tap", "out")]
    assert problems(in_two, "open-collector") == []


@pytest.mark.parametrize(
    ("elements", "problem"),
    [
        ([*SOUND, R("R_F", "out", "cc")], "R_F stands 2 times in the circuit."),
        ([*SOUND, R("X_1", "out", "cc")], "'X_1' cannot name a resistor."),
        ([*SOUND, R("R_OH", "out", "cc")], "'R_OH' cannot name a resistor."),
        ([*SOUND, R("R_1;import os", "out", "cc")], "'R_1;import os' cannot name a resistor."),
        ([*SOUND, R("R_1", "out", "n_1"), W("n_1", "cc")], "'n_1' cannot name a node."),
        ([*SOUND, R("R_1", "cc", "cc")], "R_1 has both ends on one node."),
        ([*SOUND, W("cc", "ref")], "a wire shorts cc and ref."),
        ([*SOUND, W("plus", "minus")], "a wire joins minus and plus."),
        ([*SOUND, W("out", "load")], "the output is wired to load."),
        ([*SOUND, R("R_1", "plus", "tap")], "the node 'tap' floats."),
        ([*SOUND, R("R_1", "a", "b")], "the node 'a' floats."),
        (without("R_F"), "nothing is connected to the node 'out'."),
        ([*without("R_F"), R("R_L", "out", "load")], "no positive feedback."),
        ([*SOUND, W("plus", "ref")], "no positive feedback."),
        ([*SOUND[:3], W("minus", "ref")], "nothing is connected to the node 'signal'."),
        (
            [*SOUND[:3], W("minus", "ref"), R("R_S", "signal", "ref")],
            "the signal does not reach the inputs.",
        ),
        (
            [*SOUND[:3], W("minus", "ref"), R("R_S", "signal", "out")],
            "the signal does not reach the inputs.",
        ),
        (
            [R("R_I", "signal", "plus"), R("R_F", "out", "plus"), R("R_N", "plus", "minus")],
            "the node 'minus' floats.",
        ),
        (
            [R("R_I", "signal", "plus"), R("R_F", "out", "minus"), R("R_N", "plus", "minus")],
            "no positive feedback.",
        ),
    ],
)
def test_one_fault(elements: Sequence[Element], problem: str) -> None:
    assert problem in problems(elements)


@pytest.mark.parametrize("elements", [SOUND, [*SOUND, R("R_D", "out", "ground")]])
def test_an_open_collector_needs_a_pull_up(elements: Sequence[Element]) -> None:
    assert problems(elements, "open-collector") == ["the open-collector output has no pull-up."]
    assert problems(elements) == []


def test_the_fault_names_what_it_found() -> None:
    (fault,) = circuit_faults(
        [*SOUND[:3], W("minus", "ref"), R("R_S", "signal", "out")], "push-pull"
    )
    assert fault.have == "no path from signal to plus or minus except through the output"
    elements = [R("R_I", "signal", "plus"), R("R_F", "out", "minus"), R("R_N", "plus", "minus")]
    (fault,) = circuit_faults(elements, "push-pull")
    assert fault.have == "no path from out to plus except through minus"


def test_a_misspelt_node_is_recognised() -> None:
    (fault,) = circuit_faults([*SOUND[:2], R("R_F", "outt", "plus"), SOUND[3]], "push-pull")
    assert "is 'outt' meant?" in fault.remedy
    (fault,) = circuit_faults([*SOUND, R("R_G", "plus", "ground2")], "push-pull")
    assert "is 'ground' meant?" not in fault.remedy  # nothing is connected to ground here
    (fault,) = circuit_faults([*SOUND, R("R_G", "minuss", "ground")], "push-pull")
    assert "is 'minus' meant?" in fault.remedy


@pytest.mark.parametrize("element", [("R_1", "out", "cc"), 5, None, R("R_1", "out", 3)])  # type: ignore[arg-type]
def test_what_is_no_element(element: Any) -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Stage.custom([*SOUND, element, "R_2"])  # type: ignore[list-item]
    found = [fault.problem.split(" is ")[0] for fault in caught.value.faults]
    assert found == ["element 5", "element 6"]
    assert all(fault.remedy for fault in caught.value.faults)


@pytest.mark.parametrize("elements", [5, None, "R_1"])
def test_what_is_no_circuit(elements: Any) -> None:
    with pytest.raises(hk.DesignError, match="elements is not a list"):
        hk.Stage.custom(elements)


def test_the_name_of_a_circuit_is_text() -> None:
    with pytest.raises(hk.DesignError, match="name is not text"):
        hk.Stage.custom(SOUND, name=3)  # type: ignore[arg-type]


def test_ground_and_the_negative_rail_are_one_in_a_single_supply() -> None:
    wired = [*SOUND, W("ee", "ground")]
    assert [*circuit_faults(wired, "push-pull", "single")] == []
    (fault,) = circuit_faults(wired, "push-pull", "split")
    assert fault.problem == "a wire shorts ee and ground."
    joined = hk.Stage.custom(
        [*SOUND[:1], R("R_B", "plus", "ground"), *SOUND[2:], W("ee", "ground")]
    )
    parts = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
    built_in = hk.trip_points(hk.Design(hk.Stage("inverting"), parts, supply=5))
    trips = hk.trip_points(hk.Design(joined, parts, supply=5))
    assert (trips.upper, trips.lower) == pytest.approx((built_in.upper, built_in.lower))


@pytest.mark.parametrize("node", [*sorted(SUFFIXES), "CC0", "Plus", "GROUND", "Signal", "Out"])
def test_nodes_that_could_be_taken_for_something_else(node: str) -> None:
    circuit = [*SOUND, R("R_1", "plus", node), R("R_2", node, "ee")]
    expected = [] if node == "CC0" else [f"{node!r} cannot name a node."]
    assert problems(circuit) == expected


def test_every_voltage_of_the_laws_is_kept_from_the_nodes() -> None:
    names = {name for stage in VARIANTS for name in hk.derive(stage).symbols}
    voltages = {str(name).removeprefix("V_") for name in names if str(name).startswith("V_")}
    assert voltages - {"plus", "minus", "out"} <= SUFFIXES


def test_all_faults_are_reported_at_once() -> None:
    circuit: list[Element] = [
        R("R_T", "plus", "cc"),
        R("R_T", "plus", "ee"),
        R("Q_1", "plus", "a"),
        R("R_2", "b", "b"),
        W("out", "minus"),
        W("cc", "pu"),
        W("signal", "ref"),
    ]
    with pytest.raises(hk.DesignError) as caught:
        hk.Stage.custom(circuit)
    found = [fault.problem for fault in caught.value.faults]
    assert found == [
        "R_T stands 2 times in the circuit.",
        "'Q_1' cannot name a resistor.",
        "R_2 has both ends on one node.",
        "a wire shorts cc and pu.",
        "a wire joins minus and out.",
        "a wire shorts ref and signal.",
    ]
    assert str(caught.value).startswith("6 faults in this circuit:")


def test_missing_nodes_are_reported_together() -> None:
    assert problems([R("R_1", "cc", "ee")]) == [
        f"nothing is connected to the node {node!r}." for node in ("plus", "minus", "out", "signal")
    ]


@pytest.mark.parametrize(
    ("extra", "sense"),
    [
        ((), "non-inverting"),
        # Behind plus the signal is weaker than at plus.
        ((R("R_1", "plus", "minus"), R("R_2", "minus", "ground")), "non-inverting"),
        ((R("R_1", "signal", "minus"), R("R_2", "minus", "ground")), None),
        # An output that gives way could bring more of the signal to minus than plus has.
        ((R("R_1", "signal", "out"), R("R_2", "out", "minus")), None),
    ],
)
def test_the_sense_follows_from_the_wiring_where_it_can(
    extra: tuple[Element, ...], sense: str | None
) -> None:
    held = () if extra else (W("minus", "ref"),)
    assert infer_sense([*NON_INVERTING[:2], *held, *extra]) == sense

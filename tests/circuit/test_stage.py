"""The built-in forms against the wiring table of the design, and stages as values."""

from __future__ import annotations

import copy
import pickle
from collections.abc import Iterator
from dataclasses import FrozenInstanceError
from itertools import permutations

import pytest

import hystkit as hk
from hystkit.circuit.checks import circuit_faults, infer_sense
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import VARIANTS


def by_title(stage: hk.Stage) -> str:
    return "-".join((stage.title, *stage.including))


def wiring(stage: hk.Stage) -> Iterator[tuple[str, str, str]]:
    """The wiring table of the built-in forms: part, and the nodes it joins."""
    compared = "plus" if stage.sense == "inverting" else "minus"
    if stage.reference == "divider":
        yield "R_T", compared, "cc"
        yield "R_B", compared, "ee"
    elif stage.sense == "inverting":
        yield ("R_R", "ref", "plus") if stage.reference == "source" else ("R_B", "plus", "ground")
    else:
        yield "R_R", "ref" if stage.reference == "source" else "ground", "minus"
    yield "R_F", "out", "plus"
    if stage.sense == "non-inverting":
        yield "R_I", "in", "plus"
        yield "R_G", "plus", "ground"
        yield "R_S", "signal", "in"
    else:
        yield "R_S", "signal", "minus"
    if stage.output == "open-collector":
        yield "R_PU", "pu", "out"
    yield "R_L", "out", "load"


def test_there_are_twenty_forms() -> None:
    stages = hk.Stage.all()
    assert len(stages) == len({stage.title for stage in stages}) == 20
    assert len(VARIANTS) == 168


@pytest.mark.parametrize("stage", VARIANTS, ids=by_title)
def test_elements_are_those_of_the_wiring_table(stage: hk.Stage) -> None:
    table = {name: frozenset(nodes) for name, *nodes in wiring(stage)}
    fitted = {*stage.required, *stage.including}
    found = {e.name: frozenset(e.nodes) for e in stage.elements if isinstance(e, hk.Resistor)}
    assert found == {name: nodes for name, nodes in table.items() if name in fitted}
    assert table.keys() == {*stage.required, *stage.optional}


@pytest.mark.parametrize("stage", VARIANTS, ids=by_title)
def test_a_wire_stands_where_an_optional_series_part_is_left_out(stage: hk.Stage) -> None:
    table = {name: frozenset(nodes) for name, *nodes in wiring(stage)}
    series = {"R_R", "R_S"} & {*stage.optional} - {*stage.including}
    wires = {frozenset(e.nodes) for e in stage.elements if isinstance(e, hk.Wire)}
    assert wires == {table[name] for name in series}


@pytest.mark.parametrize("stage", VARIANTS, ids=by_title)
def test_a_form_passes_the_checks_of_custom_circuits(stage: hk.Stage) -> None:
    assert circuit_faults(stage.elements, stage.output) == ()
    assert infer_sense(stage.elements) == stage.sense


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=by_title)
def test_a_level_is_asked_for_where_its_node_is_touched(stage: hk.Stage) -> None:
    loaded = stage.with_options("R_L")
    assert ("V_REF" in stage.levels) == (stage.reference == "source")
    assert ("V_PU" in stage.levels) == (stage.output == "open-collector")
    assert ("V_OH" in stage.levels) == (stage.output == "push-pull")
    assert "V_OL" in stage.levels
    assert set(loaded.levels) - set(stage.levels) == {"V_L"}


def test_required_and_optional_parts() -> None:
    stage = hk.Stage("non-inverting", reference="source", output="open-collector")
    assert stage.required == ("R_I", "R_F", "R_PU")
    assert stage.optional == ("R_R", "R_G", "R_S", "R_L")
    assert hk.Stage("inverting").required == ("R_T", "R_B", "R_F")


def test_every_fault_of_the_choices_is_reported_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Stage("invertin", supply="dual", reference="sources", output="open_collector")
    assert [fault.remedy for fault in caught.value.faults] == [
        "inverting",
        "",
        "source",
        "open-collector",
    ]
    assert str(caught.value).startswith("4 faults in this stage:")


def test_a_ground_reference_needs_a_split_supply() -> None:
    with pytest.raises(hk.DesignError, match="ground reference") as caught:
        hk.Stage("inverting", reference="ground", output="pushpull")
    assert len(caught.value.faults) == 2


def test_optional_parts_that_a_form_does_not_have() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Stage("inverting", including=("R_G", "R_LL"))
    assert [fault.asked for fault in caught.value.faults] == ["R_G", "R_LL"]
    assert caught.value.faults[1].remedy == "R_L"


def test_the_order_of_optional_parts_does_not_count() -> None:
    names = ("R_R", "R_G", "R_S", "R_L")
    stages = {
        hk.Stage("non-inverting", reference="source", including=p) for p in permutations(names)
    }
    assert len(stages) == 1
    assert hk.Stage("inverting", including="R_S") == hk.Stage("inverting", including=["R_S"])


def test_the_same_options_give_the_very_same_stage() -> None:
    stage = hk.Stage("inverting", including=("R_L", "R_S"))
    assert stage.with_options("R_S", "R_L") is stage
    assert stage.with_options() == hk.Stage("inverting")
    assert TAPPED.with_options("R_S") is TAPPED


def test_the_sense_of_a_custom_circuit_is_found_or_asked_for() -> None:
    assert TAPPED.sense == "inverting"
    with pytest.raises(hk.DesignError, match="reaches both inputs"):
        hk.Stage.custom(BRIDGE.elements, supply="split", output="open-collector")
    with pytest.raises(hk.DesignError, match="the wiring is inverting"):
        hk.Stage.custom(TAPPED.elements, sense="non-inverting")
    assert hk.Stage.custom(TAPPED.elements, sense="inverting").sense == "inverting"


def test_a_resistor_from_output_to_minus_leaves_no_doubt_about_the_sense() -> None:
    pulser = [
        hk.Resistor("R_T", "plus", "cc"),
        hk.Resistor("R_B", "plus", "ee"),
        hk.Resistor("R_F", "out", "plus"),
        hk.Resistor("R_N", "out", "minus"),
        hk.Resistor("R_S", "signal", "minus"),
    ]
    assert hk.Stage.custom(pulser).sense == "inverting"


def test_custom_choices_are_checked_with_the_circuit() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Stage.custom([hk.Resistor("R_F", "out", "plus")], supply="both", output="totem")
    kinds = [fault.problem.split("'")[0] for fault in caught.value.faults]
    assert kinds[:2] == ["there is no supply ", "there is no output "]
    assert len(kinds) > 2


def test_a_custom_circuit_has_only_required_parts() -> None:
    assert TAPPED.optional == ()
    assert TAPPED.required == ("R_1", "R_2", "R_3", "R_F", "R_4", "R_5")
    assert TAPPED.title == "tapped divider"
    assert BRIDGE.title == "non-inverting circuit of 9 resistors"
    assert BRIDGE.levels == ("V_REF", "V_PU", "V_L", "V_OL")


@pytest.mark.parametrize("stage", [*hk.Stage.all(), TAPPED, BRIDGE], ids=by_title)
def test_a_stage_is_a_value(stage: hk.Stage) -> None:
    for twin in (pickle.loads(pickle.dumps(stage)), copy.copy(stage), copy.deepcopy(stage)):
        assert twin == stage
        assert hash(twin) == hash(stage)
        assert twin.elements == stage.elements
    with pytest.raises(FrozenInstanceError):
        stage.sense = "other"  # type: ignore[misc]


def test_different_circuits_are_different_stages() -> None:
    assert len({*VARIANTS, TAPPED, BRIDGE}) == len(VARIANTS) + 2

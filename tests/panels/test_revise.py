"""One change of a design and what follows from it."""

from __future__ import annotations

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.panels.revise import FIRST_VALUES, Spare, revised
from tests.panels.front import design_of, own_circuit


def test_every_part_of_every_form_has_a_first_value() -> None:
    names = {name for stage in hk.Stage.all() for name in (*stage.required, *stage.optional)}
    assert set(FIRST_VALUES) == names


@pytest.mark.parametrize("before", hk.Stage.all(), ids=lambda stage: stage.title)
def test_any_form_can_follow_any_other(before: hk.Stage) -> None:
    design = design_of(before)
    for after in hk.Stage.all():
        choices = {n: getattr(after, n) for n in ("sense", "supply", "reference", "output")}
        made = revised(design, choices)
        assert made.stage == after
        for name in {*made.parts} & {*design.parts}:
            assert made.parts[name] == design.parts[name]
        assert made.supply.v_cc == design.supply.v_cc
        assert (made.signal, made.device, made.name) == (design.signal, design.device, design.name)


def test_what_a_form_had_comes_back_with_it() -> None:
    spare = Spare()
    design = header_tank().with_parts(R_L="2k2").with_levels(V_L=0.7)
    for change in (
        {"supply": "split"},
        {"V_EE": -3.3},
        {"reference": "source"},
        {"V_REF": hk.Part(1.2, tol=0.01)},
        {"R_L": None},
        {"supply": "single", "reference": "divider"},
    ):
        spare.remember(design)
        design = revised(design, change, spare)
    assert "V_L" not in design.levels
    assert design.parts["R_T"] == header_tank().parts["R_T"]
    spare.remember(design)
    again = revised(design, {"supply": "split", "reference": "source", "R_L": "2k2"}, spare)
    assert again.supply.v_ee == -3.3
    assert again.levels["V_REF"] == hk.Part(1.2, tol=0.01)
    assert again.levels["V_L"].value == 0.7


def test_a_level_set_back_to_its_default_does_not_come_back() -> None:
    spare = Spare()
    stage = hk.Stage("inverting", output="open-collector")
    design = design_of(stage, levels={"V_PU": 12})
    spare.remember(design)
    design = revised(design, {"V_PU": None}, spare)
    spare.remember(design)
    for output in ("push-pull", "open-collector"):
        design = revised(design, {"output": output}, spare)
        spare.remember(design)
    assert design.levels == {}


def test_a_bare_value_keeps_the_tolerance_and_a_part_replaces_it() -> None:
    tank = header_tank()
    assert revised(tank, {"R_F": "120k"}).parts["R_F"] == hk.Part("120k", tol=0.01)
    assert revised(tank, {"R_F": hk.Part("120k")}).parts["R_F"] == hk.Part("120k")


def test_levels_that_belong_to_the_old_rails_go() -> None:
    design = design_of(hk.Stage("inverting", supply="split"), levels={"V_OH": 11, "V_OL": -11})
    made = revised(design, {"supply": "single"})
    assert made.values["V_OL"] == 0
    assert made.values["V_OH"] == 12


def test_a_rail_that_a_single_supply_cannot_have_is_moved() -> None:
    stage = hk.Stage("inverting", supply="split")
    made = revised(design_of(stage, supply=hk.Supply(0, -5)), {"supply": "single"})
    assert made.supply == hk.Supply(5)


def test_device_fields_return_to_their_defaults() -> None:
    tank = revised(header_tank(), {"common_mode_high": None, "drop_low": "0.2 V"})
    assert tank.device.common_mode_high is None
    assert revised(tank, {"drop_low": None}).device.drop_low == 0


def test_names_are_checked_against_the_stage() -> None:
    with pytest.raises(hk.UnknownNameError) as caught:
        revised(header_tank(), {"R_X": 1, "vref": 2})
    assert len(caught.value.faults) == 2
    assert "V_REF" in str(caught.value)
    with pytest.raises(hk.UnknownNameError, match="sense"):
        revised(own_circuit(), {"sense": "inverting"})
    with pytest.raises(hk.UnknownNameError, match="R_F"):
        revised(own_circuit(), {"R_F": "10k"})
    assert revised(own_circuit(), {"R_3": "47k"}).parts["R_3"].value == 47e3


def test_all_faults_come_together() -> None:
    with pytest.raises(hk.DesignError) as caught:
        revised(header_tank(), {"R_T": -1, "drop_low": -1, "r_high": "x", "V_OL": 7})
    assert len(caught.value.faults) == 4
    assert header_tank() == header_tank()
    with pytest.raises(hk.DesignError, match="no V_REF"):
        revised(header_tank(), {"V_REF": 2})

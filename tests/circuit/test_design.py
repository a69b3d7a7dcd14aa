"""Designs: every fault at once, changed copies, defaults that follow the rails, value semantics."""

from __future__ import annotations

import copy
import pickle
from collections.abc import Mapping
from dataclasses import FrozenInstanceError
from typing import Any

import pytest
from hypothesis import given

import hystkit as hk
from tests.circuit.custom import TAPPED
from tests.circuit.strategies import VARIANTS, designs

PARTS = {"R_T": "46k4", "R_B": hk.Part("26.7k", tol=0.01, tempco=1e-4), "R_F": 100e3}
#: A sound value for every part there is.
ANY = dict.fromkeys(("R_T", "R_B", "R_R", "R_I", "R_G", "R_F", "R_S", "R_PU", "R_L"), "10k")


def tank(**changes: Any) -> hk.Design:
    return hk.Design(**{"stage": hk.Stage("inverting"), "parts": PARTS, "supply": 5.0, **changes})


def faults_of(**changes: Any) -> list[str]:
    with pytest.raises(hk.DesignError) as caught:
        tank(**changes)
    return [fault.problem for fault in caught.value.faults]


def test_numbers_text_and_parts_are_taken_alike() -> None:
    design = tank(supply="5 V")
    assert [part.value for part in design.parts.values()] == [46400.0, 26700.0, 100000.0]
    assert design.supply == hk.Supply(5.0)
    assert design.parts["R_B"] == hk.Part(26700.0, 0.01, 1e-4)
    assert design.device == hk.Device()


def test_parts_stand_in_the_order_of_the_stage() -> None:
    shuffled = {name: PARTS[name] for name in ("R_F", "R_B", "R_T")}
    assert list(tank(parts=shuffled).parts) == ["R_T", "R_B", "R_F"]
    assert tank(parts=shuffled) == tank()


def test_an_optional_part_that_is_given_is_fitted() -> None:
    design = tank(parts={**PARTS, "R_L": "1k"})
    assert design.stage.including == ("R_L",)
    assert hk.Resistor("R_L", "out", "load") in design.elements
    assert design.with_parts(R_L=None) == tank()
    assert design.with_parts(R_L=None).stage == hk.Stage("inverting")


def test_an_optional_part_that_the_stage_includes_needs_a_value() -> None:
    stage = hk.Stage("inverting", including="R_S")
    assert faults_of(stage=stage) == ["R_S is missing."]


@pytest.mark.parametrize(
    ("changes", "problem"),
    [
        ({"parts": {"R_T": "1k", "R_B": "1k"}}, "R_F is missing."),
        ({"parts": {}}, "R_T, R_B, R_F are missing."),
        ({"parts": {**PARTS, "R_PU": "1k"}}, "there is no part of this stage 'R_PU' here."),
        ({"parts": {**PARTS, "R_F": 0}}, "R_F is not positive."),
        ({"parts": {**PARTS, "R_F": "-1k"}}, "R_F is not positive."),
        ({"parts": {**PARTS, "R_F": float("nan")}}, "R_F is not a finite number."),
        ({"parts": {**PARTS, "R_F": "4,7k"}}, "R_F is not written as a number is here."),
        ({"parts": {**PARTS, "R_F": "2.5 V"}}, "R_F is not in Ω."),
        ({"parts": {**PARTS, "R_F": None}}, "R_F is not a single number."),
        ({"levels": {"V_OL": "1k"}, "device": hk.Device()}, "V_OH is not above V_OL."),
        ({"levels": {"V_OH": 0.2, "V_OL": 0.2}}, "V_OH is not above V_OL."),
        ({"device": hk.Device(drop_high=3, drop_low=2)}, "V_OH is not above V_OL."),
        ({"levels": {"V_REF": 2.5}}, "this stage has no V_REF."),
        ({"levels": {"V_PU": 2.5}}, "this stage has no V_PU."),
        ({"levels": {"V_L": 0.7}}, "this stage has no V_L."),
        ({"levels": {"V_OHH": 4}}, "there is no level of this stage 'V_OHH' here."),
        ({"levels": {"V_OH": "4 Ω"}}, "V_OH is not in V."),
        ({"supply": (5, -5)}, "V_CC is not a single number."),
        ({"supply": -5}, "V_CC is not above 0 V."),
        ({"parts": {**PARTS, "R_F": hk.Part("2.5 V")}}, "R_F is not in Ω."),
        ({"levels": {"V_OH": hk.Part("2.5 kΩ")}}, "V_OH is not in V."),
        (
            {"supply": hk.Supply(5, -5)},
            "a stage on a single supply was given a split one.",
        ),
    ],
)
def test_one_fault(changes: Mapping[str, Any], problem: str) -> None:
    assert faults_of(**changes) == [problem]


@pytest.mark.parametrize(
    ("changes", "problem"),
    [
        ({"stage": "inverting"}, "stage is not a Stage."),
        ({"parts": None}, "parts is not a mapping of names."),
        ({"parts": ["R_T"]}, "parts is not a mapping of names."),
        ({"levels": [2.5]}, "levels is not a mapping of names."),
        ({"device": "comparator"}, "device is not a Device."),
        ({"signal": "x"}, "signal is not a signal."),
        ({"name": 3}, "name is not text."),
    ],
)
def test_an_argument_of_another_kind(changes: Mapping[str, Any], problem: str) -> None:
    assert faults_of(**changes) == [problem]
    with pytest.raises(hk.DesignError) as caught:
        tank(**changes, supply=-5)
    assert len(caught.value.faults) == 2
    assert caught.value.faults[0].asked
    assert caught.value.faults[0].have
    assert caught.value.faults[0].remedy


def test_faults_of_other_forms() -> None:
    source = hk.Stage("inverting", reference="source", output="open-collector")
    parts = {"R_R": "10k", "R_F": "100k", "R_PU": "1k"}
    assert faults_of(stage=source, parts=parts) == ["V_REF is missing."]
    low = {"V_REF": 1, "V_PU": 0.1, "V_OL": 0.1}
    assert faults_of(stage=source, parts=parts, levels=low) == ["V_PU is not above V_OL."]
    high = {"V_REF": 1, "V_OH": 4}
    assert faults_of(stage=source, parts=parts, levels=high) == ["this stage has no V_OH."]
    split = hk.Stage("inverting", supply="split")
    assert faults_of(stage=split) == ["a stage on a split supply was given a single one."]


def test_all_faults_are_reported_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        tank(
            parts={"R_T": "4,7k", "R_B": -1, "R_FF": "100k"},
            levels={"V_REF": 2.5, "V_OH": "x", "VOL": 0.1},
            supply="five",
        )
    error = caught.value
    assert [fault.problem for fault in error.faults] == [
        "R_T is not written as a number is here.",
        "V_OH is not a number.",
        "V_CC is not a number.",
        "R_F is missing.",
        "R_B is not positive.",
        "there is no part of this stage 'R_FF' here.",
        "this stage has no V_REF.",
        "there is no level of this stage 'VOL' here.",
    ]
    assert error.faults[5].remedy == "R_F"
    assert error.faults[7].remedy == "V_OL"
    assert str(error).startswith("8 faults in this design:\n  1  R_T is not")
    assert isinstance(error, ValueError)


def test_a_changed_copy_keeps_tolerances_and_leaves_the_original_alone() -> None:
    design = tank()
    changed = design.with_parts(R_B="33k", R_F=hk.Part("120k", tol=0.05))
    assert changed.parts["R_B"] == hk.Part(33e3, 0.01, 1e-4)
    assert changed.parts["R_F"].tol == 0.05
    assert design == tank()
    assert changed.with_parts(R_B=26.7e3, R_F=hk.Part(100e3)) == design


def test_changed_copies_of_the_rest() -> None:
    design = tank()
    assert design.with_supply(v_cc=6).supply == hk.Supply(6)
    assert design.with_device(drop_low="200m").device == hk.Device(drop_low=0.2)
    level = hk.signals.Linear(1.2, span=(0, 2))
    assert design.with_signal(level).signal is level
    assert design.with_signal(level).with_signal(None) == design
    levels = design.with_levels(V_OH=hk.Part(4.5, tol=0.02)).with_levels(V_OH=4)
    assert levels.levels["V_OH"] == hk.Part(4.0, 0.02)
    assert levels.with_levels(V_OH=None) == design


@pytest.mark.parametrize(
    ("method", "changes", "asked"),
    [
        ("with_parts", {"R_TT": None, "R_Q": None}, ["R_TT", "R_Q"]),
        ("with_parts", {"R_TT": "10k"}, ["R_TT"]),
        ("with_levels", {"V_OO": None}, ["V_OO"]),
        ("with_supply", {"vcc": 5, "v_dd": 5}, ["vcc", "v_dd"]),
        ("with_device", {"drop_hi": 0.1, "Offset": 0}, ["drop_hi", "Offset"]),
    ],
)
def test_a_change_of_something_that_is_not_there(
    method: str, changes: dict[str, Any], asked: list[str]
) -> None:
    with pytest.raises(hk.InputError) as caught:
        getattr(tank(), method)(**changes)
    assert [fault.asked for fault in caught.value.faults] == asked


def test_values_that_cannot_be_read_are_reported_together_by_name() -> None:
    with pytest.raises(hk.DesignError) as caught:
        tank().with_parts(R_T="x", R_B="2 V")
    assert [f.problem for f in caught.value.faults] == ["R_T is not a number.", "R_B is not in Ω."]


def test_a_required_part_cannot_be_taken_out() -> None:
    with pytest.raises(hk.DesignError, match="R_F is missing"):
        tank().with_parts(R_F=None)


def test_values_hold_every_symbol_of_the_law() -> None:
    device = hk.Device(0.1, 0.2, 30, 20, 1e-7, 1e-3, 2e-8, 3e-8)
    for stage in VARIANTS:
        parts = {name: ANY[name] for name in stage.parts}
        split = stage.supply == "split"
        design = hk.Design(
            stage,
            parts,
            supply=hk.Supply(5, -4 if split else None),
            device=device,
            levels={"V_REF": 1.0} if stage.reference == "source" else {},
        )
        values = design.values
        known = set(hk.derive(stage).formulas.names)
        assert known <= values.keys()
        assert values["V_OL"] == (-3.8 if split else 0.2)
        assert values.get("V_EE", -4.0) == -4.0
        if stage.output == "push-pull":
            assert (values["V_OH"], values["R_OH"], "I_LK" in values) == (4.9, 30.0, False)
        else:
            assert (values["V_PU"], values["I_LK"], "R_OH" in values) == (5.0, 1e-7, False)
        assert values.get("V_L", 0.0) == 0.0


def test_given_levels_win_over_the_drops() -> None:
    design = tank(levels={"V_OH": 3.3, "V_OL": 0.4}, device=hk.Device(drop_high=1, drop_low=1))
    assert (design.values["V_OH"], design.values["V_OL"]) == (3.3, 0.4)


def test_a_custom_circuit_is_a_design_like_any_other() -> None:
    design = hk.Design(TAPPED, dict.fromkeys(TAPPED.parts, "10k"), supply=5)
    assert design.elements == TAPPED.wiring
    with pytest.raises(hk.DesignError, match="R_9") as caught:
        design.with_parts(R_9="1k")
    assert caught.value.faults[0].have == "R_1, R_2, R_3, R_F, R_4, R_5"


@given(designs())
def test_a_design_is_a_value(design: hk.Design) -> None:
    for twin in (pickle.loads(pickle.dumps(design)), copy.copy(design), copy.deepcopy(design)):
        assert twin == design
        assert hash(twin) == hash(design)
        assert twin.values == design.values
    assert {design: 1}[copy.deepcopy(design)] == 1


@given(designs())
def test_any_change_makes_another_design(design: hk.Design) -> None:
    name = design.stage.parts[-1]
    other = design.with_parts(**{name: design.parts[name].value * 1.5})
    assert other != design
    assert other.with_parts(**{name: design.parts[name].value}) == design
    assert design.with_device(delay=design.device.delay + 1) != design
    assert design.with_supply(tol=design.supply.tol + 0.1) != design


def test_a_design_is_frozen() -> None:
    design = tank()
    with pytest.raises(FrozenInstanceError):
        design.name = "other"  # type: ignore[misc]
    with pytest.raises(TypeError):
        design.parts["R_T"] = hk.Part(1)  # type: ignore[index]


def test_views_tell_what_is_built() -> None:
    level = hk.signals.Linear(1.2, 0.6, span=(0, 2), unit="m", name="level")
    design = hk.Design(
        hk.Stage("inverting"),
        {"R_T": hk.Part("46k4", tol=0.01, tempco=50e-6), "R_B": "26k7", "R_F": "100k"},
        supply=hk.Supply(5.0, tol=0.02),
        signal=level,
        name="tank",
    )
    lines = [line.split("  ") for line in str(design).splitlines()]
    assert lines[0] == ["tank"]
    told = {line[0]: [piece.strip() for piece in line[1:] if piece.strip()] for line in lines[1:]}
    assert told["R_T"] == ["46k4", "± 1 %, 50 ppm/K"]
    assert told["R_B"] == ["26k7"]
    assert told["supply"] == ["5 V", "± 2 %"]
    assert told["signal"] == ["level", "0 to 2 m"]
    assert "<table" in design._repr_html_()
    assert "46k4" in design.to_latex()

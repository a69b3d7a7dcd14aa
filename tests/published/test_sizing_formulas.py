"""Parts from wanted trips against published values; each case carries its source."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk
from hystkit.symbolic.symbols import symbol

CASES: dict[str, dict[str, Any]] = {
    case["id"]: case
    for case in json.loads(Path(__file__).with_name("checks.json").read_text(encoding="utf-8"))[
        "sizing"
    ]
}


def solved(case_id: str, stage: hk.Stage, *unknown: str, **known: float) -> dict[str, float]:
    """Solve a published case for two unknowns and put its numbers in."""
    case = CASES[case_id]
    assert case["source"]
    numbers = {**known, **case["given"], "V_upper": case["upper"], "V_lower": case["lower"]}
    values = {symbol(name): value for name, value in numbers.items()}
    (solution,) = hk.derive(stage).solve_for(*unknown)
    return {name: float(formula.subs(values)) for name, formula in solution.items()}


def test_s1_divider_and_feedback_from_the_top_resistor() -> None:
    case = CASES["S1"]
    rails = {"V_CC": case["v_cc"], "V_OH": case["v_cc"], "V_OL": 0.0}
    found = solved("S1", hk.Stage("inverting"), "R_B", "R_F", **rails)
    assert found == pytest.approx(case["exact"], rel=1e-9)


def test_s2_feedback_from_the_input_resistor() -> None:
    """Both trips follow from one ratio; the low level comes out as the mirror of the high one."""
    case = CASES["S2"]
    stage = hk.Stage("non-inverting", supply="split", reference="ground")
    found = solved("S2", stage, "R_F", "V_OL", V_OH=case["v_oh"])
    assert found == pytest.approx({**case["exact"], "V_OL": case["v_ol"]}, rel=1e-9)


def test_s3_feedback_from_the_resistor_to_ground() -> None:
    case = CASES["S3"]
    stage = hk.Stage("inverting", supply="split", reference="ground")
    found = solved("S3", stage, "R_F", "V_OL", V_OH=case["v_oh"])
    assert found == pytest.approx({**case["exact"], "V_OL": case["v_ol"]}, rel=1e-9)
    design = hk.Design(
        stage,
        {**case["given"], "R_F": "120k"},
        supply=hk.Supply(15, -15),
        levels={"V_OH": case["v_oh"], "V_OL": case["v_ol"]},
    )
    # The nearest standard value, as the source states it.
    assert hk.trip_points(design).upper == pytest.approx(0.48998, abs=5e-6)


def test_s4_input_and_shunt_from_the_feedback_resistor() -> None:
    case = CASES["S4"]
    stage = hk.Stage("non-inverting", reference="source", including="R_G")
    known = {**case["levels"], "V_OH": case["v_cc"], "V_OL": 0.0}
    found = solved("S4", stage, "R_I", "R_G", **known)
    assert found["R_I"] == pytest.approx(case["exact"]["R_I"], rel=1e-9)
    assert found["R_G"] == pytest.approx(case["exact"]["R_G"], abs=0.005)


def test_every_published_case_is_checked() -> None:
    tested = {name.split("_")[1].upper() for name in globals() if name.startswith("test_s")}
    assert tested == CASES.keys()

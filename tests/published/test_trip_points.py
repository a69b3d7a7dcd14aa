"""Trip points against published circuits; each case carries its source in checks.json."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hystkit as hk
from tests.numeric import nodal

CASES: list[dict[str, Any]] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)["trip_points"]


def by_id(case: dict[str, Any]) -> str:
    return str(case["id"])


def design_of(case: dict[str, Any]) -> hk.Design:
    choices = ("sense", "supply", "reference", "output")
    levels = {"V_OH": case["v_oh"], "V_OL": case["v_ol"], **case["levels"]}
    return hk.Design(
        hk.Stage(**{name: case[name] for name in choices}),
        case["parts"],
        supply=hk.Supply(case["v_cc"], case["v_ee"] if case["supply"] == "split" else None),
        levels={name: volts for name, volts in levels.items() if volts is not None},
        name=case["id"],
    )


@pytest.mark.parametrize("case", CASES, ids=by_id)
def test_published_trip_points(case: dict[str, Any]) -> None:
    assert case["source"]
    assert case["provenance"]
    trips = hk.trip_points(design_of(case))
    assert trips.upper == pytest.approx(case["upper"], rel=case["rel_tol"])
    assert trips.lower == pytest.approx(case["lower"], rel=case["rel_tol"])


@pytest.mark.parametrize("case", CASES, ids=by_id)
def test_the_formula_and_the_oracle_agree_with_the_number(case: dict[str, Any]) -> None:
    """Three ways to one value: the compiled law, the symbols put in, the node equations."""
    design = design_of(case)
    law = hk.derive(design)
    trips = hk.trip_points(design)
    for kind, state in (("upper", law.upper_state), ("lower", law.lower_state)):
        formula = getattr(law.ideal, kind)
        put_in = formula.subs({s: design.values[s.name] for s in formula.free_symbols})
        solved = nodal.trip(design.elements, design.stage.output, state, design.values)
        value = getattr(trips, kind)
        np.testing.assert_allclose([float(put_in), solved.item()], value, rtol=1e-12, atol=1e-14)


@pytest.mark.parametrize(
    ("case_id", "part", "value", "upper", "lower"),
    [
        # Standard values in place of the exact ones, as the notes of the cases state them.
        ("A1", "R_F", 576e3, 2.699681, 2.300319),
        ("A26", "R_F", 100e3, 2.524752, 2.475248),
        ("A7", "R_F", 1.2e6, 2.999393, 2.949393),
    ],
)
def test_standard_values(case_id: str, part: str, value: float, upper: float, lower: float) -> None:
    case = next(case for case in CASES if case["id"] == case_id)
    trips = hk.trip_points(design_of(case).with_parts(**{part: value}))
    assert (trips.upper, trips.lower) == (
        pytest.approx(upper, abs=5e-7),
        pytest.approx(lower, abs=5e-7),
    )


def test_a_pull_up_at_the_voltage_of_the_divider_has_no_effect_when_high() -> None:
    """A3: the divider's Thevenin voltage equals the pull-up supply, so that no current flows."""
    case = next(case for case in CASES if case["id"] == "A3")
    pulled = hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {**case["parts"], "R_PU": "1k"},
        supply=case["v_cc"],
        levels={"V_PU": 5},
    )
    ends = hk.trip_points(pulled), hk.trip_points(design_of(case))
    assert ends[0].upper == pytest.approx(ends[1].upper, rel=1e-12)
    assert ends[0].lower == pytest.approx(ends[1].lower, rel=1e-12)

"""Sizing against published designs; each case of the table names its source."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk

CASES: dict[str, Any] = {
    case["id"]: case
    for case in json.loads(Path(__file__).with_name("checks.json").read_text(encoding="utf-8"))[
        "sizing"
    ]
}
FORMS = {
    "inverting single divider push-pull": hk.Stage("inverting"),
    "non-inverting split ground push-pull": hk.Stage(
        "non-inverting", supply="split", reference="ground"
    ),
    "inverting split ground push-pull": hk.Stage("inverting", supply="split", reference="ground"),
    "non-inverting single source push-pull with R_G": hk.Stage(
        "non-inverting", reference="source", including="R_G"
    ),
}
# Coarse series around each published value, so that the exact one has to win against others.
AROUND = [0.5, 0.8, 0.9, 0.95, 0.98, 0.99, 1.0, 1.01, 1.02, 1.05, 1.1, 1.25, 2.0]


def request(case: dict[str, Any]) -> dict[str, Any]:
    split = "v_ol" in case
    levels = {
        **case.get("levels", {}),
        **({"V_OH": case["v_oh"], "V_OL": case["v_ol"]} if split else {}),
    }
    return {
        "supply": hk.Supply(15.0, -15.0) if split else hk.Supply(case["v_cc"]),
        "levels": levels,
        "upper": case["upper"],
        "lower": case["lower"],
        "parts": case["given"],
    }  # fmt: skip


def test_each_case_names_its_source() -> None:
    assert sorted(CASES) == ["S1", "S2", "S3", "S4"]
    assert all(case["source"] for case in CASES.values())


@pytest.mark.parametrize("name", CASES)
def test_published_values_win_against_their_neighbours(name: str) -> None:
    case = CASES[name]
    series = {part: [value * k for k in AROUND] for part, value in case["exact"].items()}
    best = hk.size(FORMS[case["form"]], **request(case), series=series)[0]
    found = {part: best.design.parts[part].value for part in case["exact"]}
    assert found == pytest.approx(case["exact"], rel=1e-9)
    # S4 is printed with six digits; the others are exact.
    assert best.error == pytest.approx(0.0, abs=2e-6 if name == "S4" else 1e-12)


def test_standard_parts_of_s1() -> None:
    # TIPD144 as A1 of the table: the standard value of 575k is 576k, 2.699681 V and 2.300319 V.
    best = hk.size(FORMS[CASES["S1"]["form"]], **request(CASES["S1"]), series="E96")[0]
    assert best.design.parts["R_F"].value == 576e3
    assert best.trips.upper == pytest.approx(2.699681, abs=5e-7)
    assert best.trips.lower == pytest.approx(2.300319, abs=5e-7)


def test_standard_part_of_s3() -> None:
    # The book takes the standard 120k for 117.5k and gets 0.48998 V.
    best = hk.size(FORMS[CASES["S3"]["form"]], **request(CASES["S3"]), series="E12")[0]
    assert best.design.parts["R_F"].value == 120e3
    assert best.trips.upper == pytest.approx(0.48998, abs=5e-6)


def test_standard_parts_of_s4_are_met_or_improved() -> None:
    # The datasheet takes 12k and 8.66k, both in E192, and gets 2.999393 V and 2.949393 V.
    wanted = request(CASES["S4"])
    stage = FORMS[CASES["S4"]["form"]]
    parts = wanted.pop("parts")
    own = hk.size(stage, **wanted, parts=parts, series={"R_I": ["12k"], "R_G": ["8.66k"]})[0]
    assert own.trips.upper == pytest.approx(2.999393, abs=5e-7)
    assert own.trips.lower == pytest.approx(2.949393, abs=5e-7)
    best = hk.size(stage, **wanted, parts=parts, series="E192")[0]
    assert best.error <= own.error

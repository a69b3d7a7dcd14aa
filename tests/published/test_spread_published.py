"""Extreme values and root sum squares against published and recomputed tolerance cases."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk

CASES: dict[str, Any] = json.loads(
    (Path(__file__).parent / "checks.json").read_text(encoding="utf-8")
)["tolerance"]


def test_reference_design_of_a_vendor_with_one_percent_parts() -> None:
    case = CASES["A1_with_576k_1pct"]
    values = {"R_T": 100e3, "R_B": 100e3, "R_F": 576e3}
    parts = {name: hk.Part(value, tol=0.01) for name, value in values.items()}
    found = hk.spread(hk.Design(hk.Stage("inverting"), parts, supply=5.0), sigmas=3)
    for kind in ("upper", "lower", "width"):
        assert found.extremes[kind] == pytest.approx(tuple(case[kind]), abs=1e-6)
    assert found.rss["upper"] == pytest.approx(case["rss_upper"], abs=1e-6)
    assert found.rss["width"] == pytest.approx(case["rss_width"], abs=1e-6)
    # Upper and lower move together: their extremes cannot simply be subtracted.
    spans = {kind: high - low for kind, (low, high) in found.extremes.items()}
    overstated = (spans["upper"] + spans["lower"]) / spans["width"]
    assert overstated == pytest.approx(6.8, abs=0.05)


def divider(r1: float, r2: float, tol: float) -> hk.Spread:
    """A divider of a reference at the minus input; feedback is far too weak to load it."""
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_1", "ref", "minus"),
            hk.Resistor("R_2", "minus", "ground"),
            hk.Wire("signal", "in"),
            hk.Resistor("R_I", "in", "plus"),
            hk.Resistor("R_F", "out", "plus"),
        ]
    )
    parts = {"R_1": hk.Part(r1, tol=tol), "R_2": hk.Part(r2, tol=tol), "R_I": 1.0, "R_F": 1e15}
    return hk.spread(hk.Design(stage, parts, supply=5.0, levels={"V_REF": 1.0}))


def test_extreme_ratio_of_a_divider() -> None:
    case = CASES["divider"]
    found = divider(case["r1"], case["r2"], case["tol"])
    assert found.extremes["upper"] == pytest.approx(tuple(case["ratio"]), rel=1e-9)


def test_extreme_error_of_a_feedback_divider() -> None:
    case = CASES["feedback_divider"]
    # The divider returns v_fb / v_out of the output: half, hence two equal resistors.
    ratio = case["v_fb"] / case["v_out"]
    found = divider(100e3 * (1 - ratio) / ratio, 100e3, case["tol"])
    low, high = found.extremes["upper"]
    errors = sorted(100 * (ratio / end - 1) for end in (low, high))
    assert errors == pytest.approx(case["error_percent"], abs=1e-4)

"""Relaxation oscillators against published frequencies; checks.json names each source."""

from __future__ import annotations

import json
from math import log
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk

CYCLE: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)["cycle"]


def test_published_split_supply_astable() -> None:
    """Share beta of the output at the plus input, from 100k to ground and 1M of feedback."""
    case = CYCLE["astable"]
    assert case["source"]
    stage = hk.Stage("inverting", supply="split", reference="ground")
    parts = {"R_B": "100k", "R_F": "1M"}
    assert case["beta"] == pytest.approx(100e3 / 1.1e6)
    design = hk.Design(stage, parts, supply=hk.Supply(12, -12))
    found = hk.oscillate(design, case["r"], case["c"])
    assert found.frequency == pytest.approx(case["hz"], rel=case["rel_tol"])
    # The same source's closed form for symmetric levels.
    share = case["beta"]
    closed = 2 * case["r"] * case["c"] * log((1 + share) / (1 - share))
    assert found.period == pytest.approx(closed, rel=1e-12)


def test_published_single_supply_astable() -> None:
    case = CYCLE["astable_single"]
    assert case["source"]
    equal = dict.fromkeys(("R_T", "R_B", "R_F"), case["all_resistors"])
    design = hk.Design(hk.Stage("inverting"), equal, supply=5.0)
    found = hk.oscillate(design, case["all_resistors"], case["c"])
    assert found.frequency == pytest.approx(case["hz"], rel=case["rel_tol"])
    assert found.frequency == pytest.approx(
        1 / (2 * case["all_resistors"] * case["c"] * log(2)), rel=1e-12
    )

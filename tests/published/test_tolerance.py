"""Worst case and root sum of squares of a published circuit with 1 % resistors."""

from __future__ import annotations

import json
import math
from itertools import product
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk

CHECKS: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)
CASE: dict[str, Any] = CHECKS["tolerance"]["A1_with_576k_1pct"]
TOL = 0.01
PARTS = {"R_T": 100e3, "R_B": 100e3, "R_F": 576e3}
DESIGN = hk.Design(
    hk.Stage("inverting"),
    {name: hk.Part(value, tol=TOL) for name, value in PARTS.items()},
    supply=5.0,
)


def test_the_intervals_of_both_trips() -> None:
    assert CHECKS["tolerance"]["definition_source"]
    found = hk.levels(DESIGN)
    assert found.upper_interval == pytest.approx(CASE["upper"], abs=1e-6)
    assert found.lower_interval == pytest.approx(CASE["lower"], abs=1e-6)


def test_the_width_over_all_corners() -> None:
    """Upper and lower move together, so that their intervals say little about the width."""
    ends = [(value * (1 - TOL), value * (1 + TOL)) for value in PARTS.values()]
    corners = zip(*product(*ends), strict=True)
    trips = hk.trip_points(DESIGN, **dict(zip(PARTS, map(list, corners), strict=True)))
    assert (trips.width.min(), trips.width.max()) == pytest.approx(CASE["width"], abs=1e-6)


def test_the_root_sum_of_squares_from_the_sensitivities() -> None:
    law = hk.derive(DESIGN)
    nominal = hk.trip_points(DESIGN)
    for kind in ("upper", "width"):
        shares = []
        for name in PARTS:
            formula = getattr(law.ideal.sensitivity(name), kind)
            share = formula.subs({s: DESIGN.values[s.name] for s in formula.free_symbols})
            shares.append(float(share) * TOL * getattr(nominal, kind))
        assert math.hypot(*shares) == pytest.approx(CASE[f"rss_{kind}"], abs=1e-6)

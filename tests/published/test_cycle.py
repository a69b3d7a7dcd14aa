"""Steady cycles against published and recomputed values; checks.json names each source."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk

CYCLE: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)["cycle"]


def case_of(name: str) -> dict[str, Any]:
    case = CYCLE[name]
    assert case["source"]
    return dict(case)


def test_first_order() -> None:
    case = case_of("first_order")
    plant = hk.FirstOrder(case["tau"], case["on_level"], case["off_level"], case["dead_time"])
    found = hk.steady_cycle(plant, on_at=case["on_at"], off_at=case["off_at"])
    assert found.on_time == pytest.approx(case["t_on"], abs=1e-6)
    assert found.off_time == pytest.approx(case["t_off"], abs=1e-6)
    # Without a dead time nothing goes beyond the trips.
    assert (found.low, found.high) == pytest.approx((case["on_at"], case["off_at"]), rel=1e-14)


def test_symmetric_dead_time() -> None:
    case = case_of("symmetric_dead_time")
    plant = hk.FirstOrder(case["tau"], case["gain"], 0.0, case["dead_time"])
    found = hk.steady_cycle(plant, on_at=case["on_at"], off_at=case["off_at"])
    assert (found.low, found.high) == pytest.approx((case["low"], case["high"]), abs=1e-6)
    assert found.period == pytest.approx(case["period"], abs=1e-6)
    assert found.duty == pytest.approx(0.5, rel=1e-12)


def test_integrator() -> None:
    case = case_of("integrator")
    plant = hk.Integrating(case["rate_up"], -case["rate_down"], case["dead_time"])
    found = hk.steady_cycle(plant, on_at=-case["half_band"], off_at=case["half_band"])
    assert found.period == pytest.approx(case["period"], rel=1e-12)
    assert (found.low, found.high) == pytest.approx(
        (-case["amplitude"], case["amplitude"]), rel=1e-12
    )

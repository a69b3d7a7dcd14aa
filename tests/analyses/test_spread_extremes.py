"""Exact extremes against every corner, dense sampling, a closed form and an independent solver."""

from __future__ import annotations

from dataclasses import replace
from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.spread import bounds as bounds_module
from hystkit.analyses.spread.bounds import bounds
from tests.analyses.spread_designs import (
    REAL,
    VALUES,
    bridge,
    full,
    interior_width,
    uncertain_design,
    wide,
)
from tests.numeric import nodal

KINDS = ("upper", "lower", "width", "middle")


def interior(design: hk.Design, count: int, seed: int = 0) -> hk.TripPoints:
    """Trip points at random places all over the box."""
    random = np.random.default_rng(seed)
    box = hk.spread(design).box.intervals
    return hk.trip_points(design, **{n: random.uniform(*ends, count) for n, ends in box.items()})


def assert_holds(design: hk.Design, count: int, seed: int = 0) -> hk.Spread:
    """No random point leaves the extremes, and these are attained within the stated gap."""
    found = hk.spread(design)
    trips = interior(design, count, seed)
    for kind in KINDS:
        bound = found.bounds[kind]
        values, (low, high) = getattr(trips, kind), bound.interval
        room = 1e-12 * max(abs(low), abs(high))
        assert np.all(np.isfinite(values))
        assert low - room <= values.min()
        assert values.max() <= high + room
        for at, end in ((bound.at_lowest, low), (bound.at_highest, high)):
            attained = getattr(hk.trip_points(design, **at), kind)
            assert abs(attained - end) <= bound.gap + room
        assert bound.gap <= 1e-9 * max(abs(low), abs(high), high - low)
    return found


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=lambda stage: stage.title)
def test_no_random_point_leaves_the_extremes(stage: hk.Stage) -> None:
    found = assert_holds(uncertain_design(full(stage)), 20_000)
    assert found.proof["upper"] == found.proof["lower"] == "corners"


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_no_point_of_a_million_leaves_the_extremes(output: str) -> None:
    stage = hk.Stage("inverting", reference="divider", output=output)
    design = uncertain_design(stage, tol=0.1)
    for seed in range(10):
        assert_holds(design, 100_000, seed)


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=lambda stage: stage.title)
def test_extremes_of_the_trips_are_those_of_an_independent_solver(stage: hk.Stage) -> None:
    device = replace(REAL, limits={"offset": (-4e-3, 4e-3), "drop_low": (0.1, 0.4)})
    design = uncertain_design(stage, device=device)
    box = hk.spread(design).box.intervals
    grid = np.array(list(product(*box.values()))).T
    corner = dict(zip(box, grid, strict=True))
    values = {**design.values, **corner, "V_OL": corner["drop_low"], "V_OS": corner["offset"]}
    values["V_OL"] = values.get("V_EE", 0.0) + corner["drop_low"]
    if "V_OH" in design.values:
        values["V_OH"] = corner["V_CC"] - design.device.drop_high
    high, low = (nodal.trip(design.elements, stage.output, s, values) for s in ("high", "low"))
    upper, lower = (high, low) if stage.sense == "inverting" else (low, high)
    found = hk.spread(design).extremes
    assert found["upper"] == pytest.approx((upper.min(), upper.max()), rel=1e-9, abs=1e-9)
    assert found["lower"] == pytest.approx((lower.min(), lower.max()), rel=1e-9, abs=1e-9)


def test_trip_intervals_of_levels_are_the_same() -> None:
    design = uncertain_design(hk.Stage("inverting", output="open-collector"))
    found, levels = hk.spread(design).extremes, hk.levels(design)
    assert levels.upper_interval == found["upper"]
    assert levels.lower_interval == found["lower"]


def test_equal_fixed_output_resistances_need_corners_only() -> None:
    equal = hk.Device(r_high=50, r_low=50)
    design = uncertain_design(hk.Stage("inverting"), tol=0.4, device=equal)
    found = assert_holds(design, 50_000)
    # Equal, yet two symbols: the fraction has squares until both are zero.
    assert found.proof["width"] in ("corners", "control points")
    ideal = assert_holds(uncertain_design(hk.Stage("inverting"), 0.4, hk.Device()), 50_000)
    assert set(ideal.proof.values()) == {"corners"}


def test_wide_boxes_with_a_pull_up_and_a_load() -> None:
    stage = hk.Stage("non-inverting", output="open-collector", including=("R_L", "R_G"))
    parts = {name: wide(VALUES[name]) for name in stage.parts}
    design = hk.Design(stage, parts, supply=hk.Supply(5, tol=0.1), device=hk.Device(r_low=30))
    found = assert_holds(design, 300_000)
    assert found.proof["width"] == "control points"


def test_interior_feedback_resistor_beats_both_ends() -> None:
    design = interior_width()
    low, high = hk.spread(design).box.intervals["R_F"]
    found = assert_holds(design, 300_000)
    assert found.proof["width"] == "bisection"
    # The width over R_F alone: r ((e - v) / (F + p + r) + (v - o) / (F + r)), with v < o < e.
    r, p = 1 / (1 / 100e3 + 1 / 1e3), 10e3
    v, e, o = 5.0 * r / 100e3, 2.5, 0.7
    best = p / (np.sqrt((e - v) / (o - v)) - 1) - r
    assert low < best < high
    width = r * ((e - v) / (best + p + r) + (v - o) / (best + r))
    ends = hk.trip_points(design, R_F=[low, high]).width
    assert found.extremes["width"][1] == pytest.approx(width, rel=1e-9)
    assert found.extremes["width"][1] > 1.16 * ends.max()
    assert found.bounds["width"].at_highest["R_F"] == pytest.approx(best, rel=1e-3)


@given(
    seed=st.integers(0, 10_000),
    output=st.sampled_from(["push-pull", "open-collector"]),
    sense=st.sampled_from(["inverting", "non-inverting"]),
)
def test_any_wide_box_holds_its_samples(seed: int, output: str, sense: str) -> None:
    random = np.random.default_rng(seed)
    stage = full(hk.Stage(sense, reference="source", output=output))
    device = hk.Device(r_low=100, r_high=100, limits={"r_low": (10, 2000), "r_high": (10, 2000)})
    design = hk.Design(
        stage,
        {name: wide(10 ** random.uniform(3.5, 5.5)) for name in stage.parts},
        supply=5.0,
        levels={"V_REF": hk.Part(random.uniform(0.2, 4.5), tol=0.1)},
        device=device,
    )
    if hk.spread(design).switches:
        assert_holds(design, 2000, seed)


def test_the_signal_at_both_inputs() -> None:
    assert_holds(bridge(0.3), 200_000)
    # Farther apart, the two inputs follow the signal alike somewhere: no trip point there.
    lost = hk.spread(bridge(0.6))
    assert not lost.switches
    assert "no hysteresis" in lost.message or "not everywhere" in lost.message
    assert np.all(np.isnan([lost.extremes[kind] for kind in KINDS]))


def test_a_box_that_does_not_switch_everywhere_says_where() -> None:
    stage = hk.Stage("inverting", output="open-collector")
    design = hk.Design(
        stage,
        {"R_T": "46k4", "R_B": "26k7", "R_F": "100k", "R_PU": "4k7"},
        supply=5.0,
        levels={"V_PU": hk.Part(1.0, tol=0.9)},
        device=hk.Device(drop_low=0.3),
    )
    found = hk.spread(design)
    assert np.isnan(found.extremes["upper"][0])
    assert "V_PU = 100 mV" in found.message
    assert found.message in found.to_text()
    assert hk.spread(uncertain_design(stage)).message == ""


def test_no_tolerance_at_all() -> None:
    design = hk.Design(hk.Stage("inverting"), {n: VALUES[n] for n in ("R_T", "R_B", "R_F")},
                       supply=5.0)  # fmt: skip
    found, trips = hk.spread(design, samples=10), hk.trip_points(design)
    assert found.extremes["width"] == pytest.approx((trips.width, trips.width), rel=1e-12)
    assert found.rss["upper"] == 0
    assert np.all(found.samples["upper"] == trips.upper)


def test_too_many_resistances_are_named() -> None:
    ladder = [hk.Resistor(f"R_{n}", f"n{n}", f"n{n + 1}") for n in range(16)]
    stage = hk.Stage.custom(
        [
            *ladder,
            hk.Resistor("R_A", "signal", "n0"),
            hk.Wire("n16", "plus"),
            hk.Resistor("R_F", "out", "plus"),
            hk.Wire("ref", "minus"),
        ]
    )
    parts = {name: hk.Part("1k", tol=0.01) for name in stage.parts}
    design = hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5})
    assert hk.levels(design).upper_interval is None
    with pytest.raises(hk.DesignError, match=r"18 resistances with a tolerance: .*R_15") as caught:
        hk.spread(design).extremes  # noqa: B018
    assert "at most 16" in str(caught.value)


def test_bisection_states_the_gap_it_leaves(monkeypatch: pytest.MonkeyPatch) -> None:
    exact = hk.spread(interior_width()).extremes["width"]
    monkeypatch.setattr(bounds_module, "_MAX_BOXES", 5)
    design = interior_width()
    rough = bounds(design, hk.spread(design).box.intervals)["width"]
    assert rough.gap > 1e-6
    assert rough.interval[1] > exact[1]
    assert rough.interval[1] - rough.gap <= exact[1]

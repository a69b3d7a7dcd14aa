"""Exact intervals: no point of the box leaves them, and their ends are attained in corners."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest

import hystkit as hk
from hystkit.numeric.extremes import MAX_RESISTANCES, corners, not_evaluated, trip_intervals
from hystkit.numeric.tolerances import toleranced
from tests.circuit.custom import uncertain_chain
from tests.circuit.strategies import VARIANTS

VALUES = {"R_T": "33k", "R_B": "47k", "R_R": "10k", "R_I": "22k", "R_G": "150k", "R_F": "180k"}
VALUES |= {"R_S": "1k", "R_PU": "4k7", "R_L": "68k"}
#: The forms with the most parts.
FULL = [stage.with_options(*stage.optional) for stage in hk.Stage.all()]


def uncertain(stage: hk.Stage, tol: float = 0.1) -> hk.Design:
    """Tolerances at every part, level and rail, and limits at the device."""
    split = stage.supply == "split"
    levels = {"V_REF": hk.Part(2.0, tol), "V_PU": hk.Part(10.0, tol), "V_L": hk.Part(1.5, tol)}
    return hk.Design(
        stage,
        {name: hk.Part(VALUES[name], tol=tol) for name in stage.parts},
        supply=hk.Supply(12, -12 if split else None, tol=tol),
        device=hk.Device(
            offset=1e-3, r_low=30, limits={"offset": (-5e-3, 5e-3), "r_low": (10, 90)}
        ),
        levels={name: part for name, part in levels.items() if name in stage.levels},
    )


@pytest.mark.parametrize("stage", FULL, ids=lambda stage: stage.title)
def test_random_points_stay_inside(stage: hk.Stage) -> None:
    design = uncertain(stage)
    found = hk.levels(design)
    assert found.upper_interval is not None
    assert found.lower_interval is not None
    random = np.random.default_rng(7)
    count = 100_000 // len(FULL)
    box = toleranced(design)
    trips = hk.trip_points(design, **{n: random.uniform(*ends, count) for n, ends in box.items()})
    assert trips.ok.all()
    for kind, (low, high) in (("upper", found.upper_interval), ("lower", found.lower_interval)):
        values = getattr(trips, kind)
        assert low < values.min() <= values.max() < high
        # The box is not overstated: the interval's ends are trips of its corners.
        at_low, at_high = corners(design, box).at(kind)
        assert getattr(hk.trip_points(design, **at_low), kind) == pytest.approx(low, rel=1e-12)
        assert getattr(hk.trip_points(design, **at_high), kind) == pytest.approx(high, rel=1e-12)
        assert all(corner[n] in box[n] for corner in (at_low, at_high) for n in box)


@pytest.mark.parametrize("stage", VARIANTS[::13], ids=lambda stage: stage.title)
def test_the_intervals_are_those_of_all_corners(stage: hk.Stage) -> None:
    design = uncertain(stage)
    box = toleranced(design)
    if len(box) > 12:
        design = uncertain(stage.with_options())
        box = toleranced(design)
    every = np.array(list(product(*box.values()))).T
    trips = hk.trip_points(design, **dict(zip(box, every, strict=True)))
    intervals = trip_intervals(design)
    assert intervals is not None
    for (low, high), values in zip(intervals, (trips.upper, trips.lower), strict=True):
        assert [low, high] == pytest.approx([values.min(), values.max()])


def test_without_tolerances_there_is_no_interval() -> None:
    parts = {"R_T": "10k", "R_B": "10k", "R_F": "100k"}
    design = hk.Design(hk.Stage("inverting"), parts, supply=5)
    assert trip_intervals(design) is None
    found = hk.levels(design)
    assert found.upper_interval is found.lower_interval is None
    nominal = hk.levels(design.with_parts(R_T=hk.Part("10k", tol=1e-12)))
    assert nominal.upper_interval == pytest.approx((found.upper, found.upper))


def test_a_tolerance_of_one_level_moves_both_trips_by_its_share() -> None:
    stage = hk.Stage("inverting", reference="source")
    design = hk.Design(
        stage, {"R_R": "10k", "R_F": "90k"}, supply=5, levels={"V_REF": hk.Part(2.0, tol=0.05)}
    )
    found = hk.levels(design)
    assert found.upper_interval == pytest.approx((2.3 - 0.09, 2.3 + 0.09))
    assert found.lower_interval == pytest.approx((1.8 - 0.09, 1.8 + 0.09))


def test_a_corner_that_cannot_switch_leaves_no_interval() -> None:
    stage = hk.Stage("inverting", output="open-collector")
    parts = {"R_T": "10k", "R_B": "10k", "R_F": "100k", "R_PU": "1k"}
    design = hk.Design(stage, parts, supply=5, levels={"V_PU": hk.Part(1.0, tol=0.2), "V_OL": 0.9})
    intervals = trip_intervals(design)
    assert intervals is not None
    assert np.isnan(intervals).all()
    assert hk.levels(design).ok


def test_too_many_uncertain_resistances() -> None:
    design = uncertain_chain(MAX_RESISTANCES + 1)
    assert trip_intervals(design) is None
    assert hk.levels(design).not_evaluated == not_evaluated(design)
    assert "more than 16 uncertain resistances" in not_evaluated(design)
    with pytest.raises(hk.DesignError, match="too many uncertain resistances"):
        corners(design, toleranced(design))
    fewer = design.with_parts(R_T=hk.Part("10k"))
    assert trip_intervals(fewer) is not None
    assert not_evaluated(fewer) == hk.levels(fewer).not_evaluated == ""

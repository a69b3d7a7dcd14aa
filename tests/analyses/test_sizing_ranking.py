"""In which order candidates stand, against a count of units drawn by hand."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.analyses.sizing.ranking import COMPARED

STAGE = hk.Stage("inverting", output="open-collector")
DEVICE = hk.Device(drop_low=0.2, limits={"drop_low": (0.1, 0.3)})


def sized(half: float, upper: float = 2.7, lower: float = 2.3, **more: Any) -> hk.Sizing:
    windows = {"upper": (upper - half, upper + half), "lower": (lower - half, lower + half)}
    request: dict[str, Any] = {"supply": 5.0, "parts": {"R_PU": "4k7"}, "device": DEVICE,
                               "tol": 0.02, "series": "E24", "suggest": False}  # fmt: skip
    return hk.size(STAGE, **(request | windows | more))


def share_inside(candidate: hk.Candidate, rng: np.random.Generator, count: int = 200_000) -> float:
    """Share of units with normal parts, three standard deviations in the tolerance."""
    units: dict[str, Any] = {}
    for name, part in candidate.design.parts.items():
        drawn = rng.standard_normal(2 * count)
        drawn = drawn[abs(drawn) <= 3][:count]
        units[name] = part.value * (1 + part.tol * drawn / 3)
    drawn = rng.standard_normal(2 * count)
    units["drop_low"] = 0.2 + 0.1 * drawn[abs(drawn) <= 3][:count] / 3
    trips = hk.trip_points(candidate.design, **units)
    target = candidate.target
    inside = (trips.upper >= target.upper[0]) & (trips.upper <= target.upper[1])
    inside &= (trips.lower >= target.lower[0]) & (trips.lower <= target.lower[1])
    return float(inside.mean())


def test_where_a_window_is_left_the_best_yield_comes_first() -> None:
    asked: dict[str, Any] = {"half": 0.02, "upper": 2.9, "lower": 2.4}
    found = sized(**asked)
    assert not found.fits
    rng = np.random.default_rng(4)
    counted = [share_inside(candidate, rng) for candidate in found]
    assert np.all(np.diff(counted) < 3e-3)  # three standard deviations of a count
    assert counted[0] > counted[-1] + 0.05
    # The smallest excess in the worst case would put another one first, of lower yield.
    least = min(sized(**asked, count=COMPARED), key=lambda one: one.worst_error)
    assert share_inside(least, rng) < counted[0] - 0.1


def test_the_first_is_the_same_however_many_are_wanted() -> None:
    all_compared = sized(0.03, count=COMPARED)
    for count in (1, 3, 10):
        few = sized(0.03, count=count)
        assert len(few) == count
        assert [c.design for c in few] == [c.design for c in all_compared[:count]]


def test_what_holds_stands_in_front_by_its_error() -> None:
    found = sized(0.066, count=60)
    holding = [c.worst_error for c in found if c.holds]
    assert 0 < len(holding) < len(found)
    assert [c.holds for c in found] == sorted((c.holds for c in found), reverse=True)
    assert holding == sorted(holding)
    shares = [round(c.expected_yield.value, 4) for c in found if not c.holds]
    assert shares == sorted(shares, reverse=True)


def test_of_equal_yield_the_smaller_excess_comes_first() -> None:
    found = sized(0.05, count=COMPARED)
    full = [c.worst_error for c in found if round(c.expected_yield.value, 4) == 1.0]
    assert len(full) > 2
    assert full == sorted(full)
    assert [c.worst_error for c in found] != sorted(c.worst_error for c in found)


def test_forms_are_compared_by_yield_too() -> None:
    found = sized(0.02, count=20, parts={"R_PU": "4k7"})
    every = hk.size(supply=5.0, device=DEVICE, tol=0.02, series="E24", suggest=False, count=20,
                    parts={"R_PU": "4k7"}, upper=(2.68, 2.72), lower=(2.28, 2.32))  # fmt: skip
    shares = [round(c.expected_yield.value, 4) for c in every]
    assert shares == sorted(shares, reverse=True)
    assert len({c.design.stage.title for c in (*every, *found)}) > 1


def test_the_list_says_the_yield_where_a_window_is_left() -> None:
    row = sized(0.02).to_text().splitlines()[1]
    assert "leaves a window by" in row
    assert "; yield " in row
    assert "; yield " not in sized(0.2).to_text()


def test_wanted_numbers_stand_by_their_error() -> None:
    found = hk.size(STAGE, supply=5.0, upper=2.7, lower=2.3, series="E12", parts={"R_PU": "4k7"})
    errors = [c.error for c in found]
    assert errors == sorted(errors)
    with pytest.raises(hk.InputError):
        found[0].sampled_yield()

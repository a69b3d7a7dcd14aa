"""Control points enclose, meet the corners, and stay exact when a box is halved."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.numeric.control import ControlNet, control_net
from hystkit.numeric.fractions import fractions

PARTS = {"R_T": 46.4e3, "R_B": 26.7e3, "R_F": 100e3, "R_PU": 4.7e3, "R_L": 82e3}


def design() -> hk.Design:
    stage = hk.Stage("inverting", output="open-collector", including=("R_L",))
    return hk.Design(stage, PARTS, supply=5.0, device=hk.Device(drop_low=0.2, r_low=50))


def net(kind: str, box: dict[str, tuple[float, float]]) -> ControlNet:
    return control_net(fractions(design(), box)[kind], design(), box)


BOX = {
    "R_T": (30e3, 60e3),
    "R_F": (50e3, 200e3),
    "R_PU": (2e3, 9e3),
    "r_low": (0.0, 200.0),
    "V_CC": (4.0, 6.0),
    "drop_low": (0.1, 0.5),
}


@given(kind=st.sampled_from(["upper", "lower", "width", "middle"]), seed=st.integers(0, 1000))
def test_no_value_lies_outside(kind: str, seed: int) -> None:
    random = np.random.default_rng(seed)
    drawn = {name: random.uniform(*ends, 200) for name, ends in BOX.items()}
    found = getattr(hk.trip_points(design(), **drawn), kind)
    over, under = net(kind, BOX), net(kind, BOX).mirrored()
    assert found.max() <= over.bound + 1e-12
    assert found.min() >= -under.bound - 1e-12


@pytest.mark.parametrize("kind", ["upper", "lower", "width", "middle"])
def test_corners_are_values_of_the_law(kind: str) -> None:
    found = net(kind, BOX)
    assert set(found.best_at) <= set(BOX)
    trips = hk.trip_points(design(), **found.best_at)
    assert getattr(trips, kind) == pytest.approx(found.best, rel=1e-12)


def test_halves_are_the_nets_of_the_half_boxes() -> None:
    whole = net("width", BOX)
    axis = whole.resistances.index("R_F")
    for half, ends in zip(whole.halved(axis), ((50e3, 125e3), (125e3, 200e3)), strict=True):
        fresh = net("width", {**BOX, "R_F": ends})
        assert half.intervals == fresh.intervals
        assert half.above / fresh.above.flat[0] == pytest.approx(
            fresh.above / fresh.above.flat[0], rel=1e-9
        )
        assert half.highest == pytest.approx(fresh.highest, rel=1e-9)
        assert half.bound <= whole.bound + 1e-12


def test_a_smaller_box_is_bounded_more_closely() -> None:
    def excess(share: float) -> float:
        box = {n: (v * (1 - share), v * (1 + share)) for n, v in PARTS.items()}
        found = net("middle", box)
        inner = found.highest[(1,) * found.highest.ndim]
        nominal = float(hk.trip_points(design()).middle)
        return abs(float(inner) - nominal)

    # The error falls with the square of the size.
    assert excess(0.02) / excess(0.01) == pytest.approx(4, rel=0.1)


def test_a_vanishing_denominator_has_no_bound() -> None:
    whole = net("width", BOX)
    broken = ControlNet(
        whole.resistances,
        whole.sources,
        whole.intervals,
        whole.middles,
        whole.halves,
        whole.above,
        whole.below - whole.below.mean(),
    )
    assert broken.bound == np.inf
    assert 0 <= broken.axis_to_halve() < len(broken.intervals)

"""The vectorised switch against a loop over the samples."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

import hystkit as hk
from hystkit.numeric import switching

LEVELS = st.sampled_from([-2.0, -1.0, -0.5, 0.0, 0.5, 1.0, 2.0, np.nan])
ROWS = hnp.array_shapes(min_dims=1, max_dims=3, min_side=1, max_side=12)


def looped(samples: Any, upper: Any, lower: Any, start: bool) -> list[bool]:
    """What a person would write."""
    state, found = start, []
    for sample, above, below in zip(samples, upper, lower, strict=True):
        if sample > above:
            state = True
        elif sample < below:
            state = False
        found.append(state)
    return found


@given(data=st.data(), shape=ROWS)
def test_equals_a_loop(data: st.DataObject, shape: tuple[int, ...]) -> None:
    samples = data.draw(hnp.arrays(float, shape, elements=LEVELS))
    ends = data.draw(hnp.arrays(float, (2, *shape), elements=st.sampled_from([-1.0, 0.0, 0.5])))
    lower, upper = np.sort(ends, axis=0)
    start = data.draw(hnp.arrays(bool, shape[:-1]))
    found = hk.simulate_switch(samples, upper, lower, start)
    assert found.shape == shape
    assert found.dtype == bool
    for row in np.ndindex(shape[:-1]):
        expected = looped(samples[row], upper[row], lower[row], bool(start[row]))
        assert found[row].tolist() == expected


@settings(max_examples=20)
@given(seed=st.integers(0, 2**32 - 1), width=st.floats(0.1, 6))
def test_blocks_carry_the_state_on(seed: int, width: float) -> None:
    """Longer than a block, in which a wide band is not left."""
    samples = np.random.default_rng(seed).standard_normal((2, 70_001))
    found = hk.simulate_switch(samples, width / 2, -width / 2, start=True)
    trips = np.broadcast_to(width / 2, 70_001)
    for row in range(2):
        assert found[row].tolist() == looped(samples[row].tolist(), trips, -trips, True)


def test_many_short_records() -> None:
    samples = np.random.default_rng(1).standard_normal((3000, 700))
    found = hk.simulate_switch(samples, 1.0, -1.0, start=False)
    for row in (0, 1234, 2999):
        expected = looped(samples[row].tolist(), [1.0] * 700, [-1.0] * 700, False)
        assert found[row].tolist() == expected


def test_trip_points_that_move_or_differ() -> None:
    time = np.linspace(0, 1, 101)
    falling = hk.simulate_switch(np.full(101, 0.5), 1 - time, -time, start=False)
    assert falling.tolist() == (1 - time < 0.5).tolist()
    each = hk.simulate_switch(np.sin(20 * time), np.array([[0.5], [2.0]]), -0.5, start=False)
    assert each.shape == (2, 101)
    assert each[0].any()
    assert not each[1].any()


@pytest.mark.parametrize(("first", "state"), [(0.6, True), (0.4, False), (1.5, True), (-1, False)])
def test_without_a_start_the_nearer_trip_point_decides(first: float, state: bool) -> None:
    assert hk.simulate_switch([first, 0.5], 1.0, 0.0).tolist() == [state, state]


def test_on_a_trip_point_the_state_stays() -> None:
    assert hk.simulate_switch([1.0, 1.1, 0.0, -0.1], 1.0, 0.0, start=False).tolist() == [
        False, True, True, False,
    ]  # fmt: skip


def test_trip_points_as_text() -> None:
    assert hk.simulate_switch([0.0, 0.6, 0.3], "500 mV", ["0", "200m", 0.4]).tolist() == [
        False, True, False,
    ]  # fmt: skip


def test_nothing_and_memory() -> None:
    assert hk.simulate_switch(np.empty((3, 0)), 1, 0).shape == (3, 0)
    # A mark holds the place in its block and the state.
    assert np.iinfo(np.uint16).max >= 2 * switching._LONGEST + 1


@pytest.mark.parametrize(
    ("arguments", "text"),
    [
        (([0.0], 0.0, 1.0), "the upper trip point is below the lower one."),
        ((0.0, 1.0, 0.0), "samples is a single number."),
        (([0.0, 1.0], [1.0, 1.0, 1.0], 0.0), "the shapes of a simulation do not fit."),
        (([0.0, 1.0], 1.0, 0.0, [True, False]), "the shapes of a simulation do not fit."),
        (("abc", "1 A", 0.0), "2 faults in this simulation:"),
        (([0.0], 1.0, 0.0, "low"), "start is not True or False."),
    ],
)
def test_refusals(arguments: Any, text: str) -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.simulate_switch(*arguments)
    assert str(caught.value).splitlines()[0] == text

"""A noisy ramp through a band: every formula against a simulation of the same process."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from scipy.stats import binomtest

import hystkit as hk
from hystkit.analyses.noise.chatter import Validity
from tests.analyses.noise_process import (
    BRICK_WALL,
    EQUAL_POLES,
    POLES_APART,
    POLES_FAR_APART,
    POLES_FARTHEST_APART,
    THIRD_ORDER,
    Filtered,
    Process,
    Ramps,
    ramps,
)

WIDTHS = (1.0, 2.0, 3.0, 4.0, 5.0, 6.0)
# What is promised: formula over simulation.
OPTIMISTIC, CONSERVATIVE = 1 / 1.15, 2.5
# Fewer than this are no count.
EVENTS = 40
# Process and crossings of the mean while the ramp rises by the rms.
CASES = [
    (BRICK_WALL, 1), (BRICK_WALL, 3), (BRICK_WALL, 10), (BRICK_WALL, 100), (BRICK_WALL, 1000),
    (EQUAL_POLES, 1), (EQUAL_POLES, 10), (EQUAL_POLES, 100), (EQUAL_POLES, 1000),
    (POLES_APART, 1), (POLES_APART, 10), (POLES_APART, 100),
    (POLES_FAR_APART, 3), (POLES_FAR_APART, 30), (POLES_FARTHEST_APART, 30),
    (THIRD_ORDER, 2), (THIRD_ORDER, 30),
]  # fmt: skip


def named(case: tuple[Process, float]) -> str:
    process, crossings = case
    kind = "brick wall" if process.ratio is None else f"poles 1:{process.ratio:g}"
    if isinstance(process, Filtered):
        kind = f"order {process.order}"
    return f"{kind}, {crossings} crossings"


@cache
def simulated(process: Process, crossings: float) -> Ramps:
    # Slow noise needs long passages, and so more samples for as many of them.
    samples = 4e7 if process is POLES_FARTHEST_APART else 1e7
    return ramps(process, crossings, WIDTHS, samples, seed=20)


@pytest.fixture(params=CASES, ids=named)
def case(request: pytest.FixtureRequest) -> tuple[Process, float]:
    found: tuple[Process, float] = request.param
    return found


def test_probability_and_extra_cycles(case: tuple[Process, float]) -> None:
    process, crossings = case
    found = hk.chatter(WIDTHS, process.noise, 1 / crossings)
    assert found.inside_range.sum() >= 4
    compared = 0
    for place, width in enumerate(WIDTHS):
        counted = simulated(process, crossings).by_width[width]
        few = counted.chattering < min(EVENTS, counted.passages)
        if few or not found.inside_range[place]:
            continue
        compared += 1
        # The promise may fail by no more than chance explains, at 99.9 % confidence.
        test = binomtest(counted.chattering, counted.passages)
        low, high = test.proportion_ci(0.999, "exact")
        assert OPTIMISTIC * low < found.probability[place] < CONSERVATIVE * high, width
        low, high = (counted.extra_cycles + z * counted.extra_error for z in (-3.3, 3.3))
        assert OPTIMISTIC * low < found.extra_cycles[place] < CONSERVATIVE * high, width
    assert compared >= 3


def test_chance_leaves_little_room(case: tuple[Process, float]) -> None:
    """The intervals themselves are narrow, so that the comparison above says something."""
    sure = [
        binomtest(c.chattering, c.passages).proportion_ci(0.999, "exact")
        for c in simulated(*case).by_width.values()
        if c.chattering >= 1000
    ]
    assert all(high / low < 1.25 for low, high in sure)


def test_first_transition(case: tuple[Process, float]) -> None:
    process, crossings = case
    first = simulated(process, crossings).first
    found = hk.chatter(3.0, process.noise, 1 / crossings)
    error = 3.3 * first.std() / np.sqrt(first.size)
    assert found.early_shift == pytest.approx(-first.mean(), rel=0.15, abs=error)
    spread = 3.3 / np.sqrt(2 * first.size)
    assert OPTIMISTIC * (1 - spread) < found.jitter / first.std() < 1.4 * (1 + spread)
    assert found.jitter_time == pytest.approx(found.jitter * crossings)


def test_wide_bands_on_slow_ramps() -> None:
    """Where widths are usually chosen: some extra cycles in a thousand passages."""
    for crossings, width, samples in ((10, 6.6, 3e7), (1e3, 7.0, 1.2e7), (1e4, 7.5, 2e7)):
        counted = ramps(BRICK_WALL, crossings, (width,), samples, seed=3).by_width[width]
        found = hk.chatter(width, BRICK_WALL.noise, 1 / crossings)
        assert found.inside_range
        assert counted.chattering >= 10
        low, high = binomtest(counted.chattering, counted.passages).proportion_ci(0.999, "exact")
        assert OPTIMISTIC * low < found.probability < CONSERVATIVE * high


def test_extra_cycles_of_a_slow_ramp_are_those_of_a_signal_that_stands() -> None:
    """In the limit the ramp passes all places of the band one after the other."""
    for process in (BRICK_WALL, POLES_APART):
        places = np.linspace(-8, 8, 4001)
        for width in (1.0, 3.0, 6.0):
            rate = hk.standing_cycles(places, width - places, process.noise)
            expected = np.trapezoid(rate, places)
            slow = hk.chatter(width, process.noise, 1e-4).extra_cycles * 1e-4
            # Before the first transition nothing returns: all but a share is there.
            assert slow == pytest.approx(expected, rel=0.08), width


def test_all_goes_down_with_the_width_and_up_with_time() -> None:
    widths, crossings = np.linspace(0.5, 12, 60)[:, None], np.geomspace(1, 1e5, 26)
    for process in (BRICK_WALL, EQUAL_POLES, POLES_FAR_APART):
        found = hk.chatter(widths, process.noise, 1 / crossings)
        assert np.all(np.diff(found.probability, axis=0) <= 1e-12)
        assert np.all(np.diff(found.extra_cycles, axis=0) <= 0)
        assert np.all(np.diff(found.probability, axis=1) >= -1e-3 * found.probability[:, :-1])
        assert np.all(np.diff(found.early_shift, axis=1) > 0)
        assert np.all((found.probability >= 0) & (found.probability <= 1))
        # Each chattering passage has an extra cycle at least; the two are summed in different ways.
        assert np.all(found.probability <= found.extra_cycles * 1.08)


def test_units_scale() -> None:
    small = hk.Noise.two_pole(rms="2m", f1="1k", f2="30k")
    large = hk.Noise.two_pole(rms=2.0, f1=1.0, f2=30.0)
    a, b = hk.chatter("8m", small, "1 V/s"), hk.chatter(8.0, large, 1.0)
    assert a.probability == pytest.approx(b.probability, rel=1e-9)
    assert a.extra_cycles == pytest.approx(b.extra_cycles, rel=1e-9)
    assert a.early_shift * 1e3 == pytest.approx(b.early_shift, rel=1e-9)
    assert a.jitter * 1e3 == pytest.approx(b.jitter, rel=1e-9)
    assert hk.chatter("8m", small, "-1 V/s").probability == a.probability


def test_an_array_is_its_elements() -> None:
    noise = EQUAL_POLES.noise
    widths, slopes = np.linspace(1, 7, 70)[:, None], np.array([1.0, 0.1, 0.003])
    found = hk.chatter(widths, noise, slopes)
    assert found.probability.shape == (70, 3)
    for i, j in ((0, 0), (13, 2), (64, 1), (69, 2)):
        one = hk.chatter(float(widths[i, 0]), noise, float(slopes[j]))
        assert isinstance(one.probability, float)
        for name in ("probability", "extra_cycles", "early_shift", "jitter", "status"):
            assert getattr(found, name)[i, j] == pytest.approx(getattr(one, name), rel=1e-9)


def test_an_impossible_element_stops_nothing() -> None:
    found = hk.chatter([3.0, -1.0, np.nan, np.inf, 2.0], BRICK_WALL.noise, [0.1, 0.1, 0.1, 1, 0.0])
    bad = [False, True, True, True, True]
    assert list(np.isnan(found.probability)) == bad
    assert list(found.status == Validity.IMPOSSIBLE) == bad
    assert list(found.inside_range) == [not one for one in bad]
    assert hk.chatter(np.empty(0), BRICK_WALL.noise, 1.0).probability.shape == (0,)
    assert "1 inside the range" in found.to_text()


def test_a_band_that_no_noise_crosses_has_no_chance_at_all() -> None:
    found = hk.chatter(1.0, hk.Noise.two_pole(rms="1m", f1="1k", f2="1M"), "1 V/s")
    # Not minus zero, which a report would show.
    assert str(found.probability) == "0.0"


@pytest.mark.parametrize(
    ("width", "noise", "slope", "validity"),
    [
        (3.0, BRICK_WALL.noise, 0.1, Validity.INSIDE),
        (0.5, BRICK_WALL.noise, 0.1, Validity.NARROW),
        (9.0, BRICK_WALL.noise, 0.1, Validity.RARE),
        (3.0, BRICK_WALL.noise, 1.5, Validity.FAST),
        (3.0, BRICK_WALL.noise, 1e-6, Validity.SLOW),
        (3.0, POLES_FAR_APART.noise, 0.9, Validity.CORRELATED),
        (3.0 * 0.447, hk.Noise.from_density([0.9, 1.1], [1.0, 1.0]), 0.01, Validity.RESONANT),
    ],
)
def test_what_lies_outside_says_so(
    width: float, noise: hk.Noise, slope: float, validity: Validity
) -> None:
    found = hk.chatter(width, noise, slope)
    assert found.status == validity
    assert found.inside_range is (validity is Validity.INSIDE)
    assert found.note == validity.message
    assert found.note in found.to_text()


@pytest.mark.parametrize(
    ("arguments", "text"),
    [
        ((-1, BRICK_WALL.noise, 1), "width is negative."),
        ((1, BRICK_WALL.noise, 0), "the signal does not pass the band."),
        ((1, "noise", 1), "noise is not a Noise."),
        (("wide", 1.0, "0 V/s"), "3 faults in this passage:"),
        (([1, 2], BRICK_WALL.noise, [1, 2, 3]), "these arrays do not broadcast."),
        ((["a"], BRICK_WALL.noise, 1), "width is not a number."),
        (([None], BRICK_WALL.noise, 1), "width is not a number or an array of numbers [V]."),
    ],
)
def test_refusals(arguments: tuple[object, object, object], text: str) -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.chatter(*arguments)  # type: ignore[arg-type]
    assert str(caught.value).splitlines()[0] == text

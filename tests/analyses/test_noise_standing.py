"""A standing signal with noise, hum on a ramp, and the widths found for them."""

from __future__ import annotations

from math import sqrt
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from tests.analyses.noise_process import (
    BRICK_WALL,
    EQUAL_POLES,
    POLES_APART,
    POLES_FAR_APART,
    POLES_FARTHEST_APART,
    Process,
)

PROCESSES = [BRICK_WALL, EQUAL_POLES, POLES_APART, POLES_FAR_APART]
OPTIMISTIC, CONSERVATIVE = 1 / 1.15, 2.5
RECORDS, SAMPLES = 12, 1 << 20
SHARES = (0.5, 0.3, 0.0, -0.2)
# Counts come in bursts where poles lie far apart: their variance is below so many times the count.
BURSTS = 20.0
# Fewer than this are no count.
EVENTS = 40


@pytest.fixture(
    scope="module", params=[*PROCESSES, POLES_FARTHEST_APART], ids=lambda p: f"poles {p.ratio}"
)
def standing(request: pytest.FixtureRequest) -> tuple[Process, Any]:
    process: Process = request.param
    return process, process.records(RECORDS, SAMPLES, np.random.default_rng(8))


def compare(rate: float, count: int, seconds: float) -> None:
    error = 3.3 * sqrt(BURSTS * count)
    assert OPTIMISTIC * (count - error) < rate * seconds < CONSERVATIVE * (count + error)


def test_false_trips_outside_the_band(standing: tuple[Process, Any]) -> None:
    process, record = standing
    seconds = record.size / process.per_crossing
    for distance in (0.0, 1.0, 2.0, 3.0, 3.5):
        above = record > distance
        count = int(np.count_nonzero(above[:, 1:] & ~above[:, :-1]))
        rate = hk.false_trip_rate(distance, process.noise)
        compare(rate, count, seconds)
        # Rice's formula is exact; the samples miss up to 5 % of the crossings.
        error = 3.3 * sqrt(BURSTS * count)
        assert 0.93 * rate * seconds - error < count < 1.02 * rate * seconds + error


@pytest.mark.parametrize("width", [1.0, 2.0, 3.0, 4.0, 5.0, 6.0])
def test_full_cycles(standing: tuple[Process, Any], width: float) -> None:
    process, record = standing
    for share in SHARES:
        up, down = share * width, (1 - share) * width
        # From the second transition on, the state does not depend on how the record began.
        high = hk.simulate_switch(record, up, -down)
        count = int(np.count_nonzero(high[:, 1:] & ~high[:, :-1]))
        rate = hk.standing_cycles(up, down, process.noise)
        if count >= EVENTS:
            compare(rate, count, record.size / process.per_crossing)
        assert rate <= hk.false_trip_rate(max(up, 0), process.noise) * 1.001


@pytest.mark.parametrize("process", PROCESSES)
def test_cycles_far_inside_a_band_are_those_of_both_rates(process: Process) -> None:
    """r_u r_d / (r_u + r_d) with Rice's rates, where crossings do not come in bursts."""
    for up, down in ((5.0, 6.0), (6.0, 6.0), (7.0, 5.5)):
        both = [hk.false_trip_rate(d, process.noise) for d in (up, down)]
        plain = both[0] * both[1] / sum(both)
        found = hk.standing_cycles(up, down, process.noise)
        bursts = 0.4 if process is POLES_FAR_APART else 0.85
        assert bursts * plain < found < plain * 1.01


def test_without_a_width_every_crossing_is_a_cycle() -> None:
    noise = BRICK_WALL.noise
    for level in (0.0, 1.0, 2.0):
        crossing = hk.false_trip_rate(level, noise)
        found = hk.standing_cycles(level + 1e-6, -level, noise)
        assert crossing * 0.999 < found < 2 * crossing
    assert hk.standing_cycles(1e-6, 0.0, noise) == pytest.approx(noise.crossing_rate, rel=1e-3)


def test_cycles_are_mirrored_and_broadcast() -> None:
    noise = POLES_APART.noise
    up, down = np.array([[0.5], [2.0]]), np.array([1.0, 3.0, 4.0])
    found = hk.standing_cycles(up, down, noise)
    assert found.shape == (2, 3)
    assert found == pytest.approx(hk.standing_cycles(down, up, noise))
    assert np.isnan(hk.standing_cycles([1.0, -2.0], [-1.0, 1.0], noise)).all()


@pytest.mark.parametrize("process", PROCESSES)
@pytest.mark.parametrize("crossings", [1.0, 30.0, 1e4])
def test_width_for_undoes_chatter(process: Process, crossings: float) -> None:
    slope = np.array([[1.0], [2.0]]) / crossings
    for name in ("probability", "extra_cycles"):
        goals: Any = np.array([1e-6, 1e-3, 0.1])
        widths = hk.width_for(**{name: goals}, noise=process.noise, slope=slope)
        assert widths.shape == (2, 3)
        assert np.all(np.diff(widths, axis=1) < 0)
        back = getattr(hk.chatter(widths, process.noise, slope), name)
        assert back == pytest.approx(np.broadcast_to(goals, back.shape), rel=1e-5)
    one = hk.width_for(probability=1e-3, noise=process.noise, slope=1 / crossings)
    assert isinstance(one, float)
    assert hk.chatter(one, process.noise, 1 / crossings).probability == pytest.approx(1e-3, 1e-5)


@pytest.mark.parametrize("process", PROCESSES)
def test_width_for_an_interval_holds_anywhere_in_the_band(process: Process) -> None:
    times = np.array([1e2, 1e5, 1e9])
    widths = hk.width_for(interval=times, noise=process.noise)
    places = np.linspace(-0.2, 1.2, 141)[:, None]
    rates = hk.standing_cycles(places * widths, (1 - places) * widths, process.noise)
    assert rates.max(axis=0) == pytest.approx(1 / times, rel=1e-5)
    assert rates.argmax(axis=0) == pytest.approx(70)


@given(time=st.floats(1e-3, 1e12), rms=st.floats(1e-6, 1e2))
def test_distance_for_undoes_the_rate(time: float, rms: float) -> None:
    noise = hk.Noise.brick_wall(rms=rms, bandwidth="1k")
    distance = hk.distance_for(time, noise)
    if noise.crossing_rate * time <= 1:
        assert distance == 0
    else:
        assert hk.false_trip_rate(distance, noise) * time == pytest.approx(1, rel=1e-6)


def test_no_width_is_needed_where_nothing_happens() -> None:
    noise = BRICK_WALL.noise
    assert hk.width_for(probability=0.999, noise=noise, slope=50.0) == 0
    assert hk.width_for(interval=0.1, noise=noise) == 0
    found = hk.width_for(probability=[1e-3, 2.0, -1.0], noise=noise, slope=0.1)
    assert list(np.isnan(found)) == [False, True, True]


def turned_back(amplitude: float, frequency: float, slope: float) -> float:
    """Largest fall-back of hum on a ramp, on a fine grid of time."""
    time = np.linspace(0, 3 / frequency, 300_001)
    signal = slope * time + amplitude * np.sin(2 * np.pi * frequency * time)
    return float(np.max(np.maximum.accumulate(signal) - signal))


@given(amplitude=st.floats(1e-3, 10), frequency=st.floats(0.1, 1e4), share=st.floats(0.001, 1.3))
def test_hum_width_is_the_largest_fall_back(
    amplitude: float, frequency: float, share: float
) -> None:
    slope = share * 2 * np.pi * frequency * amplitude
    expected = turned_back(amplitude, frequency, slope)
    found = hk.hum_width(amplitude, frequency, slope)
    assert found == pytest.approx(expected, rel=1e-3, abs=1e-8 * amplitude)
    assert hk.hum_width(amplitude, frequency, -slope) == found


def test_hum_switches_once_from_this_width_on() -> None:
    time = np.linspace(-0.2, 0.2, 400_001)
    need = hk.hum_width("30m", 100, 0.8)
    for phase in np.linspace(0, 2 * np.pi, 25):
        signal = 0.8 * time + 0.03 * np.sin(2 * np.pi * 100 * time + phase)
        wide = hk.simulate_switch(signal, 0.0, -need * 1.001, start=False)
        assert np.count_nonzero(np.diff(wide)) == 1
    # A little less, and there is a phase at which it switches more than once.
    crest = np.arccos(-0.8 / (0.03 * 2 * np.pi * 100))
    at = crest / (2 * np.pi * 100)
    signal = 0.8 * time + 0.03 * np.sin(2 * np.pi * 100 * time)
    top = 0.8 * at + 0.03 * np.sin(crest)
    narrow = hk.simulate_switch(signal, top - 1e-6, top - need * 0.999, start=False)
    assert np.count_nonzero(np.diff(narrow)) > 1


def test_hum_in_arrays() -> None:
    found = hk.hum_width([[0.03], [0.0]], 100, [0.0, 0.8, 50.0])
    assert found.shape == (2, 3)
    assert found[0, 0] == pytest.approx(0.06)
    assert found[0, 2] == 0
    assert np.all(found[1] == 0)
    assert np.isnan(hk.hum_width([-1.0, 1.0], 100, 1.0)).tolist() == [True, False]


NOISE = BRICK_WALL.noise


@pytest.mark.parametrize(
    ("call", "error", "text"),
    [
        (lambda: hk.false_trip_rate(-1, NOISE), hk.InputError, "distance is negative."),
        (lambda: hk.false_trip_rate("x", 3), hk.InputError, "2 faults in this rate:"),
        (lambda: hk.standing_cycles(1, -1, NOISE), hk.InputError,
         "the upper trip is not above the lower one."),
        (lambda: hk.hum_width(-1, -1, "x"), hk.InputError, "3 faults in this hum:"),
        (lambda: hk.width_for(noise=NOISE, slope=1), hk.InputError,
         "a width is found for one goal."),
        (lambda: hk.width_for(probability=0.1, interval=3, noise=NOISE), hk.InputError,
         "2 faults in this width:"),
        (lambda: hk.width_for(probability=0.1, noise=NOISE), hk.InputError,
         "the slope of the signal is missing."),
        (lambda: hk.width_for(probability=1.5, noise=NOISE, slope=1), hk.InputError,
         "this probability is always met."),
        (lambda: hk.width_for(interval=3, noise=NOISE, slope=1), hk.InputError,
         "slope is not needed with interval."),
        (lambda: hk.width_for(interval=1e300, noise=NOISE), hk.InfeasibleWidthError,
         "no width is known to keep noise that quiet."),
        (lambda: hk.distance_for(0, NOISE), hk.InputError, "interval is not positive."),
    ],
)  # fmt: skip
def test_refusals(call: Any, error: type[Exception], text: str) -> None:
    with pytest.raises(error) as caught:
        call()
    assert str(caught.value).splitlines()[0] == text

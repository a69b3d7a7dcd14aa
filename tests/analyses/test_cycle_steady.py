"""The steady cycle against closed forms, exact identities and symmetries."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy import exp, log
from scipy.optimize import brentq, fsolve

import hystkit as hk
from hystkit.analyses.cycle import CycleStatus
from hystkit.analyses.cycle.question import closed, turn


@dataclass(frozen=True)
class Case:
    """A heating load on two lags, or one; the trips lie between both levels."""

    tau: float
    ratio: float
    middle: float
    share: float
    dead_on: float
    dead_off: float

    @property
    def trips(self) -> tuple[float, float]:
        half = self.share * min(self.middle, 1 - self.middle)
        return self.middle - half, self.middle + half

    def plant(self, kind: str = "two lags") -> Any:
        dead = (self.dead_on * self.tau, self.dead_off * self.tau)
        if kind == "one lag":
            return hk.FirstOrder(self.tau, 1.0, 0.0, dead)
        return hk.TwoLag(self.tau, self.tau * self.ratio, 1.0, 0.0, dead)


cases = st.builds(
    Case,
    tau=st.sampled_from([0.01, 1.0, 1800.0]),
    ratio=st.one_of(st.just(1.0), st.floats(-3, 3).map(lambda p: 10.0**p)),
    middle=st.floats(0.05, 0.95),
    share=st.floats(1e-3, 0.95),
    dead_on=st.sampled_from([0.0, 1e-3, 0.1, 3.0]),
    dead_off=st.sampled_from([0.0, 1e-3, 0.1, 3.0]),
)
kinds = st.sampled_from(["one lag", "two lags"])


def steady(plant: Any, trips: tuple[Any, Any], **times: Any) -> hk.Cycle:
    return hk.steady_cycle(plant, on_at=trips[0], off_at=trips[1], **times)


# ----- closed forms ---------------------------------------------------------------------------


@settings(max_examples=100, deadline=None)
@given(cases)
def test_one_lag_is_the_closed_form(case: Case) -> None:
    """Exponential charging between the trips, each overshot during the dead time."""
    (a, b), tau = case.trips, case.tau
    dead_on, dead_off = case.dead_on * tau, case.dead_off * tau
    high = 1 - (1 - b) * exp(-dead_off / tau)
    low = a * exp(-dead_on / tau)
    found = steady(case.plant("one lag"), case.trips)
    assert (found.low, found.high) == pytest.approx((low, high), rel=1e-13)
    assert found.on_time == pytest.approx(dead_on + tau * log((1 - low) / (1 - b)), rel=1e-9)
    assert found.off_time == pytest.approx(dead_off + tau * log(high / a), rel=1e-9)


def test_two_lags_against_partial_fractions() -> None:
    """Periodic response of two lags by residues, solved by scipy's fsolve."""
    tau, sensor, dead, y1, y0, a, b = 1800.0, 120.0, 30.0, 110.0, 20.0, 58.0, 62.0
    lags = np.array([tau, sensor])
    shares = np.array([tau, -sensor]) / (tau - sensor)

    def misses(times: Any) -> Any:
        on, off = times
        z = (1 - exp(-on / lags)) / (1 - exp(-(on + off) / lags))
        w = z * exp(-off / lags)
        at_off = y0 + (y1 - y0) * shares @ (1 - (1 - w) * exp(-(on - dead) / lags))
        at_on = y0 + (y1 - y0) * shares @ (z * exp(-(off - dead) / lags))
        return at_off - b, at_on - a

    on, off = fsolve(misses, (400.0, 400.0), xtol=1e-13)
    found = steady(hk.TwoLag(tau, sensor, y1, y0, dead), (a, b))
    assert (found.on_time, found.off_time) == pytest.approx((on, off), rel=1e-10)
    # Worked by hand before: 386.6 s on, 477.0 s off, 55.0 to 65.6.
    assert (on, off) == pytest.approx((386.6, 477.0), abs=0.05)
    assert (found.low, found.high) == pytest.approx((55.0, 65.6), abs=0.05)
    top = (1 - exp(-on / tau)) / (1 - exp(-(on + off) / tau))
    assert found.high == pytest.approx(y0 + (y1 - y0) * top, rel=1e-10)


def test_vaccine_fridge() -> None:
    """Own scenario, recomputed by simulation before: 1278 s on, 1216 s off, 3.3 to 6.7."""
    plant = hk.TwoLag(tau=7200, sensor_tau=240, on_level=-14, off_level=25, dead_time=30)
    found = steady(plant, (6, 4))
    assert (found.on_time, found.off_time) == pytest.approx((1278, 1216), abs=0.5)
    assert (found.low, found.high) == pytest.approx((3.3, 6.7), abs=0.05)
    assert not found.heating


@pytest.mark.parametrize("dead", [0.0, 2.0, (0.5, 7.0)])
def test_integrator_is_the_closed_form(dead: Any) -> None:
    """Triangles: each trip is overshot by rate times dead time, and then made up for."""
    on, off = dead if isinstance(dead, tuple) else (dead, dead)
    found = steady(hk.Integrating(0.4, -0.1, dead), (1.0, 3.0))
    high, low = 3.0 + 0.4 * off, 1.0 - 0.1 * on
    assert (found.low, found.high) == pytest.approx((low, high), rel=1e-13)
    assert found.on_time == pytest.approx(on + (3.0 - low) / 0.4, rel=1e-13)
    assert found.off_time == pytest.approx(off + (high - 1.0) / 0.1, rel=1e-13)
    assert found.mean == pytest.approx((low + high) / 2, rel=1e-12)


def test_integrator_period_in_one_formula() -> None:
    """P = (H + L (r1 + r2)) (1/r1 + 1/r2), from the same triangles."""
    found = steady(hk.Integrating(0.4, -0.1, 5.0), (1.0, 3.0))
    assert found.period == pytest.approx((2.0 + 5.0 * 0.5) * (1 / 0.4 + 1 / 0.1), rel=1e-13)


# ----- exact identities -----------------------------------------------------------------------


@settings(max_examples=100, deadline=None)
@given(cases, kinds)
def test_duty_follows_from_the_mean(case: Case, kind: str) -> None:
    """The mean of x' over a period is zero, so that the mean input gives the mean value."""
    found = steady(case.plant(kind), case.trips)
    acting = found.on_time + (case.dead_off - case.dead_on) * case.tau
    assert acting / found.period == pytest.approx(found.mean, rel=1e-9)
    if case.dead_on == case.dead_off:
        assert found.duty == pytest.approx(found.mean, rel=1e-9)


@settings(max_examples=100, deadline=None)
@given(cases, kinds)
def test_sensed_values_at_the_commands_are_the_trips(case: Case, kind: str) -> None:
    """Follow one turn with the plant's own motion, which test_cycle_plants.py verifies."""
    plant, (a, b) = case.plant(kind), case.trips
    found = steady(plant, case.trips)
    dynamics = plant.dynamics
    on_phase = found.on_time - (case.dead_on - case.dead_off) * case.tau
    x = np.full(dynamics.order, 0.5)
    for _ in range(3):
        x = rest_of_a_turn(dynamics, x, on_phase, found.period - on_phase)
    before = dynamics.advance(x, True, max(on_phase - case.dead_off * case.tau, 0.0))
    assert dynamics.sensed_of(before) == pytest.approx(b, rel=1e-7)
    high = dynamics.advance(x, True, on_phase)
    fall = found.period - on_phase - case.dead_on * case.tau
    assert dynamics.sensed_of(dynamics.advance(high, False, fall)) == pytest.approx(a, rel=1e-7)
    assert found.on_time >= case.dead_on * case.tau
    assert found.off_time >= case.dead_off * case.tau
    assert found.sensed_low <= a * (1 + 1e-12)
    assert found.sensed_high >= b * (1 - 1e-12)


def rest_of_a_turn(dynamics: Any, x: Any, on: float, off: float) -> Any:
    """The state at the beginning of an on phase that returns to itself, as a linear equation."""

    def once(y: Any) -> Any:
        return dynamics.advance(dynamics.advance(y, True, on), False, off)

    zero = once(np.zeros_like(x))
    matrix = np.array([once(row) - zero for row in np.eye(x.size)]).T
    return np.linalg.solve(np.eye(x.size) - matrix, zero)


def test_lags_and_dead_times_far_apart_are_solved() -> None:
    """Six decades of everything: the times found put the sensed value on its trips."""
    rng = np.random.default_rng(5)
    count = 4000
    tau, middle = 10 ** rng.uniform(-4, 4, count), rng.uniform(0.01, 0.99, count)
    sensor = tau * 10 ** rng.uniform(-6, 6, count)
    dead = np.maximum(tau, sensor) * 10 ** rng.uniform(-7, 1, (2, count))
    dead[rng.random((2, count)) < 0.3] = 0.0
    half = 10 ** rng.uniform(-3, -0.01, count) * np.minimum(middle, 1 - middle)
    plant = hk.TwoLag(tau, sensor, 1.0, 0.0, (dead[0], dead[1]))
    found = steady(plant, (middle - half, middle + half))
    assert found.ok.all()
    dynamics = plant.dynamics
    on_phase = found.on_time - dead[0] + dead[1]
    high, low = (np.zeros((count, 2)) for _ in range(2))
    # So many turns forget where they began, if each lasts long enough.
    for _ in range(60):
        high = dynamics.advance(low, True, on_phase)
        low = dynamics.advance(high, False, found.period - on_phase)
    settled = found.period > 0.5 * np.maximum(tau, sensor)
    assert settled.sum() > 500
    at_off = dynamics.sensed_of(dynamics.advance(low, True, found.on_time - dead[0]))
    at_on = dynamics.sensed_of(dynamics.advance(high, False, found.off_time - dead[1]))
    assert at_off[settled] == pytest.approx((middle + half)[settled], abs=1e-9)
    assert at_on[settled] == pytest.approx((middle - half)[settled], abs=1e-9)


def test_two_lags_have_one_cycle_only() -> None:
    """Both relations on which the bracket stands, and with them the uniqueness of the cycle."""
    rng = np.random.default_rng(2)
    count = 300
    tau, middle = 10 ** rng.uniform(-1, 1, count), rng.uniform(0.02, 0.98, count)
    sensor = tau * 10 ** rng.uniform(-4, 4, count)
    dead = np.maximum(tau, sensor) * 10 ** rng.uniform(-5, 1, (2, count))
    dead[rng.random((2, count)) < 0.3] = 0.0
    dynamics = hk.TwoLag(tau, sensor, 1.0, 0.0, (dead[0], dead[1])).dynamics

    def commands(total: Any, share: Any) -> tuple[Any, Any]:
        orbit = closed(dynamics, total * share, total * (1 - share))
        return dynamics.sensed_of(orbit.start), dynamics.sensed_of(turn(dynamics, orbit).off)

    width = np.full(count, -np.inf)
    for length in np.geomspace(1e-5, 100, 25):
        total = length * (tau + sensor)
        heights = [sum(commands(total, share)) for share in np.linspace(1e-6, 1 - 1e-6, 9)]
        assert (np.diff(heights, axis=0) > -1e-12).all()
        low, high = np.zeros(count), np.ones(count)
        for _ in range(50):
            half = (low + high) / 2
            above = sum(commands(total, half)) > 2 * middle
            low, high = np.where(above, low, half), np.where(above, half, high)
        at_on, at_off = commands(total, low)
        centred = np.abs(at_on + at_off - 2 * middle) < 1e-11
        grown = np.where(centred, at_off - at_on, -np.inf)
        assert (grown - np.maximum(width, 0.0) > -1e-11)[centred & (grown > 0)].all()
        width = np.maximum(width, grown)


@pytest.mark.parametrize(
    ("tau", "sensor", "dead_off", "on_at", "off_at"),
    [
        (0.5628, 2.563e-5, 4.2256e-5, 0.26051496393485607, 0.2605159090909446),
        (7.65, 9.816e-5, 1.5114e-4, 0.02186212038821039, 0.021862180399297566),
        (4521.88, 1.06538e8, 24289.97, 0.15636250147786585, 0.15636287898521367),
    ],
)
def test_narrow_bands_where_newton_alone_goes_astray(
    tau: float, sensor: float, dead_off: float, on_at: float, off_at: float
) -> None:
    plant = hk.TwoLag(tau, sensor, 1.0, 0.0, (0.0, dead_off))
    found = steady(plant, (on_at, off_at))
    dynamics = plant.dynamics
    on_phase = found.on_time + dead_off
    low = rest_of_a_turn(dynamics, np.zeros(2), on_phase, found.period - on_phase)
    near = 1e-3 * (off_at - on_at)
    at_off = dynamics.sensed_of(dynamics.advance(low, True, found.on_time))
    assert at_off == pytest.approx(off_at, abs=near, rel=0)
    assert dynamics.sensed_of(low) == pytest.approx(on_at, abs=near, rel=0)


def test_rates_at_the_commands() -> None:
    """(level - trip) / tau for one lag, with the load as it still is; signs as they are."""
    found = steady(hk.FirstOrder(600, 40, 10, 30), (19.5, 20.5))
    assert found.rate_at_on == pytest.approx((10 - 19.5) / 600, rel=1e-12)
    assert found.rate_at_off == pytest.approx((40 - 20.5) / 600, rel=1e-12)
    cooled = steady(hk.FirstOrder(600, 10, 40, 30), (30.5, 29.5))
    assert cooled.rate_at_on == pytest.approx((40 - 30.5) / 600, rel=1e-12)
    assert cooled.rate_at_off == pytest.approx((10 - 29.5) / 600, rel=1e-12)


# ----- symmetries -----------------------------------------------------------------------------


def assert_same(found: hk.Cycle, other: hk.Cycle, scale: float = 1.0, shift: float = 0.0) -> None:
    assert other.on_time == pytest.approx(found.on_time, rel=1e-8)
    assert other.off_time == pytest.approx(found.off_time, rel=1e-8)
    ends = ("low", "high", "sensed_low", "sensed_high")
    if scale < 0:
        ends = ("high", "low", "sensed_high", "sensed_low")
    for name, end in zip(("low", "high", "sensed_low", "sensed_high"), ends, strict=True):
        expected = scale * getattr(found, name) + shift
        assert getattr(other, end) == pytest.approx(expected, rel=1e-8, abs=1e-8 * abs(scale))


@settings(max_examples=60, deadline=None)
@given(
    cases, st.floats(-50, 50), st.sampled_from([-40.0, -1.0, 0.5, 90.0]), st.sampled_from([0, 0.3])
)
def test_shift_scale_and_mirror_change_nothing(
    case: Case, shift: float, scale: float, hold: float
) -> None:
    """A negative scale turns heating into cooling."""
    found = steady(case.plant(), case.trips, min_on=hold * case.tau)
    dead = case.plant().dead_time
    moved = hk.TwoLag(case.tau, case.tau * case.ratio, shift + scale, shift, dead)
    trips = tuple(shift + scale * trip for trip in case.trips)
    other = steady(moved, (trips[0], trips[1]), min_on=hold * case.tau)
    assert bool(other.heating) == (scale > 0)
    assert_same(found, other, scale, shift)


@settings(max_examples=60, deadline=None)
@given(cases)
def test_swapping_on_and_off_mirrors_the_cycle(case: Case) -> None:
    """Off is the on of the opposite load: 1 - y is driven down where y is driven up."""
    found = steady(case.plant(), case.trips)
    on, off = case.plant().dead_time
    other = steady(
        hk.TwoLag(case.tau, case.tau * case.ratio, 1.0, 0.0, (off, on)),
        (1 - case.trips[1], 1 - case.trips[0]),
    )
    assert other.on_time == pytest.approx(found.off_time, rel=1e-7)
    assert other.off_time == pytest.approx(found.on_time, rel=1e-7)


@settings(max_examples=40, deadline=None)
@given(cases, kinds, st.sampled_from([1e-6, 0.1, 3600.0]))
def test_time_scales(case: Case, kind: str, factor: float) -> None:
    found = steady(case.plant(kind), case.trips)
    slower = Case(case.tau * factor, *list(vars(case).values())[1:])
    other = steady(slower.plant(kind), case.trips)
    assert other.on_time == pytest.approx(found.on_time * factor, rel=1e-8)
    assert other.high == pytest.approx(found.high, rel=1e-9)


@settings(max_examples=60, deadline=None)
@given(cases)
def test_a_quick_sensor_leaves_one_lag(case: Case) -> None:
    quick = Case(case.tau, 1e-9, *list(vars(case).values())[2:])
    found = steady(quick.plant(), case.trips)
    single = steady(case.plant("one lag"), case.trips)
    assert found.period == pytest.approx(single.period, rel=1e-4)
    assert (found.low, found.high) == pytest.approx((single.low, single.high), abs=1e-6)


@settings(max_examples=40, deadline=None)
@given(cases)
def test_the_sensed_value_does_not_know_the_order_of_the_lags(case: Case) -> None:
    """1/((1 + s t1)(1 + s t2)) is symmetric; only the process value differs."""
    found = steady(case.plant(), case.trips)
    plant = hk.TwoLag(case.tau * case.ratio, case.tau, 1.0, 0.0, case.plant().dead_time)
    other = steady(plant, case.trips)
    assert other.period == pytest.approx(found.period, rel=1e-7)
    assert (other.sensed_low, other.sensed_high) == pytest.approx(
        (found.sensed_low, found.sensed_high), rel=1e-8
    )


# ----- limits ---------------------------------------------------------------------------------


def test_wide_time_constant_acts_as_an_integrator() -> None:
    plant = hk.FirstOrder(tau=1e7, on_level=1e5 * 3, off_level=-1e5, dead_time=20)
    found = steady(plant, (-1.0, 1.0))
    tank = steady(hk.Integrating(3e5 / 1e7, -1e5 / 1e7, 20), (-1.0, 1.0))
    assert found.on_time == pytest.approx(tank.on_time, rel=1e-4)
    assert found.off_time == pytest.approx(tank.off_time, rel=1e-4)


def test_quick_form_of_the_period() -> None:
    """Far from both levels: P near 4 (H / R + L + tau_sensor), R the full rate (y1 - y0)/tau."""
    plant = hk.TwoLag(tau=1e5, sensor_tau=20, on_level=1000, off_level=-1000, dead_time=10)
    rate = 2000 / 1e5
    found = steady(plant, (-2.0, 2.0))
    assert found.period == pytest.approx(4 * (4.0 / rate + 10 + 20), rel=0.02)


def test_no_width_with_two_lags_and_no_dead_time_is_refused() -> None:
    found = steady(hk.TwoLag(1800, 120, 110, 20), (60, 60))
    assert found.status == CycleStatus.CHATTERS
    assert np.isnan(found.period)
    assert steady(hk.TwoLag(1800, 120, 110, 20, 30), (60, 60)).period > 60


# ----- minimum times --------------------------------------------------------------------------


@settings(max_examples=80, deadline=None)
@given(cases, kinds, st.floats(0, 2), st.floats(0, 2))
def test_minimum_times_hold(case: Case, kind: str, least_on: float, least_off: float) -> None:
    plant, (a, b) = case.plant(kind), case.trips
    free = steady(plant, case.trips)
    times = {"min_on": least_on * free.on_time, "min_off": least_off * free.off_time}
    found = steady(plant, case.trips, **times)
    assert found.ok
    assert found.on_time >= times["min_on"] * (1 - 1e-9)
    assert found.off_time >= times["min_off"] * (1 - 1e-9)
    if max(least_on, least_off) <= 1:
        assert_same(free, found)
    else:
        # One trip at least is passed by.
        assert found.sensed_low < a or found.sensed_high > b


def test_minimum_on_time_of_one_lag_is_the_closed_form() -> None:
    """y1 - (y1 - ymin) exp(-t/tau) after the minimum time, counted from the command."""
    plant = hk.FirstOrder(600, 40, 10)
    found = steady(plant, (19.5, 20.5), min_on=120)
    assert found.on_time == 120
    assert found.high == pytest.approx(40 - (40 - 19.5) * exp(-120 / 600), rel=1e-13)
    mirrored = steady(hk.FirstOrder(600, 10, 40), (30.5, 29.5), min_on=120)
    assert mirrored.low == pytest.approx(50 - found.high, rel=1e-13)


def test_both_minimum_times_give_a_fixed_duty() -> None:
    found = steady(hk.FirstOrder(600, 40, 10), (24.9, 25.1), min_on=300, min_off=300)
    assert (found.on_time, found.off_time) == (300, 300)
    # tanh form of a lag that is driven by a symmetric square wave.
    assert found.high - found.low == pytest.approx(30 * np.tanh(300 / 600 / 2), rel=1e-12)


def test_extremes_of_the_sensed_value_against_a_fine_look() -> None:
    plant = hk.TwoLag(1800, [120, 1800, 9000], 110, 20, 30)
    found = steady(plant, (58, 62))
    for k, sensor in enumerate((120, 1800, 9000)):
        single = hk.TwoLag(1800, sensor, 110, 20, 30).dynamics
        on = found.on_time[k]
        low = rest_of_a_turn(single, np.zeros(2), on, found.off_time[k])
        times = np.linspace(0, on, 200_001)[:, None]
        rising = single.sensed_of(single.advance(low, True, times[:, 0]))
        assert found.sensed_low[k] == pytest.approx(rising.min(), abs=1e-8)
        assert found.low[k] == pytest.approx(low[0], rel=1e-9)


def test_root_of_the_off_time_for_two_lags_by_brentq() -> None:
    """With the on time held, one equation is left: the fall to the on trip."""
    plant = hk.TwoLag(1800, 120, 110, 20, 30)
    dynamics = plant.dynamics
    found = steady(plant, (58, 62), min_on=900)

    def miss(off: float) -> float:
        low = rest_of_a_turn(dynamics, np.zeros(2), 900.0, off)
        high = dynamics.advance(low, True, 900.0)
        return float(dynamics.sensed_of(dynamics.advance(high, False, off - 30)) - 58)

    assert found.off_time == pytest.approx(brentq(miss, 100, 1e4, xtol=1e-10), rel=1e-10)

"""The steady cycle against runs that know nothing of it: small steps, and a general solver."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.analyses.cycle import CycleStatus
from tests.analyses.cycle_oracle import Oracle, first_order, integrating, linear, two_lag
from tests.analyses.cycle_slow import Relay, stepped

#: tau, sensor tau, level on, level off, trips on and off, dead times, minimum times [s].
TWO_LAGS: dict[str, tuple[float, float, float, float, tuple[float, ...]]] = {
    "heating": (1800, 120, 110, 20, (58, 62, 30, 30, 0, 0)),
    "cooling": (7200, 240, -14, 25, (6, 4, 30, 30, 0, 0)),
    "equal lags": (600, 600, 110, 20, (58, 62, 10, 10, 0, 0)),
    "slow sensor": (60, 900, 110, 20, (58, 62, 5, 5, 0, 0)),
    "long dead time": (600, 60, 110, 20, (58, 62, 2000, 2000, 0, 0)),
    "off later than a phase": (1800, 120, 110, 20, (58, 62, 0, 1500, 0, 0)),
    "on later than a phase": (1800, 120, 110, 20, (58, 62, 1500, 0, 0, 0)),
    "no width": (1800, 120, 110, 20, (60, 60.0000001, 30, 20, 0, 0)),
    "minimum on": (1800, 120, 110, 20, (58, 62, 30, 30, 900, 0)),
    "minimum off": (1800, 120, 110, 20, (58, 62, 30, 10, 0, 1500)),
    "both minimum times": (1800, 120, 110, 20, (59.5, 60.5, 30, 30, 600, 700)),
}


def solved(values: tuple[Any, ...]) -> hk.Cycle:
    tau, sensor, on_level, off_level, (on_at, off_at, dead_on, dead_off, least_on, least_off) = (
        values
    )
    plant = hk.TwoLag(tau, sensor, on_level, off_level, (dead_on, dead_off))
    return hk.steady_cycle(plant, on_at=on_at, off_at=off_at, min_on=least_on, min_off=least_off)


def last_times(oracle: Oracle) -> tuple[float, float]:
    """On and off time of the last full cycle."""
    times = [(time, on) for time, on in oracle.run().commands]
    times = times if times[-1][1] else times[:-1]
    (begins, on), (ends, _), (again, _) = times[-3:]
    assert on
    return ends - begins, again - ends


@pytest.mark.parametrize("name", TWO_LAGS)
def test_two_lags_against_solve_ivp(name: str) -> None:
    """scipy.integrate.solve_ivp with events at rtol 1e-10, until the cycle repeats."""
    tau, sensor, on_level, off_level, trips = TWO_LAGS[name]
    found = solved(TWO_LAGS[name])
    keys = ("on_at", "off_at", "dead_on", "dead_off", "min_on", "min_off")
    oracle = Oracle(
        two_lag(tau, sensor, on_level, off_level),
        sensed=(0.0, 1.0),
        state=(found.mean, found.mean),
        until=20 * found.period + 10 * (tau + sensor),
        **dict(zip(keys, trips, strict=True)),
    )
    assert last_times(oracle) == pytest.approx(
        (found.on_time, found.off_time), abs=1e-7 * found.period
    )


@pytest.mark.parametrize("name", TWO_LAGS)
def test_two_lags_against_small_steps(name: str) -> None:
    tau, sensor, on_level, off_level, (on_at, off_at, *times) = TWO_LAGS[name]
    found = solved(TWO_LAGS[name])
    rates = np.array([[-1 / tau, 0.0], [1 / sensor, -1 / sensor]])
    level = np.array([1 / tau, 0.0])
    relay = Relay(
        rates, on_level * level, off_level * level, np.array([0.0, 1.0]), on_at, off_at,
        (times[0], times[1]), (times[2], times[3]),
    )  # fmt: skip
    step, count = found.period / 4000, 4000 * (8 + round(4 * (tau + sensor) / found.period))
    seen = stepped(relay, np.full(2, found.mean), step, min(count, 100_000))
    # Each command and each dead time is late or early by a step at most.
    assert (seen.on_time, seen.off_time) == pytest.approx(
        (found.on_time, found.off_time), abs=8 * step
    )
    swing = found.sensed_high - found.sensed_low
    assert (seen.sensed_low, seen.sensed_high) == pytest.approx(
        (found.sensed_low, found.sensed_high), abs=5e-3 * swing
    )


@pytest.mark.parametrize("dead", [(0.0, 0.0), (40.0, 40.0), (5.0, 3000.0)])
@pytest.mark.parametrize("least", [(0.0, 0.0), (300.0, 0.0)])
def test_one_lag_and_a_tank_against_solve_ivp(dead: Any, least: Any) -> None:
    times = dict(zip(("dead_on", "dead_off", "min_on", "min_off"), (*dead, *least), strict=True))
    trips = {"on_at": 24.0, "off_at": 26.0}
    for plant, slope in (
        (hk.FirstOrder(600, 40, 10, dead), first_order(600, 40, 10)),
        (hk.Integrating(0.02, -0.03, dead), integrating(0.02, -0.03)),
    ):
        found = hk.steady_cycle(plant, **trips, min_on=least[0], min_off=least[1])
        oracle = Oracle(
            slope, sensed=(1.0,), state=(25.0,), until=8 * found.period, **trips, **times
        )
        assert last_times(oracle) == pytest.approx(
            (found.on_time, found.off_time), abs=1e-7 * found.period
        )


# ----- plants of one's own --------------------------------------------------------------------

OWN: dict[str, tuple[Any, Any, Any, dict[str, float]]] = {
    # A thermostat's bulb on a radiator in a room.
    "three bodies": (
        [[-0.02, 0.01, 0.0], [0.002, -0.003, 0.0], [0.0, 0.02, -0.02]],
        [1.2, 0.0, 0.0],
        [0.0, 0.0, 1.0],
        {"on_at": 20.0, "off_at": 22.0, "dead_on": 20.0, "dead_off": 20.0},
    ),
    "swings once": (
        [[0.0, 1.0], [-1.0, -0.9]],
        [0.0, 1.0],
        [1.0, 0.0],
        {"on_at": 0.4, "off_at": 0.6, "dead_on": 0.2, "dead_off": 0.5},
    ),
    "three equal lags": (
        [[-1.0, 0.0, 0.0], [1.0, -1.0, 0.0], [0.0, 1.0, -1.0]],
        [1.0, 0.0, 0.0],
        [0.0, 0.0, 1.0],
        {"on_at": 0.5, "off_at": 0.55},
    ),
    "held on": (
        [[-1.0, 0.0, 0.0], [1.0, -1.0, 0.0], [0.0, 1.0, -1.0]],
        [1.0, 0.0, 0.0],
        [0.0, 0.0, 1.0],
        {"on_at": 0.5, "off_at": 0.55, "min_on": 4.0, "min_off": 0.5},
    ),
}


def own_plant(
    name: str, off: float = 0.0
) -> tuple[hk.StateSpace, dict[str, float], dict[str, Any]]:
    a, b, c, times = OWN[name]
    dead = times.get("dead_on", 0.0), times.get("dead_off", 0.0)
    asked = {key: value for key, value in times.items() if not key.startswith("dead")}
    return hk.StateSpace(a, b, c, off=off, dead_time=dead), times, asked


@pytest.mark.parametrize("name", OWN)
def test_own_plants_against_solve_ivp(name: str) -> None:
    plant, times, asked = own_plant(name)
    found = hk.steady_cycle(plant, **asked)
    assert found.ok
    oracle = Oracle(
        linear(plant.a, plant.b), plant.c, np.zeros(len(plant.c)), until=60 * found.period, **times
    )
    assert last_times(oracle) == pytest.approx(
        (found.on_time, found.off_time), abs=1e-7 * found.period
    )


@pytest.mark.parametrize("name", OWN)
def test_extremes_and_mean_of_own_plants_against_small_steps(name: str) -> None:
    plant, times, asked = own_plant(name)
    found = hk.steady_cycle(plant, **asked)
    dead = times.get("dead_on", 0.0), times.get("dead_off", 0.0)
    least = times.get("min_on", 0.0), times.get("min_off", 0.0)
    relay = Relay(
        plant.a, plant.b, 0 * plant.b, plant.c, asked["on_at"], asked["off_at"], dead, least
    )
    seen = stepped(relay, np.zeros(len(plant.c)), found.period / 4000, 100_000)
    swing = found.high - found.low
    assert (seen.sensed_low, seen.sensed_high) == pytest.approx(
        (found.low, found.high), abs=5e-3 * swing
    )


@pytest.mark.parametrize("name", ["heating", "equal lags", "off later than a phase", "minimum on"])
def test_two_lags_as_a_plant_of_ones_own(name: str) -> None:
    """The general solver against the one that is made for two lags."""
    tau, sensor, y1, y0, (on_at, off_at, dead_on, dead_off, least_on, least_off) = TWO_LAGS[name]
    own = hk.StateSpace(
        [[-1 / tau, 0], [1 / sensor, -1 / sensor]], [1 / tau, 0], [0, 1], on=y1, off=y0,
        process=[1, 0], dead_time=(dead_on, dead_off),
    )  # fmt: skip
    found = hk.steady_cycle(own, on_at=on_at, off_at=off_at, min_on=least_on, min_off=least_off)
    made = solved(TWO_LAGS[name])
    for field in ("on_time", "off_time", "low", "high", "sensed_low", "sensed_high", "mean"):
        assert getattr(found, field) == pytest.approx(getattr(made, field), rel=1e-9)


def test_a_tank_with_a_slow_gauge() -> None:
    """An integrator never settles: the mean of the process value is a sum over one turn."""
    rate, gauge = 0.05, 30.0
    plant = hk.StateSpace(
        [[0, 0], [1 / gauge, -1 / gauge]], [rate, 0], [0, 1], on=1, off=-0.5, process=[1, 0]
    )
    found = hk.steady_cycle(plant, on_at=1.0, off_at=3.0)
    oracle = Oracle(
        linear(plant.a, plant.b, 1.0, -0.5), (0.0, 1.0), (1.0, 1.0), 1.0, 3.0, 20 * found.period
    )
    assert last_times(oracle) == pytest.approx(
        (found.on_time, found.off_time), abs=1e-7 * found.period
    )
    # A triangle: its mean lies halfway, and its slopes give the swing.
    assert found.mean == pytest.approx((found.low + found.high) / 2, rel=1e-9)
    assert found.high - found.low == pytest.approx(rate * found.on_time, rel=1e-9)


def test_own_plants_that_stick() -> None:
    plant, _, asked = own_plant("three equal lags")
    assert hk.steady_cycle(plant, on_at=0.5, off_at=1.2).status == CycleStatus.STAYS_ON
    assert hk.steady_cycle(plant, on_at=-0.1, off_at=0.5).status == CycleStatus.STAYS_OFF
    assert hk.steady_cycle(plant, on_at=0.5, off_at=0.4).status == CycleStatus.WRONG_WAY
    off_at = [0.55, 1.2, np.nan, 0.5, 0.9]
    found = hk.steady_cycle(plant, on_at=0.5, off_at=off_at)
    assert found.status.tolist()[:4] == [0, 1, 7, 5]
    assert np.isfinite(found.period).tolist() == [True, False, False, False, True]
    assert found.period[0] == pytest.approx(hk.steady_cycle(plant, **asked).period, rel=1e-10)


def test_a_plant_that_grows_is_not_called_steady() -> None:
    """The unstable pole runs away, whatever the switch does."""
    plant = hk.StateSpace([[0.5]], [1.0], [1.0], on=1.0, off=-1.0, dead_time=5.0)
    found = hk.steady_cycle(plant, on_at=-0.1, off_at=0.1)
    assert found.status != CycleStatus.CYCLES


@pytest.mark.parametrize("seed", range(12))
def test_random_stable_plants_repeat(seed: int) -> None:
    """Whatever is called a cycle returns to itself, by scipy's solver."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(2, 5))
    a = rng.normal(size=(n, n))
    a -= (np.linalg.eigvals(a).real.max() + rng.uniform(0.1, 1.0)) * np.eye(n)
    b, c = rng.normal(size=n), rng.normal(size=n)
    gain = float(-c @ np.linalg.solve(a, b))
    on_at, off_at = gain * (rng.uniform(0.35, 0.65) + np.array([-1, 1]) * rng.uniform(0.05, 0.2))
    dead = float(rng.choice([0.0, 0.3]))
    found = hk.steady_cycle(hk.StateSpace(a, b, c, dead_time=dead), on_at=on_at, off_at=off_at)
    assert found.status in (CycleStatus.CYCLES, CycleStatus.UNPROVED)
    if found.ok:
        oracle = Oracle(
            linear(a, b), c, np.zeros(n), on_at, off_at, until=80 * found.period + 50,
            dead_on=dead, dead_off=dead, max_step=found.period / 20,
        )  # fmt: skip
        assert last_times(oracle) == pytest.approx(
            (found.on_time, found.off_time), abs=1e-6 * found.period
        )

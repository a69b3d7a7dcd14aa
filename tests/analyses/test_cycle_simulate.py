"""Runs from event to event, against a general solver and against what can be said exactly."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

import hystkit as hk
from hystkit.analyses.cycle import follow
from hystkit.analyses.cycle.follow import Event, Outcome
from hystkit.analyses.cycle.status import CycleStatus
from tests.analyses import cycle_oracle as oracle
from tests.analyses.cycle_oracle import Oracle

HEATER: dict[str, float] = {
    "tau": 1800.0,
    "sensor_tau": 120.0,
    "on_level": 110.0,
    "off_level": 20.0,
}
SPRING_A = [[0.0, 1.0], [-4e-4, -4e-3]]
SPRING_B = [0.0, 4e-4]
BAND: dict[str, float] = {"on_at": 58.0, "off_at": 62.0}
LONG: dict[str, float] = {"until": 9000.0}


def body(**changes: Any) -> tuple[hk.FirstOrder, dict[str, Any]]:
    values = {"tau": 600.0, "on_level": 40.0, "off_level": 10.0}
    plant = hk.FirstOrder(**values, **changes)
    return plant, {"slope": oracle.first_order(**values), "sensed": [1.0]}


def heater(values: dict[str, float] = HEATER, **changes: Any) -> tuple[hk.TwoLag, dict[str, Any]]:
    plant = hk.TwoLag(**values, **changes)
    return plant, {"slope": oracle.two_lag(**values), "sensed": [0.0, 1.0]}


def tank(**changes: Any) -> tuple[hk.Integrating, dict[str, Any]]:
    plant = hk.Integrating(rate_on=0.004, rate_off=-0.0025, **changes)
    return plant, {"slope": oracle.integrating(0.004, -0.0025), "sensed": [1.0]}


def train(**changes: Any) -> tuple[hk.StateSpace, dict[str, Any]]:
    """Three lags of 50 s in series."""
    a = 0.02 * (np.eye(3, k=-1) - np.eye(3))
    b = [0.02, 0.0, 0.0]
    plant = hk.StateSpace(a, b, [0.0, 0.0, 1.0], **changes)
    return plant, {"slope": oracle.linear(a, b), "sensed": [0.0, 0.0, 1.0]}


def spring(**changes: Any) -> tuple[hk.StateSpace, dict[str, Any]]:
    """A weakly damped plant: 20 s per radian, damping ratio 0.1."""
    plant = hk.StateSpace(SPRING_A, SPRING_B, [1.0, 0.0], **changes)
    return plant, {"slope": oracle.linear(SPRING_A, SPRING_B), "sensed": [1.0, 0.0]}


EQUAL = HEATER | {"sensor_tau": 1800.0}
COLD = {"tau": 7200.0, "sensor_tau": 240.0, "on_level": -14.0, "off_level": 25.0}
CASES: dict[str, tuple[Any, list[float], dict[str, Any]]] = {
    "one lag": (body(), [15.0], {"on_at": 19.5, "off_at": 20.5, "until": 1500}),
    "one lag, dead time": (
        body(dead_time=40), [15.0], {"on_at": 19.5, "off_at": 20.5, "until": 3000}),
    "one lag, dead time longer than a phase": (
        body(dead_time=(100, 90)), [15.0], {"on_at": 19.9, "off_at": 20.1, "until": 4000}),
    "dead times so unequal that commands overtake": (
        body(dead_time=(60, 5)), [30.0],
        {"on_at": 19.5, "off_at": 20.5, "until": 4000, "disturbances": [(700, 40), (730, -40)]}),
    "one lag, filter": (
        body(dead_time=20), [15.0], {"on_at": 19, "off_at": 21, "until": 3000, "input_rc": 15}),
    "two lags": (heater(), [20.0, 20.0], {**BAND, **LONG}),
    "two lags, dead time": (heater(dead_time=30), [20.0, 20.0], {**BAND, **LONG}),
    "two lags, from unequal states": (heater(dead_time=30), [80.0, 20.0], {**BAND, **LONG}),
    "two lags, long minimum times": (
        heater(dead_time=(30, 10)), [20.0, 20.0], {**BAND, **LONG, "min_on": 700, "min_off": 300}),
    "two lags, disturbed": (
        heater(dead_time=30), [20.0, 20.0],
        {**BAND, **LONG, "disturbances": [(2000, -15), (3511.5, 25), (7000, -10)]}),
    "two lags, filter and delay": (
        heater(dead_time=30), [20.0, 20.0], {**BAND, **LONG, "input_rc": 40, "delay": 2.5}),
    "two lags, everything": (
        heater(dead_time=(45, 12)), [70.0, 66.0],
        {**BAND, **LONG, "input_rc": 10, "delay": 0.5, "min_on": 420, "min_off": 200,
         "disturbances": [(1234.5, -10), (5000, 30)]}),
    "two equal lags": (
        heater(EQUAL, dead_time=30), [20.0, 20.0], {**BAND, "until": 20000}),
    "two equal lags, filter": (
        heater(EQUAL), [20.0, 20.0], {**BAND, "until": 12000, "input_rc": 50}),
    "cooling": (
        heater(COLD, dead_time=30), [25.0, 25.0], {"on_at": 6, "off_at": 4, "until": 15000}),
    "tank": (tank(dead_time=(2, 7)), [0.5], {"on_at": 0.8, "off_at": 1.4, "until": 3000}),
    "tank, filter": (
        tank(dead_time=2), [0.5], {"on_at": 0.8, "off_at": 1.4, "until": 3000, "input_rc": 9}),
    "tank, drawn from": (
        tank(), [0.5],
        {"on_at": 0.8, "off_at": 1.4, "until": 3000,
         "disturbances": [(300, -0.002), (1500, 0.003)]}),
    "three equal lags": (
        train(dead_time=5), [0.0, 0.0, 0.0], {"on_at": 0.4, "off_at": 0.6, "until": 3000}),
    "oscillating plant": (spring(), [0.0, 0.0], {"on_at": 0.4, "off_at": 0.7, "until": 2500}),
    "oscillating plant, dead time": (
        spring(dead_time=30), [0.0, 0.0], {"on_at": 0.4, "off_at": 0.7, "until": 2500}),
}  # fmt: skip


def both(case: Any) -> tuple[hk.Run, Oracle]:
    (plant, equation), state, asked = case
    dead_on, dead_off = plant.dead_time
    lags = [getattr(plant, name, math.inf) for name in ("tau", "sensor_tau")]
    lags += [
        asked.get("input_rc") or math.inf,
        20.0 if plant.__class__ is hk.StateSpace else math.inf,
    ]
    solved = Oracle(state=state, dead_on=dead_on, dead_off=dead_off, **equation, **asked)
    # The solver places a trip by interpolation, which its tolerance does not govern.
    solved.max_step = min(lags) / 2
    return hk.simulate(plant, state=state, **asked), solved.run()


def commands(run: hk.Run) -> np.ndarray:
    return run.times[(run.events & Event.COMMAND) > 0]


@pytest.mark.parametrize("name", CASES)
def test_against_a_general_solver(name: str) -> None:
    run, solved = both(CASES[name])
    expected = np.array([time for time, _ in solved.commands])
    period = np.diff(expected[-3:]).sum() if len(expected) > 2 else expected[-1]
    assert len(expected) >= 4
    assert commands(run).shape == expected.shape
    assert np.abs(commands(run) - expected).max() < 1e-7 * period
    loads = run.times[(run.events & Event.LOAD) > 0]
    assert np.allclose(loads, [time for time, _ in solved.loads], rtol=0, atol=1e-7 * period)
    assert np.allclose(run.states[-1], solved.final, rtol=1e-6, atol=1e-6)


times = st.floats(0.0, 1.0)


@settings(max_examples=25, deadline=None, derandomize=True)
@given(st.tuples(*[times] * 9))
def test_any_two_lags_against_a_general_solver(shares: tuple[float, ...]) -> None:
    tau = 100.0
    sensor, dead_on, dead_off, least, rc, delay, low, size, when = shares
    values = {"tau": tau, "sensor_tau": tau * (0.05 + sensor), "on_level": 100.0, "off_level": 0.0}
    on_at = 25 + 40 * low
    asked = {
        "on_at": on_at,
        "off_at": on_at + 5,
        "until": 800.0,
        "min_on": 40 * least,
        "min_off": 20 * least,
        "delay": 3 * delay if delay > 0.5 else 0.0,
        "input_rc": 5 + 20 * rc if rc > 0.5 else 0.0,
        "disturbances": [(500 * when, 40 * (size - 0.5))],
    }
    case = heater(values, dead_time=(60 * dead_on, 60 * dead_off)), [0.0, 0.0], asked
    run, solved = both(case)
    expected = np.array([time for time, _ in solved.commands])
    assert commands(run).shape == expected.shape
    assert np.allclose(commands(run), expected, rtol=0, atol=1e-6)


def test_phases_of_one_lag_are_those_of_the_closed_form() -> None:
    # Closed form of one lag, recomputed in tests/published/checks.json (cycle, first_order).
    run = hk.simulate(body()[0], on_at=19.5, off_at=20.5, start=19.5, until=400)
    assert run.on_times[-1] == pytest.approx(600 * math.log(20.5 / 19.5), rel=1e-12)
    assert run.off_times[-1] == pytest.approx(600 * math.log(10.5 / 9.5), rel=1e-12)
    assert (run.low, run.high) == (pytest.approx(19.5), pytest.approx(20.5))


def test_a_tank_overshoots_by_its_rates() -> None:
    run = hk.simulate(hk.Integrating(0.5, -0.5, dead_time=2), on_at=-0.3, off_at=0.3,
                      start=0, until=60, start_on=True)  # fmt: skip
    # T = 4 (L + e/k): textbook form of a relay with hysteresis and a dead time, from memory.
    assert run.on_times[1:] + run.off_times[: run.on_times.size - 1] == pytest.approx(10.4)
    assert (run.low, run.high) == (pytest.approx(-1.3), pytest.approx(1.3))
    assert run.duty == pytest.approx(0.5)
    assert run.settled


@pytest.mark.parametrize("beyond", [1e-6, 1e-9, 1e-12])
def test_a_short_visit_beyond_a_trip_is_seen(beyond: float) -> None:
    # y = exp(-t) - exp(-2 t) has its highest value 1/4 at t = ln 2.
    plant = hk.StateSpace(
        [[-1.0, 0.0], [0.0, -2.0]], [0.0, 0.0], [1.0, -1.0], disturbance=[1.0, 0.0]
    )
    asked = {"on_at": -1.0, "state": [1.0, 1.0], "until": 50.0, "start_on": True}
    run = hk.simulate(plant, off_at=0.25 - beyond, **asked)
    # exp(-t) = (1 + sqrt(1 - 4 y)) / 2 on the way up.
    expected = -math.log((1 + math.sqrt(4 * beyond)) / 2)
    assert run.times[1] == pytest.approx(expected, abs=1e-16 / math.sqrt(beyond) * 10)
    assert run.events[1] & Event.TRIP
    run = hk.simulate(plant, off_at=0.25 + beyond, **asked)
    assert not (run.events & Event.TRIP).any()
    assert run.status == Outcome.STAYS_ON


@pytest.mark.parametrize("until", [100.0, 1000.0])
def test_a_short_visit_of_an_undamped_plant_is_seen(until: float) -> None:
    # y = 1 - cos(t), its highest value 2 at t = pi.
    plant = hk.StateSpace([[0.0, 1.0], [-1.0, 0.0]], [0.0, 1.0], [1.0, 0.0])
    asked = {"on_at": -1.0, "state": [0.0, 0.0], "until": until, "start_on": True}
    run = hk.simulate(plant, off_at=2 - 1e-9, **asked)
    assert run.times[1] == pytest.approx(math.acos(-1 + 1e-9), abs=1e-10)
    assert not (hk.simulate(plant, off_at=2 + 1e-9, **asked).events & Event.TRIP).any()


def test_a_growing_plant_is_followed() -> None:
    # y = exp(t) - 1 from rest.
    plant = hk.StateSpace([[1.0]], [1.0], [1.0])
    run = hk.simulate(plant, on_at=-1, off_at=1e3, state=[0.0], until=20, start_on=True)
    assert run.times[1] == pytest.approx(math.log(1001), rel=1e-13)


def test_plants_without_modes_are_followed() -> None:
    # y = 1 - (1 + w t) exp(-w t), and y = t^2 / 2, from rest.
    w = 1000.0
    critical = hk.StateSpace([[0.0, 1.0], [-w * w, -2 * w]], [0.0, w * w], [1.0, 0.0])
    run = hk.simulate(critical, on_at=-1, off_at=0.5, state=[0, 0], until=10, start_on=True)
    expected = brentq(lambda x: 0.5 - (1 + x) * math.exp(-x), 1, 3, xtol=1e-15) / w
    assert run.times[1] == pytest.approx(expected, rel=1e-12)
    assert run.status == Outcome.STAYS_OFF
    double = hk.StateSpace([[0.0, 1.0], [0.0, 0.0]], [0.0, 1.0], [1.0, 0.0])
    run = hk.simulate(double, on_at=-1, off_at=50, state=[0, 0], until=30, start_on=True)
    assert run.times[1] == pytest.approx(10.0, rel=1e-12)


@pytest.mark.parametrize("name", CASES)
def test_extremes_bound_what_is_sampled(name: str) -> None:
    (plant, _), state, asked = CASES[name]
    run = hk.simulate(plant, state=state, **asked)
    found = run.extremes
    marks = np.concatenate([[0.0], found.time, [asked["until"]]])
    assert (np.diff(found.high.astype(int)) != 0).all()
    assert (np.diff(marks) > 0).all()
    for begin, end in pairwise(marks):
        value = run.sampled(np.linspace(begin, end, 101)).process
        steps = np.diff(value)
        tiny = 1e-11 * np.abs(value).max()
        assert (steps >= -tiny).all() or (steps <= tiny).all(), (begin, end)
    at = run.sampled(found.time).process
    assert np.allclose(at, found.value, rtol=1e-9, atol=1e-9)


def test_samples_pass_through_the_events() -> None:
    run, solved = both(CASES["two lags, everything"])
    seen = run.sampled(run.times)
    assert np.allclose(seen.process, run.process, rtol=1e-12)
    assert np.allclose(seen.sensed, run.sensed, rtol=1e-12)
    assert (seen.on == run.on).all()
    even = run.sampled(7)
    assert np.allclose(even.time, np.linspace(0, 9000, 7))
    assert np.allclose(even.process[-1], solved.final[0], rtol=1e-7)
    outside = run.sampled([-1.0, 9001.0])
    assert np.isnan(outside.process).all()
    assert not outside.on.any()


@pytest.mark.parametrize("at", [0, 2.5, "x", [1.0, math.inf]])
def test_what_is_no_time_is_refused(at: Any) -> None:
    run = hk.simulate(heater()[0], 58, 62, start=20, until=100)
    with pytest.raises(hk.InputError, match="at is"):
        run.sampled(at)


def test_an_array_holds_the_single_runs() -> None:
    sensor = np.array([[60.0], [120.0], [1800.0]])
    dead = np.array([0.0, 30.0])
    plant = hk.TwoLag(1800, sensor, 110, 20, dead_time=(dead, 2 * dead))
    rc = np.array([0.0, 25.0])
    until = np.array([[4000.0], [6000.0], [9000.0]])
    step = (1500, np.array([5.0, -5.0]))
    many = hk.simulate(plant, 58, 62, start=20, until=until, input_rc=rc, disturbances=[step])
    assert many.shape == many.status.shape == many.duty.shape == (3, 2)
    for i, j in np.ndindex(3, 2):
        one = hk.simulate(
            hk.TwoLag(1800, sensor[i, 0], 110, 20, dead_time=(dead[j], 2 * dead[j])), 58, 62,
            start=20, until=until[i, 0], input_rc=rc[j], disturbances=[(1500, step[1][j])],
        )  # fmt: skip
        for name in ("times", "process", "sensed", "on_times", "off_times", "starts"):
            alone, among = getattr(one, name), getattr(many, name)[i, j]
            assert np.allclose(among[: alone.size], alone, rtol=1e-9), name
            assert np.isnan(among[alone.size :]).all(), name
        assert np.allclose(many.states[i, j, : one.times.size], one.states)
        assert (many.events[i, j, : one.times.size] == one.events).all()
        assert not many.events[i, j, one.times.size :].any()
        assert np.allclose(many.extremes.value[i, j, : one.extremes.value.size], one.extremes.value)
        samples = many.sampled(50), one.sampled(50)
        assert np.allclose(samples[0].sensed[i, j], samples[1].sensed)
        assert many.low[i, j] == pytest.approx(one.low)


def test_runs_that_stick_say_so() -> None:
    level = np.array([50.0, 110.0, 110.0, 110.0, 62.0])
    ambient = np.array([20.0, 20.0, 60.0, 59.0, 20.0])
    run = hk.simulate(
        hk.FirstOrder(600, level, ambient), 58, 62, start=61, until=5e4, start_on=True
    )
    expected = [Outcome.STAYS_ON, Outcome.SWITCHES, Outcome.STAYS_OFF, Outcome.STAYS_OFF,
                Outcome.STAYS_ON]  # fmt: skip
    assert run.status.tolist() == expected
    assert "stays on" in run.message
    alone = hk.simulate(hk.FirstOrder(600, 50, 20), 58, 62, start=20, until=1e4)
    assert alone.on[-1]
    assert np.isnan(alone.duty)
    assert not alone.settled
    assert "stays on" in str(alone)


def test_a_tank_that_drains_while_it_is_filled_sticks() -> None:
    # The second one switches, though long after the run has ended.
    for rc in (0.0, 5.0):
        plant = hk.Integrating([-1e-3, 1e-6], -2e-3)
        run = hk.simulate(plant, 0.8, 1.4, start=1.0, until=2000, input_rc=rc)
        assert run.status.tolist() == [Outcome.STAYS_ON, Outcome.SWITCHES]


def test_trips_without_width_spoil_their_element_only() -> None:
    run = hk.simulate(hk.FirstOrder(600, 110, 20), 58, [58, 62], start=20, until=3000)
    assert run.status.tolist() == [Outcome.NO_WIDTH, Outcome.SWITCHES]
    assert np.isnan(run.times[0]).all()
    assert np.isnan([run.low[0], run.duty[0], *run.sampled(3).process[0]]).all()
    assert run.starts.shape[-1] > 1
    none = hk.simulate(hk.FirstOrder(600, 110, 20), [58, 59], [58, 59], start=20, until=3000)
    assert none.times.shape == (2, 0)
    assert none.extremes.value.shape == (2, 0)
    assert "no hysteresis" in str(none)


def test_a_trip_that_is_not_finite_spoils_its_element_only() -> None:
    run = hk.simulate(hk.FirstOrder(600, 110, 20), 58, [math.nan, 62], start=20, until=3000)
    assert run.status.tolist() == [Outcome.NOT_FINITE, Outcome.SWITCHES]
    assert np.isnan(run.times[0]).all()


def test_a_run_with_endless_events_is_cut_short(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(follow, "MAX_EVENTS", 100)
    run = hk.simulate(hk.Integrating(1.0, -1.0), 0.0, 1.0, start=0.5, until=1e6)
    assert run.status == Outcome.CUT_SHORT
    assert run.times.size == 100
    assert np.isnan(run.sampled([200.0])[1]).all()


def test_a_command_that_is_overtaken_is_void() -> None:
    plant = hk.Integrating(1.0, -1.0, dead_time=(5, 1))
    # On at once; the disturbance carries the level through the upper trip before the load acts.
    run = hk.simulate(plant, 0.0, 2.0, start=0.0, until=4, disturbances=[(0.5, 5.0)])
    kinds = [(float(t), bool(on)) for t, on, e in zip(run.times, run.on, run.events, strict=True)
             if e & Event.COMMAND]  # fmt: skip
    assert kinds == [(0.0, True), (pytest.approx(0.5 + 2.5 / 4), False)]
    assert not run.acting.any()


def test_the_start_is_at_rest() -> None:
    run = hk.simulate(heater()[0], 58, 62, start=40, until=10, input_rc=3)
    assert run.states[0] == pytest.approx([40, 40])
    assert run.sensed[0] == pytest.approx(40)
    plate = hk.StateSpace([[-0.02, 0.01], [0.002, -0.003]], [0.5, 0.0], [0, 1], on=1, off=0)
    start = hk.simulate(plate, 5, 6, start=3, until=10).states[0]
    # At rest: 0.002 x0 = 0.003 x1.
    assert start == pytest.approx([4.5, 3.0])


def test_a_plant_without_a_state_of_rest_spoils_its_element_only() -> None:
    a = [[[-1.0, 0.0], [1.0, -1.0]], [[-1.0, 0.0], [0.0, -1.0]]]
    plant = hk.StateSpace(a, [[1.0, 0.0], [1.0, 0.0]], [0.0, 1.0])
    run = hk.simulate(plant, 0.4, 0.6, start=0.2, until=10)
    assert run.status.tolist() == [Outcome.SWITCHES, Outcome.NOT_FINITE]


def test_every_fault_is_reported() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.simulate("heater", "warm", math.inf, until=0, min_on=-1, input_rc="x",  # type: ignore[arg-type]
                    disturbances=[(1, 2), 3], start_on=2)  # fmt: skip
    text = str(caught.value)
    for name in ("plant", "on_at", "off_at", "until", "min_on", "input_rc", "disturbance 2",
                 "start_on", "no start"):  # fmt: skip
        assert name in text, name
    assert len(caught.value.faults) == 9


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"off_at": 58}, "no hysteresis"),
        ({"state": [20, 20]}, "both given"),
        ({"start": None, "state": [20]}, "2 states"),
        ({"until": [1, 2, 3], "start": [1, 2]}, "do not broadcast"),
        ({"disturbances": [(5, 1), (5, 1)]}, "disturbance 2 does not come after disturbance 1"),
        ({"disturbances": 7}, "disturbances is not a list"),
        ({"plant": hk.StateSpace([[0, 1], [0, 0]], [[0], [1]], [1, 0], on=[1], off=[0]),
          "disturbances": [(5, 1)]}, "does not say how a disturbance enters"),
        ({"plant": hk.StateSpace([[-1, 0], [0, -1]], [0, 0], [1, 0])}, "at rest"),
    ],
)  # fmt: skip
def test_what_cannot_be_run_is_refused(changes: dict[str, Any], words: str) -> None:
    asked = {"plant": heater()[0], "on_at": 58, "off_at": 62, "start": 20, "until": 100} | changes
    with pytest.raises(hk.InputError, match=words):
        hk.simulate(**asked)


def test_a_disturbance_may_name_its_unit() -> None:
    oven = hk.FirstOrder(600, 110, 20, unit="°C")
    tank = hk.Integrating("2 mm/s", "-1 mm/s", unit="m")
    for plant, trips, text, size in (
        (oven, (58, 62), "-5 °C", -5.0),
        (tank, (1, 2), "-1 mm/s", -1e-3),
    ):
        one, other = (
            hk.simulate(plant, *trips, start=trips[0], until=2000, disturbances=[("100 s", given)])
            for given in (text, size)
        )
        assert np.array_equal(one.times, other.times)
    with pytest.raises(hk.InputError, match="size of disturbance 1 is not in °C"):
        hk.simulate(oven, 58, 62, start=60, until=9, disturbances=[(1, "5 V")])


def drawn_plant(
    kind: str, count: int, rng: np.random.Generator
) -> tuple[hk.Plant, np.ndarray, np.ndarray]:
    """Random plants with trips that some of them reach; half of the loads cool."""
    dead = rng.uniform(0, 60, (2, count)) * (rng.random(count) < 0.8)
    sign = np.where(rng.random(count) < 0.5, 1.0, -1.0)
    low = rng.uniform(-0.1, 0.9, count)
    high = low + rng.uniform(0.01, 0.3, count)
    tau = rng.uniform(50, 2000, count)
    dead_time = (dead[0], dead[1])
    plant: hk.Plant
    if kind == "integrating":
        up, down = rng.uniform(1e-3, 5e-3, (2, count))
        plant = hk.Integrating(sign * up, -sign * down, dead_time=dead_time)
    elif kind == "one lag":
        plant = hk.FirstOrder(tau, sign, 0.0, dead_time=dead_time)
    elif kind == "two lags":
        plant = hk.TwoLag(tau, rng.uniform(5, 500, count), sign, 0.0, dead_time=dead_time)
    else:
        plant = hk.TwoLag(
            tau, tau * (1 + rng.choice([0, 1e-6, 1e-3], count)), sign, 0.0, dead_time=dead_time
        )
    return plant, sign * low, sign * high


@pytest.mark.parametrize("minimum", [0.0, 300.0])
@pytest.mark.parametrize("kind", ["integrating", "one lag", "two lags", "equal lags"])
def test_a_long_run_settles_into_the_steady_cycle(kind: str, minimum: float) -> None:
    rng = np.random.default_rng(len(kind))
    plant, on_at, off_at = drawn_plant(kind, 200, rng)
    least = {"min_on": minimum * rng.random(200), "min_off": minimum * rng.random(200)}
    cycle = hk.steady_cycle(plant, on_at, off_at, **least)
    assert cycle.ok.mean() > 0.5
    until = np.where(cycle.ok, 60 * cycle.period, 3e4)
    run = hk.simulate(plant, on_at, off_at, start=0.0, until=until, **least)
    assert (run.status[cycle.ok] == Outcome.SWITCHES).all()
    # Minimum times that hold both phases of an integrator let it drift for thousands of cycles.
    ok = cycle.ok & run.settled
    assert ok.sum() >= cycle.ok.sum() - 2 * (kind == "integrating" and minimum > 0)
    for phases, expected in ((run.on_times, cycle.on_time), (run.off_times, cycle.off_time)):
        before_last = np.isfinite(phases).sum(axis=-1) - 2
        found = np.take_along_axis(phases, before_last[:, None], axis=-1)[:, 0]
        assert np.allclose(found[ok], expected[ok], rtol=1e-8)
    assert np.allclose(run.low[ok], cycle.low[ok], rtol=1e-8, atol=1e-8)
    assert np.allclose(run.high[ok], cycle.high[ok], rtol=1e-8, atol=1e-8)
    assert np.allclose(run.duty[ok], cycle.duty[ok], rtol=1e-6)
    for name in ("STAYS_ON", "STAYS_OFF"):
        assert (run.status[cycle.status == CycleStatus[name]] == Outcome[name]).all()


@pytest.mark.parametrize("kind", ["integrating", "one lag", "two lags", "equal lags"])
def test_the_sensed_value_never_passes_a_trip_unseen(kind: str) -> None:
    count = 200
    rng = np.random.default_rng(11)
    plant, on_at, off_at = drawn_plant(kind, count, rng)
    rc = np.where(rng.random(count) < 0.5, rng.uniform(0.01, 30, count), 0.0)
    step = 1e-3 if kind == "integrating" else 0.3
    steps = [(time, step * rng.uniform(-1, 1, count)) for time in (700.0, 1500.0)]
    asked = {"start": 0.0, "until": 3000.0, "input_rc": rc, "disturbances": steps}
    run = hk.simulate(plant, on_at, off_at, **asked)
    trip = np.where(run.on, on_at[:, None], off_at[:, None])
    tripped = (run.events & Event.TRIP) > 0
    begun = (run.times == 0) & tripped  # a run may start beyond a trip
    apart = np.abs(run.sensed - trip)[tripped & ~begun]
    assert apart.size > count
    assert apart.max() < 1e-12 * np.abs(off_at).max()
    # Without delay and minimum times the command says which trip comes next.
    seen = run.sampled(2000)
    sense = np.sign(off_at - on_at)[:, None]
    past = np.where(seen.on, seen.sensed - off_at[:, None], on_at[:, None] - seen.sensed) * sense
    assert past.max() < 1e-11

    held = {"min_on": rng.uniform(0, 200, count), "min_off": rng.uniform(0, 200, count)}
    run = hk.simulate(plant, on_at, off_at, **asked, **held, delay=rng.uniform(0, 5, count))
    for phases, least in ((run.on_times, "min_on"), (run.off_times, "min_off")):
        assert (np.nan_to_num(phases, nan=np.inf) >= held[least][:, None] * (1 - 1e-12)).all()

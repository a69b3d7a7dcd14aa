"""Plants: what they take, and their motion against the matrix exponential of scipy."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.linalg import expm

import hystkit as hk

Array = NDArray[np.float64]

#: Two equal lags in series have one eigenvector; a double integrator has one as well.
MATRICES = {
    "one lag": [[-0.5]],
    "integrator": [[0.0]],
    "equal lags": [[-0.5, 0.0], [0.5, -0.5]],
    "double integrator": [[0.0, 0.0], [1.0, 0.0]],
    "swinging": [[-0.1, -2.0], [1.0, -0.1]],
    "coupled bodies": [[-0.02, 0.01, 0.0], [0.002, -0.013, 0.01], [0.0, 0.3, -0.3]],
    "growing": [[0.1, 1.0], [0.0, -1.0]],
    "three equal lags": [[-0.5, 0.0, 0.0], [0.5, -0.5, 0.0], [0.0, 0.5, -0.5]],
    "critically damped": [[0.0, 1.0], [-0.25, -1.0]],
    "growing without modes": [[0.1, 1.0], [0.0, 0.1]],
}


def exponential(a: Array, forcing: Array, x: Array, time: float) -> Array:
    """x' = a x + f from x, by scipy's exponential of the extended matrix."""
    n = len(x)
    extended = np.zeros((n + 1, n + 1))
    extended[:n, :n], extended[:n, n] = a, forcing
    return np.asarray((expm(extended * time) @ np.append(x, 1.0))[:n])


@pytest.mark.parametrize("name", MATRICES)
@pytest.mark.parametrize("on", [True, False])
def test_motion_is_the_matrix_exponential(name: str, on: bool) -> None:
    rng = np.random.default_rng(3)
    a = np.array(MATRICES[name])
    n = len(a)
    plant = hk.StateSpace(a, rng.normal(size=n), np.ones(n), on=2.0, off=-0.5)
    dynamics = plant.dynamics
    for time in (0.0, 1e-6, 0.3, 2.0, 15.0):
        x = rng.normal(size=n)
        expected = exponential(a, plant.b * (2.0 if on else -0.5), x, time)
        assert dynamics.advance(x, on, time) == pytest.approx(expected, rel=1e-11, abs=1e-12)


positive = st.floats(-3, 3).map(lambda power: 10.0**power)


@settings(max_examples=200, deadline=None)
@given(positive, positive, st.floats(-2, 1).map(lambda power: 10.0**power), st.booleans())
def test_two_lags_move_as_the_matrix_exponential(
    tau: float, ratio: float, share: float, equal: bool
) -> None:
    sensor = tau if equal else tau * ratio
    plant = hk.TwoLag(tau, sensor, on_level=110, off_level=20)
    time = share * min(tau, sensor)
    x = np.array([35.0, 90.0])
    expected = exponential(plant.dynamics.a, plant.dynamics.on, x, time)
    assert plant.dynamics.advance(x, True, time) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("near", [0.0, 1e-15, 1e-12, 1e-9, 1e-6, -1e-9])
def test_nearly_equal_lags_lose_no_digits(near: float) -> None:
    """Textbook closed form of two equal lags: 1 - (1 + t/tau) exp(-t/tau)."""
    plant = hk.TwoLag(100.0, 100.0 * (1 + near), on_level=1.0, off_level=0.0)
    found = plant.dynamics.advance(np.zeros(2), True, 150.0)
    assert found[1] == pytest.approx(1 - 2.5 * np.exp(-1.5), rel=max(1e-13, 2 * abs(near)))


@settings(max_examples=50, deadline=None)
@given(st.sampled_from(sorted(MATRICES)), st.floats(0, 5), st.floats(0, 5))
def test_motion_can_be_cut_anywhere(name: str, first: float, second: float) -> None:
    a = np.array(MATRICES[name])
    dynamics = hk.StateSpace(a, np.ones(len(a)), np.ones(len(a))).dynamics
    x = np.arange(1.0, len(a) + 1)
    halfway = dynamics.advance(x, True, first)
    whole = dynamics.advance(x, True, first + second)
    assert dynamics.advance(halfway, True, second) == pytest.approx(whole, rel=1e-10, abs=1e-10)


def test_levels_are_where_the_plant_settles() -> None:
    plant = hk.TwoLag(1800, 120, on_level=[110, 90], off_level=20)
    assert plant.dynamics.settled(True) == pytest.approx(np.array([[110, 110], [90, 90]]))
    assert plant.dynamics.advance(np.zeros(2), True, 1e6)[0] == pytest.approx([110, 110])
    assert np.isnan(hk.Integrating(1, -1).dynamics.settled(True)).all()


@pytest.mark.parametrize(
    "plant",
    [hk.FirstOrder(600, 40, 10), hk.TwoLag(600, 60, 40, 10)],
    ids=["one lag", "two lags"],
)
def test_a_disturbance_shifts_the_levels(plant: Any) -> None:
    shifted = plant.dynamics.shifted(np.array([0.0, 3.0]))
    assert shifted.sensed_of(shifted.settled(True)) == pytest.approx([40, 43])
    assert shifted.sensed_of(shifted.settled(False)) == pytest.approx([10, 13])


def test_a_disturbance_of_an_integrator_is_a_rate() -> None:
    shifted = hk.Integrating(0.5, -0.25).dynamics.shifted(0.1)
    assert shifted.rate(np.zeros(1), True) == pytest.approx([0.6])
    assert shifted.rate(np.zeros(1), False) == pytest.approx([-0.15])


def test_a_plant_with_several_inputs_says_how_a_disturbance_enters() -> None:
    given: dict[str, Any] = {
        "a": [[-1.0]], "b": [[1.0, 0.5]], "c": [1.0], "on": [1, 20], "off": [0, 20],
    }  # fmt: skip
    with pytest.raises(hk.InputError, match="disturbance enters"):
        hk.StateSpace(**given).dynamics.shifted(1.0)
    shifted = hk.StateSpace(**given, disturbance=[2.0]).dynamics.shifted(1.5)
    assert shifted.rate(np.zeros(1), False) == pytest.approx([0.5 * 20 + 3.0])


def test_dead_time_may_differ_for_on_and_off() -> None:
    plant = hk.FirstOrder(600, 40, 10, dead_time=("30 s", [5, 10]))
    assert plant.dynamics.dead_on == 30
    assert plant.dynamics.dead_off == pytest.approx([5, 10])
    assert plant.shape == (2,)


def test_all_faults_come_together() -> None:
    with pytest.raises(hk.PlantError) as caught:
        hk.TwoLag(tau=0, sensor_tau="slow", on_level=np.nan, off_level=20, dead_time=(1, 2, 3))
    report = str(caught.value)
    assert len(caught.value.faults) == 4
    assert all(name in report for name in ("tau", "sensor_tau", "on_level", "dead_time"))


def test_what_is_no_text_is_refused() -> None:
    with pytest.raises(hk.PlantError) as caught:
        hk.FirstOrder(600, "40", 10, unit=3, name=None)  # type: ignore[arg-type]
    assert [fault.problem for fault in caught.value.faults] == [
        "unit is not text.", "name is not text.",
    ]  # fmt: skip


def test_a_percent_of_the_process_counts_as_one() -> None:
    humidifier = hk.FirstOrder(600, "80 %", 20, unit="%")
    assert humidifier == hk.FirstOrder(600, 80, "20", unit="%")
    cycle = hk.steady_cycle(humidifier, on_at="45 %", off_at=55)
    assert "45 %" in cycle.to_text().split("lowest")[1].splitlines()[0]
    run = hk.simulate(humidifier, on_at=45, off_at="55 %", start=50, until=5000)
    assert "55 %" in run.to_text().split("highest")[1].splitlines()[0]


def test_arrays_that_do_not_fit_are_refused() -> None:
    with pytest.raises(hk.PlantError, match="do not broadcast") as caught:
        hk.FirstOrder([1, 2], [1, 2, 3], 0)
    assert "tau of shape (2,)" in str(caught.value)


@pytest.mark.parametrize(
    ("change", "culprit"),
    [
        ({"a": [[1.0, 2.0]]}, "a"),
        ({"b": [1.0]}, "b"),
        ({"b": [[1.0, 2.0]]}, "b"),
        ({"b": [[1.0, 2.0], [0.0, 1.0]]}, "on"),
        ({"c": [1.0]}, "c"),
        ({"process": [1.0, 0.0, 0.0]}, "process"),
        ({"disturbance": [1.0]}, "disturbance"),
    ],
)
def test_state_space_names_the_array_that_does_not_fit(change: Any, culprit: str) -> None:
    fitting: dict[str, Any] = {"a": [[-1.0, 0.0], [1.0, -1.0]], "b": [1.0, 0.0], "c": [0.0, 1.0]}
    with pytest.raises(hk.PlantError, match=rf"\b{culprit} has a shape"):
        hk.StateSpace(**{**fitting, **change})


def test_equal_plants_are_equal_and_hash_alike() -> None:
    first, second = (hk.TwoLag(1800, [60, 120], 110, 20, "30 s", unit="°C") for _ in range(2))
    assert first == second
    assert hash(first) == hash(second)
    assert first != hk.TwoLag(1800, [60, 121], 110, 20, 30, unit="°C")
    assert hk.FirstOrder(1, 2, 3) != hk.Integrating(1, 2)


def test_a_plant_cannot_be_changed() -> None:
    plant = hk.FirstOrder([600, 700], 40, 10)
    with pytest.raises(AttributeError):
        plant.tau = 1.0  # type: ignore[misc]
    with pytest.raises(ValueError, match="read-only"):
        np.asarray(plant.tau)[0] = 1.0


def test_some_of_an_array_of_plants() -> None:
    dynamics = hk.TwoLag([[1000], [2000]], [50, 60, 70], 110, 20, 5).dynamics
    assert dynamics.shape == (2, 3)
    one = dynamics.taken(np.s_[1:, 2])
    assert one.a[0] == pytest.approx(hk.TwoLag(2000, 70, 110, 20).dynamics.a)

"""The search for a crossing, and the queue of commands, each against a plain model of it."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from hystkit.analyses.cycle.crossings import first_reach
from hystkit.analyses.cycle.dynamics import Dynamics
from hystkit.analyses.cycle.motion import Coupled, Modal, Motion, motions
from hystkit.analyses.cycle.norms import fading_norm, largest_growth, mean_power
from hystkit.analyses.cycle.pending import Pending

GRID = np.linspace(0, 10, 2001)


def plant(a: Any) -> Dynamics:
    a = np.asarray(a, dtype=float)
    n = a.shape[-1]
    zero, dead = np.zeros((len(a), n)), np.zeros(len(a))
    return Dynamics(a, zero, zero, zero, zero, None, dead, dead)


def matrices(kind: str, count: int, rng: np.random.Generator) -> np.ndarray:
    a = rng.normal(size=(count, 3, 3))
    if kind == "lags":
        return np.tril(a, -1) - np.array([np.diag(rng.uniform(0.1, 5, 3)) for _ in range(count)])
    if kind == "equal lags":
        lag = rng.uniform(0.2, 3, (count, 1, 1))
        return lag * (np.eye(3, k=-1) - np.eye(3))
    if kind == "critically damped":
        w = rng.uniform(0.5, 3, count)
        a = np.zeros((count, 3, 3))
        a[:, 0, 1], a[:, 1, 0], a[:, 1, 1], a[:, 2, 2] = 1, -(w**2), -2 * w, -1
        return a
    if kind == "turning":
        # Damped, undamped and slightly growing oscillations, faster than they fade.
        return 3 * (a - np.swapaxes(a, 1, 2)) - np.eye(3) * rng.uniform(-0.1, 0.3, (count, 1, 1))
    assert kind == "integrating"
    a = np.tril(a, -1)
    a[:, 2, 2] = -rng.uniform(0.1, 2, count)
    return a


def signals(a: np.ndarray, row: np.ndarray, gap: np.ndarray, v: np.ndarray) -> np.ndarray:
    """Each signal on the grid, shape (m, times), by matrix exponentials."""
    n, step = a.shape[-1], GRID[1]
    block = np.zeros((len(a), n + 1, n + 1))
    # The last state stands still and drives the others: x' = A x + v.
    block[:, :n, :n], block[:, :n, n] = a * step, v * step
    stride = expm(block)
    x = np.zeros((len(a), n + 1, 1))
    x[:, n] = 1
    found = []
    for _ in GRID:
        found.append(gap + (row * x[:, :n, 0]).sum(axis=1))
        x = stride @ x
    return np.array(found).T


@pytest.mark.parametrize(
    "kind", ["lags", "equal lags", "critically damped", "turning", "integrating"]
)
def test_the_first_crossing_is_the_first_on_a_fine_grid(kind: str) -> None:
    count = 200
    rng = np.random.default_rng(len(kind))
    a = matrices(kind, count, rng)
    row, v = rng.normal(size=(2, count, 3))
    gap = -(10.0 ** rng.uniform(-3, 1, count))
    expected = signals(a, row, gap, v)
    found = np.full(count, np.nan)
    for index, motion in motions(plant(a)):
        found[index] = searched(motion, row[index], gap[index], v[index])
    crossed = (expected > 0).any(axis=1)
    first = GRID[np.argmax(expected > 0, axis=1)]
    assert np.isinf(found[~crossed]).sum() >= (~crossed).sum() - 2  # a peak between grid points
    assert crossed.sum() > 20
    assert (found[crossed] <= first[crossed] + 1e-9).all()
    # Found earlier than the grid says, the signal has to be there: at the level, by itself.
    for place in np.flatnonzero(np.isfinite(found)):
        at = np.interp(found[place], GRID, expected[place])
        assert abs(at) < 1e-3 * (1 + np.ptp(expected[place]))
        before = found[place] - 1e-9 > GRID
        assert (expected[place][before] <= 1e-12).all()


def searched(motion: Motion, row: Any, gap: Any, v: Any) -> np.ndarray:
    count = len(gap)
    return first_reach(
        motion, motion.row(row), gap, motion.inward(v), np.full(count, 10.0), np.full(count, 1e-15)
    )


def test_which_plants_have_modes() -> None:
    a = np.array([[[-1.0, 0.0], [1.0, -2.0]], [[-1.0, 0.0], [1.0, -1.0]], [[0.0, 1.0], [0.0, 0.0]]])
    (modal, first), (coupled, second) = motions(plant(a))
    assert (modal.tolist(), coupled.tolist()) == ([0], [1, 2])
    assert isinstance(first, Modal)
    assert isinstance(second, Coupled)
    assert np.isinf(second.slowest).tolist() == [False, True]


@pytest.mark.parametrize("kind", ["equal lags", "critically damped", "turning", "integrating"])
def test_rates_stay_below_what_their_norm_says(kind: str) -> None:
    rng = np.random.default_rng(3)
    a, v = matrices(kind, 20, rng), rng.normal(size=(20, 3, 1))
    norm, inverse, growth = fading_norm(a)
    assert np.allclose(norm @ inverse, np.eye(3), atol=1e-6)
    assert (np.linalg.eigvalsh(norm) > 0).all()
    largest = largest_growth(a)

    def size(x: np.ndarray) -> np.ndarray:
        return np.asarray(np.sqrt(np.swapaxes(x, 1, 2) @ norm @ x)[:, 0, 0])

    for time in (0.01, 0.1, 1.0, 3.0):
        later = expm(a * time) @ v
        assert (size(later) <= size(v) * np.exp(growth * time) * (1 + 1e-9)).all()
        bound = np.abs(v).max(axis=(1, 2)) * np.exp(largest * time)
        assert (np.abs(later).max(axis=(1, 2)) <= bound * (1 + 1e-9)).all()


@pytest.mark.parametrize("time", [1e-9, 0.1, 3.0, 1e5])
def test_the_mean_power_is_the_integral_of_the_exponential(time: float) -> None:
    # A filter of 1 ms behind two equal lags of 1000 s: by hand, from its closed form.
    slow, fast = 1e-3, 1e3
    a = np.array([[-slow, 0.0, 0.0], [slow, -slow, 0.0], [0.0, fast, -fast]])
    found = mean_power(a * time) * time
    faded = np.exp(-slow * time)
    assert found[0, 0] == pytest.approx(-np.expm1(-slow * time) / slow, rel=1e-13)
    assert found[1, 1] == pytest.approx(found[0, 0], rel=1e-13)
    assert found[1, 0] == pytest.approx(
        (-np.expm1(-slow * time) - slow * time * faded) / slow, rel=1e-8, abs=1e-13
    )
    grown = solve_ivp(lambda t, x: a @ x + [1, 0, 0], (0, time), np.zeros(3), method="Radau",
                      rtol=1e-9, atol=1e-12)  # fmt: skip
    assert found[:, 0] == pytest.approx(grown.y[:, -1], rel=1e-6, abs=1e-9)
    assert np.allclose(mean_power(np.stack([a * time, a * 0])), [found / time, np.eye(3)])


class Line:
    """One queue as a list of what arrives when, with the states themselves."""

    def __init__(self) -> None:
        self.commanded = self.state = False
        self.coming: list[tuple[float, bool]] = []

    def push(self, when: float) -> None:
        self.commanded = not self.commanded
        self.coming = [one for one in self.coming if one[0] < when] + [(when, self.commanded)]

    def pop(self, now: float) -> bool:
        before = self.state
        while self.coming and self.coming[0][0] <= now:
            self.state = self.coming.pop(0)[1]
        return self.state != before


lags = st.integers(0, 6)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(st.lists(st.tuples(lags, lags, st.booleans(), st.booleans()), max_size=30))
def test_pending_commands_arrive_as_in_a_list_of_states(moves: list[Any]) -> None:
    lines, queue = (Line(), Line()), Pending(2)
    for now, (first, second, *pushed) in enumerate(moves):
        which = np.array(pushed)
        when = now + np.array([first, second], dtype=float)
        queue.push(which, when)
        for line, chosen, time in zip(lines, pushed, when, strict=True):
            if chosen:
                line.push(float(time))
        expected = [line.pop(float(now)) for line in lines]
        assert queue.pop(np.full(2, float(now))).tolist() == expected

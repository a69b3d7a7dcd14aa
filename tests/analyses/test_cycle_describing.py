"""The steady cycle against the describing function of a relay with hysteresis, by python-control.

The describing function keeps the fundamental of the relay's square wave and drops its harmonics.
Y. Z. Tsypkin, Relay Control Systems (1984), gives the exact condition of a symmetric cycle as a
sum over all odd harmonics, Im sum G(ik w)/k = -pi c / (4 b); the describing function keeps its
first term. So the exact frequency is where that term misses by what the others can add up to,
sum over k = 3, 5, ... of |G(ik w)|/k, and no further: that is the bound used here. The values of
both are from memory; the bound itself is a line of algebra.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import control
import numpy as np
import pytest

import hystkit as hk

CASES: list[dict[str, float]] = json.loads(
    (Path(__file__).parents[1] / "published" / "checks.json").read_text(encoding="utf-8")
)["cycle"]["describing_function_relay"]["values"]

HARMONICS = np.arange(3, 4001, 2)


@pytest.mark.parametrize("case", CASES)
def test_describing_function_of_the_relay(case: dict[str, float]) -> None:
    """N(A) = (4 b / pi A) (sqrt(1 - (c/A)^2) - j c/A): Astrom and Murray, Feedback Systems."""
    relay = control.relay_hysteresis_nonlinearity(case["b"], case["c"])
    found = control.describing_function(relay, case["A"])
    assert found == pytest.approx(complex(case["re"], case["im"]), rel=1e-6)


def predicted(lags: list[float], half_width: float) -> tuple[float, float]:
    """Amplitude of the sensed value and angular frequency for levels of +1 and -1."""
    s = control.tf("s")
    plant = 1.0
    for lag in lags:
        plant = plant / (lag * s + 1)
    relay = control.relay_hysteresis_nonlinearity(1.0, half_width)
    amplitudes = np.linspace(1.001 * half_width, 4 / np.pi, 200)
    omega = np.geomspace(0.1, 100, 400) / max(lags)
    response = control.describing_function_response(plant, relay, amplitudes, omega)
    assert len(response.intersections) == 1
    amplitude, frequency = response.intersections[0]
    return float(amplitude), float(frequency)


def gain(lags: list[float], omega: Any) -> Any:
    return np.prod([1 / (1 + 1j * omega * lag) for lag in lags], axis=0)


def missed(lags: list[float], omega: float, half_width: float) -> tuple[float, float]:
    """By how much the first harmonic misses the condition, and what the others can add."""
    first = float(gain(lags, omega).imag + np.pi * half_width / 4)
    rest = float((np.abs(gain(lags, omega * HARMONICS)) / HARMONICS).sum())
    return first, rest


def cycle_of(lags: list[float], half_width: float) -> hk.Cycle:
    if len(lags) == 2:
        plant: Any = hk.TwoLag(lags[0], lags[1], on_level=1.0, off_level=-1.0)
    else:
        rates = 1 / np.array(lags)
        a = np.diag(-rates) + np.diag(rates[1:], -1)
        plant = hk.StateSpace(
            a, rates * np.eye(len(lags))[0], np.eye(len(lags))[-1], on=1.0, off=-1.0
        )
    return hk.steady_cycle(plant, on_at=-half_width, off_at=half_width)


# Where its intersection is exact already, python-control says that it cannot refine it.
@pytest.mark.filterwarnings("ignore:not able to refine")
@pytest.mark.parametrize("half_width", [0.01, 0.05, 0.2])
@pytest.mark.parametrize("lags", [[1.0, 1.0], [10.0, 1.0], [1800.0, 120.0], [1.0, 1.0, 1.0]])
def test_the_describing_function_lies_within_its_known_error(
    lags: list[float], half_width: float
) -> None:
    amplitude, frequency = predicted(lags, half_width)
    found = cycle_of(lags, half_width)
    exact = 2 * np.pi / found.period
    first, rest = missed(lags, frequency, half_width)
    # What python-control found is the first harmonic's own condition.
    assert abs(first) < 0.02 * rest
    first, rest = missed(lags, exact, half_width)
    assert abs(first) <= rest
    # The harmonics of the sensed value are the same terms, and so bound its amplitude.
    harmonics = 4 / np.pi * (np.abs(gain(lags, exact * HARMONICS)) / HARMONICS).sum()
    fundamental = 4 / np.pi * abs(gain(lags, exact))
    assert abs(found.sensed_high - fundamental) <= harmonics
    # Common practice: a low-pass of second order or more leaves an error of 10 % or less in both
    # where harmonics are weak.
    if rest < 0.03 * abs(gain(lags, exact)):
        assert frequency == pytest.approx(exact, rel=0.1)
        assert amplitude == pytest.approx(found.sensed_high, rel=0.1)


@pytest.mark.parametrize("half_width", [0.01, 0.2])
def test_tsypkin_holds_exactly(half_width: float) -> None:
    """All harmonics together: the exact cycle solves the exact condition."""
    lags = [10.0, 1.0]
    exact = 2 * np.pi / cycle_of(lags, half_width).period
    harmonics = np.arange(1, 400_001, 2)
    total = (gain(lags, exact * harmonics).imag / harmonics).sum()
    assert total == pytest.approx(-np.pi * half_width / 4, rel=1e-6)

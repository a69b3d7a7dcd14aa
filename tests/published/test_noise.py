"""Noise and hum against published values, and against values recomputed elsewhere."""

from __future__ import annotations

import json
from math import sqrt
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hystkit as hk

CHECKS: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)["noise"]
# A table of frequencies that is fine at the corner and ends where nothing is left.
FREQUENCY = np.concatenate([[0.0], np.geomspace(1e-3, 1e4, 6000)])


def butterworth(order: int) -> hk.Noise:
    """1 V/√Hz behind a filter with its corner at 1 Hz."""
    return hk.Noise.from_density(FREQUENCY, (1 + FREQUENCY ** (2 * order)) ** -0.5)


def equal_poles(order: int) -> hk.Noise:
    """1 V/√Hz behind poles at 1 Hz."""
    return hk.Noise.from_density(FREQUENCY, (1 + FREQUENCY**2) ** (-order / 2))


def test_the_sources_stand_beside_the_values() -> None:
    assert CHECKS["source"].startswith("S. O. Rice, Bell System Technical Journal")
    assert "MT-048" in CHECKS["fraction_source"]
    assert "Nyquist" in CHECKS["johnson_source"]
    assert CHECKS["filters_source"]


@pytest.mark.parametrize(("sigmas", "rate"), CHECKS["rice_lowpass_1kHz_upcrossings_per_s"].items())
def test_rice_behind_an_ideal_filter(sigmas: str, rate: float) -> None:
    noise = hk.Noise.brick_wall(rms="1m", bandwidth="1k")
    found = hk.false_trip_rate(float(sigmas) * 1e-3, noise)
    assert found == pytest.approx(rate, rel=2e-5)


@pytest.mark.parametrize(("order", "rate"), CHECKS["butterworth_upcrossings_over_fc"].items())
def test_crossings_behind_butterworth_filters(order: str, rate: float) -> None:
    # Of the integral for the slope, 1e-4 lies beyond the end of the table with order 2.
    assert butterworth(int(order)).crossing_rate == pytest.approx(rate, rel=2e-4)


@pytest.mark.parametrize(("order", "rate"), CHECKS["equal_poles_upcrossings_over_pole"].items())
def test_crossings_behind_equal_poles(order: str, rate: float) -> None:
    assert equal_poles(int(order)).crossing_rate == pytest.approx(rate, rel=2e-4)
    if order == "2":
        noise = hk.Noise.two_pole(rms=1.0, f1=1.0, f2=1.0)
        assert noise.crossing_rate == pytest.approx(rate, rel=1e-12)


@pytest.mark.parametrize("order", ["2", "3"])
def test_equivalent_noise_bandwidths(order: str) -> None:
    for make, key in (
        (equal_poles, "enbw_equal_poles_over_pole_frequency"),
        (butterworth, "enbw_butterworth"),
    ):
        assert make(int(order)).rms ** 2 == pytest.approx(CHECKS[key][order], rel=1e-5)
    two = hk.Noise.two_pole(density=1.0, f1=1.0, f2=1.0)
    assert two.rms**2 == pytest.approx(CHECKS["enbw_equal_poles_over_pole_frequency"]["2"])


def test_the_noise_bandwidth_of_one_pole() -> None:
    """With the second pole far beyond, as one pole alone has no crossing rate."""
    far = hk.Noise.two_pole(density=1.0, f1=1.0, f2=1e8)
    for key in ("enbw_equal_poles_over_pole_frequency", "enbw_butterworth"):
        assert far.rms**2 == pytest.approx(CHECKS[key]["1"], rel=1e-6)


def test_thermal_noise() -> None:
    case = CHECKS["johnson"]
    noise = hk.Noise.johnson(case["ohm"], case["hz"], case["kelvin"])
    assert noise.rms == pytest.approx(case["volt"], rel=case["rel_tol"])
    # A density of 4 nV/√Hz for 1 kΩ at room temperature is common practice.
    density = hk.Noise.johnson("1k", 1).rms
    assert density == pytest.approx(4e-9, rel=0.02)
    poles = hk.Noise.two_pole(density=density, f1="1M", f2="1M")
    assert poles.rms == pytest.approx(density * sqrt(0.785398e6), rel=1e-6)


@pytest.mark.parametrize(("peak_to_peak", "share"), CHECKS["fraction_outside_peak_to_peak"].items())
def test_realisations_stay_within_peak_to_peak_limits(peak_to_peak: str, share: float) -> None:
    record = hk.Noise.brick_wall(rms=1.0, bandwidth=1.0).generate(1e6, 2.0, seed=1)
    outside = np.count_nonzero(np.abs(record) > float(peak_to_peak) / 2)
    assert outside == pytest.approx(share * record.size, abs=4 * sqrt(share * record.size))


# Recomputed in other code from Rice's rates: width over rms at which one passage in a thousand
# switches more than once, by crossings of the mean while the ramp rises by the rms.
WIDTHS = {1e1: 6.6, 1e2: 7.8, 1e3: 8.8, 1e4: 9.8, 1e5: 10.7}
# Simulated in other code with noise behind two poles, on a ramp with 100 crossings.
EXTRA = {2.0: 49, 4.0: 6.8, 5.0: 1.7}


@pytest.mark.parametrize(("crossings", "width"), WIDTHS.items())
def test_the_width_for_one_passage_in_a_thousand(crossings: float, width: float) -> None:
    noise = hk.Noise.brick_wall(rms=1.0, bandwidth=sqrt(3))
    found = hk.width_for(probability=1e-3, noise=noise, slope=1 / crossings)
    assert found == pytest.approx(width, abs=0.06)
    assert hk.chatter(found * 0.999, noise, 1 / crossings).inside_range


def test_the_width_on_a_fast_ramp_is_on_the_safe_side() -> None:
    """Rice's rates alone give 5.1; the formula is conservative where noise and ramp are as fast."""
    noise = hk.Noise.brick_wall(rms=1.0, bandwidth=sqrt(3))
    assert 5.1 < hk.width_for(probability=1e-3, noise=noise, slope=1.0) < 5.5


@pytest.mark.parametrize(("width", "cycles"), EXTRA.items())
def test_extra_cycles_are_conservative(width: float, cycles: float) -> None:
    noise = hk.Noise.two_pole(rms=1.0, f1=1.0, f2=1.0)
    found = hk.chatter(width, noise, 0.01).extra_cycles
    assert cycles * 0.98 < found < cycles * 1.25


@pytest.mark.parametrize(("crossings", "shift"), [(10, 2.0), (100, 2.8)])
def test_noise_trips_early(crossings: float, shift: float) -> None:
    noise = hk.Noise.brick_wall(rms=1.0, bandwidth=sqrt(3))
    assert hk.chatter(8.0, noise, 1 / crossings).early_shift == pytest.approx(shift, abs=0.05)


def test_hum_of_a_light_beam() -> None:
    """Ripple of 60 mV peak to peak at 100 Hz; widths recomputed by hand from the sum of both."""
    for slope, width in ((0.8, 56e-3), (5.0, 37e-3)):
        assert hk.hum_width("30m", 100, slope) == pytest.approx(width, abs=0.5e-3)
    assert hk.hum_width("30m", 100, 18.7) > 0
    assert hk.hum_width("30m", 100, 18.9) == 0

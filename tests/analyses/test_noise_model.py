"""Descriptions of noise: moments against quadrature, realisations against the process."""

from __future__ import annotations

import pickle
from math import acos, inf, pi, sqrt
from typing import Any

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.signal import butter, freqs, lfilter, welch

import hystkit as hk
from hystkit.analyses.noise.spectrum import Table, TwoPole
from tests.analyses.noise_process import autocovariance

POLES = st.floats(1e-1, 1e5)


def moment(density: Any, order: int) -> float:
    """By quadrature over the logarithm of frequency."""
    return float(quad(lambda u: np.exp((order + 1) * u) * density(np.exp(u)), -25, 25, limit=400,
                      points=[-5, 0, 5])[0])  # fmt: skip


@pytest.mark.parametrize(("f1", "f2"), [(1.0, 1.0), (1.0, 1.5), (0.2, 30.0)])
def test_two_poles_against_quadrature(f1: float, f2: float) -> None:
    def density(f: float) -> float:
        return float(1 / ((f**2 + f1**2) * (f**2 + f2**2)))

    zero, second = (moment(density, order) for order in (0, 2))
    noise = hk.Noise.two_pole(rms=3.0, f1=f1, f2=f2)
    assert noise.rms == 3.0
    assert noise.crossing_rate == pytest.approx(sqrt(second / zero), rel=1e-6)
    assert noise.crossing_rate == pytest.approx(sqrt(f1 * f2), rel=1e-12)
    # White noise of 1 V/√Hz before the poles.
    before = hk.Noise.two_pole(density=1.0, f1=f1, f2=f2)
    assert before.rms == pytest.approx(f1 * f2 * sqrt(zero), rel=1e-6)
    assert before.crossing_rate == pytest.approx(noise.crossing_rate)


@given(f1=POLES, f2=POLES)
def test_poles_may_be_exchanged(f1: float, f2: float) -> None:
    a, b = (hk.Noise.two_pole(rms="1m", f1=x, f2=y) for x, y in ((f1, f2), (f2, f1)))
    assert a.crossing_rate == pytest.approx(b.crossing_rate)
    assert a.relaxation == pytest.approx(2 * pi / (1 / f1 + 1 / f2))
    assert a.describe == b.describe


@pytest.mark.parametrize("slope", [-4.0, -3.2, -1.0, 0.0, 2.0])
@pytest.mark.parametrize("order", [0, 2])
def test_a_power_law_is_integrated_exactly(slope: float, order: int) -> None:
    f = np.array([0.5, 2.0, 40.0])
    table = Table(tuple(f), tuple(f**slope))
    exact = quad(lambda x: x ** (order + slope), 0.5, 40.0, epsabs=0, epsrel=1e-12)[0]
    assert table.moment(order) == pytest.approx(exact, rel=1e-10)


@pytest.mark.parametrize("order", [0, 2])
def test_a_straight_line_is_integrated_exactly(order: int) -> None:
    """From 0 Hz on, and down to no noise, where there is no power law."""
    table = Table((0.0, 3.0, 7.0), (2.0, 5.0, 0.0))
    exact = quad(lambda x: x**order * np.interp(x, [0, 3, 7], [2, 5, 0]), 0, 7, points=[3])[0]
    assert table.moment(order) == pytest.approx(exact, rel=1e-10)
    assert table.at(np.array([1.5, 5.0, 8.0])) == pytest.approx([3.5, 2.5, 0.0])


def test_points_along_a_law_change_nothing() -> None:
    coarse, fine = np.geomspace(1, 1e4, 5), np.geomspace(1, 1e4, 400)
    found = [hk.Noise.from_density([*f, 2e4], [*(f**-1.8), 1e-20]) for f in (coarse, fine)]
    assert found[0].rms == pytest.approx(found[1].rms, rel=1e-6)
    assert found[0].crossing_rate == pytest.approx(found[1].crossing_rate, rel=1e-4)


def test_a_table_of_two_poles_is_two_poles() -> None:
    f = np.concatenate([[0.0], np.geomspace(1e-3, 1e5, 4000)])
    noise = hk.Noise.from_density(f, 1 / np.sqrt((1 + f**2) * (1 + (f / 30) ** 2)))
    poles = hk.Noise.two_pole(density=1.0, f1=1.0, f2=30.0)
    for name in ("rms", "crossing_rate", "relaxation"):
        assert getattr(noise, name) == pytest.approx(getattr(poles, name), rel=1e-3), name


def test_relaxation_of_a_first_order_noise_is_its_pole() -> None:
    noise = hk.Noise.two_pole(rms=1.0, f1=1.0, f2=1e4)
    assert noise.relaxation == pytest.approx(2 * pi, rel=1e-3)
    wall = hk.Noise.brick_wall(rms=2.0, bandwidth=5.0)
    assert wall.relaxation == pytest.approx(pi**2 * 5.0)
    # Deepest trough of sin(x)/x.
    assert wall.undershoot == pytest.approx(0.2172, abs=2e-3)


@pytest.mark.parametrize("f2", [None, inf])
def test_a_single_pole_is_refused(f2: float | None) -> None:
    with pytest.raises(hk.NoiseModelError) as caught:
        hk.Noise.two_pole(rms=1e-3, f1=1e3, f2=f2)
    report = str(caught.value)
    assert "crossing rate of noise behind a single pole diverges" in report
    assert "add the device's own pole: Noise.two_pole(rms=, f1=, f2=<device bandwidth>)" in report


def falling(f: Any, slope: float) -> Any:
    return (1 + np.asarray(f) ** 2) ** (slope / 4)


@pytest.mark.parametrize("slope", [-1.0, -2.0, -2.5])
def test_a_density_that_ends_while_it_falls_is_refused(slope: float) -> None:
    f = np.concatenate([[0.0], np.geomspace(0.1, 1e3, 50)])
    with pytest.raises(hk.NoiseModelError, match=rf"{10 * slope:.0f} dB per decade at its end"):
        hk.Noise.from_density(f, falling(f, slope))
    # Bare 1/f² in power, two points.
    with pytest.raises(hk.NoiseModelError, match="device's own pole"):
        hk.Noise.from_density([1, 1e3], [1, 1e-3])


@pytest.mark.parametrize("slope", [-4.0, -6.0, 0.0])
def test_a_density_that_ends_is_taken(slope: float) -> None:
    f = np.concatenate([[0.0], np.geomspace(0.1, 1e3, 50)])
    assert hk.Noise.from_density(f, falling(f, slope)).crossing_rate > 0


def test_a_sharp_filter_from_its_response() -> None:
    f = np.linspace(0, 50, 40_001)
    _, response = freqs(*butter(4, 2 * pi, analog=True), worN=2 * pi * f)
    noise = hk.Noise.from_density(f, np.abs(response))
    # sin(π/2n) / sin(3π/2n) for order n, from the integral of f² / (1 + f^2n).
    expected = sqrt(np.sin(pi / 8) / np.sin(3 * pi / 8))
    assert noise.crossing_rate == pytest.approx(expected, rel=1e-3)


PROCESSES = [
    hk.Noise.brick_wall(rms=2.0, bandwidth=sqrt(3)),
    hk.Noise.two_pole(rms=2.0, f1=1.0, f2=1.0),
    hk.Noise.two_pole(rms=2.0, f1=0.1, f2=10.0),
]


@pytest.mark.parametrize("noise", PROCESSES, ids=lambda noise: noise.origin)
@pytest.mark.parametrize("rate", [1.3, 8.0, 50.0])
def test_realisations_have_the_rms_at_any_rate(noise: hk.Noise, rate: float) -> None:
    record = noise.generate(2e5 / rate, rate, seed=4)
    assert record.size == 200_000
    effective = min(2e5, 2e5 / rate * noise.relaxation)
    assert record.std() == pytest.approx(2.0, rel=4 / sqrt(effective))
    assert abs(record.mean()) < 12 / sqrt(effective)
    assert np.array_equal(record, noise.generate(2e5 / rate, rate, seed=4))
    assert not np.array_equal(record, noise.generate(2e5 / rate, rate, seed=5))


@pytest.mark.parametrize("ratio", [1.0, 100.0])
def test_realisations_of_two_poles_have_their_autocovariance(ratio: float) -> None:
    rate = 30.0
    noise = hk.Noise.two_pole(rms=1.0, f1=1 / sqrt(ratio), f2=sqrt(ratio))
    record = noise.generate(4e5 / rate, rate, seed=6)
    for lag in (1, 5, 20, 60):
        found = float(np.mean(record[lag:] * record[:-lag]))
        assert found == pytest.approx(autocovariance(ratio, lag / rate), abs=0.03)


@pytest.mark.parametrize("noise", PROCESSES, ids=lambda noise: noise.origin)
def test_realisations_cross_as_often_as_their_samples_can_show(noise: hk.Noise) -> None:
    """Crossings of a sampled Gaussian process: arccos of the correlation of neighbours, exactly."""
    rate = 60.0
    record = noise.generate(1e4, rate, seed=7)
    neighbours = float(np.mean(record[1:] * record[:-1]) / np.mean(record**2))
    count = np.count_nonzero((record[1:] > 0) & (record[:-1] <= 0))
    assert count / 1e4 == pytest.approx(acos(neighbours) / (2 * pi) * rate, rel=0.02)
    assert 0.8 * noise.crossing_rate < count / 1e4 < 1.03 * noise.crossing_rate


def test_realisations_of_a_table_have_its_density() -> None:
    f = np.array([0.0, 10.0, 40.0, 80.0, 90.0])
    volts = np.array([3.0, 1.0, 2.0, 2.0, 0.0])
    noise = hk.Noise.from_density(f, volts)
    record = noise.generate(4000.0, 400.0, seed=8)
    seen, power = welch(record, 400.0, nperseg=2000)
    for low, high in ((1, 9), (12, 38), (45, 78)):
        part = (seen > low) & (seen < high)
        expected = np.mean(Table(tuple(f), tuple(volts**2)).at(seen[part]))
        assert np.mean(power[part]) == pytest.approx(expected, rel=0.03)
    assert np.mean(power[seen > 95]) < 1e-3


def test_realisations_are_gaussian_and_do_not_repeat() -> None:
    record = PROCESSES[1].generate(4000, 50, seed=9) / 2
    for level, share in ((1.0, 0.31731), (2.0, 0.0455)):  # two-sided tails
        assert np.mean(np.abs(record) > level) == pytest.approx(share, rel=0.1)
    ends = [r[[0, -1]] for r in (PROCESSES[1].generate(4, 50, seed=s) for s in range(2000))]
    assert abs(np.corrcoef(np.transpose(ends))[0, 1]) < 0.1


def test_measured_noise_is_the_noise_that_was_drawn() -> None:
    noise = hk.Noise.two_pole(rms="5m", f1="1k", f2="4k")
    record = 0.7 + noise.generate(2.0, 2e5, seed=10)
    found = hk.Noise.from_samples(record, "200k")
    assert found.rms == pytest.approx(noise.rms, rel=0.03)
    assert found.crossing_rate == pytest.approx(noise.crossing_rate, rel=0.08)
    assert found.relaxation == pytest.approx(noise.relaxation, rel=0.3)
    assert abs(found.undershoot) < 0.1
    assert abs(found.memory) < 0.1
    assert "up-crossings in 2 s of samples" in found.describe
    again = hk.Noise.from_samples(found.generate(2.0, 2e5, seed=11), 2e5)
    assert again.rms == pytest.approx(found.rms, rel=0.05)
    assert again.crossing_rate == pytest.approx(found.crossing_rate, rel=0.1)
    ours, theirs = (hk.chatter("20m", n, 10).probability for n in (found, noise))
    assert ours == pytest.approx(theirs, rel=0.3)


def test_a_record_of_a_single_pole_is_refused() -> None:
    rng = np.random.default_rng(12)
    record = lfilter([1.0], [1.0, -np.exp(-0.01)], rng.standard_normal(400_000))
    with pytest.raises(hk.NoiseModelError, match="depends on its sample rate"):
        hk.Noise.from_samples(record, 1e4)
    with pytest.raises(hk.NoiseModelError, match="depends on its sample rate"):
        hk.Noise.from_samples(rng.standard_normal(10_000), 1e4)
    with pytest.raises(hk.NoiseModelError, match="too few crossings"):
        hk.Noise.from_samples(np.sin(np.linspace(0, 60, 1000)), 1e4)


@pytest.mark.parametrize("ratio", [1.0, 10.0, 1e3, 1e6])
def test_poles_have_no_resonance_and_no_slow_part(ratio: float) -> None:
    noise = hk.Noise.two_pole(rms=1.0, f1=1.0, f2=ratio)
    assert abs(noise.undershoot) < 0.01
    later = 4 / noise.relaxation + 1 / noise.crossing_rate
    expected = autocovariance(ratio, later * sqrt(ratio))
    assert noise.memory == pytest.approx(expected, abs=2e-3)


def test_a_resonance_and_a_slow_part_are_seen() -> None:
    band = hk.Noise.from_density([0.9, 1.1], [1.0, 1.0])
    assert band.undershoot > 0.9
    f = np.concatenate([[0.0], np.geomspace(1e-3, 300, 1000)])
    resonant = hk.Noise.from_density(f, 1 / np.sqrt((1 - f**2) ** 2 + (f / 2) ** 2))
    # Of an oscillator with quality Q, exp(-pi / sqrt(4 Q^2 - 1)) half a period later.
    assert resonant.undershoot == pytest.approx(np.exp(-pi / sqrt(15)), abs=0.02)
    slow = np.sqrt((1 + 0.3 / np.maximum(f, 3e-3)) / ((1 + f**2) * (1 + (f / 5) ** 2)))
    assert hk.Noise.from_density(f, slow).memory > 0.1
    assert "resonant" in band.to_text()


@pytest.mark.parametrize(
    ("call", "text"),
    [
        (lambda: hk.Noise.brick_wall(rms=-1, bandwidth="x"), "2 faults in this noise:"),
        (lambda: hk.Noise.brick_wall(rms=[1, 2], bandwidth=1), "rms is not a single number."),
        (lambda: hk.Noise.two_pole(f1=1, f2=2),
         "the strength of this noise is given twice, or not at all."),
        (lambda: hk.Noise.two_pole(rms=1, density=1, f1=1, f2=2),
         "the strength of this noise is given twice, or not at all."),
        (lambda: hk.Noise.two_pole(rms=0, f1=0, f2="1k"), "2 faults in this noise:"),
        (lambda: hk.Noise.johnson("100k", 0, -3), "2 faults in this noise:"),
        (lambda: hk.Noise.from_density([1, 2], [1]),
         "these two columns are not a table of noise densities."),
        (lambda: hk.Noise.from_density([2, 1], [1, 1]),
         "these two columns are not a table of noise densities."),
        (lambda: hk.Noise.from_density([1, 2], [0, 0]),
         "these two columns are not a table of noise densities."),
        (lambda: hk.Noise.from_density("ab", None),
         "these two columns are not a table of noise densities."),
        (lambda: hk.Noise.from_samples([[1.0]], 1), "this is not a record of noise."),
        (lambda: hk.Noise.from_samples([1.0, np.nan], 1), "this is not a record of noise."),
        (lambda: PROCESSES[0].generate(0, -1), "2 faults in this record:"),
    ],
)  # fmt: skip
def test_refusals(call: Any, text: str) -> None:
    with pytest.raises(hk.InputError) as caught:
        call()
    assert str(caught.value).splitlines()[0] == text


@pytest.mark.parametrize("noise", PROCESSES, ids=lambda noise: noise.origin)
def test_scaled_noise_crosses_as_often(noise: hk.Noise) -> None:
    found = noise.scaled(10)
    assert found.rms == pytest.approx(20.0)
    assert found.crossing_rate == noise.crossing_rate
    assert found.relaxation == pytest.approx(noise.relaxation)
    assert found.generate(3, 50) == pytest.approx(10 * noise.generate(3, 50))
    with pytest.raises(hk.InputError, match="factor is not positive"):
        noise.scaled(0)


def test_noise_can_be_compared_and_kept() -> None:
    noise = hk.Noise.two_pole(rms="1m", f1="1k", f2="1M")
    assert noise == hk.Noise.two_pole(rms=1e-3, f1=1e6, f2=1e3)
    assert noise != hk.Noise.two_pole(rms=1e-3, f1=1e6, f2=2e3)
    assert pickle.loads(pickle.dumps(noise)) == noise
    assert len({noise, hk.Noise.two_pole(rms="1m", f1="1k", f2="1M")}) == 1


@pytest.mark.parametrize("rate", [8.0, 62.0, 64.0, 1e5, 1e9])
@pytest.mark.parametrize("f2", [1.0, 1.001, 5.0])
def test_sampled_two_poles_keep_their_digits_at_any_rate(f2: float, rate: float) -> None:
    """Against the same closed form with 60 digits; equal poles as a limit."""
    frequency = np.array([0.0, 1e-4, 0.1, 0.5]) * rate
    found = TwoPole(1.0, 1.0, f2).folded(frequency, rate)
    with mpmath.workdps(60):
        w1 = 2 * mpmath.pi / mpmath.mpf(rate)
        w2 = w1 * (mpmath.mpf(f2) if f2 > 1 else 1 + mpmath.mpf(10) ** -20)

        def shape(w: mpmath.mpf, at: float) -> mpmath.mpf:
            turn = 2 * mpmath.pi * mpmath.mpf(at) / mpmath.mpf(rate)
            return mpmath.sinh(w) / (mpmath.cosh(w) - mpmath.cos(turn))

        expected = [
            float(2 / mpmath.mpf(rate) * (w2 * shape(w1, f) - w1 * shape(w2, f)) / (w2 - w1))
            for f in frequency
        ]
    assert found == pytest.approx(expected, rel=2e-5)

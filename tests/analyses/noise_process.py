"""Noise simulated by other means than those of the package, and the switch on a noisy ramp."""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, pi, sqrt
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.signal import butter, lfilter, sosfilt, sosfreqz

import hystkit as hk

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Process:
    """Gaussian noise with rms 1 and one crossing of its mean per second.

    `ratio` is that of the poles; None for a brick wall. `per_crossing` is the samples a second:
    many enough to lose at most 5 % of the crossings.
    """

    ratio: float | None
    per_crossing: int

    @property
    def noise(self) -> hk.Noise:
        if self.ratio is None:
            return hk.Noise.brick_wall(rms=1.0, bandwidth=sqrt(3))
        return hk.Noise.two_pole(rms=1.0, f1=1 / sqrt(self.ratio), f2=sqrt(self.ratio))

    def records(self, count: int, samples: int, rng: np.random.Generator) -> Floats:
        if self.ratio is None:
            return _brick_wall(count, samples, self.per_crossing, rng)
        return _two_pole(self.ratio, count, samples, self.per_crossing, rng)


@dataclass(frozen=True)
class Filtered(Process):
    """White noise behind a Butterworth filter, simulated with its digital form."""

    order: int = 3

    @property
    def edge(self) -> float:
        """Corner frequency at which the mean is crossed once a second."""
        return sqrt(np.sin(1.5 * pi / self.order) / np.sin(0.5 * pi / self.order))

    @property
    def noise(self) -> hk.Noise:
        f = np.concatenate([[0.0], np.geomspace(1e-3, 300, 3000)])
        unit = hk.Noise.from_density(f, (1 + (f / self.edge) ** (2 * self.order)) ** -0.5)
        return unit.scaled(1 / unit.rms)

    def records(self, count: int, samples: int, rng: np.random.Generator) -> Floats:
        sections = butter(self.order, self.edge, fs=self.per_crossing, output="sos")
        warm_up = 20 * self.per_crossing
        found = sosfilt(sections, rng.standard_normal((count, samples + warm_up)), axis=1)
        response = sosfreqz(sections, worN=1 << 14, fs=self.per_crossing)[1]
        return np.asarray(found[:, warm_up:] / sqrt(np.mean(np.abs(response) ** 2)))


BRICK_WALL = Process(None, 14)
EQUAL_POLES = Process(1.0, 40)
POLES_APART = Process(10.0, 80)
POLES_FAR_APART = Process(100.0, 200)
POLES_FARTHEST_APART = Process(1000.0, 600)
THIRD_ORDER = Filtered(None, 20)


def autocovariance(ratio: float, time: float) -> float:
    """Of noise behind two poles, the textbook's sum of two exponentials."""
    w1, w2 = 2 * pi / sqrt(ratio), 2 * pi * sqrt(ratio)
    if ratio == 1.0:
        return (1 + w1 * time) * exp(-w1 * time)
    return (w2 * exp(-w1 * time) - w1 * exp(-w2 * time)) / (w2 - w1)


def _two_pole(ratio: float, count: int, samples: int, rate: int, rng: Any) -> Floats:
    """Recursion of second order that has exactly this autocovariance at the samples."""
    a1, a2 = (exp(-2 * pi * f / rate) for f in (1 / sqrt(ratio), sqrt(ratio)))
    poles = np.array([1.0, -(a1 + a2), a1 * a2])

    def driving(lag: int) -> float:
        pairs = np.ndenumerate(np.outer(poles, poles))
        return sum(float(c) * autocovariance(ratio, abs(lag + i - j) / rate) for (i, j), c in pairs)

    variance, ratio_1 = driving(0), driving(1) / driving(0)
    zero = (1 - sqrt(1 - 4 * ratio_1**2)) / (2 * ratio_1)
    scale = sqrt(variance / (1 + zero**2))
    warm_up = int(3 * rate * sqrt(ratio))
    white = rng.standard_normal((count, samples + warm_up))
    return np.asarray(lfilter([scale, scale * zero], poles, white, axis=1)[:, warm_up:])


def _brick_wall(count: int, samples: int, rate: int, rng: Any) -> Floats:
    """Equal random amplitudes at all frequencies below the edge, of twice the length."""
    length = 1 << int(np.ceil(np.log2(2 * samples)))
    top = int(sqrt(3) * length / rate)
    spectrum = np.zeros((count, length // 2 + 1), dtype=complex)
    draw = rng.standard_normal((2, count, top))
    spectrum[:, 1 : top + 1] = draw[0] + 1j * draw[1]
    return np.asarray(np.fft.irfft(spectrum, axis=1)[:, :samples] * (length / (2 * sqrt(top))))


@dataclass(frozen=True)
class Counted:
    """What many passages showed at one width."""

    passages: int
    chattering: int
    extra_cycles: float
    extra_error: float

    @property
    def probability(self) -> float:
        return self.chattering / self.passages


@dataclass(frozen=True)
class Ramps:
    """Passages at one slope: counts by width, and where the first transition came."""

    by_width: dict[float, Counted]
    first: Floats


def ramps(
    process: Process, crossings: float, widths: tuple[float, ...], samples: float, seed: int
) -> Ramps:
    """Let `samples` samples of noise ramp through bands; `crossings` is nu0 sigma / slope."""
    rng = np.random.default_rng(seed)
    before, behind = 5.2 if crossings < 1e4 else 6.0, max(4.0, 5.2 - min(widths))
    step = 1 / (crossings * process.per_crossing)
    mean = np.arange(-before, behind, step)
    batch = max(1, int(2e6 / mean.size))
    extra: dict[float, list[Any]] = {width: [] for width in widths}
    first = []
    for _ in range(max(1, int(samples / mean.size / batch))):
        signal = mean + process.records(batch, mean.size, rng)
        for width in widths:
            high = hk.simulate_switch(signal, 0.0, -width, start=False)
            rises = np.count_nonzero(high[:, 1:] & ~high[:, :-1], axis=1)
            extra[width].append(np.maximum(rises - 1, 0))
        first.append(mean[(signal > 0).argmax(axis=1)])
    found = {}
    for width, parts in extra.items():
        cycles = np.concatenate(parts)
        error = cycles.std(ddof=1) / sqrt(cycles.size) if cycles.size > 1 else np.inf
        found[width] = Counted(cycles.size, int((cycles > 0).sum()), float(cycles.mean()), error)
    return Ramps(found, np.concatenate(first))

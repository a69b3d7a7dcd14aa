"""Spectra of noise: their moments, and seeded realisations of the process."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
# Images of a sampled table that are folded back one by one.
_IMAGES = 200
# Radians per sample of a pole up to which its power series is used.
_SLOW = 0.5


class Spectrum(Protocol):
    """One-sided power density of a process with zero mean."""

    def moment(self, order: int) -> float:
        """Integral of f**order times the power density, order 0 or 2."""
        ...

    @property
    def relaxation(self) -> float:
        """Rate at which the noise forgets its value, see `Table.relaxation` [1/s]."""
        ...

    def folded(self, frequency: Floats, rate: float) -> Floats:
        """Power density of the process sampled at `rate`, all images folded in."""
        ...

    def scaled(self, factor: float) -> Spectrum:
        """Spectrum of `factor` times the noise."""
        ...


@dataclass(frozen=True)
class Table:
    """A power density by points: a power law between two of them, and nothing outside.

    A segment that starts at 0 Hz, or ends where there is no noise, is a straight line instead.

    Attributes
    ----------
    frequency : tuple of float
        Rising [Hz].
    power : tuple of float
        One-sided power density there, in V²/Hz.
    """

    frequency: tuple[float, ...]
    power: tuple[float, ...]

    def moment(self, order: int) -> float:
        """Integrate f**order times the power density, exactly on every segment.

        Parameters
        ----------
        order : int
            0 or 2.

        Returns
        -------
        float
            The moment.
        """
        f, s = self._points
        line = self._straight
        found = np.empty(len(f) - 1)
        found[line] = _line_moment(f[:-1][line], f[1:][line], s[:-1][line], s[1:][line], order)
        found[~line] = _power_moment(
            f[:-1][~line], f[1:][~line], s[:-1][~line], s[1:][~line], order
        )
        return float(found.sum())

    @property
    def relaxation(self) -> float:
        r"""Rate at which the noise forgets its value [1/s].

        Notes
        -----
        The largest :math:`\omega^2 S / 4 \sigma^2`. For noise through one pole it is the pole,
        2 pi f1, for two poles 2 pi f1 f2 / (f1 + f2).
        """
        f, s = self._points
        return float(np.max((2 * np.pi * f) ** 2 * s)) / (4 * self.moment(0))

    @property
    def end_slope(self) -> float:
        """Exponent of frequency in the power density over the last octave; NaN where none is."""
        top = self.frequency[-1]
        if self.frequency[0] > top / 2:
            return math.nan
        ends = self.at(np.array([top / 2, top]))
        return math.nan if np.any(ends <= 0) else float(np.log2(ends[1] / ends[0]))

    def at(self, frequency: Floats) -> Floats:
        """Give the power density.

        Parameters
        ----------
        frequency : ndarray
            Not negative [Hz].

        Returns
        -------
        ndarray
            In V²/Hz; 0 outside the table.
        """
        f, s = self._points
        value = np.interp(frequency, f, s, left=0.0, right=0.0)
        if np.all(self._straight):
            return value
        with np.errstate(divide="ignore"):
            power = np.exp(np.interp(np.log(frequency), np.log(f), np.log(s)))
        place = np.clip(np.searchsorted(f, frequency, side="right") - 1, 0, len(f) - 2)
        inside = (frequency >= f[0]) & (frequency <= f[-1])
        return np.where(self._straight[place] | ~inside, value, power)

    def folded(self, frequency: Floats, rate: float) -> Floats:
        """Fold every image of a sampled process back.

        Parameters
        ----------
        frequency : ndarray
            0 to half of `rate` [Hz].
        rate : float
            Samples per second [Hz].

        Returns
        -------
        ndarray
            In V²/Hz.
        """
        power = self.at(frequency)
        images = math.ceil(self.frequency[-1] / rate + 0.5)
        for image in range(1, min(images, _IMAGES) + 1):
            power += self.at(image * rate - frequency) + self.at(image * rate + frequency)
        if images > _IMAGES:
            # So many more fill the band evenly.
            rest = self.moment(0) - np.trapezoid(power, frequency)
            power += max(0.0, float(rest)) * 2 / rate
        return power

    def scaled(self, factor: float) -> Table:
        """Give the spectrum of stronger or weaker noise.

        Parameters
        ----------
        factor : float
            Of the voltage.

        Returns
        -------
        Table
            At the same frequencies.
        """
        return Table(self.frequency, tuple(factor**2 * power for power in self.power))

    @cached_property
    def _points(self) -> tuple[Floats, Floats]:
        return np.array(self.frequency), np.array(self.power)

    @cached_property
    def _straight(self) -> NDArray[np.bool_]:
        f, s = self._points
        return np.asarray((f[:-1] == 0) | (s[:-1] <= 0) | (s[1:] <= 0) | (s[1:] == s[:-1]))


@dataclass(frozen=True)
class TwoPole:
    """White noise behind two real poles.

    Attributes
    ----------
    rms : float
        [V].
    f1, f2 : float
        The poles, the lower one first [Hz].
    """

    rms: float
    f1: float
    f2: float

    def moment(self, order: int) -> float:
        """Give the closed form of a moment of the power density.

        Parameters
        ----------
        order : int
            0 or 2.

        Returns
        -------
        float
            The moment.
        """
        return self.rms**2 * (self.f1 * self.f2 if order else 1.0)

    @property
    def relaxation(self) -> float:
        """Rate at which the noise forgets its value, as for `Table` [1/s]."""
        return 2 * math.pi * self.f1 * self.f2 / (self.f1 + self.f2)

    def folded(self, frequency: Floats, rate: float) -> Floats:
        """Give the closed form of the power density of the sampled process.

        Parameters
        ----------
        frequency : ndarray
            0 to half of `rate` [Hz].
        rate : float
            Samples per second [Hz].

        Returns
        -------
        ndarray
            In V²/Hz.
        """
        w1, w2 = sorted(2 * math.pi * f / rate for f in (self.f1, self.f2))
        sine = np.sin(np.pi * frequency / rate) ** 2
        power = _slow_poles(w1, w2, sine) if w2 < _SLOW else _fast_poles(w1, w2, sine)
        return np.asarray(2 * self.rms**2 / rate * np.maximum(power, 0.0))

    def scaled(self, factor: float) -> TwoPole:
        """Give the spectrum of stronger or weaker noise.

        Parameters
        ----------
        factor : float
            Of the voltage.

        Returns
        -------
        TwoPole
            With the same poles.
        """
        return TwoPole(factor * self.rms, self.f1, self.f2)


def _slow_poles(w1: float, w2: float, sine: Floats) -> Floats:
    """Two poles far below the sample rate, where the two terms of `_fast_poles` nearly cancel.

    With D = sinh(w/2)^2 + sin^2 each is sinh(w) / (2 D); their difference is taken by terms in
    w2 - w1, which divides out, so that equal poles need nothing of their own.
    """
    low, high = (math.sinh(w / 2) ** 2 + sine for w in (w1, w2))
    half = (w2 - w1) / 2
    rise = math.sinh((w1 + w2) / 2) / 2 * (math.sinh(half) / half if half else 1.0)
    # Divided difference of sinh(w) / (2 w), by its power series.
    bend = sum(
        math.fsum(w1**j * w2 ** (n - 1 - j) for j in range(n)) / (2 * math.factorial(n + 1))
        for n in range(2, 16, 2)
    )
    level = math.sinh(w1) / (2 * w1)
    return np.asarray(w1 * w2 * (level * rise - bend * low) / (low * high))


def _fast_poles(w1: float, w2: float, sine: Floats) -> Floats:
    """Two poles not far below the sample rate, or above it."""
    # Equal poles are a limit of different ones; this far apart, both errors are small.
    w2 = max(w2, w1 * (1 + 1e-5))
    slow, fast = (
        -math.expm1(-2 * w) / (math.expm1(-w) ** 2 + 4 * math.exp(-w) * sine) for w in (w1, w2)
    )
    return np.asarray((w2 * slow - w1 * fast) / (w2 - w1))


def realise(spectrum: Spectrum, samples: int, rate: float, seed: int) -> Floats:
    """Draw a record of a Gaussian process with this spectrum.

    Parameters
    ----------
    spectrum : Spectrum
        Of the process.
    samples : int
        Length of the record.
    rate : float
        Samples per second [Hz].
    seed : int
        The same seed gives the same record.

    Returns
    -------
    ndarray, shape (samples,)
        [V].

    Notes
    -----
    Random amplitudes at the frequencies of a record at least twice as long, so that its end is not
    tied to its beginning; the expected rms is exact.
    """
    from scipy.fft import irfft, next_fast_len  # rarely needed

    length = next_fast_len(max(2 * samples, 64), real=True)
    length += length % 2
    frequency = np.arange(length // 2 + 1) * (rate / length)
    power = spectrum.folded(frequency, rate) * (rate / length)
    power[[0, -1]] /= 2
    total = power.sum()
    power *= spectrum.moment(0) / total if total > 0 else 0.0
    draw = np.random.default_rng(seed).standard_normal((2, power.size))
    amplitude = np.sqrt(power) / 2 * (draw[0] + 1j * draw[1])
    # The lowest and the highest frequency have no partner.
    amplitude[[0, -1]] = np.sqrt(power[[0, -1]]) * draw[0, [0, -1]]
    return np.asarray(irfft(amplitude, length, norm="forward")[:samples])


def autocorrelation(spectrum: Spectrum, rate: float, samples: int) -> Floats:
    """Give the correlation of noise with itself at later times.

    Parameters
    ----------
    spectrum : Spectrum
        Of the noise.
    rate : float
        Points per second [Hz].
    samples : int
        How many points.

    Returns
    -------
    ndarray, shape (samples,)
        From 1 at no delay on [1].
    """
    from scipy.fft import irfft  # rarely needed

    frequency = np.linspace(0, rate / 2, 2 * samples + 1)
    found = irfft(spectrum.folded(frequency, rate))[:samples]
    return np.asarray(found / found[0])


def _line_moment(f0: Any, f1: Any, s0: Any, s1: Any, order: int) -> Any:
    """Moment of a straight line from (f0, s0) to (f1, s1)."""
    slope = (s1 - s0) / (f1 - f0)
    first, second = ((f1**n - f0**n) / n for n in (order + 1, order + 2))
    return (s0 - slope * f0) * first + slope * second


def _power_moment(f0: Any, f1: Any, s0: Any, s1: Any, order: int) -> Any:
    """Moment of a power law through (f0, s0) and (f1, s1), both positive."""
    span = np.log(f1 / f0)
    growth = np.log(s1 / s0) + (order + 1) * span
    # expm1(x) / x tends to 1 where the integrand is flat over the logarithm of frequency.
    flat = np.abs(growth) < 1e-12
    return (
        s0
        * f0 ** (order + 1)
        * span
        * np.where(flat, 1.0, np.expm1(growth) / np.where(flat, 1.0, growth))
    )

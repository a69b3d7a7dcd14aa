"""Noise at the input of a switch: how strong it is, and how often it crosses its mean."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.analyses.noise.measured import measured
from hystkit.analyses.noise.spectrum import Spectrum, Table, TwoPole, autocorrelation, realise
from hystkit.base.errors import Fault, InputError, NoiseModelError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.arrays import read_positives
from hystkit.circuit.reading import Quantity, is_kind, wrong_kind

#: Boltzmann constant, exact in the SI since 2019, in J/K.
BOLTZMANN = 1.380649e-23
#: Deepest negative correlation of noise without a resonance; a brick wall has 0.22.
DEEPEST = 0.25
#: Most correlation that is left after some relaxation times, for noise without a slow part.
LONGEST = 0.1
# Points of the correlation: many for each crossing of the mean, few for each relaxation time.
_POINTS = 2048
_PER_CROSSING, _PER_RELAXATION = 12, 200
_LATER = 8
_SHARPEST = -3.0
_FLATTEST = -0.5
_REASON = "the crossing rate of noise behind a single pole diverges: its slope has no finite rms"
_REMEDY = "add the device's own pole: Noise.two_pole(rms=, f1=, f2=<device bandwidth>)"


@dataclass(frozen=True)
class Noise(Viewed):
    """Stationary Gaussian noise with zero mean, at the signal's input.

    Made by `brick_wall`, `two_pole`, `from_density`, `from_samples` or `johnson`.

    Attributes
    ----------
    rms : float
        [V].
    crossing_rate : float
        Up-crossings of the mean per second [1/s], as S. O. Rice has it.
    relaxation : float
        Rate at which the noise forgets its value [1/s]: the pole 2 pi f1 behind a low one.
    origin : str
        What it was made from.
    spectrum : Spectrum
        Its power density, for `generate`.

    Examples
    --------
    >>> noise = Noise.two_pole(rms="2m", f1="1k", f2="100k")
    >>> round(noise.crossing_rate)
    10000
    """

    rms: float
    crossing_rate: float
    relaxation: float
    origin: str
    spectrum: Spectrum = field(repr=False)

    @classmethod
    def brick_wall(cls, *, rms: Quantity, bandwidth: Quantity) -> Noise:
        """Flat noise up to a frequency, and none above.

        Parameters
        ----------
        rms : float or str
            [V].
        bandwidth : float or str
            Highest frequency [Hz].

        Returns
        -------
        Noise
            With the crossing rate bandwidth / sqrt(3).

        Raises
        ------
        InputError
            Naming every value that cannot be used.

        Examples
        --------
        >>> print(f"{Noise.brick_wall(rms=1.0, bandwidth=1e3).crossing_rate:.2f}")
        577.35
        """
        sigma, top = _positive("this noise", rms=(rms, "V"), bandwidth=(bandwidth, "Hz"))
        table = Table((0.0, top), (sigma**2 / top,) * 2)
        return _made(table, f"brick wall to {show(top, 'Hz')}")

    @classmethod
    def two_pole(
        cls,
        *,
        rms: Quantity | None = None,
        density: Quantity | None = None,
        f1: Quantity,
        f2: Quantity | None = None,
    ) -> Noise:
        """White noise behind two poles, such as a filter and the device's own.

        Parameters
        ----------
        rms : float or str, optional
            Behind both poles [V]. Either this or `density`.
        density : float or str, optional
            Before them, one-sided [V/√Hz].
        f1, f2 : float or str
            Corner frequencies, in either order [Hz].

        Returns
        -------
        Noise
            With the crossing rate sqrt(f1 f2).

        Raises
        ------
        NoiseModelError
            Without the second pole: the crossing rate diverges.
        InputError
            Naming every value that cannot be used.

        Notes
        -----
        The equivalent noise bandwidth is (pi / 2) f1 f2 / (f1 + f2).
        """
        if f2 is None or _is_infinite(f2) or _is_infinite(f1):
            raise NoiseModelError(
                "noise behind a single pole has no crossing rate.",
                asked=f"f1 = {f1}, f2 = {f2}",
                rule=_REASON,
                remedy=_REMEDY,
            )
        if (rms is None) == (density is None):
            raise InputError(
                "the strength of this noise is given twice, or not at all.",
                asked="rms and density" if rms is not None else "neither rms nor density",
                rule="one of them",
                remedy='rms="1m" behind the poles, or density="50n" before them',
            )
        given = (rms, "V") if rms is not None else (density, "V/√Hz")
        strength, *poles = _positive(
            "this noise", **{"density" if rms is None else "rms": given},
            f1=(f1, "Hz"), f2=(f2, "Hz"),
        )  # fmt: skip
        low, high = sorted(poles)
        band = math.pi / 2 * low * high / (low + high)
        sigma = strength if rms is not None else strength * math.sqrt(band)
        origin = f"poles at {show(low, 'Hz')} and {show(high, 'Hz')}"
        return _made(TwoPole(sigma, low, high), origin)

    @classmethod
    def from_density(cls, frequency: ArrayLike, density: ArrayLike) -> Noise:
        """Noise with a given density, as a datasheet or an analyser shows it.

        Parameters
        ----------
        frequency : array_like, shape (n,)
            Rising, from 0 on [Hz].
        density : array_like, shape (n,)
            One-sided noise density there [V/√Hz].

        Returns
        -------
        Noise
            Nothing is assumed below the first frequency or above the last.

        Raises
        ------
        NoiseModelError
            If the power density still falls at the end more slowly than f**-3, so that what lies
            beyond decides the crossing rate: with one pole it falls as f**-2.
        InputError
            If the two are not a table.

        Notes
        -----
        Power laws between the points, integrated exactly. A density that is flat at its end is
        taken as a band that ends there.

        Examples
        --------
        >>> noise = Noise.from_density([0, 1e3], [1e-6, 1e-6])
        >>> print(f"{noise.rms:.4g} {noise.crossing_rate:.2f}")
        3.162e-05 577.35
        """
        f, volts = _columns(frequency, density)
        table = Table(tuple(f.tolist()), tuple((volts**2).tolist()))
        if _SHARPEST < table.end_slope < _FLATTEST:
            raise NoiseModelError(
                "this density has no crossing rate: it ends while it is still falling.",
                asked=f"a density to {show(table.frequency[-1], 'Hz')}",
                have=f"{10 * table.end_slope:.0f} dB per decade at its end",
                rule=f"steeper than -30 dB per decade, or flat; {_REASON}",
                remedy=_REMEDY + ", or measure on, beyond the device's bandwidth",
            )
        band = f"{show(table.frequency[0], 'Hz')} to {show(table.frequency[-1], 'Hz')}"
        return _made(table, f"density from {band}")

    @classmethod
    def from_samples(cls, samples: ArrayLike, rate: Quantity) -> Noise:
        """Noise as measured: rms and crossing rate counted in a record.

        Parameters
        ----------
        samples : array_like, shape (n,)
            Record of the standing signal; its mean is taken off [V].
        rate : float or str
            Samples per second [Hz].

        Returns
        -------
        Noise
            The origin names how many crossings were counted.

        Raises
        ------
        NoiseModelError
            If the count depends on the sample rate, as behind a single pole, or is too small.
        InputError
            If it is not a record.

        Notes
        -----
        The crossing rate is the number of up-crossings of the mean per second. Every other sample
        alone has to show at least 0.8 times as many: smooth noise does, noise behind a single pole
        0.71, and noise that is sampled too slowly 0.5 times. The spectrum, for `generate`, is
        averaged over segments of the record (P. D. Welch's method).
        """
        (per_second,) = _positive("this record", rate=(rate, "Hz"))
        found = measured(samples, per_second)
        return Noise(
            found.rms, found.crossing_rate, found.spectrum.relaxation,
            f"{found.crossings} up-crossings in {show(found.duration, 's')} of samples",
            found.spectrum,
        )  # fmt: skip

    @classmethod
    def johnson(
        cls, resistance: Quantity, bandwidth: Quantity, temperature: float = 300.0
    ) -> Noise:
        """Thermal noise of a resistance in a brick-wall band.

        Parameters
        ----------
        resistance : float or str
            [Ohm].
        bandwidth : float or str
            [Hz].
        temperature : float, default 300
            [K].

        Returns
        -------
        Noise
            With the rms sqrt(4 k T R B).

        Raises
        ------
        InputError
            Naming every value that cannot be used.

        References
        ----------
        J. B. Johnson, Physical Review 32 (1928), 97-109; H. Nyquist, the same, 110-113.

        Examples
        --------
        >>> print(f"{Noise.johnson('100k', '1M').rms * 1e6:.1f} µV")
        40.7 µV
        """
        ohms, band, kelvin = _positive(
            "this noise",
            resistance=(resistance, "Ω"),
            bandwidth=(bandwidth, "Hz"),
            temperature=(temperature, "K"),
        )
        return cls.brick_wall(rms=math.sqrt(4 * BOLTZMANN * kelvin * ohms * band), bandwidth=band)

    @cached_property
    def undershoot(self) -> float:
        """Deepest negative correlation with a later time [1]; near 1 for a narrow band."""
        rate = min(_PER_CROSSING * self.crossing_rate, _PER_RELAXATION * self.relaxation)
        return float(-autocorrelation(self.spectrum, rate, _POINTS).min())

    @cached_property
    def memory(self) -> float:
        """Correlation left after four relaxation times [1]; large where a part is slow."""
        later = 4 / self.relaxation + 1 / self.crossing_rate
        return float(autocorrelation(self.spectrum, _LATER / later, _POINTS)[_LATER])

    @property
    def describe(self) -> str:
        """One line: strength, origin and crossing rate."""
        return (
            f"{show(self.rms, 'V')} rms, {self.origin}, crosses its mean"
            f" {show(self.crossing_rate, '1/s')} upwards"
        )

    def generate(self, duration: Quantity, rate: Quantity, seed: int = 0) -> NDArray[np.float64]:
        """Draw a sample of the same process.

        Parameters
        ----------
        duration : float or str
            [s].
        rate : float or str
            Samples per second [Hz].
        seed : int, default 0
            The same seed gives the same record.

        Returns
        -------
        ndarray, shape (duration * rate,)
            [V].

        Raises
        ------
        InputError
            Naming every value that cannot be used.

        Notes
        -----
        What is above half of `rate` is folded down, as sampling does: the rms is right at any
        rate. To see crossings, take 20 or more samples per crossing, and some more where poles
        are far apart.
        """
        seconds, per_second = _positive("this record", duration=(duration, "s"), rate=(rate, "Hz"))
        samples = max(1, round(seconds * per_second))
        record = realise(self.spectrum, samples, per_second, seed)
        # A spectrum that was averaged over a record need not have exactly its rms.
        return record * (self.rms / math.sqrt(self.spectrum.moment(0)))

    def scaled(self, factor: float) -> Noise:
        """Give stronger or weaker noise of the same kind, as behind a gain.

        Parameters
        ----------
        factor : float
            Of the voltage, above 0 [1].

        Returns
        -------
        Noise
            With `factor` times the rms, and the same crossing rate.

        Raises
        ------
        InputError
            If the factor cannot be used.
        """
        (gain,) = _positive("this gain", factor=(factor, ""))
        return replace(self, rms=gain * self.rms, spectrum=self.spectrum.scaled(gain))

    @property
    def _title(self) -> str:
        return f"Noise, {self.origin}"

    def _fields(self) -> Sequence[Field]:
        return (
            Field("rms", self.rms, "V", "", r"\sigma"),
            Field("crossing rate", self.crossing_rate, "1/s", "up-crossings of the mean", r"\nu_0"),
            Field("relaxation", self.relaxation, "1/s"),
            Field("resonant", self.undershoot > DEEPEST),
            Field("slow part", self.memory > LONGEST),
        )


def _made(spectrum: Table | TwoPole, origin: str) -> Noise:
    """Give the noise of a spectrum whose second moment is known to be finite."""
    power = spectrum.moment(0)
    rate = math.sqrt(spectrum.moment(2) / power)
    return Noise(math.sqrt(power), rate, spectrum.relaxation, origin, spectrum)


def _positive(subject: str, **given: tuple[Any, str]) -> list[float]:
    """Read single numbers that have to be above zero, or report every one that is not."""
    faults: list[Fault] = []
    found = []
    for name, (value, unit) in given.items():
        if not is_kind(value, str) and np.ndim(value) > 0:
            faults.append(wrong_kind(name, value, "a single number", f"one value in {unit}"))
            continue
        found.append(float(read_positives(faults, name, value, unit)))
    if faults:
        raise InputError.of(subject, faults)
    return found


def _is_infinite(value: Any) -> bool:
    return isinstance(value, float) and math.isinf(value)


def _columns(frequency: ArrayLike, density: ArrayLike) -> tuple[Any, Any]:
    """Take both columns of a table of densities, or refuse it."""
    try:
        f, volts = (np.asarray(column, dtype=np.float64) for column in (frequency, density))
        good = f.ndim == 1 and f.shape == volts.shape and f.size >= 2
        good = good and bool(np.all(np.isfinite(f) & np.isfinite(volts) & (f >= 0) & (volts >= 0)))
        good = good and bool(np.all(np.diff(f) > 0) and np.any(volts > 0))
    except (TypeError, ValueError):
        good = False
    if not good:
        raise InputError(
            "these two columns are not a table of noise densities.",
            asked=f"frequency {np.shape(frequency)}, density {np.shape(density)}",
            rule="two points at least, frequencies rising from 0 on, densities finite and not"
            " negative",
            remedy="frequency in Hz, density in V/√Hz, one beside the other",
        )
    return f, volts

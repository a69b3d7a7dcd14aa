"""Noise counted in a record of samples."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.analyses.noise.spectrum import Table
from hystkit.base.errors import InputError, NoiseModelError
from hystkit.base.quantity import show

#: Fewest up-crossings from which a rate is told; the count is then good to about 10 %.
FEWEST = 100
# Crossings that every other sample has to show, relative to all.
_STEADY = 0.8
_SEGMENT = 4096
_BANDS_PER_OCTAVE = 4


@dataclass(frozen=True)
class Measured:
    """What a record shows.

    Attributes
    ----------
    rms : float
        About the mean [V].
    crossings : int
        Up-crossings of the mean.
    duration : float
        [s].
    spectrum : Table
        Averaged over segments.
    """

    rms: float
    crossings: int
    duration: float
    spectrum: Table

    @property
    def crossing_rate(self) -> float:
        """Up-crossings of the mean per second [1/s]."""
        return self.crossings / self.duration


def measured(samples: ArrayLike, rate: float) -> Measured:
    """Count crossings in a record, and estimate its spectrum.

    Parameters
    ----------
    samples : array_like, shape (n,)
        [V].
    rate : float
        Samples per second [Hz].

    Returns
    -------
    Measured
        With a count that does not depend on the sample rate.

    Raises
    ------
    InputError
        If it is not a record.
    NoiseModelError
        If the count is too small, or depends on the sample rate.
    """
    record = _record(samples)
    every, other = _crossings(record), _crossings(record[::2])
    if every < FEWEST:
        raise NoiseModelError(
            "this record has too few crossings of its mean.",
            have=f"{every} in {show(record.size / rate, 's')}",
            rule=f"{FEWEST} at least, for a rate within about 10 %",
            remedy="a longer record, without drift",
        )
    if other < _STEADY * every:
        raise NoiseModelError(
            "the crossing rate of this record depends on its sample rate.",
            have=f"{every} up-crossings, but {other} in every other sample",
            rule="the slope of the noise has a finite rms, and the record shows it; behind a single"
            " pole the crossing rate diverges",
            remedy="sample faster; or add the device's own pole: Noise.two_pole(rms=, f1=,"
            " f2=<device bandwidth>)",
        )
    return Measured(float(record.std()), every, (record.size - 1) / rate, _spectrum(record, rate))


def _record(samples: ArrayLike) -> NDArray[np.float64]:
    try:
        record = np.asarray(samples, dtype=np.float64)
        good = record.ndim == 1 and record.size >= 2 and bool(np.all(np.isfinite(record)))
    except (TypeError, ValueError):
        good = False
    if not good:
        raise InputError(
            "this is not a record of noise.",
            asked=f"samples of shape {np.shape(samples)}",
            rule="one axis, finite numbers",
            remedy="a record of the standing signal in V",
        )
    return np.asarray(record - record.mean())


def _crossings(record: NDArray[np.float64]) -> int:
    above = record > 0
    return int(np.count_nonzero(above[1:] & ~above[:-1]))


def _spectrum(record: NDArray[np.float64], rate: float) -> Table:
    """Average the periodograms of segments, and then bands of a part of an octave."""
    from scipy.signal import welch  # slow to import, rarely needed

    length = min(record.size, max(256, min(_SEGMENT, record.size // 16)))
    frequency, power = welch(record, rate, nperseg=length)
    frequency, power = frequency[1:], power[1:]
    band = np.floor(np.log2(frequency / frequency[0]) * _BANDS_PER_OCTAVE).astype(int)
    _, start = np.unique(band, return_index=True)
    size = np.diff([*start, band.size])
    mean_f, mean_p = (np.add.reduceat(row, start) / size for row in (frequency, power))
    ends_f, ends_p = [0.0, *mean_f, rate / 2], [mean_p[0], *mean_p, mean_p[-1]]
    keep = np.concatenate([[True], np.diff(ends_f) > 0])
    return Table(
        tuple(float(f) for f in np.array(ends_f)[keep]),
        tuple(float(p) for p in np.array(ends_p)[keep]),
    )

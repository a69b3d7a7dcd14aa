"""A noisy signal that passes the band of a stage: a seeded sample, and the output to it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.noise.chatter import Chatter
from hystkit.analyses.noise.model import Noise
from hystkit.base.digits import rounded_up
from hystkit.numeric.switching import simulate_switch
from hystkit.numeric.views import Levels

Array = NDArray[np.float64]
Hum = tuple[float, float]

#: Samples for each crossing of the noise's mean, and for each period of the hum.
PER_CROSSING, PER_PERIOD = 20, 40
#: Samples that are drawn at least and at most.
LEAST, MOST = 1_000, 2**17
#: First transitions lie within so many of their standard deviations.
_REACH = 4.0


@dataclass(frozen=True, eq=False)
class NoiseSample:
    """A ramp that rises through the band with noise and hum on it.

    Attributes
    ----------
    time : ndarray, shape (n,)
        From 0 [s].
    ramp : ndarray, shape (n,)
        The signal without noise and hum [V].
    signal : ndarray, shape (n,)
        With both [V].
    above : ndarray of bool, shape (n,)
        Whether the switch is in the state of a signal above the band.
    coarse : bool
        Whether the samples are too far apart for the noise, so that crossings are missed.
    """

    time: Array
    ramp: Array
    signal: Array
    above: NDArray[np.bool_]
    coarse: bool

    @property
    def interval(self) -> float:
        """Time from one sample to the next [s]."""
        return float(self.time[1] - self.time[0])

    @property
    def length(self) -> float:
        """Length of the record [s]."""
        return float(self.time[-1])

    @cached_property
    def changes(self) -> NDArray[np.intp]:
        """Samples at which the output changes; it starts in the state below the band."""
        before = np.concatenate([[False], self.above[:-1]])
        return np.flatnonzero(self.above != before)

    @property
    def transitions(self) -> int:
        """How often the output changes."""
        return int(self.changes.size)

    @property
    def extra_cycles(self) -> int:
        """Full cycles beyond the one transition that is meant."""
        return max(self.transitions - 1, 0) // 2

    def outline(self, values: Array, columns: int) -> tuple[Array, Array]:
        """Reduce a record to the least and the greatest value of each column of a picture.

        Parameters
        ----------
        values : ndarray, shape (n,)
            One for each sample.
        columns : int
            How many columns there are.

        Returns
        -------
        time, values : ndarray
            Two points for each column, or the record itself where it is not longer.
        """
        if values.size <= 2 * columns:
            return self.time, values
        starts = np.linspace(0, values.size, columns, endpoint=False).astype(np.intp)
        ends = (np.minimum.reduceat(values, starts), np.maximum.reduceat(values, starts))
        return np.repeat(self.time[starts], 2), np.column_stack(ends).ravel()


def passing(levels: Levels, found: Chatter, hum: Hum | None = None, seed: int = 0) -> NoiseSample:
    """Draw a sample of the signal around its passage of the upper trip, and follow the switch.

    Parameters
    ----------
    levels : Levels
        With both trips.
    found : Chatter
        Noise and slope, and when the first transition is to be expected.
    hum : pair of float, optional
        Amplitude [V] and frequency [Hz]; its phase is drawn.
    seed : int, default 0
        The same seed gives the same sample.

    Returns
    -------
    NoiseSample
        From before the first transition that noise can bring about to after the last.

    Notes
    -----
    Transitions can follow each other until the ramp is as far above the lower trip as it was below
    the upper one when they began. Where that takes more samples than are drawn, they are farther
    apart, and `NoiseSample.coarse` says so.
    """
    noise, slope, width = found.noise, float(found.slope), levels.width
    early, spread = float(found.early_shift), _REACH * float(found.jitter)
    swing = 0.0 if hum is None else hum[0]
    begin = -(early + spread + swing)
    end = max(spread - early, early + spread - width) + swing
    length = rounded_up((end - begin) / slope)
    wanted = PER_CROSSING * noise.crossing_rate
    if hum is not None:
        wanted = max(wanted, PER_PERIOD * hum[1])
    samples = int(min(max(math.ceil(wanted * length), LEAST), MOST))
    rate = samples / length
    time = np.arange(samples) / rate
    ramp = levels.upper + begin + slope * time
    signal = ramp + _drawn(noise, length, rate, seed)
    if hum is not None:
        phase = np.random.default_rng([seed, 1]).uniform(0, 2 * np.pi)
        signal += hum[0] * np.sin(2 * np.pi * hum[1] * time + phase)
    above = simulate_switch(signal, levels.upper, levels.lower, start=False)
    return NoiseSample(time, ramp, signal, above, rate < wanted * (1 - 1e-9))


@lru_cache(maxsize=4)
def _drawn(noise: Noise, length: float, rate: float, seed: int) -> Array:
    """Draw the noise; kept while only trips, hum or ramp change."""
    found = noise.generate(length, rate, seed)
    found.setflags(write=False)
    return found

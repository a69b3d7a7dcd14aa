"""What noise and hum make of a design: the width they need, how often they switch, a sample."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.noise.asked import check_noise
from hystkit.analyses.noise.chatter import WIDTHS, Chatter, chatter
from hystkit.analyses.noise.hum import hum_width
from hystkit.analyses.noise.inverse import width_for
from hystkit.analyses.noise.model import Noise
from hystkit.analyses.noise.rates import standing_cycles
from hystkit.base.errors import Fault, InfeasibleWidthError, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.circuit.arrays import read_positives
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, is_kind, wrong_kind
from hystkit.numeric.levels import levels
from hystkit.numeric.views import Levels
from hystkit.review.noise_sample import Hum, NoiseSample, passing
from hystkit.review.service import PROBABILITY

Array = NDArray[np.float64]

#: Widths that are looked at whatever the design has, in units of the rms.
_LEAST, _MOST = 1.0, 12.0
#: Room beyond the widths that are marked, as a factor.
_BESIDE = 1.3
_POINTS = 121
# Ends of the range of widths, times powers of ten: it follows its content in steps.
_ENDS = (1.0, 2.0, 5.0, 10.0)
_HOUR = 3600.0


@dataclass(frozen=True, eq=False)
class NoiseCurve:
    """What noise does at every width of a range.

    Attributes
    ----------
    width : ndarray, shape (n,)
        Ascending [V].
    probability : ndarray, shape (n,)
        Of more than one transition on a passage [1].
    extra_cycles : ndarray, shape (n,)
        Expected on a passage beyond the one transition that is meant [1].
    inside : ndarray of bool, shape (n,)
        Where both were compared with simulations.
    standing : ndarray, shape (n,)
        Full cycles while the signal stands in the middle of the band [1/s].
    standing_inside : ndarray of bool, shape (n,)
        Where that was compared with simulations.
    """

    width: Array
    probability: Array
    extra_cycles: Array
    inside: NDArray[np.bool_]
    standing: Array
    standing_inside: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class NoiseScene(Viewed):
    """A design with noise, and perhaps hum, on a signal that passes its band.

    Attributes
    ----------
    levels : Levels
        Of the design.
    inverts : bool
        Whether the output is low while the signal is above the band.
    noise : Noise
        On the signal.
    slope : float
        Of the signal at the trips [V/s].
    hum : pair of float, or None
        Amplitude [V] and frequency [Hz].
    allowed : float
        Probability of more than one transition on a passage [1].
    needed : float
        Width that keeps the noise to it [V]; NaN where none is known.
    needed_for_hum : float
        Width that hum needs by itself [V]; 0 without hum.
    curve : NoiseCurve
        Over a range of widths that holds all of these.
    found : Chatter or None
        At the design's own width; None where it has no band.
    standing : float
        Full cycles while the signal stands in the middle of the band [1/s]; NaN without a band.
    sample : NoiseSample or None
        One passage; None where the design has no band.
    seed : int
        Of the sample.
    """

    levels: Levels
    inverts: bool
    noise: Noise
    slope: float
    hum: Hum | None
    allowed: float
    needed: float
    needed_for_hum: float
    curve: NoiseCurve
    found: Chatter | None
    standing: float
    sample: NoiseSample | None
    seed: int

    @property
    def width(self) -> float:
        """Width of the design [V]; NaN where it has no band."""
        return math.nan if self.found is None else self.levels.width

    @property
    def together(self) -> float:
        """Width that noise and hum need together, acting at one time [V]."""
        return self.needed + self.needed_for_hum

    @property
    def margin(self) -> float:
        """Width beyond what noise and hum need together [V]."""
        return self.width - self.together

    def sensed(self, width: float) -> float:
        """Give a width about the middle of the band in the measurand.

        Parameters
        ----------
        width : float
            [V].

        Returns
        -------
        float
            In the unit of the signal; NaN without a signal, and beyond its reach.
        """
        signal, middle = self.levels.signal, self.levels.middle
        if signal is None:
            return math.nan
        with np.errstate(all="ignore"):
            ends = signal.quantity(np.array([middle - width / 2, middle + width / 2]))
        return abs(float(ends[1] - ends[0]))

    @property
    def _title(self) -> str:
        return f"Band with {self.noise.describe}"

    def _fields(self) -> Sequence[Field]:
        fields = [Field("slope", self.slope, "V/s", "", "r")]
        if self.hum is not None:
            amplitude, frequency = self.hum
            fields.append(Field("hum", amplitude, "V", f"amplitude, at {frequency:g} Hz"))
        found = self.found
        if found is None:
            fields.append(Field("width", None, "V", self.levels.message, "H"))
        else:
            fields += [
                Field("width", self.width, "V", f"{self.width / self.noise.rms:.3g} rms", "H"),
                Field("more than one transition", found.probability, "",
                      f"of a passage; {found.note}", "P"),
                Field("extra cycles", found.extra_cycles, "", "of a passage"),
                Field("early shift", found.early_shift, "V", "of the first transition, mean"),
                Field("jitter", found.jitter, "V", "of the first transition, rms"),
                Field("false cycles", _HOUR * self.standing, "1/h", "standing in mid-band"),
            ]  # fmt: skip
        known = None if math.isnan(self.needed) else self.needed
        fields.append(Field("needed for noise", known, "V", f"for {self.allowed:.3g}", "", 3))
        if self.hum is not None:
            fields.append(Field("needed for hum", self.needed_for_hum, "V", "", "", 3))
        return fields


def noise_scene(
    design: Design,
    noise: Noise,
    slope: Quantity,
    *,
    hum: tuple[Quantity, Quantity] | None = None,
    probability: Quantity = PROBABILITY,
    seed: int = 0,
) -> NoiseScene:
    """Let a noisy signal pass the band of a design.

    Parameters
    ----------
    design : Design
        Gives both trips.
    noise : Noise
        On the signal [V].
    slope : float or str
        Of the signal at the trips, > 0 [V/s].
    hum : pair of float or str, optional
        Amplitude [V] and frequency [Hz].
    probability : float or str, default 1e-3
        Allowed for more than one transition on a passage [1].
    seed : int, default 0
        The same seed gives the same sample.

    Returns
    -------
    NoiseScene
        Widths that are needed, what noise does at every width, and a sample of the waveform.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

    Notes
    -----
    Ranges as for `hystkit.chatter` and `hystkit.standing_cycles`. Noise and hum are taken to act at
    one time: what they need adds up.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> noise = Noise.two_pole(rms="50m", f1="100", f2="10k")
    >>> found = noise_scene(header_tank(), noise, slope=0.5, hum=("30m", 50))
    >>> print(f"{found.needed:.3f} V and {found.needed_for_hum:.3f} V of {found.width:.3f} V")
    0.377 V and 0.055 V of 0.725 V
    """
    slope, hum, allowed = _checked(noise, slope, hum, probability, seed)
    shown = levels(design)
    switches = shown.ok and math.isfinite(shown.width) and shown.width > 0
    needed = _needed(noise, slope, allowed)
    for_hum = 0.0 if hum is None else float(hum_width(*hum, slope))
    own = shown.width if switches else math.nan
    found = chatter(own, noise, slope) if switches else None
    return NoiseScene(
        levels=shown,
        inverts=design.stage.sense == "inverting",
        noise=noise,
        slope=slope,
        hum=hum,
        allowed=allowed,
        needed=needed,
        needed_for_hum=for_hum,
        curve=_curve(noise, slope, *_range(noise.rms, own, needed, for_hum, needed + for_hum)),
        found=found,
        standing=float(standing_cycles(own / 2, own / 2, noise)) if switches else math.nan,
        sample=None if found is None else passing(shown, found, hum, seed),
        seed=seed,
    )


def first_noise(design: Design) -> Noise:
    """Give noise that suits the band of a design, to begin with.

    Parameters
    ----------
    design : Design
        Gives the width.

    Returns
    -------
    Noise
        A tenth of the width, behind two poles; nothing is known of the real one.
    """
    width = levels(design).width
    rms = _digit(width / 10) if math.isfinite(width) and width > 0 else 1e-3
    return Noise.two_pole(rms=rms, f1=100.0, f2=10e3)


def first_slope(noise: Noise) -> float:
    """Give a slope to begin with.

    Parameters
    ----------
    noise : Noise
        On the signal.

    Returns
    -------
    float
        At which the noise crosses its mean a hundred times while the ramp rises by its rms [V/s].
    """
    return _digit(noise.rms * noise.crossing_rate / 100)


def _checked(
    noise: Any, slope: Any, hum: Any, probability: Any, seed: Any
) -> tuple[float, Hum | None, float]:
    """Read what is given, or report everything that cannot be used."""
    faults: list[Fault] = []
    check_noise(faults, noise)
    steep = _single(faults, "slope", slope, "V/s")
    allowed = _single(faults, "probability", probability, "")
    if allowed >= 1:
        faults.append(
            Fault(
                "this probability is always met.",
                asked=f"probability = {allowed:g}",
                rule="0 < probability < 1",
                remedy="1e-3, for one passage in a thousand",
            )
        )
    swing = None
    if hum is not None and not (is_kind(hum, (tuple, list)) and len(hum) == 2):
        faults.append(wrong_kind("hum", hum, "a pair", 'hum=("30 mV", "100 Hz")'))
    elif hum is not None:
        swing = (
            _single(faults, "hum amplitude", hum[0], "V"),
            _single(faults, "hum frequency", hum[1], "Hz"),
        )
    if not is_kind(seed, int) or seed < 0:
        faults.append(wrong_kind("seed", seed, "a whole number >= 0", "seed=0"))
    if faults:
        raise InputError.of("this noise", faults)
    return steep, swing, allowed


def _single(faults: list[Fault], name: str, value: Any, unit: str) -> float:
    if not isinstance(value, str) and np.ndim(value):
        faults.append(wrong_kind(name, value, "a single number", f"one value in {unit or '1'}"))
        return math.nan
    return float(read_positives(faults, name, value, unit))


@lru_cache(maxsize=16)
def _needed(noise: Noise, slope: float, allowed: float) -> float:
    """Find the width for the noise; NaN where none is known."""
    try:
        return float(width_for(probability=allowed, noise=noise, slope=slope))
    except InfeasibleWidthError:
        return math.nan


def _range(rms: float, *marked: float) -> tuple[float, float]:
    """Give a range of widths on round ends that holds all that is marked."""
    shown = [width for width in marked if math.isfinite(width) and width > 0]
    low = min(_LEAST * rms, *(width / _BESIDE for width in shown), math.inf)
    high = max(_MOST * rms, *(width * _BESIDE for width in shown), 0.0)
    return _end(low, up=False), _end(high, up=True)


def _end(value: float, *, up: bool) -> float:
    power = 10.0 ** math.floor(math.log10(value))
    ends = [float(f"{factor * power:.12g}") for factor in _ENDS]
    if up:
        return next(end for end in ends if end >= value * (1 - 1e-9))
    return next(end for end in reversed(ends) if end <= value * (1 + 1e-9))


def _digit(value: float) -> float:
    return float(f"{value:.1g}")


@lru_cache(maxsize=16)
def _curve(noise: Noise, slope: float, low: float, high: float) -> NoiseCurve:
    """Evaluate a range of widths; kept while neither it nor the noise changes."""
    width = np.geomspace(low, high, _POINTS)
    found = chatter(width, noise, slope)
    shares = width / noise.rms
    standing = standing_cycles(width / 2, width / 2, noise)
    inside = (shares >= WIDTHS[0]) & (shares <= WIDTHS[1])
    return NoiseCurve(
        width, found.probability, found.extra_cycles, found.inside_range, standing, inside
    )

"""How often noise alone switches, while the signal stands still."""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
from scipy.special import log_ndtr

from hystkit.analyses.noise.asked import broadcast, check_noise, plain
from hystkit.analyses.noise.model import Noise
from hystkit.base.errors import Fault
from hystkit.circuit.arrays import Floats, Values, read_array, read_positives

# Beyond so many sigma nothing ever happens.
_FAR = 25.0
_STEPS = 10_001


def false_trip_rate(distance: Values, noise: Noise) -> Any:
    r"""Rate at which noise alone crosses a threshold that the signal stays away from.

    .. math:: \nu = \nu_0 \, e^{-d^2 / 2 \sigma^2}

    Parameters
    ----------
    distance : float, str or array_like
        Distance of the standing signal from the threshold [V], >= 0.
    noise : Noise
        Its rms and crossing rate.

    Returns
    -------
    float or ndarray
        Expected crossings in one direction per second [1/s], shape of `distance`; NaN where it
        is negative.

    Raises
    ------
    InputError
        If a single distance is negative, or there is no noise.

    Notes
    -----
    Exact for Gaussian noise: every crossing counts. A stage with hysteresis switches less often,
    as crossings that follow each other closely count once; see `standing_cycles`. Noise behind a
    single pole has no such rate, and is refused when the noise is described.

    References
    ----------
    S. O. Rice, Bell System Technical Journal 23 (1944), 282-332, and 24 (1945), 46-156.

    Examples
    --------
    >>> noise = Noise.brick_wall(rms=1.0, bandwidth=1e3)
    >>> print(f"{false_trip_rate(4.0, noise):.4f}")
    0.1937
    """
    faults: list[Fault] = []
    away = read_positives(faults, "distance", distance, "V", zero=True)
    check_noise(faults, noise)
    (away,) = broadcast("this rate", faults, {"distance": away})
    return plain(noise.crossing_rate * np.exp(-((away / noise.rms) ** 2) / 2))


def standing_cycles(to_upper: Values, to_lower: Values, noise: Noise) -> Any:
    r"""Rate of full cycles, on and off again, that noise makes of a standing signal.

    .. math:: \nu = \frac{1}{T_u + T_d} = \frac{r_u r_d}{r_u + r_d}, \quad r = 1 / T

    Parameters
    ----------
    to_upper : float, str or array_like
        From the standing signal up to the upper trip [V]; negative above it.
    to_lower : float, str or array_like
        From the standing signal down to the lower trip [V]; negative below it.
    noise : Noise
        Its rms, crossing rate and relaxation.

    Returns
    -------
    float or ndarray
        Full cycles per second [1/s]; NaN where the width, the sum of both, is not positive.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

    Notes
    -----
    For trips far away the rates are those of `false_trip_rate`. Nearer, two things change them:
    noise with a sharp upper edge swings back at once, by the factor 1 + exp(-width / rms) found by
    simulation, which is exact for no width; and noise with poles far apart crosses in bursts of
    which a switch with hysteresis sees one trip, so that the mean time of a first-order noise
    between both trips bounds each time. Within -10 % and +30 % of simulations for widths from 1 to
    6 times the rms (brick wall; poles equal to a factor 1000 apart).

    References
    ----------
    S. O. Rice, as for `false_trip_rate`; mean passage times of first-order noise: A. J. F. Siegert,
    Physical Review 81 (1951), 617-623 (from memory).

    Examples
    --------
    >>> noise = Noise.brick_wall(rms=1e-3, bandwidth="1k")
    >>> print(f"{standing_cycles('3m', '3m', noise):.2f} per second")
    3.21 per second
    """
    faults: list[Fault] = []
    given = {
        "to_upper": read_array(faults, "to_upper", to_upper, "V"),
        "to_lower": read_array(faults, "to_lower", to_lower, "V"),
    }
    check_noise(faults, noise)
    if all(one.ndim == 0 for one in given.values()) and sum(given.values()) <= 0:
        faults.append(
            Fault(
                "the upper trip is not above the lower one.",
                asked=f"to_upper + to_lower = {float(sum(given.values())):g} V",
                rule="their sum is the width of the band, > 0",
                remedy="both distances as positive numbers, for a signal inside the band",
            )
        )
    up, down = broadcast("this rate", faults, given)
    with np.errstate(invalid="ignore"):
        up, down = (np.where(up + down > 0, d / noise.rms, np.nan) for d in (up, down))
    slowness = noise.crossing_rate / noise.relaxation
    swing = returning(up + down)
    times = (
        passage_time(swing * np.exp(-np.maximum(near, 0) ** 2 / 2),
                     slowness * (climb(near) - climb(-far)))
        for near, far in ((up, down), (down, up))
    )  # fmt: skip
    return plain(noise.crossing_rate / sum(times))


def returning(width: Any) -> Any:
    """How much more often noise returns over a band than crossings alone tell.

    Parameters
    ----------
    width : float or ndarray
        In units of the rms.

    Returns
    -------
    float or ndarray
        2 without a width, where every crossing is half a cycle; 1 for wide bands.
    """
    return 1.0 + np.exp(-width)


def passage_time(rate: Any, slow: Any) -> Any:
    """Mean time to a threshold, from crossings that are too many and a walk that is too fast.

    Parameters
    ----------
    rate : ndarray
        Of crossings.
    slow : ndarray
        Time that first-order noise takes, in the unit of 1 / `rate`.

    Returns
    -------
    ndarray
        Their root sum square.
    """
    with np.errstate(divide="ignore", over="ignore"):
        return np.hypot(1.0 / rate, slow)


def climb(level: Any) -> Any:
    r"""Time that first-order noise takes to climb from its mean to a level.

    Parameters
    ----------
    level : float or ndarray
        In units of the rms; negative below the mean, with a negative time.

    Returns
    -------
    ndarray
        In units of its relaxation time: the integral of exp(t^2 / 2) Phi(t), times sqrt(2 pi).
    """
    levels, times = _climbs()
    return np.interp(level, levels, times)


@lru_cache(maxsize=1)
def _climbs() -> tuple[Floats, Floats]:
    levels = np.linspace(-_FAR, _FAR, _STEPS)
    slopes = np.sqrt(2 * np.pi) * np.exp(levels**2 / 2 + log_ndtr(levels))
    steps = (slopes[1:] + slopes[:-1]) / 2 * (levels[1] - levels[0])
    times = np.concatenate([[0.0], np.cumsum(steps)])
    return levels, times - times[_STEPS // 2]

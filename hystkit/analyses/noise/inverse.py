"""The width, or the distance, that keeps noise quiet enough."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from hystkit.analyses.noise.asked import broadcast, check_noise, plain
from hystkit.analyses.noise.chatter import assessed
from hystkit.analyses.noise.model import Noise
from hystkit.analyses.noise.rates import standing_cycles
from hystkit.base.errors import Fault, InfeasibleWidthError, InputError
from hystkit.circuit.arrays import Floats, Values, read_array, read_positives
from hystkit.circuit.reading import wrong_kind

# No noise crosses a wider band in the age of anything, in units of the rms.
_WIDEST = 24.0
_POINTS = 17
# The interval shrinks 16 times in each, to about a millionth of the rms.
_ROUNDS = 6


def width_for(
    *,
    probability: Values | None = None,
    extra_cycles: Values | None = None,
    interval: Values | None = None,
    noise: Noise,
    slope: Values | None = None,
) -> Any:
    """Find the width at which noise is quiet enough.

    Parameters
    ----------
    probability : float or array_like, optional
        Of more than one transition on a passage [1]. One of the three is given.
    extra_cycles : float or array_like, optional
        Expected cycles beyond the one transition that is meant [1].
    interval : float, str or array_like, optional
        Mean time from one false cycle to the next [s], with the signal standing at the worst place,
        in the middle of the band.
    noise : Noise
        On the signal.
    slope : float, str or array_like, optional
        Of the signal at the trip [V/s]; needed with the first two, and not with `interval`.

    Returns
    -------
    float or ndarray
        The least width [V]; 0 where no hysteresis is needed, NaN where an element cannot be used.

    Raises
    ------
    InputError
        Naming everything that cannot be used.
    InfeasibleWidthError
        If what is asked for is so rare that no width is known to give it.

    Notes
    -----
    The inverse of `chatter`, and of `standing_cycles` in the middle of the band, with their range:
    `chatter` at the width found says whether it lies inside.

    Examples
    --------
    >>> noise = Noise.brick_wall(rms="1m", bandwidth="1k")
    >>> width = width_for(probability=1e-3, noise=noise, slope=0.0577)
    >>> print(f"{width * 1e3:.1f} mV")
    6.6 mV
    """
    faults: list[Fault] = []
    name, wanted = _one_of(
        faults,
        {
            "probability": (probability, ""),
            "extra_cycles": (extra_cycles, ""),
            "interval": (interval, "s"),
        },
    )
    check_noise(faults, noise)
    if name == "interval":
        if slope is not None:
            faults.append(wrong_kind("slope", slope, "needed with interval", "leave it out"))
        (time,) = broadcast("this width", faults, {"interval": wanted})
        return _least(
            lambda h, t: np.asarray(standing_cycles(h / 2, h / 2, noise)), 1 / time, noise
        )
    if slope is None:
        faults.append(
            Fault(
                "the slope of the signal is missing.",
                asked=f"{name or 'a width'} on a passage of the band",
                rule="noise has more time to switch while the signal moves slowly",
                remedy="slope=, in V/s at the trip; or interval= for a standing signal",
            )
        )
        raise InputError.of("this width", faults)
    steep = np.abs(read_array(faults, "slope", slope, "V/s"))
    goal, steep = broadcast("this width", faults, {name: wanted, "slope": steep})
    rises = np.where(steep > 0, steep, np.nan)

    def counted(width: Floats, each: Floats) -> Floats:
        return np.asarray(getattr(assessed(width, each, noise), name))

    return _least(counted, goal, noise, rises)


def distance_for(interval: Values, noise: Noise) -> Any:
    r"""Find how far a standing signal stays from a threshold that it must not trip.

    .. math:: d = \sigma \sqrt{2 \ln(\nu_0 T)}

    Parameters
    ----------
    interval : float, str or array_like
        Mean time from one false trip to the next [s].
    noise : Noise
        On the signal.

    Returns
    -------
    float or ndarray
        The least distance [V]; 0 for intervals shorter than between crossings of the mean.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

    Notes
    -----
    The inverse of `false_trip_rate`.

    Examples
    --------
    >>> noise = Noise.brick_wall(rms="1m", bandwidth="1k")
    >>> print(f"{distance_for(3600 * 24, noise) * 1e3:.2f} mV")
    5.95 mV
    """
    faults: list[Fault] = []
    given = {"interval": read_positives(faults, "interval", interval, "s")}
    check_noise(faults, noise)
    (time,) = broadcast("this distance", faults, given)
    crossings = noise.crossing_rate * time
    return plain(noise.rms * np.sqrt(2 * np.log(np.maximum(crossings, 1.0))))


def _one_of(faults: list[Fault], goals: dict[str, tuple[Values | None, str]]) -> tuple[str, Floats]:
    """Read the one goal that is given."""
    given = [name for name, (value, _) in goals.items() if value is not None]
    if len(given) != 1:
        faults.append(
            Fault(
                "a width is found for one goal.",
                asked=", ".join(given) or "nothing",
                rule=f"one of {', '.join(goals)}",
                remedy="probability=1e-3, for one passage in a thousand",
            )
        )
        return "", np.asarray(np.nan)
    (name,) = given
    value, unit = goals[name]
    found = read_positives(faults, name, value, unit)
    if name == "probability":
        if found.ndim == 0 and found >= 1:
            faults.append(
                Fault(
                    "this probability is always met.",
                    asked=f"probability = {float(found):g}",
                    rule="0 < probability < 1",
                    remedy="probability=1e-3, for one passage in a thousand",
                )
            )
        found = np.where(found < 1, found, np.nan)
    return name, found


def _least(
    counted: Callable[[Floats, Floats], Floats],
    goal: Floats,
    noise: Noise,
    slope: Floats | None = None,
) -> Any:
    """Narrow the width down in which the count falls to the goal; it falls with the width."""
    aims = goal.ravel()[:, None]
    slopes = np.zeros(aims.shape) if slope is None else slope.ravel()[:, None]
    low, high = np.zeros(aims.shape), np.full(aims.shape, _WIDEST * noise.rms)
    shares = np.linspace(0, 1, _POINTS)
    for turn in range(_ROUNDS):
        widths = low + (high - low) * shares
        # A band without width is no band.
        tried = np.maximum(widths, 1e-9 * noise.rms)
        above = counted(tried, np.broadcast_to(slopes, tried.shape)) > aims
        if turn == 0 and above[:, -1].any():
            raise _out_of_reach(noise)
        place = np.maximum(above.sum(axis=1, keepdims=True) - 1, 0)
        low, high = (np.take_along_axis(widths, place + n, axis=1) for n in (0, 1))
        low = np.where(above.any(axis=1, keepdims=True), low, 0.0)
        high = np.where(above.any(axis=1, keepdims=True) | (turn > 0), high, 0.0)
    found = np.where(np.isnan(aims + slopes), np.nan, high)
    return plain(found.reshape(goal.shape))


def _out_of_reach(noise: Noise) -> InfeasibleWidthError:
    return InfeasibleWidthError(
        "no width is known to keep noise that quiet.",
        asked="a goal that is not met at the widest band",
        have=f"a band of {_WIDEST:g} rms = {_WIDEST * noise.rms:g} V",
        rule="the formulas say nothing about rarer events",
        remedy="a goal that matters, such as one false trip in the life of the device",
    )

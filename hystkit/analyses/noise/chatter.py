"""Chatter: what noise makes of one slow passage through the band."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.noise.asked import broadcast, check_noise, plain
from hystkit.analyses.noise.model import DEEPEST, LONGEST, Noise
from hystkit.analyses.noise.ramp import passage
from hystkit.base.errors import Fault
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.arrays import Floats, Values, read_array, read_positives
from hystkit.numeric.measurand import span_of

#: Where the formulas were compared with simulations: width in units of the rms, ...
WIDTHS = (1.0, 6.0)
#: ... wider ones down to this probability, ...
RARE = 5e-4
#: ... crossings of the mean, and ...
CROSSINGS = (1.0, 1e5)
#: ... relaxation times of the noise while the ramp rises by the rms.
RELAXATIONS = 1.8
# A limit that is met but for rounding is met.
_ROUNDING = 1e-9
# Elements evaluated at once, so that what they need stays in cache.
_BLOCK = 64


class Validity(IntEnum):
    """Whether an element lies where the formulas were compared with simulations."""

    INSIDE = 0
    IMPOSSIBLE = 1
    NARROW = 2
    RARE = 3
    FAST = 4
    SLOW = 5
    CORRELATED = 6
    RESONANT = 7
    DRIFTING = 8

    @property
    def message(self) -> str:
        """One line that says what it means."""
        return _MESSAGES[self]


_MESSAGES = {
    Validity.INSIDE: "inside the range compared with simulations",
    Validity.IMPOSSIBLE: "width or slope cannot be used",
    Validity.NARROW: "outside the validated range: the width is below 1 rms",
    Validity.RARE: "outside the validated range: too rare to be counted in a simulation",
    Validity.FAST: "outside the validated range: the ramp rises by the rms before the noise"
    " crosses its mean once",
    Validity.SLOW: "outside the validated range: the ramp is slower than was simulated",
    Validity.CORRELATED: "outside the validated range: the ramp rises by the rms before the noise"
    " forgets its value",
    Validity.RESONANT: "outside the validated range: the noise swings back, as in a narrow band or"
    " behind a resonance; twice as much and more is possible",
    Validity.DRIFTING: "outside the validated range: a part of the noise is much slower than the"
    " rest; the result is on the safe side",
}


@dataclass(frozen=True, eq=False)
class Chatter(Viewed):
    """What noise makes of one passage of a ramp through the band.

    Attributes
    ----------
    width : float or ndarray
        Of the band [V].
    slope : float or ndarray
        Magnitude of the slope of the signal [V/s].
    noise : Noise
        On the signal.
    probability : float or ndarray
        Of more than one transition [1].
    extra_cycles : float or ndarray
        Expected off-and-on cycles beyond the one transition that is meant [1].
    early_shift : float or ndarray
        By how much the mean of the signal is before the trip at the first transition, on average
        [V]: a rising signal seems to have a lower trip, a falling one a higher. Negative where it
        is late.
    jitter : float or ndarray
        Standard deviation of that [V].
    status : int or ndarray of int8
        A `Validity` code for each element.
    """

    width: Any
    slope: Any
    noise: Noise
    probability: Any
    extra_cycles: Any
    early_shift: Any
    jitter: Any
    status: Any

    @property
    def inside_range(self) -> Any:
        """Whether each element lies where the formulas were compared with simulations."""
        return plain(np.equal(self.status, Validity.INSIDE))

    @property
    def note(self) -> str:
        """What is to be said about the range; of the first element that lies outside."""
        codes = np.ravel(self.status)
        outside = codes[codes != Validity.INSIDE]
        return Validity(int(outside[0]) if outside.size else Validity.INSIDE).message

    @property
    def jitter_time(self) -> Any:
        """Standard deviation of the time of the first transition [s]."""
        return self.jitter / self.slope

    @property
    def _title(self) -> str:
        return f"Chatter with {self.noise.describe}"

    def _fields(self) -> Sequence[Field]:
        if np.ndim(self.probability):
            inside = int(np.count_nonzero(self.inside_range))
            return [
                Field("width", span_of(self.width), "V"),
                Field("slope", span_of(self.slope), "V/s"),
                Field("probability of more than one transition", span_of(self.probability)),
                Field("extra cycles", span_of(self.extra_cycles)),
                Field("elements", f"{np.size(self.probability)}", "", f"{inside} {_INSIDE}"),
            ]
        return [
            Field("width", self.width, "V", f"{self.width / self.noise.rms:.3g} rms", "H"),
            Field("slope", self.slope, "V/s", "", "r"),
            Field("probability of more than one transition", self.probability, "", self.note, "P"),
            Field("extra cycles", self.extra_cycles),
            Field("early shift", self.early_shift, "V", "of the first transition, mean"),
            Field("jitter", self.jitter, "V", f"rms; {show(self.jitter_time, 's')} in time"),
        ]


_INSIDE = _MESSAGES[Validity.INSIDE]


def chatter(width: Values, noise: Noise, slope: Values) -> Chatter:
    r"""Transitions that noise adds while the signal passes the band once.

    Parameters
    ----------
    width : float, str or array_like
        Of the band, upper less lower trip [V]; arrays broadcast.
    noise : Noise
        On the signal.
    slope : float, str or array_like
        Of the signal at the trip [V/s]; its sign does not matter.

    Returns
    -------
    Chatter
        With the shape of both together. An element without a usable width or slope is NaN with
        its status, and does not stop the rest.

    Raises
    ------
    InputError
        Naming every single value that cannot be used.

    Notes
    -----
    The first transition comes at Rice's rate for a threshold that the ramp moves, and after it
    the switch is followed through the states up and down, which it leaves at the rates of
    `standing_cycles`. Of the probability of more than one transition that is

    .. math:: P = \int \lambda_u e^{-\int \lambda_u} \left(1 - e^{-\int \lambda_d}\right) dt

    Once up, the noise has to forget where it was before it can bring the switch back; how long
    that takes was found by simulation. Compared with simulations of brick-wall noise and of noise
    behind two poles, equal and up to a factor 1000 apart, and behind filters of third order, for
    widths of 1 to 6 rms and for wider ones with a probability above 5e-4: never less than 1 / 1.15
    and never more than 2.5 times what
    was counted. `inside_range` says where an element lies.

    References
    ----------
    S. O. Rice, Bell System Technical Journal 24 (1945), 46-156, for the rates; the states, and what
    follows a trip, are derived and fitted here.

    Examples
    --------
    >>> noise = Noise.two_pole(rms="1m", f1="1k", f2="10k")
    >>> found = chatter(width=[2e-3, 4e-3, 6e-3], noise=noise, slope=0.1)
    >>> found.probability.shape, bool(found.inside_range.all())
    ((3,), True)
    """
    faults: list[Fault] = []
    given = {
        "width": read_positives(faults, "width", width, "V", zero=True),
        "slope": np.abs(read_array(faults, "slope", slope, "V/s")),
    }
    if given["slope"].ndim == 0 and given["slope"] == 0:
        faults.append(
            Fault(
                "the signal does not pass the band.",
                asked="slope = 0 V/s",
                rule="a slope other than 0",
                remedy="hk.standing_cycles, for a signal that stands still",
            )
        )
    check_noise(faults, noise)
    wide, steep = broadcast("this passage", faults, given)
    return assessed(wide, np.where(steep > 0, steep, np.nan), noise)


def assessed(width: Floats, slope: Floats, noise: Noise) -> Chatter:
    """Evaluate arrays that have been read.

    Parameters
    ----------
    width, slope : ndarray
        Of one shape [V] and [V/s]; NaN where they cannot be used.
    noise : Noise
        On the signal.

    Returns
    -------
    Chatter
        Of the same shape.
    """
    widths = (width / noise.rms).ravel()
    rises = (noise.rms / slope).ravel()
    # One slope for all is worked out once.
    if rises.size and np.all(rises == rises[0]):
        rises = rises[:1]
    crossings, relaxations = noise.crossing_rate * rises, noise.relaxation * rises
    found = np.empty((4, widths.size))
    for begin in range(0, widths.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        each = slice(None) if rises.size == 1 else part
        block = passage(widths[part], crossings[each], relaxations[each])
        found[:, part] = block.probability, block.extra_cycles, block.early, block.jitter
    status = _status(widths, crossings, relaxations, found[0], noise)
    found[2:] *= noise.rms
    results = [plain(row.reshape(width.shape)) for row in (*found, status)]
    return Chatter(plain(width), plain(slope), noise, *results)


def _status(
    widths: Floats, crossings: Floats, relaxations: Floats, probability: Floats, noise: Noise
) -> NDArray[np.int8]:
    """Judge every element; what goes first is marked last."""
    status = np.full(widths.shape, Validity.INSIDE, dtype=np.int8)
    if noise.memory > LONGEST:
        status[:] = Validity.DRIFTING
    if noise.undershoot > DEEPEST:
        status[:] = Validity.RESONANT
    status[(widths > WIDTHS[1] * (1 + _ROUNDING)) & (probability < RARE)] = Validity.RARE
    status[np.broadcast_to(crossings > CROSSINGS[1] * (1 + _ROUNDING), status.shape)] = (
        Validity.SLOW
    )
    status[np.broadcast_to(relaxations < RELAXATIONS, status.shape)] = Validity.CORRELATED
    status[np.broadcast_to(crossings < CROSSINGS[0] * (1 - _ROUNDING), status.shape)] = (
        Validity.FAST
    )
    status[widths < WIDTHS[0] * (1 - _ROUNDING)] = Validity.NARROW
    status[np.isnan(probability)] = Validity.IMPOSSIBLE
    return status

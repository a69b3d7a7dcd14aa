"""The share of samples within windows, with its confidence interval."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import isfinite
from numbers import Real
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import betaincinv

from hystkit.base.errors import Fault, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.nearest import unknown_name_fault
from hystkit.numeric.views import Interval

Window = tuple[float | None, float | None]


@dataclass(frozen=True)
class Yield(Viewed):
    """What share of units falls within all windows at once.

    Attributes
    ----------
    value : float
        Share of the samples that pass [1].
    low, high : float
        Confidence interval of the share [1].
    confidence : float
        That the interval holds the share [1].
    passed, samples : int
        How many passed, of how many.
    """

    value: float
    low: float
    high: float
    confidence: float
    passed: int
    samples: int

    def _fields(self) -> Sequence[Field]:
        note = f"{self.confidence:.0%} confidence"
        between = f"{percent(self.low)} and {percent(self.high)}"
        return (
            Field("yield", percent(self.value), note=f"{self.passed} of {self.samples}"),
            Field("between", between, note=note),
        )


def percent(share: float) -> str:
    """Write a share of units; never 100 % where a single one failed.

    Parameters
    ----------
    share : float
        [1].

    Returns
    -------
    str
        With the sign for per cent.

    Examples
    --------
    >>> percent(65535 / 65536), percent(0.9)
    ('> 99.99 %', '90 %')
    """
    text = f"{100 * share:.4g}"
    return f"{text if share == 1 or text != '100' else '> 99.99'} %"


def yield_of(
    samples: Mapping[str, NDArray[np.float64]],
    windows: Mapping[str, Window | None],
    confidence: float = 0.95,
) -> Yield:
    """Count the samples that lie within all windows.

    Parameters
    ----------
    samples : mapping of str to ndarray
        By kind, all of one length; NaN where a sample cannot switch, which is a failure.
    windows : mapping of str to pair, or None
        Lowest and highest value by kind; an end that is None is open, a window that is None is
        not asked for.
    confidence : float, default 0.95
        Of the interval [1].

    Returns
    -------
    Yield
        With the interval of Clopper and Pearson.

    Raises
    ------
    InputError
        Naming every window that cannot be used.

    Notes
    -----
    The interval is exact for independent samples. Those here are spread more evenly, so that it
    is wider than it need be.

    References
    ----------
    C. J. Clopper and E. S. Pearson, Biometrika 26 (1934), 404-413.

    Examples
    --------
    >>> found = yield_of({"upper": np.array([2.4, 2.5, 2.6, 2.9])}, {"upper": (None, 2.7)})
    >>> found.value, round(found.low, 3), round(found.high, 3)
    (0.75, 0.194, 0.994)
    """
    asked = {kind: window for kind, window in windows.items() if window is not None}
    faults = [fault for kind, window in asked.items() for fault in _faults(samples, kind, window)]
    if not 0 < confidence < 1:
        faults.append(_confidence_fault(confidence))
    if faults:
        raise InputError.of("these windows", faults)
    # NaN compares false: a sample that cannot switch is in no window.
    inside = np.logical_and.reduce([np.isfinite(values) for values in samples.values()])
    for kind, (low, high) in asked.items():
        inside &= samples[kind] >= (-np.inf if low is None else low)
        inside &= samples[kind] <= (np.inf if high is None else high)
    passed, total = int(np.count_nonzero(inside)), int(inside.size)
    return Yield(passed / total, *_interval(passed, total, confidence), confidence, passed, total)


def _interval(passed: int, total: int, confidence: float) -> Interval:
    tail = (1 - confidence) / 2
    low = 0.0 if passed == 0 else float(betaincinv(passed, total - passed + 1, tail))
    high = 1.0 if passed == total else float(betaincinv(passed + 1, total - passed, 1 - tail))
    return low, high


def _faults(samples: Mapping[str, Any], kind: str, window: Window) -> list[Fault]:
    if kind not in samples:
        return [unknown_name_fault("window", kind, tuple(samples))]
    if _is_interval(window):
        return []
    return [
        Fault(
            f"the window for {kind} is not an interval.",
            asked=f"{kind}={window!r}",
            rule="two numbers, the lower one first; None leaves an end open",
            remedy=f"{kind}=(2.25, 2.35) or {kind}=(2.25, None)",
        )
    ]


def _is_interval(window: Any) -> bool:
    if not isinstance(window, Sequence) or len(window) != 2:
        return False
    given = [end for end in window if end is not None]
    real = all(isinstance(end, Real) and isfinite(end) for end in given)
    return real and (len(given) < 2 or given[0] <= given[1])


def _confidence_fault(confidence: float) -> Fault:
    return Fault(
        "the confidence is not a probability.",
        asked=f"confidence={confidence!r}",
        rule="0 < confidence < 1",
        remedy="confidence=0.95",
    )

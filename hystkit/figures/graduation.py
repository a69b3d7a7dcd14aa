"""Scales and where their ticks stand."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import overload

import numpy as np
from numpy.typing import NDArray

from hystkit.figures.lettering import plain


@dataclass(frozen=True)
class Scale:
    """A straight axis: values from `low` to `high` lie between the px `start` and `end`.

    Attributes
    ----------
    low, high : float
        Values at both ends, low < high.
    start, end : float
        Their places on the page [px]; `end` < `start` for an axis that runs upwards.
    """

    low: float
    high: float
    start: float
    end: float

    @overload
    def px(self, value: float) -> float: ...
    @overload
    def px(self, value: NDArray[np.float64]) -> NDArray[np.float64]: ...
    def px(self, value: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
        """Place of a value on the page [px]."""
        share = (value - self.low) / (self.high - self.low)
        return self.start + share * (self.end - self.start)

    def inside(self, value: float) -> float:
        """Place of a value [px], held at the end of the axis if it lies beyond."""
        return self.px(min(max(value, self.low), self.high))


def step_for(span: float, intervals: float) -> float:
    """Return the least step of 1, 2 or 5 times a power of ten that makes so few intervals."""
    least = span / max(intervals, 1.0)
    power = 10.0 ** math.floor(math.log10(least))
    # The small excess keeps 0.2 / 0.1 from being taken for a little more than 2.
    factor = next(f for f in (1, 2, 5, 10) if f * power >= least * (1 - 1e-9))
    return factor * power


def ticks(low: float, high: float, step: float) -> tuple[float, ...]:
    """Return the multiples of `step` from `low` to `high`."""
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return tuple(float(f"{k * step:.12g}") for k in range(first, last + 1))


def decimals_of(step: float) -> int:
    """Return how many decimals tell neighbouring multiples of `step` apart."""
    return max(0, -math.floor(math.log10(step) + 1e-9))


def number(value: float, step: float) -> str:
    """Return the number at a tick."""
    return plain(value, decimals_of(step))


def roundness(value: float, step: float) -> int:
    """Return how round a multiple of `step` is: 3 for zero, down to 0 for the odd ones."""
    multiple = round(value / step)
    if multiple == 0:
        return 3
    return sum(multiple % k == 0 for k in (2, 5)) if multiple % 10 else 2


def outward(low: float, high: float, grain: float) -> tuple[float, float]:
    """Return a range that holds this one and ends on multiples of `grain`.

    A range that follows its content in steps changes seldom, and with it the background.
    """
    first = math.floor(low / grain + 1e-9) * grain
    last = math.ceil(high / grain - 1e-9) * grain
    return float(f"{first:.12g}"), float(f"{last:.12g}")

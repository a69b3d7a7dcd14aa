"""Areas with logarithmic axes: a width below, how often the output switches at the side."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from hystkit.figures.drafting import Ink, lettered, segments
from hystkit.figures.frame import OFFSET, Frame
from hystkit.figures.lettering import width_px, written
from hystkit.figures.placement import Span, thinned
from hystkit.figures.theme import Theme

Array = NDArray[np.float64]
#: Values along an upright axis and what stands beside them, the most wanted first.
Marks = tuple[tuple[float, str], ...]

#: Rates that have a name [1/s]; a year has 365.25 days.
_NAMED: Marks = (
    (1.0, "1/s"),
    (1 / 3600.0, "1/h"),
    (1 / 86400.0, "1/d"),
    (1 / 31557600.0, "1/y"),
    (1e-2 / 31557600.0, "1/100 y"),
    (1e3, "1k/s"),
    (1e6, "1M/s"),
    (1e9, "1G/s"),
    (1 / 60.0, "1/min"),
)
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_PLAIN = {0: "1", -1: "0.1", 1: "10", 2: "100"}
# Room for the title of the upright axis, and between two of its numbers, or of the other [px].
_TITLE, _ROW, _GAP = 26.0, 14.0, 8.0
_LEAST_LEFT = 62.0
# From the area to the title of the other axis [px].
_BESIDE = 24.0
# Factors within a decade, and how much a number is wanted there.
_POWER = 3
_STEPS = ((1.0, _POWER), (2.0, 2), (5.0, 1))


@dataclass(frozen=True)
class LogArea(Frame):
    """A plotting area; both scales hold decimal logarithms, of volts across.

    Attributes
    ----------
    marks : tuple of (float, str)
        Values beside the upright axis with their text, the most wanted first.
    """

    marks: Marks = ()

    def x(self, width: float) -> float:
        """Place of a width on the page, held at the ends of the axis [px]."""
        return self.across.inside(math.log10(width)) if width > 0 else self.left

    def y(self, value: float) -> float:
        """Place of a value on the page, held at the ends of the axis [px]."""
        return self.up.inside(math.log10(value)) if value > 0 else self.bottom

    def holds(self, value: float) -> bool:
        """Whether a value lies within the upright axis."""
        return value > 0 and self.up.low <= math.log10(value) <= self.up.high

    def trace(self, width: Array, value: Array) -> tuple[Array, Array]:
        """Places of a curve on the page, with nothing where a value cannot be drawn [px]."""
        with np.errstate(divide="ignore", invalid="ignore"):
            x, y = np.log10(width), np.log10(value)
        return self.across.px(x), self.up.px(np.where(np.isfinite(y), y, np.nan))

    def _draw_across(self, page: Axes, theme: Theme) -> None:
        y = self.bottom + OFFSET
        segments(page, [((self.left, y), (self.right, y))], theme.line, 1.4)
        widths = [(self.x(value), wanted, value) for value, wanted in self._widths()]
        ends = [((x, y), (x, y + 5)) for x, *_ in widths]
        segments(page, ends, theme.line, 1.2)
        if not self.across_name:
            return
        texts = [written(value, "V") for *_, value in widths]
        halves = [width_px(text, "small") / 2 for text in texts]
        spans = [(x - half, x + half) for (x, *_), half in zip(widths, halves, strict=True)]
        for k in self._numbered(spans, [wanted for _, wanted, _ in widths]):
            lettered(page, texts[k], (widths[k][0], y + 18), Ink(theme.text, "small"), "center")
        lettered(page, self.across_name, (self.right + _BESIDE, y + 18), Ink(theme.muted, "small"))

    def _numbered(self, spans: Sequence[Span], wanted: Sequence[int]) -> tuple[int, ...]:
        """Return which widths get a number: others only where all powers of ten have one."""
        title = self.right + _BESIDE
        order = [k for k in range(len(spans)) if spans[k][1] + _GAP <= title]
        order.sort(key=lambda k: -wanted[k])
        powers = [k for k in order if wanted[k] == _POWER]
        kept = thinned(spans, powers, gap=_GAP)
        return kept if len(kept) < len(powers) else thinned(spans, order, gap=_GAP)

    def _draw_up(self, page: Axes, theme: Theme) -> None:
        x = self.left - OFFSET
        segments(page, [((x, self.top), (x, self.bottom))], theme.line, 1.4)
        places = [(self.y(value), text) for value, text in self.marks]
        spans = [(y - _ROW / 2, y + _ROW / 2) for y, _ in places]
        kept = [places[k] for k in thinned(spans, range(len(places)))]
        segments(page, [((x - 5, y), (x, y)) for y, _ in kept], theme.line, 1.2)
        for y, text in kept:
            lettered(page, text, (x - 8, y + 4), Ink(theme.text, "small"), "right")
        middle = (self.top + self.bottom) / 2
        made = lettered(page, self.up_name, (17, middle), Ink(theme.muted, "small"))
        made.set(rotation=90, rotation_mode="anchor", ha="center")

    def _widths(self) -> Iterator[tuple[float, int]]:
        low, high = self.across.low - 1e-9, self.across.high + 1e-9
        for power in range(math.floor(low), math.ceil(high) + 1):
            for factor, wanted in _STEPS:
                if low <= power + math.log10(factor) <= high:
                    yield float(f"{factor}e{power}"), wanted


def decades(low: int, high: int) -> Marks:
    """Return every power of ten between two of them, 1 and the round ones first.

    >>> decades(-2, 0)
    ((1.0, '1'), (0.01, '0.01'), (0.1, '0.1'))
    """
    powers = sorted(range(low, high + 1), key=lambda p: (p != 0, p % 3 != 0, p % 2 != 0, -p))
    return tuple((10.0**power, _power(power)) for power in powers)


def rates(low: float, high: float) -> Marks:
    """Return the rates between two of them that have a name.

    >>> rates(1e-4, 10.0)
    ((1.0, '1/s'), (0.0002777777777777778, '1/h'), (0.016666666666666666, '1/min'))
    """
    return tuple(mark for mark in _NAMED if low <= mark[0] <= high)


def left_of(marks: Sequence[Marks]) -> float:
    """Return where areas start, so that the numbers of their upright axes have room [px]."""
    widest = max(width_px(text, "small") for each in marks for _, text in each)
    return max(_TITLE + widest + 8 + OFFSET, _LEAST_LEFT)


def _power(power: int) -> str:
    if power == -2:
        return "0.01"
    return _PLAIN.get(power) or f"10{str(power).translate(_RAISED)}"

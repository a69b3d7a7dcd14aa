"""Axes of a cycle: time in the unit that suits it, the process value in its own unit."""

from __future__ import annotations

import math
from dataclasses import dataclass

from matplotlib.axes import Axes

from hystkit.circuit.signals import Signal
from hystkit.figures.drafting import Ink, lettered, segments
from hystkit.figures.frame import OFFSET, Frame
from hystkit.figures.graduation import number, roundness, step_for, ticks
from hystkit.figures.lettering import one_line, plain, prefix_for, short_unit, width_px, written
from hystkit.figures.placement import thinned
from hystkit.figures.theme import Theme

#: Units of time in seconds, each up to so many of the unit before it.
_TIMES = ((1.0, "s", 300.0), (60.0, "min", 10800.0), (3600.0, "h", 259200.0), (86400.0, "d", 0.0))
_NUMBER_GAP, _PITCH, _LEAST_LEFT = 8.0, 28.0, 62.0
_ROOM_FOR_TITLE = 26.0


def time_unit(length: float) -> tuple[float, str]:
    """Return the factor and the unit in which a time is best written [s].

    >>> time_unit(8000.0), time_unit(0.02)
    ((60.0, 'min'), (0.001, 'ms'))
    """
    if length < 1:
        return prefix_for(0.0, length, "s")
    return next((f, u) for f, u, most in _TIMES if length <= most or not most)


def duration(time: float, longest: float | None = None) -> str:
    """Return a time with three digits, in the unit that suits it, or the longest beside it.

    >>> duration(1278.0), duration(90.0), duration(90.0, 1278.0)
    ('21.3 min', '90 s', '1.5 min')
    """
    if not math.isfinite(time):
        return "—"
    factor, unit = time_unit(time if longest is None else longest)
    return written(time, "s", 3) if factor < 1 else f"{_three(time / factor)} {unit}"


def quantity(value: float, width: float, signal: Signal | None) -> str:
    """Return a process value whose decimals show two digits of the width."""
    if signal is None:
        return written(value)
    exponent = math.floor(math.log10(width)) if width > 0 and math.isfinite(width) else 0
    return f"{plain(value, min(max(2 - exponent, 0), 7))} {short_unit(signal)}".rstrip()


@dataclass(frozen=True)
class CycleFrame(Frame):
    """A plotting area over time; prefixes stand before volts only.

    Attributes
    ----------
    axis_below : float
        Distance from the area to the time axis, with room for the strip of the load [px].
    """

    axis_below: float = 0.0

    def _draw_across(self, page: Axes, theme: Theme) -> None:
        y, scale = self.bottom + self.axis_below, self.across
        segments(page, [((self.left, y), (self.right, y))], theme.line, 1.4)
        factor, unit = time_unit(scale.high - scale.low)
        step = step_for((scale.high - scale.low) / factor, (scale.end - scale.start) / 60)
        values = ticks(scale.low / factor, scale.high / factor, step)
        places = [scale.px(value * factor) for value in values]
        segments(page, [((x, y), (x, y + 5)) for x in places], theme.line, 1.2)
        texts = [number(value, step) for value in values]
        halves = [width_px(text, "small") / 2 for text in texts]
        extents = [(x - half, x + half) for x, half in zip(places, halves, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        for k in thinned(extents, order, gap=_NUMBER_GAP):
            lettered(page, texts[k], (places[k], y + 18), Ink(theme.text, "small"), "center")
        title = f"{self.across_name} / {unit}"
        lettered(page, title, (self.right + 24, y + 18), Ink(theme.muted, "small"))

    def _draw_up(self, page: Axes, theme: Theme) -> None:
        x, scale = self.left - OFFSET, self.up
        segments(page, [((x, self.top), (x, self.bottom))], theme.line, 1.4)
        texts, unit = up_numbers((scale.low, scale.high), scale.start - scale.end, self.up_unit)
        places = {value: scale.px(value) for value in texts}
        segments(page, [((x - 5, y), (x, y)) for y in places.values()], theme.line, 1.2)
        for value, text in texts.items():
            ink = Ink(theme.text, "small")
            lettered(page, text, (x - 8, places[value] + 4), ink, "right")
        name = one_line(self.up_name, max(self.bottom - self.top - 40, 40), "small")
        title = f"{name} / {unit}" if unit else name
        made = lettered(page, title, (17, (self.top + self.bottom) / 2), Ink(theme.muted, "small"))
        made.set(rotation=90, rotation_mode="anchor", ha="center")


def up_numbers(up: tuple[float, float], height: float, unit: str) -> tuple[dict[float, str], str]:
    """Return the number at each tick of the upright axis, and the unit as it stands there."""
    factor, shown = prefix_for(*up, "V") if unit == "V" else (1.0, unit)
    low, high = (end / factor for end in up)
    step = step_for(high - low, height / _PITCH)
    return {value * factor: number(value, step) for value in ticks(low, high, step)}, shown


def left_of(up: tuple[float, float], height: float, unit: str) -> float:
    """Return where the area starts, so that the numbers of its axis have room [px]."""
    texts = up_numbers(up, height, unit)[0].values()
    widest = max((width_px(text, "small") for text in texts), default=0.0)
    return max(_ROOM_FOR_TITLE + widest + 8 + OFFSET, _LEAST_LEFT)


def _three(value: float) -> str:
    """Return a number with three digits and no exponent."""
    decimals = 2 - math.floor(math.log10(value)) if value > 0 else 0
    text = f"{value:.{max(decimals, 0)}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text

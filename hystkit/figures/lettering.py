"""How wide a text is, and how values are written beside their marks."""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Any

import numpy as np
from matplotlib.backends.backend_agg import RendererAgg

from hystkit.base.digits import trip_digits as trip_digits
from hystkit.base.quantity import show
from hystkit.circuit.signals import Signal
from hystkit.figures.theme import PX_PER_INCH, LetterSize, letters

MINUS = "−"
_UNIT_LETTERS = 10
# Less than that is what rounding leaves of zero.
_NOTHING = 1e-13
_RULE: Any = RendererAgg(1, 1, PX_PER_INCH)  # type: ignore[no-untyped-call]


@lru_cache(maxsize=8192)
def width_px(text: str, size: LetterSize = "text", bold: bool = False, math: bool = False) -> float:
    """Return how wide a text is set [px]; `math` for one made by `theme.symbol`."""
    return float(_RULE.get_text_width_height_descent(text, letters(size, bold), math)[0])


def one_line(text: str, room: float, size: LetterSize = "text") -> str:
    """Return the text on one line, ended with an ellipsis where it does not fit `room` [px]."""
    text = " ".join(text.split())
    if width_px(text, size) <= room:
        return text
    while text and width_px(f"{text}…", size) > room:
        text = text[:-1].rstrip()
    return f"{text}…"


def wrapped(text: str, room: float, lines: int, size: LetterSize = "text") -> tuple[str, ...]:
    """Return the text in at most so many lines, each within `room` [px]."""
    words = text.split()
    rows: list[str] = []
    while words and len(rows) < lines - 1:
        row = words.pop(0)
        while words and width_px(f"{row} {words[0]}", size) <= room:
            row = f"{row} {words.pop(0)}"
        rows.append(one_line(row, room, size))
    if words:
        rows.append(one_line(" ".join(words), room, size))
    return tuple(rows)


def written(value: float, unit: str = "V", digits: int = 4) -> str:
    """Return a value with its engineering prefix and a true minus sign."""
    text = show(0.0 if abs(value) < _NOTHING else value, unit, digits)
    return MINUS + text[1:] if text.startswith("-") else text


def prefix_for(low: float, high: float, unit: str) -> tuple[float, str]:
    """Return the factor and the unit with prefix in which a range is best written."""
    largest = max(abs(low), abs(high))
    for factor, prefix in ((1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "µ")):
        if largest >= factor * (1 - 1e-9):
            return factor, prefix + unit
    return (1.0, unit) if largest < _NOTHING else (1e-9, "n" + unit)


def written_span(low: float, high: float, unit: str = "V") -> str:
    """Return both ends of a range, in the prefix of the larger one."""
    factor, prefixed = prefix_for(low, high, unit)
    return f"{_short(low / factor)} to {_short(high / factor)} {prefixed}"


def _short(value: float) -> str:
    """Return a number with four digits; what is too small beside its unit is zero."""
    return f"{value if abs(value) >= 5e-4 else 0.0:.4g}".replace("-", MINUS)


def short_unit(signal: Signal) -> str:
    """Return the unit of the measurand, cut where it is too long to stand beside a mark."""
    unit = " ".join(signal.unit.split())
    return unit if len(unit) <= _UNIT_LETTERS else f"{unit[: _UNIT_LETTERS - 1]}…"


def plain(value: float, decimals: int) -> str:
    """Return a number without prefix, for units that take none and for scales."""
    if not math.isfinite(value):
        return "—"
    long = abs(value) >= 1e6 or decimals > 7
    text = f"{value:.4g}" if long else f"{value:.{decimals}f}"
    if float(text) == 0:
        return text.lstrip("-")
    return text.replace("-", MINUS)


def in_measurand(signal: Signal, volts: float, others: tuple[float, float]) -> str:
    """Return a voltage as the measured quantity that it stands for.

    Parameters
    ----------
    signal : Signal
        Quantity <-> volts.
    volts : float
        Voltage at the signal source [V].
    others : tuple of float
        Both trips [V]; the decimals tell them apart.

    Returns
    -------
    str
        Such as "28.06 °C"; a dash where the sensor has no such voltage.
    """
    with np.errstate(all="ignore"):
        value, low, high = (float(signal.quantity(v)) for v in (volts, *others))
    apart = abs(high - low)
    if not (math.isfinite(apart) and apart > 0):
        apart = abs(value) / 10 if math.isfinite(value) and value else 1.0
    decimals = min(max(2 - math.floor(math.log10(apart)), 0), 7)
    return f"{plain(value, decimals)} {short_unit(signal)}".rstrip()


def span_in_measurand(signal: Signal) -> str:
    """Return the span of the signal in its own unit."""
    low, high = signal.span
    return f"{_short(low)} to {_short(high)} {short_unit(signal)}".rstrip()

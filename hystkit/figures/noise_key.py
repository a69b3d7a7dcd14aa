"""What stands below the curves of noise: each of them with its value at the design's own width."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

from matplotlib.axes import Axes

from hystkit.figures.drafting import Ink, Tag, lettered, segments
from hystkit.figures.lettering import one_line, wrapped, written
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Dashes, Theme
from hystkit.review.noise_scene import NoiseScene

#: How curves are drawn outside the range that was compared with simulations.
OUTSIDE: Dashes = (0, (3, 2))
#: Widths of the curves [px].
THICK, THIN = 2.2, 1.6

_PERIODS = (("s", 1.0), ("min", 60.0), ("h", 3600.0), ("day", 86400.0), ("year", 31557600.0))
_RAREST, _YEARS = 1e-9, 1e3
# From this width on two entries stand side by side, and notes on one line.
_TWO_COLUMNS, _ONE_LINE = 560, 900
_SWATCH, _INDENT = 22.0, 28.0
_NOTE_LINES = 3
_NAMES = ("again", "extra", "standing", "first")


def share(probability: float) -> str:
    """Return how many of the passages a probability stands for.

    >>> share(0.25), share(6.56e-4), share(1e-30)
    ('25 %', '1 in 1,520', 'below 1 in 10⁹')
    """
    if math.isnan(probability):
        return "—"
    if probability >= 0.1:
        return f"{100 * probability:.3g} %"
    if probability < _RAREST:
        return "below 1 in 10⁹"
    return f"1 in {_three(1 / probability)}"


def pace(rate: float) -> str:
    """Return a rate per second in the period that suits it.

    >>> pace(0.3), pace(2 / 3600), pace(1e-9), pace(1e-20)
    ('18 per min', '2 per h', '1 in 31.7 years', 'below 1 in 1,000 years')
    """
    if math.isnan(rate):
        return "—"
    for name, period in _PERIODS:
        if rate * period >= 1:
            return f"{_three(rate * period)} per {name}"
    years = 1 / (rate * _PERIODS[-1][1]) if rate > 0 else math.inf
    return f"1 in {_three(years)} years" if years < _YEARS else "below 1 in 1,000 years"


def key_texts(data: NoiseScene) -> dict[str, str]:
    """Return what noise does at the design's own width, by the name of its entry.

    Without a band, only what each curve is.
    """
    found = data.found
    if found is None:
        return {
            "again": "switches again",
            "extra": "extra cycles",
            "standing": "false cycles, standing",
            "first": "",
        }
    extra = float(found.extra_cycles)
    early, jitter = float(found.early_shift), float(found.jitter)
    way = "early" if early >= 0 else "late"
    return {
        "again": f"switches again: {share(float(found.probability))}",
        "extra": f"extra cycles: {f'{_three(extra)} each' if extra >= 1 else share(extra)}",
        "standing": f"false cycles, standing: {pace(data.standing)}",
        "first": f"trips {way} by {written(abs(early), digits=3)} ± {written(jitter, digits=3)}",
    }


class NoiseKey:
    """One entry for each curve with its value at the own width, and what is to be said of both.

    Parameters
    ----------
    page : Axes
        The page.
    theme : Theme
        Colours.
    page_px : int
        Width of the page.
    top : float
        Upper end [px].
    moving : callable
        Registers an artist with the picture.
    """

    pitch = 18.0

    def __init__(
        self, page: Axes, theme: Theme, page_px: int, top: float, moving: Callable[[Any], Any]
    ) -> None:
        columns = _columns(page_px)
        self._room = (page_px - 2 * EDGE) / columns
        self._note_room = page_px - 2 * EDGE - _INDENT
        self._tags, self._places = {}, {}
        swatches = {
            "again": (theme.text, THICK),
            "extra": (theme.signal, THIN),
            "standing": (theme.text, THICK),
        }
        for place, name in enumerate(_NAMES):
            x = EDGE + (place % columns) * self._room
            y = top + 13 + (place // columns) * self.pitch
            if name in swatches:
                segments(page, [((x, y - 4), (x + _SWATCH, y - 4))], *swatches[name])
            self._tags[name] = Tag(page, [[Ink(theme.text, "small")]], moving, name)
            self._places[name] = (x + _INDENT, y)
        y = top + 13 + -(-len(_NAMES) // columns) * self.pitch
        ends = [((EDGE, y - 4), (EDGE + _SWATCH, y - 4))]
        segments(page, ends, theme.text, THICK, dashes=OUTSIDE)
        lettered(page, "outside the validated range", (EDGE + _INDENT, y), Ink(theme.text, "small"))
        self._note_lines = _note_lines(page_px)
        inks = [[Ink(theme.muted, "small")]] * self._note_lines
        self._note = Tag(page, inks, moving, "note")
        self._note_at = y + self.pitch

    @staticmethod
    def height(page_px: int) -> float:
        """Return how high it is [px]."""
        rows = -(-len(_NAMES) // _columns(page_px)) + 1
        return rows * NoiseKey.pitch + _note_lines(page_px) * Tag.pitch

    def move(self, data: NoiseScene) -> None:
        """Set all entries."""
        for name, text in key_texts(data).items():
            self._tags[name].write([one_line(text, self._room - _INDENT - 6, "small")])
            self._tags[name].put(*self._places[name])
        if data.found is None:
            self._note.hide()
            return
        text = f"this width: {data.found.note}"
        rows = wrapped(text, self._note_room, self._note_lines, "small")
        rows += ("",) * (self._note_lines - len(rows))
        self._note.write(*([row] for row in rows))
        self._note.put(EDGE + _INDENT, self._note_at)


def _columns(page_px: int) -> int:
    return 2 if page_px >= _TWO_COLUMNS else 1


def _note_lines(page_px: int) -> int:
    if page_px >= _ONE_LINE:
        return 1
    return 2 if page_px >= _TWO_COLUMNS else _NOTE_LINES


def _three(value: float) -> str:
    """Return a number with three digits and no exponent, in groups of thousands."""
    decimals = 2 - math.floor(math.log10(value))
    text = f"{round(value, decimals):,.{max(decimals, 0)}f}"
    return text.rstrip("0").rstrip(".") if "." in text else text

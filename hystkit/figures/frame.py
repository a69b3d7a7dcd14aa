"""A plotting area with its two axes, and the labels that stand beside it."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.patches import Rectangle
from numpy.typing import NDArray

from hystkit.figures.drafting import (
    GUIDE,
    Ink,
    Tag,
    lettered,
    level_marker,
    line,
    segments,
)
from hystkit.figures.graduation import (
    Scale,
    number,
    outward,
    roundness,
    step_for,
    ticks,
)
from hystkit.figures.lettering import prefix_for, width_px, wrapped, written
from hystkit.figures.placement import Want, spread_out, thinned
from hystkit.figures.theme import MARKS, Theme, symbol
from hystkit.numeric.views import Levels

#: Space between the plotting area and its axes, so that no trace runs on an axis [px].
OFFSET = 7.0
_NUMBER_GAP = 8.0
# Room for the title of the upright axis [px].
_TITLE = 26.0
# Wanted and least distance of its numbers [px]; a low area takes them closer to have three.
_PITCH, _LEAST_PITCH = 28.0, 16.0
OUTPUTS = (("output_high", "V_OH"), ("output_low", "V_OL"))


@dataclass(frozen=True)
class Frame:
    """A plotting area: `across` runs to the right, `up` runs up the page.

    Attributes
    ----------
    across, up : Scale
        Values -> px; in base units.
    across_name, up_name : str
        Titles of the axes without unit; an axis without a title has no numbers either.
    across_unit, up_unit : str
        Units without prefix.
    """

    across: Scale
    up: Scale
    across_name: str
    up_name: str
    across_unit: str = "V"
    up_unit: str = "V"

    @property
    def left(self) -> float:
        """Left end of the area [px]."""
        return self.across.start

    @property
    def right(self) -> float:
        """Right end of the area [px]."""
        return self.across.end

    @property
    def top(self) -> float:
        """Upper end of the area [px]."""
        return self.up.end

    @property
    def bottom(self) -> float:
        """Lower end of the area [px]."""
        return self.up.start

    def draw(self, page: Axes, theme: Theme) -> None:
        """Draw both axes."""
        self._draw_across(page, theme)
        self._draw_up(page, theme)

    def clip(self, page: Axes, *artists: Artist) -> None:
        """Keep artists inside the area, and its edge."""
        edge = OFFSET - 2
        width, height = self.right - self.left, self.top - self.bottom
        area = Rectangle(
            (self.left - edge, self.bottom + edge), width + 2 * edge, height - 2 * edge,
            transform=page.transData,
        )  # fmt: skip
        for artist in artists:
            artist.set_clip_path(area)

    def _draw_across(self, page: Axes, theme: Theme) -> None:
        y, scale = self.bottom + OFFSET, self.across
        segments(page, [((self.left, y), (self.right, y))], theme.line, 1.4)
        factor, unit = prefix_for(scale.low, scale.high, self.across_unit)
        step = step_for((scale.high - scale.low) / factor, (scale.end - scale.start) / 70)
        values = ticks(scale.low / factor, scale.high / factor, step)
        places = [scale.px(value * factor) for value in values]
        segments(page, [((x, y), (x, y + 5)) for x in places], theme.line, 1.2)
        if not self.across_name:
            return
        texts = [number(value, step) for value in values]
        halves = [width_px(text, "small") / 2 for text in texts]
        extents = [(x - half, x + half) for x, half in zip(places, halves, strict=True)]
        order = sorted(range(len(values)), key=lambda k: -roundness(values[k], step))
        ink = Ink(theme.text, "small")
        for k in thinned(extents, order, gap=_NUMBER_GAP):
            lettered(page, texts[k], (places[k], y + 18), ink, "center")
        title = f"{self.across_name} / {unit}"
        lettered(page, title, (self.right + 16, y + 18), Ink(theme.muted, "small"))

    def _draw_up(self, page: Axes, theme: Theme) -> None:
        x, scale = self.left - OFFSET, self.up
        segments(page, [((x, self.top), (x, self.bottom))], theme.line, 1.4)
        factor, unit, texts = _up_numbers(
            scale.low, scale.high, scale.start - scale.end, self.up_unit
        )
        places = {value: scale.px(value * factor) for value in texts}
        segments(page, [((x - 5, y), (x, y)) for y in places.values()], theme.line, 1.2)
        for value, text in texts.items():
            ink = Ink(theme.text, "small")
            lettered(page, text, (x - 8, places[value] + 4), ink, "right")
        title = f"{self.up_name} / {unit}"
        made = lettered(page, title, (17, (self.top + self.bottom) / 2), Ink(theme.muted, "small"))
        made.set(rotation=90, rotation_mode="anchor", ha="center")


def left_for(up: tuple[float, float], height: float, unit: str = "V") -> float:
    """Return where an area of that height starts, so that the numbers of its axis have room [px].

    Parameters
    ----------
    up : tuple of float
        Range of the axis that runs up the page.
    height : float
        Its length [px].
    unit : str, default "V"
        Its unit without prefix.
    """
    texts = _up_numbers(*up, height, unit)[2].values()
    widest = max((width_px(text, "small") for text in texts), default=0.0)
    return max(_TITLE + widest + 8 + OFFSET, 62.0)


def _up_numbers(
    low: float, high: float, height: float, unit: str
) -> tuple[float, str, dict[float, str]]:
    """Return the factor and unit of an upright axis, and the number at each of its ticks."""
    factor, prefixed = prefix_for(low, high, unit)
    for pitch in (_PITCH, _LEAST_PITCH):
        step = step_for((high - low) / factor, height / pitch)
        values = ticks(low / factor, high / factor, step)
        if len(values) > 2:
            break
    return factor, prefixed, {value: number(value, step) for value in values}


def ends_of(values: NDArray[np.float64]) -> list[float]:
    """Return the least and the greatest finite value, or nothing."""
    kept = values[np.isfinite(values)]
    return [float(kept.min()), float(kept.max())] if kept.size else []


def padded(values: Sequence[float], share: float = 0.06) -> tuple[float, float]:
    """Return a range around the finite ones of some values that changes only in steps."""
    kept = [float(value) for value in values if math.isfinite(value)]
    if not kept:
        return 0.0, 1.0
    low, high = min(kept), max(kept)
    if not high > low:
        low, high = low - 0.5, high + 0.5
    pad = share * (high - low)
    return outward(low - pad, high + pad, step_for(high - low, 25))


def draw_message(page: Axes, message: str, theme: Theme, width: float, baseline: float) -> None:
    """Write what is wrong, in the place of the trips."""
    for row, text in enumerate(wrapped(f"! {message}", width - 16, 2)):
        lettered(page, text, (width / 2, baseline + row * Tag.pitch), Ink(theme.warning), "center")


class OutputTags:
    """Output levels beside a plotting area: a guide, the marker, the name and the value."""

    def __init__(
        self, page: Axes, theme: Theme, frame: Frame, moving: Callable[[Any], Any]
    ) -> None:
        self._frame = frame
        ink = [[Ink(theme.text, "small", math=True), Ink(theme.text, "small")]]
        self._tags, self._marks, self._guides = {}, {}, {}
        for name, _ in OUTPUTS:
            self._guides[name] = moving(
                line(page, theme.muted, 1, GUIDE, linestyle=MARKS[name].dashes)
            )
            self._marks[name] = moving(level_marker(page, name, theme.output, theme.background, 7))
            self._tags[name] = Tag(page, ink, moving, name)

    def move(self, levels: Levels) -> None:
        """Set both levels."""
        frame = self._frame
        values = {name: getattr(levels, name) for name, _ in OUTPUTS}
        drawn = [(name, sign) for name, sign in OUTPUTS if math.isfinite(values[name])]
        places = {name: frame.up.inside(values[name]) for name, _ in drawn}
        drawn.sort(key=lambda pair: places[pair[0]])
        wants = [Want.centred(places[name], 16) for name, _ in drawn]
        starts = spread_out(wants, (frame.top - 10, frame.bottom + 10)) or ()
        for name, _ in OUTPUTS:
            self._guides[name].set_visible(name in places)
            self._marks[name].set_visible(name in places)
            if name not in places:
                self._tags[name].hide()
        for (name, sign), start in zip(drawn, starts, strict=True):
            y = places[name]
            self._guides[name].set_data([frame.left, frame.right + 4], [y, y])
            self._marks[name].set_data([frame.right + 9], [y])
            self._tags[name].write([symbol(sign), written(values[name])])
            self._tags[name].put(frame.right + 18, start + 12)

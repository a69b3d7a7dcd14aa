"""Noise against the width of the band: switching again on a passage, and while standing still."""

from __future__ import annotations

import math
from collections.abc import Hashable
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D

from hystkit.figures.drafting import (
    GUIDE,
    MARK,
    SHADE,
    TRACE,
    Ink,
    Tag,
    box,
    line,
    marker,
    stretch,
)
from hystkit.figures.frame import draw_message
from hystkit.figures.graduation import Scale
from hystkit.figures.lettering import one_line, width_px, written
from hystkit.figures.noise_axes import LogArea, decades, left_of, rates
from hystkit.figures.noise_key import OUTSIDE, THICK, THIN, NoiseKey, key_texts, share
from hystkit.figures.noise_marks import MARKED, WidthMarks, in_measurand, marked
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE, NO_TRIPS
from hystkit.figures.theme import Dashes, Theme
from hystkit.review.noise_scene import NoiseScene

_ALLOWED: Dashes = (0, (1, 2))
# Baselines of the verdict and of the labels above the areas [px].
_VERDICT, _LABELS = 20.0, 40.0
_BETWEEN, _AXIS = 26.0, 36.0
# Powers of ten that are shown above 1, where there are so many extra cycles, and below what is
# allowed; the rarest rate is one false cycle in 300 years [1/s].
_ABOVE, _BELOW, _RAREST = 2, 2, 1e-10
_STEP = 20.0


class NoisePicture(Picture[NoiseScene]):
    """Width of the band against what noise does on a passage, and while the signal stands.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: NoiseScene) -> Hashable:
        self._message = (data.levels.message or NO_TRIPS) if data.found is None else ""
        self._sensed = data.levels.signal is not None
        # A message may take two lines.
        self._baseline = _LABELS + (Tag.pitch if self._message else 0)
        self._right = _room_for(data)
        self._areas = self._framed(data)
        self._hum = data.hum is not None
        return self._areas, self._message, self._sensed, self._hum

    def _framed(self, data: NoiseScene) -> tuple[LogArea, LogArea]:
        curve = data.curve
        extra = _power_above(float(np.max(curve.extra_cycles)))
        odds = (math.floor(math.log10(data.allowed)) - _BELOW, min(max(extra, 0), _ABOVE))
        most = _power_above(float(np.max(curve.standing)))
        pace = (math.log10(_RAREST), float(max(most, 0)))
        marks = decades(*odds), rates(_RAREST, 10.0 ** pace[1])
        left, right = left_of(marks), self._width_px - self._right
        ends = [math.log10(width) for width in (curve.width[0], curve.width[-1])]
        across = Scale(ends[0], ends[1], left, right)
        top = self._baseline + WidthMarks.height(self._sensed) + 10
        middle = top + min(max(0.2 * self._width_px, 130), 190)
        below = middle + _BETWEEN
        bottom = below + min(max(0.14 * self._width_px, 96), 140)
        return (
            LogArea(across, Scale(*odds, middle, top), "", "per passage", marks=marks[0]),
            LogArea(across, Scale(*pace, bottom, below), "width", "standing", marks=marks[1]),
        )

    def _lay_out(self, data: NoiseScene) -> None:
        passage, standing = self._areas
        key_top = standing.bottom + _AXIS
        self._resize(key_top + NoiseKey.height(self._width_px) + EDGE)
        page, theme, moving = self._page(), self._theme, self._moving
        passage.draw(page, theme)
        standing.draw(page, theme)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, 17)
        self._verdict = Tag(page, [[Ink(theme.text)]], moving, "verdict")
        self._enough = [moving(box(page, theme.band, theme.band_alpha, SHADE)) for _ in range(2)]
        self._make_curves(page, theme)
        self._marks = WidthMarks(
            page, theme, self._areas, self._width_px, self._baseline, self._sensed, moving
        )
        self._own = [
            moving(marker(page, MARKED["width"], theme.band, theme.background, 8, MARK))
            for _ in range(2)
        ]
        self._allowed = moving(line(page, theme.text, 1.2, GUIDE, linestyle=_ALLOWED))
        inks = [[Ink(theme.text, "small")]] * 2
        self._allowed_tag = Tag(page, inks, moving, "allowed")
        self._key_rows = NoiseKey(page, theme, self._width_px, key_top, moving)

    def _make_curves(self, page: Axes, theme: Theme) -> None:
        """Make a line for the range that was simulated, and one for what lies outside."""
        passage, standing = self._areas
        kinds = (
            ("extra", passage, theme.signal, THIN),
            ("again", passage, theme.text, THICK),
            ("standing", standing, theme.text, THICK),
        )
        self._curves: dict[str, tuple[Line2D, Line2D]] = {}
        for name, area, colour, width in kinds:
            pair = (
                self._moving(line(page, colour, width, TRACE, gid=name)),
                self._moving(line(page, colour, width, TRACE, gid=name, linestyle=OUTSIDE)),
            )
            area.clip(page, *pair)
            self._curves[name] = pair

    def _move(self, data: NoiseScene) -> None:
        self._move_curves(data)
        self._move_enough(data)
        self._marks.move(data)
        self._move_own(data)
        self._move_allowed(data)
        self._key_rows.move(data)
        if self._message:
            self._verdict.hide()
            return
        text = one_line(_verdict(data), self._width_px - 2 * EDGE)
        self._verdict.write([text])
        self._verdict.put(EDGE, _VERDICT)
        self._verdict.colour(self._theme.text if data.margin >= 0 else self._theme.warning)

    def _move_curves(self, data: NoiseScene) -> None:
        passage, standing = self._areas
        curve = data.curve
        for name, area, values, inside in (
            ("again", passage, curve.probability, curve.inside),
            ("extra", passage, curve.extra_cycles, curve.inside),
            ("standing", standing, curve.standing, curve.standing_inside),
        ):
            x, y = area.trace(curve.width, values)
            within, beyond = self._curves[name]
            within.set_data(x, np.where(inside, y, np.nan))
            beyond.set_data(x, np.where(_with_neighbours(~inside), y, np.nan))

    def _move_enough(self, data: NoiseScene) -> None:
        """Shade the widths that are enough for noise and hum at one time."""
        known = not math.isnan(data.together)
        for area, shade in zip(self._areas, self._enough, strict=True):
            shade.set_visible(known)
            if known:
                stretch(shade, area.x(data.together), area.top, area.right, area.bottom)

    def _move_own(self, data: NoiseScene) -> None:
        """Mark where the design stands on the curves."""
        found = data.found
        values = (math.nan, math.nan)
        if found is not None:
            values = (float(found.probability), data.standing)
        for area, value, spot in zip(self._areas, values, self._own, strict=True):
            spot.set_visible(area.holds(value))
            if area.holds(value):
                spot.set_data([area.x(data.width)], [area.y(value)])

    def _move_allowed(self, data: NoiseScene) -> None:
        area = self._areas[0]
        y = area.y(data.allowed)
        self._allowed.set_data([area.left, area.right + 10], [y, y])
        self._allowed_tag.write(["allowed"], [share(data.allowed)])
        self._allowed_tag.put(area.right + 16, y - 2)

    def _describe(self, data: NoiseScene) -> str:
        words = [f"Band with {data.noise.describe}, passed at {written(data.slope, 'V/s')}"]
        words.append(self._message.rstrip(".") if self._message else _verdict(data).lstrip("✓! "))
        for name, width in marked(data).items():
            says = "width" if name == "width" else f"{name} needs"
            sensed = in_measurand(data, width)
            text = f"{says} {written(width, digits=4 if name == 'width' else 3)}"
            words.append(f"{text} ({sensed})" if sensed else text)
        words.append(f"allowed to switch again: {share(data.allowed)}")
        if data.found is not None:
            words += [*key_texts(data).values(), data.found.note]
        return "; ".join(words) + "."


def _verdict(data: NoiseScene) -> str:
    """Tell whether the width is enough; a sign stands beside the colour."""
    if math.isnan(data.together):
        return "! no width is known to keep this noise that quiet"
    needs = "noise and hum need" if data.hum is not None else "noise needs"
    sign, says = ("✓", "wide enough") if data.margin >= 0 else ("!", "too narrow")
    return f"{sign} {says}: {needs} {written(data.together, digits=3)}"


def _with_neighbours(chosen: Any) -> Any:
    """Take the point on either side as well, so that two parts of a curve meet."""
    found = chosen.copy()
    found[1:] |= chosen[:-1]
    found[:-1] |= chosen[1:]
    return found


def _power_above(value: float) -> int:
    return math.ceil(math.log10(value) - 1e-9) if value > 0 else 0


def _room_for(data: NoiseScene) -> float:
    """Return the room right of the areas; in steps, so that it seldom changes [px]."""
    widest = max(width_px(text, "small") for text in ("allowed", "width", share(data.allowed)))
    return _STEP * math.ceil((24 + widest + EDGE) / _STEP)


def noise(data: NoiseScene, *, theme: str | Theme = "light", width_px: int = 900) -> NoisePicture:
    """Return the picture of the width that noise needs.

    Parameters
    ----------
    data : NoiseScene
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.

    Returns
    -------
    NoisePicture
    """
    return NoisePicture.of(data, theme, width_px)

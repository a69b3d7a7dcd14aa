"""Clamps of a coil: the peak on the switch against the time that it takes to let go."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D

from hystkit.analyses.drive.clamps import Clamp
from hystkit.analyses.drive.coil import Coil, Release
from hystkit.analyses.drive.switches import Mosfet, Transistor
from hystkit.base.errors import Fault, InputError
from hystkit.figures.drafting import GUIDE, MARK, TRACE, Ink, Tag, line, marker
from hystkit.figures.frame import Frame, left_for, padded
from hystkit.figures.graduation import Scale
from hystkit.figures.lettering import one_line, width_px, written
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Mark, Theme

#: One for each clamp, in their order.
CLAMP_MARKS = (
    Mark("-", "o"),
    Mark("-", "s", filled=False),
    Mark("-", "D"),
    Mark("-", "^", filled=False),
    Mark("-", "v"),
    Mark("-", "o", filled=False),
    Mark("-", "s"),
    Mark("-", "D", filled=False),
)
# Narrower than this, the key stands below the picture [px].
_SIDE_FROM = 640
# Room below the area for its axis, and between two clamps of the key [px].
_AXIS, _KEY_GAP = 34.0, 6.0
# Points of the curve, and the least distance of its end from the supply, as a share of it.
_POINTS, _CLOSEST = 400, 1e-4


@dataclass(frozen=True)
class Releases:
    """What a `CoilReleasePicture` shows.

    Attributes
    ----------
    coil : Coil
        That is switched off.
    clamps : tuple of Clamp
        To choose from.
    switch : Transistor or Mosfet, or None
        Whose rated voltage is drawn, where it is stated.
    """

    coil: Coil
    clamps: tuple[Clamp, ...]
    switch: Transistor | Mosfet | None = None

    @cached_property
    def found(self) -> tuple[Release, ...]:
        """The release with each clamp."""
        return tuple(self.coil.release(clamp) for clamp in self.clamps)

    @property
    def rated(self) -> float | None:
        """Most that the switch may block [V]; None where that is not known."""
        return None if self.switch is None else self.switch.rated_voltage

    @property
    def highest(self) -> float:
        """Highest voltage of the picture [V]."""
        return max(self.rated or 0.0, *(release.peak for release in self.found))

    def too_high(self, release: Release) -> bool:
        """Whether a peak is more than the switch may block."""
        return self.rated is not None and release.peak > self.rated


class CoilReleasePicture(Picture[Releases]):
    """Peak on the switch against release time: any constant clamp, and those to choose from.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: Releases) -> Hashable:
        self._beside = self._width_px >= _SIDE_FROM
        volts = padded([0.9 * data.coil.highest_voltage, data.highest], 0.1)
        times = (0.0, padded([0.0, data.coil.slowest])[1])
        self._frame = self._framed(times, volts, data)
        return self._frame, self._beside, len(data.clamps)

    def _framed(
        self, times: tuple[float, float], volts: tuple[float, float], data: Releases
    ) -> Frame:
        key = len(data.clamps) * (2 * Tag.pitch + _KEY_GAP)
        height = min(max(0.3 * self._width_px, 160), 280)
        widest = max(width_px(text) for release in data.found for text in _texts(data, release))
        name = "release time" if self._beside else "time"
        title = 16 + width_px(f"{name} / ms", "small")
        right = max(24 + widest, title) if self._beside else title
        top = EDGE + 6
        if self._beside:
            height = max(height, key - 12)
        self._height = top + height + _AXIS + (0.0 if self._beside else key + EDGE)
        self._key_at = (
            (self._width_px - EDGE - right, top) if self._beside else (EDGE, top + height + 44)
        )
        left = left_for(volts, height)
        return Frame(
            Scale(*times, left, self._width_px - right - 2 * EDGE),
            Scale(*volts, top + height, top),
            name,
            "peak on the switch",
            "s",
        )

    def _lay_out(self, data: Releases) -> None:
        self._resize(self._height)
        page, theme, moving = self._page(), self._theme, self._moving
        self._frame.draw(page, theme)
        self._curve = moving(line(page, theme.signal, 2, TRACE, gid="curve"))
        self._frame.clip(page, self._curve)
        self._lines, self._names = {}, {}
        for name, colour in (("supply", theme.muted), ("rated", theme.warning)):
            dashes = (0, (1, 2)) if name == "supply" else (0, (5, 2))
            self._lines[name] = moving(line(page, colour, 1.4, GUIDE, linestyle=dashes, gid=name))
            self._names[name] = Tag(page, [[Ink(colour, "small")]], moving, name)
        self._points: list[Line2D] = []
        self._keys: list[Line2D] = []
        self._tags: list[Tag] = []
        for place in range(len(data.clamps)):
            self._make_clamp(page, theme, CLAMP_MARKS[place])

    def _make_clamp(self, page: Axes, theme: Theme, mark: Mark) -> None:
        for kept in (self._points, self._keys):
            kept.append(self._moving(marker(page, mark, theme.text, theme.background, 8, MARK)))
        inks = [[Ink(theme.text)], [Ink(theme.text, "small")]]
        self._tags.append(Tag(page, inks, self._moving, "clamp"))

    def _move(self, data: Releases) -> None:
        frame, coil = self._frame, data.coil
        supply = coil.highest_voltage
        peaks = supply * (1 + np.geomspace(_CLOSEST, frame.up.high / supply, _POINTS))
        self._curve.set_data(frame.across.px(coil.release_time(peaks)), frame.up.px(peaks))
        self._level("supply", supply, f"supply {written(supply)}", "left")
        rated = data.rated
        self._level("rated", rated, "" if rated is None else f"rated {written(rated)}", "right")
        for place, release in enumerate(data.found):
            self._move_clamp(data, place, release)

    def _level(self, name: str, volts: float | None, text: str, side: str) -> None:
        """Draw a level and its name, below it at the left or above it at the right.

        The curve is high at the left and comes down to the supply at the right.
        """
        self._lines[name].set_visible(volts is not None)
        if volts is None:
            self._names[name].write([""])
            self._names[name].hide()
            return
        frame, y = self._frame, self._frame.up.px(volts)
        self._lines[name].set_data([frame.left, frame.right], [y, y])
        room = self._names[name].write([text])
        if side == "left":
            self._names[name].put(frame.left + 2, y + 14)
        else:
            self._names[name].put(frame.right - room - 2, y - 5)

    def _move_clamp(self, data: Releases, place: int, release: Release) -> None:
        frame, theme = self._frame, self._theme
        at = frame.across.px(release.time), frame.up.px(release.peak)
        left, top = self._key_at
        first = top + place * (2 * Tag.pitch + _KEY_GAP) + 12
        colour = theme.warning if data.too_high(release) else theme.text
        for artist, (x, y) in (
            (self._points[place], at),
            (self._keys[place], (left + 6, first - 4)),
        ):
            artist.set_data([x], [y])
            artist.set_markeredgecolor(colour)
            if CLAMP_MARKS[place].filled:
                artist.set_markerfacecolor(colour)
        room = self._width_px - EDGE - left - 18
        self._tags[place].write(*([one_line(text, room)] for text in _texts(data, release)))
        self._tags[place].colour(colour)
        self._tags[place].put(left + 18, first)

    def _describe(self, data: Releases) -> str:
        parts = [": ".join(_texts(data, release)).lstrip("! ") for release in data.found]
        rated = "" if data.rated is None else f", the switch is rated {written(data.rated)}"
        return (
            f"Peak on the switch and release time from a supply of "
            f"{written(data.coil.highest_voltage)}{rated}: {'; '.join(parts)}."
        )


def _texts(data: Releases, release: Release) -> tuple[str, str]:
    """Return what stands in the key; a sign stands beside the warning colour."""
    sign = "! " if data.too_high(release) else ""
    return (
        f"{sign}{release.clamp.title}",
        f"{written(release.peak, digits=3)}, {written(release.time, 's', 3)}, "
        f"{written(release.clamp_energy, 'J', 3)}",
    )


def coil_release(
    coil: Coil,
    clamps: Sequence[Clamp],
    *,
    switch: Transistor | Mosfet | None = None,
    theme: str | Theme = "light",
    width_px: int = 900,
) -> CoilReleasePicture:
    """Return the picture of the clamps that a coil may have.

    Parameters
    ----------
    coil : Coil
        That is switched off.
    clamps : sequence of Clamp
        To choose from, 1 to 8.
    switch : Transistor or Mosfet, optional
        Whose rated voltage is drawn, where it is stated.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.

    Returns
    -------
    CoilReleasePicture
        With a curve for any clamp that holds a constant voltage.

    Raises
    ------
    InputError
        If there is no clamp, or more than can be told apart.
    """
    if not 1 <= len(clamps) <= len(CLAMP_MARKS):
        fault = Fault(
            "these clamps cannot be drawn.",
            have=f"{len(clamps)} clamps",
            rule=f"1 to {len(CLAMP_MARKS)}",
            remedy="[hk.drives.Diode(), hk.drives.DiodeAndZener(24)]",
        )
        raise InputError.of("this picture", [fault])
    return CoilReleasePicture.of(Releases(coil, tuple(clamps), switch), theme, width_px)

"""A sample of a noisy signal that passes the band: signal, both trips and the output."""

from __future__ import annotations

import math
from collections.abc import Hashable, Sequence

import numpy as np
from matplotlib.axes import Axes

from hystkit.figures.drafting import (
    GUIDE,
    SHADE,
    TRACE,
    Ink,
    Tag,
    box,
    lettered,
    level_marker,
    line,
    segments,
    stretch,
)
from hystkit.figures.frame import Frame, OutputTags, draw_message, ends_of, left_for, padded
from hystkit.figures.graduation import Scale, outward, step_for
from hystkit.figures.lettering import one_line, width_px, written
from hystkit.figures.picture import Picture
from hystkit.figures.placement import Want, spread_out
from hystkit.figures.ruler_plan import EDGE, NO_TRIPS, finite
from hystkit.figures.theme import MARKS, Dashes, Theme
from hystkit.figures.trip_tags import trip_rows, trips_in_words
from hystkit.numeric.views import Levels
from hystkit.review.noise_sample import NoiseSample
from hystkit.review.noise_scene import NoiseScene

_TRIPS = ("upper", "lower")
_DOTS: Dashes = (0, (2, 2))
_DOTTED = "without noise"
# Of the noise, so that what lies on it stands out on every theme.
_ALPHA = 0.7
_FURTHER_DOWN = " ↓"
# More transitions than this are not marked one by one.
_MARKED = 40
# A band so many times wider than the trace leaves the picture, so that noise can be seen.
_FAR = 8.0
# From this width on the names of the trips and the legend have room beside what they belong to.
_WIDE = 560
_LEAST_RIGHT, _LABELS, _STEP = 104.0, 24.0, 20.0
_HEAD, _BELOW, _BETWEEN = 14.0, 34.0, 30.0
_SWATCH = 30.0


class NoiseSamplePicture(Picture[NoiseScene]):
    """Signal with noise around its passage of the upper trip, and the output that follows it.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 340.
    """

    min_width_px = 340

    def _layout_key(self, data: NoiseScene) -> Hashable:
        levels, sample = data.levels, data.sample
        self._message = (levels.message or NO_TRIPS) if sample is None else ""
        self._coarse = sample is not None and sample.coarse
        self._wide = self._width_px >= _WIDE
        across, volts = (0.0, 1.0), (0.0, 1.0)
        if sample is not None:
            across = (0.0, float(f"{sample.length + sample.interval:.6g}"))
            volts = _range([*ends_of(sample.signal), levels.upper, *_near(data, sample)])
        output = padded(finite(levels.v_ee, levels.v_cc, levels.output_low, levels.output_high))
        self._right = _LEAST_RIGHT if sample is None else _room_for(levels, self._wide)
        self._frames = self._framed(across, volts, output)
        return self._frames, self._message, self._coarse

    def _framed(
        self,
        across: tuple[float, float],
        volts: tuple[float, float],
        output: tuple[float, float],
    ) -> tuple[Frame, Frame]:
        self._rows = 2 + self._coarse + (not self._wide)
        top = EDGE + self._rows * Tag.pitch + _HEAD
        upper = min(max(0.2 * self._width_px, 130), 210)
        lower = 0.4 * upper
        left = max(left_for(volts, upper), left_for(output, lower))
        ends = (*across, left, self._width_px - self._right)
        middle = top + upper
        bottom = middle + _BETWEEN + lower
        self._height = bottom + _BELOW
        return (
            Frame(Scale(*ends), Scale(*volts, middle, top), "", "signal", "s"),
            Frame(Scale(*ends), Scale(*output, bottom, middle + _BETWEEN), "time", "output", "s"),
        )

    def _lay_out(self, data: NoiseScene) -> None:
        self._resize(self._height)
        page, theme, moving = self._page(), self._theme, self._moving
        for frame in self._frames:
            frame.draw(page, theme)
        if self._message:
            draw_message(page, self._message, theme, self._width_px, self._baseline(0))
        else:
            self._draw_legend(page, theme)
        self._outcome = Tag(page, [[Ink(theme.text, bold=True)]], moving, "outcome")
        self._conditions = Tag(page, [[Ink(theme.muted, "small")]], moving, "conditions")
        self._warning = Tag(page, [[Ink(theme.warning, "small")]], moving, "coarse")
        self._band = moving(box(page, theme.band, theme.band_alpha, SHADE))
        self._signal = moving(line(page, theme.signal, 1.2, TRACE, gid="signal", alpha=_ALPHA))
        # Above the signal, which would hide it.
        self._ramp = moving(
            line(page, theme.text, 2, TRACE + 0.1, linestyle=_DOTS, gid="without noise")
        )
        self._outputs = OutputTags(page, theme, self._frames[1], moving)
        self._output = moving(line(page, theme.output, 1.8, TRACE, gid="output"))
        self._frames[0].clip(page, self._signal, self._ramp)
        self._frames[1].clip(page, self._output)
        self._make_trips(page, theme)

    def _baseline(self, row: int) -> float:
        return EDGE + 11 + row * Tag.pitch

    def _draw_legend(self, page: Axes, theme: Theme) -> None:
        """Tell what the dotted line is: at the right of the first line, or in one of its own."""
        y = self._baseline(0 if self._wide else self._rows - 1)
        room = width_px(_DOTTED, "small") + _SWATCH + 6
        x = self._width_px - EDGE - room if self._wide else EDGE
        segments(page, [((x, y - 4), (x + _SWATCH, y - 4))], theme.text, 2, dashes=_DOTS)
        lettered(page, _DOTTED, (x + _SWATCH + 6, y), Ink(theme.text, "small"))

    def _make_trips(self, page: Axes, theme: Theme) -> None:
        moving, paper = self._moving, theme.background
        self._lines, self._leads, self._ends = {}, {}, {}
        self._tags, self._switches = {}, {}
        for trip in _TRIPS:
            colour = getattr(theme, trip)
            # The trips lie above the noise, which would hide them.
            self._lines[trip] = moving(
                line(page, colour, 1.6, TRACE + 0.2, linestyle=MARKS[trip].dashes, gid=trip)
            )
            self._leads[trip] = moving(line(page, colour, 1, GUIDE))
            self._ends[trip] = moving(level_marker(page, trip, colour, paper, 9))
            self._switches[trip] = moving(level_marker(page, trip, colour, paper, 8))
            inks = [[Ink(colour, bold=True)], [Ink(colour)]]
            self._tags[trip] = Tag(page, inks, moving, trip)

    def _move(self, data: NoiseScene) -> None:
        self._outputs.move(data.levels)
        sample = data.sample
        movers = (self._signal, self._ramp, self._output, self._band)
        kept = (self._lines, self._leads, self._ends, self._switches)
        for artist in (*movers, *(one for kind in kept for one in kind.values())):
            artist.set_visible(sample is not None)
        if sample is None:
            for tag in (self._outcome, self._conditions, self._warning, *self._tags.values()):
                tag.hide()
            return
        self._move_traces(data, sample)
        self._move_head(data, sample)
        self._move_trips(data.levels, inside=bool(_near(data, sample)))
        self._move_switches(data, sample)

    def _move_traces(self, data: NoiseScene, sample: NoiseSample) -> None:
        signal, output = self._frames
        columns = round(signal.right - signal.left)
        time, volts = sample.outline(sample.signal, columns)
        self._signal.set_data(signal.across.px(time), signal.up.px(volts))
        ends = sample.time[[0, -1]], sample.ramp[[0, -1]]
        self._ramp.set_data(signal.across.px(ends[0]), signal.up.px(ends[1]))
        levels = data.levels
        above, below = levels.output_high, levels.output_low
        if data.inverts:
            above, below = below, above
        time, states = sample.outline(sample.above.astype(float), 2 * columns)
        self._output.set_data(
            output.across.px(time), output.up.px(below + (above - below) * states)
        )

    def _move_head(self, data: NoiseScene, sample: NoiseSample) -> None:
        row = self._width_px - 2 * EDGE
        room = row - width_px(_DOTTED, "small") - _SWATCH - 18 if self._wide else row
        # Bold letters are wider.
        self._outcome.write([one_line(_outcome(sample), room / 1.15)])
        self._outcome.put(EDGE, self._baseline(0))
        clean = sample.transitions <= 1
        self._outcome.colour(self._theme.text if clean else self._theme.warning)
        self._conditions.write([one_line(_conditions(data), row, "small")])
        self._conditions.put(EDGE, self._baseline(1))
        if sample.coarse:
            self._warning.write([one_line(_coarse(sample), row, "small")])
            self._warning.put(EDGE, self._baseline(2))
        else:
            self._warning.hide()

    def _move_trips(self, levels: Levels, *, inside: bool) -> None:
        """Set both trips; a lower one below the picture is named at its edge."""
        frame = self._frames[0]
        heights = {trip: frame.up.inside(getattr(levels, trip)) for trip in _TRIPS}
        stretch(self._band, frame.left, heights["upper"], frame.right, heights["lower"])
        texts = {trip: _labels(levels, trip, self._wide) for trip in _TRIPS}
        if not inside:
            texts["lower"][0][0] += _FURTHER_DOWN
        for artist in (self._lines["lower"], self._leads["lower"]):
            artist.set_visible(inside)
        length = 31.0 if any(rows[1][0] for rows in texts.values()) else 16.0
        wants = [Want.centred(heights[trip], length) for trip in _TRIPS]
        starts = spread_out(wants, (frame.top - 12, frame.bottom + 20), gap=2) or (0.0, 0.0)
        for trip, start in zip(_TRIPS, starts, strict=True):
            y, mark = heights[trip], start + 8
            self._lines[trip].set_data([frame.left, frame.right], [y, y])
            self._leads[trip].set_data([frame.right, frame.right + 10], [y, mark])
            self._ends[trip].set_data([frame.right + 14], [mark])
            self._tags[trip].write(*texts[trip])
            self._tags[trip].put(frame.right + _LABELS, start + 12)

    def _move_switches(self, data: NoiseScene, sample: NoiseSample) -> None:
        """Mark every transition on its trip, where marks have room."""
        frame, places = self._frames[0], sample.changes
        few = places.size <= _MARKED
        rising = sample.above[places]
        for trip, chosen in (("upper", rising), ("lower", ~rising)):
            self._switches[trip].set_visible(few)
            x = frame.across.px(sample.time[places[chosen]])
            y = frame.up.inside(getattr(data.levels, trip))
            self._switches[trip].set_data(x, np.full(x.shape, y))

    def _describe(self, data: NoiseScene) -> str:
        if data.sample is None:
            return f"No sample: {(data.levels.message or NO_TRIPS).rstrip('.')}."
        words = [f"Sample of a signal that rises through the band: {_conditions(data)}"]
        words += [trips_in_words(data.levels), _outcome(data.sample).lstrip("✓! ")]
        if data.sample.coarse:
            words.append(_coarse(data.sample).lstrip("! "))
        return "; ".join(words) + "."


def _range(volts: Sequence[float]) -> tuple[float, float]:
    """Return a range around some voltages that follows them in coarse steps."""
    low, high = min(volts), max(volts)
    return outward(low, high, step_for(high - low, 8))


def _near(data: NoiseScene, sample: NoiseSample) -> tuple[float, ...]:
    """Return the lower trip where it is near enough to be shown."""
    low, high = ends_of(sample.signal)
    below = low - data.levels.lower
    return () if below > _FAR * (high - low) else (data.levels.lower,)


def _outcome(sample: NoiseSample) -> str:
    """Tell how often the output changes; a sign stands beside the colour."""
    count = sample.transitions
    if count <= 1:
        return f"✓ {count} transition{'' if count == 1 else 's'} in this sample"
    extra = sample.extra_cycles
    cycles = f": {extra:,} extra cycle{'' if extra == 1 else 's'}" if extra else ""
    return f"! {count:,} transitions{cycles}"


def _conditions(data: NoiseScene) -> str:
    words = [f"{written(data.noise.rms, digits=3)} rms", written(data.slope, "V/s", 3)]
    if data.hum is not None:
        amplitude, frequency = data.hum
        words.append(f"hum {written(amplitude, digits=3)} at {written(frequency, 'Hz', 3)}")
    return ", ".join([*words, f"sample {data.seed}"])


def _coarse(sample: NoiseSample) -> str:
    return f"! one value each {written(sample.interval, 's', 3)}: too few to see all transitions"


def _labels(levels: Levels, trip: str, wide: bool) -> list[list[str]]:
    """Return what stands at a trip; without its name where there is little room."""
    rows = trip_rows(levels, trip)
    return rows if wide else [[rows[0][0].removeprefix(f"{trip}  ")], rows[1]]


def _room_for(levels: Levels, wide: bool) -> float:
    """Return the room for the labels of the trips; in steps, so that it seldom changes."""
    widest = max(
        width_px(text, bold=number == 0)
        for trip in _TRIPS
        for number, (text,) in enumerate(_labels(levels, trip, wide))
    )
    widest += width_px(_FURTHER_DOWN, bold=True)
    return max(_LABELS + _STEP * math.ceil((widest + 6) / _STEP), _LEAST_RIGHT)


def noise_sample(
    data: NoiseScene, *, theme: str | Theme = "light", width_px: int = 900
) -> NoiseSamplePicture:
    """Return the picture of a noisy signal that passes the band.

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
    NoiseSamplePicture
    """
    return NoiseSamplePicture.of(data, theme, width_px)

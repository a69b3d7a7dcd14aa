"""The switching loop: both paths, told apart by more than colour."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from matplotlib.lines import Line2D

from hystkit.figures import THEMES, loop
from hystkit.figures.drafting import TIPS
from hystkit.figures.loop import LoopPicture
from hystkit.numeric.views import Levels, Loop
from tests.figures.samples import failed, levels, loop_of, random_levels, vent
from tests.figures.seen import faults, texts


def path(picture: LoopPicture, way: str) -> Line2D:
    (found,) = picture.figure.findobj(lambda artist: artist.get_gid() == way)
    assert isinstance(found, Line2D)
    return found


def arrows(picture: LoopPicture, colour: str) -> set[str]:
    """Directions of the arrow tips of that colour."""
    by_shape = {id(shape): name for name, shape in TIPS.items()}
    return {
        by_shape[id(artist.get_marker())]
        for artist in picture.figure.findobj(Line2D)
        if artist.get_visible()
        and id(artist.get_marker()) in by_shape
        and artist.get_color() == colour
    }


def non_inverting(found: Levels) -> Loop:
    turned = loop_of(found)
    return Loop(
        turned.axis,
        (turned.rising[0], turned.rising[1][::-1]),
        (turned.falling[0], turned.falling[1][::-1]),
        found,
    )


@pytest.mark.parametrize("width", [360, 700, 1400])
@settings(max_examples=25)
@given(found=random_levels())
def test_no_label_overlaps_or_is_cut(width: int, found: Levels) -> None:
    assert faults(loop(loop_of(found), width_px=width)) == []


@pytest.mark.parametrize("theme", THEMES)
def test_paths_differ_in_colour_and_in_line(theme: str) -> None:
    picture = loop(loop_of(vent()), theme=theme)
    rising, falling = path(picture, "rising"), path(picture, "falling")
    assert rising.get_color() == THEMES[theme].upper
    assert falling.get_color() == THEMES[theme].lower
    assert not rising.is_dashed()
    assert falling.is_dashed()


def test_paths_run_through_the_trips_and_levels() -> None:
    data = loop_of(levels(1.0, 4.0))
    picture = loop(data)
    x, y = path(picture, "rising").get_data()
    per_volt = (x[3] - x[0]) / 5.0
    assert (x[1] - x[0]) / per_volt == pytest.approx(4.0)
    x_back, y_back = path(picture, "falling").get_data()
    assert (x_back[1] - x[0]) / per_volt == pytest.approx(1.0)
    assert y[0] < y[3], "the page runs downwards, and the output starts high"
    assert np.array_equal(y_back, y[::-1])


def test_arrows_point_the_way_the_paths_are_run_through() -> None:
    theme = THEMES["light"]
    inverting = loop(loop_of(levels(1.0, 4.0)))
    assert arrows(inverting, theme.upper) == {"down", "right"}
    assert arrows(inverting, theme.lower) == {"up", "left"}
    other = loop(non_inverting(levels(1.0, 4.0)))
    assert arrows(other, theme.upper) == {"up", "right"}
    assert arrows(other, theme.lower) == {"down", "left"}


def test_arrows_of_a_narrow_band_stand_at_different_heights() -> None:
    picture = loop(loop_of(levels(2.499, 2.501)), width_px=700)
    shapes = (TIPS["up"], TIPS["down"])
    heights = [
        float(artist.get_ydata()[0])
        for artist in picture.figure.findobj(Line2D)
        if artist.get_visible() and any(artist.get_marker() is shape for shape in shapes)
    ]
    assert len(heights) == 2
    assert abs(heights[0] - heights[1]) > 30


def test_arrows_inside_a_narrow_band_are_left_out() -> None:
    picture = loop(loop_of(levels(2.4, 2.5)), width_px=700)
    assert arrows(picture, THEMES["light"].upper) == {"down"}


def test_trips_and_levels_are_written() -> None:
    shown = {text for text, _ in texts(loop(loop_of(vent())))}
    assert {"lower  2.332 V", "upper  2.553 V", "28.06 °C", "24.05 °C", "4.9 V", "200 mV"} <= shown
    assert {"signal / V", "output / V"} <= shown


def test_a_small_supply_is_numbered_in_millivolts() -> None:
    found = levels(0.2, 0.3, v_cc=0.5, output_high=0.45, output_low=0.01)
    shown = {text for text, _ in texts(loop(loop_of(found)))}
    assert {"signal / mV", "output / mV", "200", "lower  200 mV"} <= shown


def test_without_trips_it_says_why() -> None:
    picture = loop(loop_of(failed()))
    assert faults(picture) == []
    shown = " ".join(text for text, _ in texts(picture))
    assert "! the loop gain is below one" in shown
    assert "upper" not in shown


def test_empty_paths_are_no_error() -> None:
    nothing = np.empty(0), np.empty(0)
    picture = loop(Loop((0.0, 5.0), nothing, nothing, failed()))
    assert picture.png()
    odd = loop(Loop((float("nan"), 5.0), nothing, nothing, levels(1, 2)))
    assert odd.png()


def test_alt_tells_all_numbers() -> None:
    assert loop(loop_of(vent())).alt == (
        "Output against signal from 0 to 5 V; "
        "lower trip 2.332 V (28.06 °C) within 2.3 to 2.362 V, "
        "upper trip 2.553 V (24.05 °C) within 2.52 to 2.585 V, width 221 mV; "
        "output high 4.9 V, low 200 mV."
    )

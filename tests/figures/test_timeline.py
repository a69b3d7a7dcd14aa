"""Signal and output against time."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from matplotlib.lines import Line2D

from hystkit.figures import THEMES, timeline
from hystkit.figures.timeline import TimelinePicture
from hystkit.numeric.views import Levels, Response
from tests.figures.samples import failed, levels, random_levels, response_of, vent
from tests.figures.seen import faults, texts


def trace(picture: TimelinePicture, name: str) -> Line2D:
    (found,) = picture.figure.findobj(lambda artist: artist.get_gid() == name)
    assert isinstance(found, Line2D)
    return found


def marks(picture: TimelinePicture, marker: str) -> list[tuple[float, float]]:
    """Places of a marker on the traces; the one beside its label is left out."""
    found = [
        artist
        for artist in picture.figure.findobj(Line2D)
        if artist.get_marker() == marker and artist.get_visible()
    ]
    places = [np.column_stack(artist.get_data()) for artist in found]
    edge = max(trace(picture, "signal").get_xdata())
    return sorted((x, y) for part in places for x, y in part if x <= edge)


@pytest.mark.parametrize("width", [480, 700, 1400])
@settings(max_examples=20)
@given(found=random_levels(), zoomed=st.booleans())
def test_no_label_overlaps_or_is_cut(width: int, found: Levels, zoomed: bool) -> None:
    data = response_of(found, 201, zoomed=zoomed)
    assert faults(timeline(data, width_px=width)) == []


def test_switching_instants_are_marked_with_their_trip() -> None:
    data = response_of(levels(1.0, 4.0))
    picture = timeline(data)
    times, _ = trace(picture, "signal").get_data()
    per_second = (times[-1] - times[0]) / 0.02
    up, down = marks(picture, "^"), marks(picture, "v")
    assert len(up) == len(down) == 2
    found = sorted((x - times[0]) / per_second for x, _ in up + down)
    assert found == pytest.approx(list(data.switches), abs=1e-9)
    assert all(y_up < y_down for (_, y_up), (_, y_down) in zip(up, down, strict=True))


def test_both_traces_share_the_time_axis() -> None:
    picture = timeline(response_of(vent()))
    signal, output = trace(picture, "signal"), trace(picture, "output")
    assert np.array_equal(signal.get_xdata(), output.get_xdata())
    assert max(signal.get_ydata()) < min(output.get_ydata())


@pytest.mark.parametrize(
    ("length", "unit"), [(0.02, "ms"), (20.0, "s"), (2e-5, "µs"), (5e-8, "ns"), (7200.0, "ks")]
)
def test_time_has_a_fitting_unit(length: float, unit: str) -> None:
    data = response_of(vent())
    scaled = Response(
        data.time * length / 0.02, data.signal, data.output, data.switches * length / 0.02, vent()
    )
    assert f"time / {unit}" in {text for text, _ in texts(timeline(scaled))}


def test_everything_is_written() -> None:
    shown = {text for text, _ in texts(timeline(response_of(vent())))}
    assert {"lower  2.332 V", "upper  2.553 V", "28.06 °C", "24.05 °C", "4.9 V", "200 mV"} <= shown
    assert {"signal / V", "output / V", "time / ms"} <= shown


@pytest.mark.parametrize("theme", THEMES)
def test_trips_differ_in_colour_and_in_line(theme: str) -> None:
    picture = timeline(response_of(vent()), theme=theme)
    dashed = {
        artist.get_color(): artist.is_dashed()
        for artist in picture.figure.findobj(Line2D)
        if artist.get_linewidth() == pytest.approx(1.6 * 0.72) and artist.get_linestyle() != "None"
    }
    assert dashed == {THEMES[theme].upper: False, THEMES[theme].lower: True}


def test_a_low_axis_has_more_than_one_number() -> None:
    found = levels(-0.1, 0.1, v_ee=-15.0, v_cc=15.0, output_high=13.5, output_low=-13.5)
    shown = [text for text, _ in texts(timeline(response_of(found), width_px=700))]
    assert shown.count("−10") == 2, "once on either axis"


def test_without_trips_it_says_why() -> None:
    picture = timeline(response_of(failed()))
    assert faults(picture) == []
    assert marks(picture, "^") == []
    assert any(text.startswith("! the loop gain") for text, _ in texts(picture))


def test_an_empty_record_is_no_error() -> None:
    nothing = np.empty(0)
    assert timeline(Response(nothing, nothing, nothing, nothing, vent())).png()


def test_alt_tells_all_numbers() -> None:
    assert timeline(response_of(levels(1.0, 4.0))).alt == (
        "Signal and output over 20 ms; lower trip 1 V, upper trip 4 V, width 3 V; "
        "the output changes state 4 times."
    )

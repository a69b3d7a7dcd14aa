"""The ruler: nothing overlaps at any setting, and what it says is what it was given."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from hystkit.figures import ruler
from hystkit.figures.lettering import MINUS
from hystkit.figures.ruler import RulerPicture, nearest_margin
from hystkit.figures.theme import symbol
from hystkit.numeric.views import Levels
from tests.figures.samples import NAN, failed, levels, random_levels, vent
from tests.figures.seen import faults, lines, texts

WIDTHS = (700, 1400)


@pytest.mark.parametrize("width", WIDTHS)
@settings(max_examples=40)
@given(found=random_levels())
def test_no_label_overlaps_or_is_cut_or_crossed_or_left_out(width: int, found: Levels) -> None:
    picture = ruler(found, width_px=width)
    assert faults(picture, "rail", "trip", "axis") == []
    shown = [text.split()[0] for text, _ in texts(picture)]
    wanted = ["lower", "upper", "width"] if found.ok else ["!"]
    wanted += [symbol(name) for name in ("V_OL", "V_OH", "V_CC")]
    wanted += [symbol("V_REF")] if found.reference is not None else []
    assert [name for name in wanted if name not in shown] == []


@settings(max_examples=20)
@given(many=st.lists(random_levels(), min_size=2, max_size=4))
def test_a_kept_picture_is_as_good_as_a_new_one(many: list[Levels]) -> None:
    kept = RulerPicture(width_px=700)
    for found in many:
        kept.update(found)
    new = ruler(many[-1], width_px=700)
    assert sorted(text for text, _ in texts(kept)) == sorted(text for text, _ in texts(new))
    assert faults(kept, "rail", "trip", "axis") == []


@pytest.mark.parametrize(
    "found",
    [
        vent(),
        levels(2.4985, 2.5015),
        levels(0.0, 5.0, output_high=5.0, output_low=0.0, reference=0.0),
        levels(-0.0015, 0.0015, v_ee=-15.0, v_cc=15.0, reference=0.0, common_mode=(-13, 12)),
        levels(11.44, 12.65, common_mode=(0.0, 3.5), reference=2.5),
        levels(4.9999999, 5.0000001),
        levels(2.0, 2.0),
    ],
)
@pytest.mark.parametrize("width", [640, *WIDTHS])
def test_hard_cases(found: Levels, width: int) -> None:
    picture = ruler(found, width_px=width)
    assert faults(picture, "rail", "trip", "axis") == []
    shown = " ".join(text for text, _ in texts(picture))
    assert "lower" in shown
    assert "upper" in shown
    assert "width" in shown


def test_every_value_is_written() -> None:
    shown = {text for text, _ in texts(ruler(vent()))}
    assert {"lower  2.332 V", "upper  2.553 V", "28.06 °C", "24.05 °C", "width 221 mV"} <= shown
    assert {"0 to 3.5 V", f"{MINUS}10 to 45 °C", "4.9 V", "200 mV", "915 mV"} <= shown
    assert {"GND", "temperature / °C", "voltage / V", "common mode", "margin", "levels"} <= shown


def test_a_split_supply_names_its_negative_rail() -> None:
    shown = {text for text, _ in texts(ruler(levels(-1, 1, v_ee=-15.0, v_cc=15.0)))}
    assert r"$V_\mathrm{EE}$" in shown
    assert "GND" not in shown
    assert {f"{MINUS}15", "15"} <= shown


def test_marks_stand_where_their_values_are() -> None:
    picture = ruler(vent())
    rails = sorted({round(box[0], 3) for box in lines(picture, "rail")})
    trips = sorted(box[0] for box in lines(picture, "trip"))
    per_volt = (rails[1] - rails[0]) / 5.0
    assert [(x - rails[0]) / per_volt for x in trips] == pytest.approx([2.332, 2.553], abs=1e-4)


def test_numbers_of_the_measurand_stand_above_their_voltages() -> None:
    picture = ruler(vent())
    rails = sorted({round(box[0], 3) for box in lines(picture, "rail")})
    boxes = dict(texts(picture))
    middle = (boxes["20"][0] + boxes["20"][2]) / 2
    volts = float(vent().signal.volts(20.0))
    assert middle == pytest.approx(rails[0] + volts / 5 * (rails[1] - rails[0]), abs=1.0)


def test_upper_marker_points_up_and_lower_down() -> None:
    shapes = {
        artist.get_marker()
        for artist in ruler(levels(1.0, 4.0)).figure.findobj(lambda a: hasattr(a, "get_marker"))
        if artist.get_visible()
    }
    assert {"^", "v"} <= shapes


def test_markers_of_a_band_narrower_than_they_are_do_not_cover_each_other() -> None:
    picture = ruler(levels(2.4985, 2.5015))
    halves = [
        artist.get_marker().vertices[:, 0]
        for artist in picture.figure.findobj(lambda a: hasattr(a, "get_marker"))
        if artist.get_visible() and hasattr(artist.get_marker(), "vertices")
        and len(artist.get_marker().vertices) == 4
        and set(np.abs(artist.get_marker().vertices[:, 1])) == {1.0}
    ]  # fmt: skip
    assert sorted((side.min(), side.max()) for side in halves) == [(-1, 0), (0, 1)]


@pytest.mark.parametrize(
    ("trips", "reach", "value", "small"),
    [
        ((1.0, 2.0), (0.0, 3.5), 1.0, False),
        ((1.0, 3.0), (0.0, 3.5), 0.5, False),
        ((1.0, 3.45), (0.0, 3.5), 0.05, True),
        ((1.0, 4.0), (0.0, 3.5), -0.5, True),
        ((0.1, 2.0), (0.3, 3.5), -0.2, True),
    ],
)
def test_the_smallest_margin_is_found_and_judged(
    trips: tuple[float, float], reach: tuple[float, float], value: float, small: bool
) -> None:
    margin = nearest_margin(levels(*trips, common_mode=reach))
    assert margin is not None
    assert margin.value == pytest.approx(value)
    assert margin.small is small


def test_a_margin_is_measured_from_the_worst_of_the_interval() -> None:
    found = levels(1.0, 3.0, upper_interval=(2.9, 3.2), common_mode=(0.0, 3.5))
    margin = nearest_margin(found)
    assert margin is not None
    assert margin.value == pytest.approx(0.3)


def test_a_margin_that_is_used_up_carries_a_sign_and_not_only_a_colour() -> None:
    good = ruler(levels(1.0, 2.0, common_mode=(0.0, 3.5)))
    bad = ruler(levels(1.0, 4.0, common_mode=(0.0, 3.5)))
    assert f"! {MINUS}500 mV" in {text for text, _ in texts(bad)}
    assert not any(text.startswith("!") for text, _ in texts(good))
    crosses = bad.figure.findobj(lambda a: getattr(a, "get_marker", str)() == "X")
    assert [a.get_visible() for a in crosses] == [True]


def test_where_the_pins_do_not_see_the_signal_their_own_voltage_counts() -> None:
    """A divided 12 V signal: the pins stand at the reference, well inside their range."""
    found = levels(11.44, 12.65, pins=(2.5, 2.5), common_mode=(0.0, 3.5), reference=2.5)
    margin = nearest_margin(found)
    assert margin is not None
    assert (margin.value, margin.pin, margin.small) == (1.0, 2.5, False)
    picture = ruler(found)
    rails = sorted({round(box[0], 3) for box in lines(picture, "rail")})
    witnesses = [(box[0] - rails[0]) / (rails[1] - rails[0]) for box in lines(picture, "witness")]
    assert witnesses == pytest.approx([0.5, 0.5], abs=1e-4)
    at_trips = lines(ruler(levels(1.0, 2.0, common_mode=(0.0, 3.5))), "witness")
    trips = lines(ruler(levels(1.0, 2.0, common_mode=(0.0, 3.5))), "trip")
    assert [box[0] for box in at_trips] == pytest.approx([box[0] for box in trips])


def test_moving_trips_do_not_redraw_the_background() -> None:
    picture = RulerPicture()
    for shift in np.linspace(0, 0.5, 20):
        picture.update(replace(vent(), lower=2.3 + shift, upper=2.6 + shift))
        picture.png()
    assert picture.full_redraws == 1
    picture.update(replace(vent(), v_cc=12.0))
    picture.png()
    assert picture.full_redraws == 2


@pytest.mark.parametrize("width", WIDTHS)
def test_without_trips_the_message_takes_their_place(width: int) -> None:
    picture = ruler(failed(), width_px=width)
    assert faults(picture, "rail", "axis") == []
    shown = " ".join(text for text, _ in texts(picture))
    assert "! the loop gain is below one" in shown
    assert "lower" not in shown
    assert "loop gain" in picture.alt


@pytest.mark.parametrize(
    "found",
    [
        levels(NAN, NAN),
        levels(1, NAN),
        levels(1, 2, v_cc=NAN),
        levels(1, 2, v_cc=0.0),
        levels(1, 2, output_high=NAN),
    ],
)
def test_what_is_not_a_number_is_left_out(found: Levels) -> None:
    picture = ruler(found)
    assert faults(picture, "rail", "axis") == []
    assert picture.png()
    assert picture.alt.endswith(".")


def test_alt_tells_all_numbers() -> None:
    assert ruler(vent()).alt == (
        "Volt axis with V_EE at 0 V and V_CC at 5 V; "
        "lower trip 2.332 V (28.06 °C) within 2.3 to 2.362 V, "
        "upper trip 2.553 V (24.05 °C) within 2.52 to 2.585 V, width 221 mV; "
        "output 0.2 to 4.9 V; common-mode range 0 to 3.5 V; "
        "margin of the input pins 915 mV."
    )


def test_alt_tells_that_tolerances_are_not_evaluated() -> None:
    found = replace(vent(), upper_interval=None, lower_interval=None, not_evaluated="none known")
    assert "upper trip 2.553 V (24.05 °C), width 221 mV, none known; " in ruler(found).alt


def test_ticks_are_outside_the_band() -> None:
    """The shade ends on the axis, and the ticks of the axis run down from it."""
    picture = ruler(levels(1.0, 4.0))
    axis = lines(picture, "axis")[0]
    numbers = [box for text, box in texts(picture) if text in {"2", "3", "2.5"}]
    assert numbers
    assert all(box[3] < axis[1] for box in numbers)
    trips = lines(picture, "trip")
    assert all(box[1] >= axis[1] - 0.5 for box in trips)

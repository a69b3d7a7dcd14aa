"""Floors, ceilings and what remains between them, as a reader of the picture sees them."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from matplotlib.lines import Line2D

import hystkit as hk
from hystkit.figures import THEMES, WindowPicture, window
from hystkit.figures.window_plan import bound_text, ordered
from hystkit.review.window import Bound, WidthWindow
from tests.figures.seen import Box, crosses, faults, pixels, texts

WIDTHS = [340, 560, 700, 1400]
NAMES = {
    "floor": ("noise", "hum", "load step", "all disturbances", "offset", "cycling",
              "minimum on time", "minimum off time"),
    "ceiling": ("swing", "accuracy", "reach"),
}  # fmt: skip
TANK = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20, unit="m")


def stage(unit: str | None = "m") -> hk.Design:
    """Trips at 2.25 and 2.75, in volts or in a unit of which one is a volt."""
    signal = None if unit is None else hk.signals.Linear(1.0, span=(0, 5), unit=unit, name="level")
    return hk.Design(
        hk.Stage("inverting", reference="source"),
        {"R_R": "10k", "R_F": "90k"},
        supply=5.0,
        levels={"V_REF": 2.5},
        signal=signal,
    )


@cache
def found(name: str) -> WidthWindow:
    asked: dict[str, dict[str, Any]] = {
        "open": {"starts_per_hour": 3, "swing": 1.0, "accuracy": 0.6, "min_on": 200},
        "empty": {"starts_per_hour": 0.9, "swing": 0.4, "accuracy": 0.6, "load_step": 0.05},
        "hopeless": {"swing": 0.05, "load_step": 0.2},
        "bare": {},
    }
    if name == "volts":
        return hk.width_window(stage(None), load_step=0.03)
    return hk.width_window(stage(), plant=TANK if asked[name] else None, **asked[name])


CASES = ("open", "empty", "hopeless", "bare", "volts")


def made(*bounds: tuple[str, str, float], unit: str | None = "m") -> WidthWindow:
    """A window of any bounds; the picture takes them as they are."""
    rows = [Bound(name, kind, width, "as given") for name, kind, width in bounds]  # type: ignore[arg-type]
    floors = sorted((b for b in rows if b.kind == "floor"), key=lambda b: -b.width)
    ceilings = sorted((b for b in rows if b.kind == "ceiling"), key=lambda b: b.width)
    return replace(hk.width_window(stage(unit)), bounds=(*floors, *ceilings))


def said(picture: WindowPicture) -> set[str]:
    return {text for text, _ in texts(picture)}


def uprights(picture: WindowPicture, *gids: str) -> list[Box]:
    """Pieces of the upright lines of these names."""
    pieces = []
    for artist in picture.figure.findobj(Line2D):
        if artist.get_gid() in gids and artist.get_visible():
            ends = artist.get_transform().transform(np.column_stack(artist.get_data()))
            pairs = ends.reshape(-1, 3, 2)[:, :2]
            pieces += [(*pair.min(axis=0), *pair.max(axis=0)) for pair in pairs]
    return pieces


def unread(picture: WindowPicture) -> list[str]:
    """Whatever keeps a label from being read."""
    through = [
        f"{text!r} is crossed"
        for piece in uprights(picture, "own width", "target")
        for text, box in texts(picture)
        if crosses(piece, box)
    ]
    return faults(picture) + through


widths = st.floats(-6, 6).map(lambda exponent: 10.0**exponent)


@st.composite
def bounds(draw: Any) -> list[tuple[str, str, float]]:
    rows = []
    for kind, hopeless in (("floor", math.inf), ("ceiling", 0.0)):
        for name in draw(st.lists(st.sampled_from(NAMES[kind]), unique=True)):
            rows.append((name, kind, draw(st.one_of(widths, st.just(hopeless)))))
    return rows


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", CASES)
def test_no_label_overlaps_is_cut_or_crossed(width: int, name: str) -> None:
    assert unread(window(found(name), width_px=width)) == []


@pytest.mark.parametrize("width", [340, 700])
@settings(max_examples=25, deadline=None)
@given(rows=bounds(), unit=st.sampled_from([None, "m", "mg per litre of brine"]))
def test_no_label_overlaps_at_any_bounds(width: int, rows: Any, unit: str | None) -> None:
    assert unread(window(made(*rows, unit=unit), width_px=width)) == []


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", CASES)
def test_every_bound_is_named_with_its_value(width: int, name: str) -> None:
    one = found(name)
    shown = said(window(one, width_px=width))
    for bound in one.bounds:
        binds = bound in (one.floor, one.ceiling)
        assert (f"{bound.name}, binds" if binds else bound.name) in shown
        assert bound_text(bound, one.unit) in shown


def test_bounds_stand_at_their_widths() -> None:
    one = found("open")
    picture = window(one, width_px=1400)
    for mark, bound in zip(picture._marks, ordered(one), strict=True):
        at = picture._scale.px(bound.width)
        assert bound.hopeless is False
        if bound.width > picture._scale.high:
            assert not mark._edge.get_visible()
            assert mark._beyond.get_visible()
            continue
        left, right = mark._bar.get_x(), mark._bar.get_x() + mark._bar.get_width()
        expected = (picture._scale.start, at) if bound.kind == "floor" else (at, picture._scale.end)
        assert (left, right) == pytest.approx(expected)
        assert list(mark._edge.get_xdata()) == pytest.approx([at, at])


def test_the_axis_begins_at_zero_and_holds_what_binds() -> None:
    for name in CASES:
        one = found(name)
        picture = window(one)
        assert picture._scale.low == 0
        for seen in (one.width, one.target or 0.0, *(one.feasible or ())[:1]):
            assert 0 <= seen <= picture._scale.high


@pytest.mark.parametrize("theme", THEMES)
def test_kinds_differ_in_colour_strokes_line_and_marker(theme: str) -> None:
    one = found("open")
    picture = window(one, theme=theme)
    marks = dict(zip(ordered(one), picture._marks, strict=True))
    floor, ceiling = (marks[bound] for bound in (one.floor, one.ceiling) if bound is not None)
    assert floor._edge.get_color() == THEMES[theme].lower
    assert ceiling._edge.get_color() == THEMES[theme].upper
    leans = []
    for mark in (floor, ceiling):
        (x1, x2), (y1, y2) = (ends[:2] for ends in mark._strokes.get_data())
        leans.append(math.copysign(1, (x2 - x1) * (y2 - y1)))
    assert leans == [-1, 1]
    assert ceiling._edge.is_dashed()
    assert not floor._edge.is_dashed()
    assert {floor._points[True].get_marker(), ceiling._points[True].get_marker()} == {">", "<"}


def test_what_binds_has_a_solid_marker() -> None:
    one = found("open")
    picture = window(one)
    for mark, bound in zip(picture._marks, ordered(one), strict=True):
        binds = bound in (one.floor, one.ceiling)
        solid, hollow = (mark._points[bold].get_visible() for bold in (True, False))
        assert (solid, hollow) == (binds, not binds and bound.width <= picture._scale.high)


def test_the_feasible_widths_are_shaded_and_written() -> None:
    one = found("open")
    picture = window(one, width_px=1400)
    low, high = one.feasible
    left = picture._band.get_x()
    assert left == pytest.approx(picture._scale.px(low))
    assert left + picture._band.get_width() == pytest.approx(picture._scale.px(high))
    assert f"feasible {low:.4g} to {high:.4g} m" in said(picture)
    assert f"target {one.target:.4g} m" in said(picture)
    assert picture._target_line.get_xdata()[0] == pytest.approx(picture._scale.px(one.target))


def test_the_gap_of_an_empty_window_is_shown_and_said() -> None:
    one = found("empty")
    picture = window(one, width_px=1400)
    floor, ceiling = one.floor, one.ceiling
    assert floor is not None
    assert ceiling is not None
    left = picture._band.get_x()
    assert left == pytest.approx(picture._scale.px(ceiling.width))
    assert left + picture._band.get_width() == pytest.approx(picture._scale.px(floor.width))
    assert picture._band.get_facecolor()[:3] != window(found("open"))._band.get_facecolor()[:3]
    shown = said(picture)
    assert f"{floor.width - ceiling.width:.4g} m apart" in shown
    (verdict,) = [text for text in shown if text.startswith("✗")]
    assert floor.name in verdict
    assert ceiling.name in verdict
    assert not any(text.startswith(("target", "feasible")) for text in shown)


def test_what_no_width_meets_is_said_and_barred_all_along() -> None:
    one = made(("noise", "floor", math.inf), ("swing", "ceiling", 0.0), ("cycling", "floor", 0.3))
    picture = window(one, width_px=700)
    assert "✗ no width meets noise and swing" in said(picture)
    for mark, bound in zip(picture._marks, ordered(one), strict=True):
        whole = mark._bar.get_width() == pytest.approx(picture._scale.end - picture._scale.start)
        assert whole == bound.hopeless
        assert mark._edge.get_visible() != bound.hopeless
    assert not picture._band.get_visible()


@pytest.mark.parametrize(("floor", "where"), [(0.2, "✓ inside"), (0.7, "! outside")])
def test_the_design_stands_at_its_width(floor: float, where: str) -> None:
    one = made(("cycling", "floor", floor), ("accuracy", "ceiling", 1.0))
    picture = window(one)
    assert one.width == pytest.approx(0.5)
    assert f"design 0.5 m, {where}" in said(picture)
    assert picture._own_line.get_xdata()[0] == pytest.approx(picture._scale.px(0.5))


def test_only_volts_take_a_prefix() -> None:
    assert "≥ 30 mV" in said(window(found("volts")))
    assert "≥ 0.03 m" in said(window(made(("load step", "floor", 0.03))))


def test_a_moving_width_redraws_no_background() -> None:
    picture = WindowPicture()
    for floor in (0.30, 0.301, 0.302, 0.303):
        picture.update(made(("cycling", "floor", floor), ("accuracy", "ceiling", 1.0)))
        picture.png()
    assert picture.full_redraws == 1


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("width", [340, 700])
def test_moved_and_drawn_afresh_look_the_same(name: str, width: int) -> None:
    picture = WindowPicture("light", width)
    for other in ("open", name):
        picture.update(found(other))
        moved = pixels(picture.png(1)).astype(int)
    afresh = pixels(picture.full_png(1)).astype(int)
    assert np.abs(moved - afresh).max() <= 2


def test_a_text_stands_where_there_is_no_window() -> None:
    picture = WindowPicture("light", 340)
    for data in (found("open"), "no trip points", found("open")):
        picture.update(data)
        picture.png()
        if isinstance(data, str):
            assert said(picture) == {"! no trip points"}
            assert picture.alt == "no trip points"
            assert faults(picture) == []
    assert "feasible" in picture.alt


@pytest.mark.parametrize("name", CASES)
def test_everything_is_told_in_words(name: str) -> None:
    one = found(name)
    alt = window(one).alt
    assert alt.startswith("Width of ")
    assert ("no width meets" in alt) == (one.feasible is None)
    assert f"the design has {bound_text(Bound('', 'floor', one.width, ''), one.unit)[2:]}" in alt
    for bound in one.bounds:
        assert bound.name in alt

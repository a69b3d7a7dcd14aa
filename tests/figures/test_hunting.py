"""A load that turns its stage back: signal, trips, and when output and load are on."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from matplotlib.collections import LineCollection
from matplotlib.lines import Line2D
from matplotlib.text import Text

import hystkit as hk
from hystkit.analyses.load_step import Hunting, LoadStep
from hystkit.figures import THEMES, HuntingPicture, hunting
from hystkit.figures.hunting_passage import MOST_CHANGES, Passage
from tests.figures.seen import faults, pixels, texts


def cutout() -> hk.Design:
    stage = hk.Stage("non-inverting", reference="source")
    parts = {"R_I": "220k", "R_G": "57k6", "R_F": "909k"}
    return hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5})


def step(current: float = 25.0, **more: Any) -> LoadStep:
    given_ = {"source_resistance": 0.035, "relaxation": 0.5} | more
    return hk.load_step(cutout(), current, **given_)


def run(current: float = 25.0, **more: Any) -> Hunting:
    return step(current, **more).hunt(relaxation_time=2.0, delay=0.02)


def trace(picture: HuntingPicture, name: str) -> tuple[Any, Any]:
    (found,) = (a for a in picture.figure.findobj(Line2D) if a.get_gid() == name)
    x, y = found.get_data()
    return np.asarray(x), np.asarray(y)


def bars(picture: HuntingPicture, name: str) -> list[tuple[float, float]]:
    (found,) = picture.figure.findobj(lambda a: a.get_gid() == name)
    assert isinstance(found, LineCollection)
    return [(float(part[0, 0]), float(part[1, 0])) for part in found.get_segments()]


def marks(picture: HuntingPicture, marker: str) -> list[tuple[float, float]]:
    """Marks at the changes; the one beside a label is larger."""
    found = picture.figure.findobj(Line2D)
    same = [a for a in found if a.get_marker() == marker and a.get_visible()]
    x, y = (np.asarray(part) for part in min(same, key=Line2D.get_markersize).get_data())
    return list(zip(x.tolist(), y.tolist(), strict=True))


CASES = {
    "current": st.floats(-40, 40),
    "source": st.floats(0, 0.05),
    "supply": st.just(0.0) | st.floats(0, 0.01),
    "tau": st.just(0.0) | st.floats(0.01, 10),
}


@pytest.mark.parametrize("width", [340, 559, 560, 1400])
@settings(max_examples=20, deadline=None)
@given(**CASES, way=st.sampled_from(["there", "back"]), load=st.sampled_from(["high", "low"]))
def test_no_label_overlaps_or_is_cut(
    width: int, current: float, source: float, supply: float, tau: float, way: str, load: str
) -> None:
    found = hk.load_step(cutout(), current, source_resistance=source, relaxation=0.5,
                         supply_resistance=supply, load=load)  # fmt: skip
    assume(np.isfinite(found.margin))
    simulated = found.hunt(relaxation_time=tau, most=200)
    assume(way == "there" or simulated.complete)
    picture = hunting(simulated, way=way, width_px=width)
    assert faults(picture) == []
    assert not [text for text, _ in texts(picture) if "…" in text]


@pytest.mark.parametrize("scale", [1, 2])
@pytest.mark.parametrize("theme", THEMES)
def test_blitted_and_full_redraw_agree_pixel_by_pixel(theme: str, scale: int) -> None:
    picture = hunting(run(25.0), theme=theme, width_px=700)
    picture.png(scale)
    for current in (40.0, 25.5):
        picture.update(Passage(run(current)))
        blitted = pixels(picture.png(scale))
        afresh = hunting(run(current), theme=theme, width_px=700)
        assert np.array_equal(blitted, pixels(picture.full_png(scale)))
        assert np.array_equal(blitted, pixels(afresh.full_png(scale)))


@pytest.mark.parametrize("way", ["there", "back"])
def test_bars_tell_when_the_output_changed(way: str) -> None:
    simulated = run()
    picture = hunting(simulated, way=way, width_px=1400)
    there = simulated.times <= simulated.turned_at
    here = there if way == "there" else ~there
    times, states = simulated.times[here], simulated.states[here]
    ends = sorted(edge for bar in bars(picture, "on") for edge in bar)
    # The load is on at one end of the window, so that one bar has its outer end there.
    inner = ends[:-1] if way == "there" else ends[1:]
    assert len(inner) == times.size == 39
    shares = (np.array(inner) - inner[0]) / (inner[-1] - inner[0])
    assert shares == pytest.approx((times - times[0]) / (times[-1] - times[0]), abs=1e-9)
    assert len(bars(picture, "on")) == np.count_nonzero(states) + (way == "back")


def test_the_load_follows_after_its_delay() -> None:
    simulated = step().hunt(relaxation_time=0.0, delay="50m")
    picture = hunting(simulated, width_px=1400)
    asked, taken = bars(picture, "on"), bars(picture, "load")
    per_second = (asked[1][0] - asked[0][0]) / (simulated.times[2] - simulated.times[0])
    for (on, off), (load_on, load_off) in list(zip(asked, taken, strict=True))[:-1]:
        assert (load_on - on, load_off - off) == pytest.approx((0.05 * per_second,) * 2)


def test_marks_lie_on_signal_and_trips() -> None:
    picture = hunting(run(supply_resistance=0.004), width_px=1400)
    up, down = marks(picture, "^"), marks(picture, "v")
    # Both trips at either supply, from the stage alone: V_CC falls by 25 A through 4 mOhm.
    trips = [hk.trip_points(cutout(), V_CC=volts) for volts in (5.0, 4.9)]
    heights = {kind: np.unique(trace(picture, kind)[1].round(6)) for kind in ("upper", "lower")}
    heights = {kind: y[np.isfinite(y)] for kind, y in heights.items()}
    assert len(heights["upper"]) == 1, "V_OL does not follow the supply"
    assert len(heights["lower"]) == 2
    high = float(heights["upper"][0])
    per_volt = (heights["lower"].max() - high) / float(trips[0].upper - trips[0].lower)
    moved = float(heights["lower"].max() - heights["lower"].min()) / per_volt
    assert moved == pytest.approx(float(trips[1].lower - trips[0].lower), rel=1e-4)
    assert {round(y, 3) for _, y in up} == {round(high, 3)}
    assert {round(y, 3) for _, y in down} == {round(float(heights["lower"].min()), 3)}
    x, y = trace(picture, "seen")
    for place, height in up + down:
        near = np.abs(x - place) < 1.5
        assert y[near].min() - 1 <= height <= y[near].max() + 1


def test_without_load_the_signal_is_a_straight_line() -> None:
    x, y = trace(hunting(run()), "rest")
    assert np.allclose(np.diff(y) / np.diff(x), (y[-1] - y[0]) / (x[-1] - x[0]))


def test_everything_is_written() -> None:
    shown = {text for text, _ in texts(hunting(run(supply_resistance=0.004)))}
    assert {
        "Signal rises: first 40 of 41 changes", "upper  12.65 V", "lower  11.44 V",
        "11.47 V with load", "without the load's effect", "output on", "load on", "time / s",
        "signal / V",
    } <= shown  # fmt: skip
    assert any(
        text.startswith("! margin −189 mV of 1.21 V without noise: hunts every 6.")
        for text in shown
    )


@pytest.mark.parametrize("theme", THEMES)
def test_a_margin_that_is_left_is_no_warning(theme: str) -> None:
    def colour_of(text: str, picture: HuntingPicture) -> str:
        found = picture.figure.findobj(Text)
        return next(str(a.get_color()) for a in found if a.get_text() == text)

    picture = hunting(run(9.0), theme=theme)
    # By hand: 12.65 V - 11.44 V less 9 A through 35 mOhm and 0.5 V of relaxation leaves 0.40 V.
    good = "margin 395 mV of 1.21 V without noise: holds"
    assert colour_of(good, picture) == THEMES[theme].text
    bad = next(text for text, _ in texts(hunting(run(), theme=theme)) if text.startswith("!"))
    picture.update(Passage(run()))
    assert colour_of(bad, picture) == THEMES[theme].warning


def test_more_changes_than_can_be_told_apart_are_cut() -> None:
    simulated = run(40.0)
    assert not simulated.complete
    picture = hunting(simulated)
    assert picture.alt.startswith(f"Signal rises: first {MOST_CHANGES} of 2000+ changes; ")
    assert len(bars(picture, "on")) == MOST_CHANGES / 2


def test_marks_without_room_are_left_out() -> None:
    narrow = hunting(run(), width_px=340)
    assert len(marks(narrow, "^")) == 1, "the one beside the label"


def test_alt_tells_all_numbers() -> None:
    assert hunting(run(9.0), way="back").alt == (
        "Signal falls: 1 change of the output; upper trip 12.65 V, lower trip 11.44 V; "
        "margin 395 mV of 1.21 V without noise: holds."
    )


def test_a_signal_that_is_too_fast_to_hunt_is_told() -> None:
    simulated = step().hunt(slope=1000.0, relaxation_time=2.0)
    assert not simulated.hunts
    assert "! margin −165 mV of 1.21 V without noise: too fast to hunt" in {
        text for text, _ in texts(hunting(simulated))
    }


def test_a_way_that_is_not_there_is_refused() -> None:
    with pytest.raises(hk.UnknownNameError, match="there"):
        hunting(run(), way="their")
    with pytest.raises(hk.InputError, match="not simulated"):
        hunting(run(40.0), way="back")

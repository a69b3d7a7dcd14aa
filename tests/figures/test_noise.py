"""Noise against width, and a sample of the waveform, as a reader of the pictures sees them."""

from __future__ import annotations

import math
from functools import cache
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.figures import (
    THEMES,
    NoisePicture,
    NoiseSamplePicture,
    Picture,
    noise,
    noise_sample,
)
from hystkit.figures.noise_axes import decades, rates
from hystkit.figures.noise_key import pace, share
from hystkit.review.noise_scene import NoiseScene, noise_scene
from tests.figures.seen import faults, pixels, texts

WIDTHS = [340, 560, 700, 1400]
POLES = hk.Noise.two_pole(rms="50m", f1=100, f2="10k")
HUM = ("30m", 50)


def vent() -> hk.Design:
    """A greenhouse vent, whose sensor falls with the temperature."""
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k", "R_PU": "4k7"}
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        parts,
        device=hk.Device(drop_low=0.2),
        supply=5.0,
        signal=hk.signals.SensorDivider(hk.signals.Ntc("10k", 3950), "10k", span=(-10, 45)),
    )


def follower() -> hk.Design:
    """A non-inverting stage without a sensor."""
    parts = {"R_I": "10k", "R_F": "220k"}
    return hk.Design(
        hk.Stage("non-inverting", reference="source"), parts, supply=12, levels={"V_REF": 6}
    )


def stuck() -> hk.Design:
    """Both inputs follow signal and output, the minus input more: it never switches."""
    ends = {
        "R_1": ("signal", "plus"),
        "R_2": ("out", "plus"),
        "R_3": ("signal", "minus"),
        "R_4": ("out", "minus"),
        "R_5": ("plus", "ground"),
        "R_6": ("minus", "ground"),
    }
    stage = hk.Stage.custom([hk.Resistor(n, *e) for n, e in ends.items()], sense="non-inverting")
    parts = dict.fromkeys(ends, "10k") | {"R_2": "100k", "R_3": "100k"}
    return hk.Design(stage, parts, supply=5)


@cache
def found(name: str) -> NoiseScene:
    tank = header_tank()
    if name == "slow":
        return noise_scene(tank, hk.Noise.two_pole(rms="1m", f1="1k", f2="1M"), 1e-4, hum=HUM)
    if name == "far":
        return noise_scene(tank, hk.Noise.two_pole(rms="1m", f1="1k", f2="100k"), 0.01)
    if name == "stuck":
        return noise_scene(stuck(), POLES, 0.5, hum=HUM)
    if name == "chatters":
        return noise_scene(tank.with_signal(None), POLES.scaled(8), 1)
    if name == "vent":
        return noise_scene(vent(), POLES, 0.1, hum=("200m", 100), probability=1e-6)
    if name == "follower":
        return noise_scene(follower(), hk.Noise.brick_wall(rms="80m", bandwidth="1k"), 5)
    if name == "fast":
        return noise_scene(tank, POLES, 1e4)
    if name == "rare":
        return noise_scene(tank, POLES, 0.5, probability=1e-300, hum=HUM)
    return noise_scene(tank, POLES, 0.5, hum=HUM if name == "hum" else None)


NAMES = ("tank", "hum", "slow", "far", "chatters", "vent", "follower", "fast", "rare", "stuck")
KINDS = (noise, noise_sample)


def said(picture: Picture[Any]) -> set[str]:
    return {text for text, _ in texts(picture)}


def value_at(picture: NoisePicture, area: int, x: float, y: float) -> tuple[float, float]:
    """Width [V], and probability, number or rate, of a place on the page."""
    frame = picture._areas[area]
    powers = []
    for scale, px in ((frame.across, x), (frame.up, y)):
        part = (px - scale.start) / (scale.end - scale.start)
        powers.append(scale.low + part * (scale.high - scale.low))
    return 10 ** powers[0], 10 ** powers[1]


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("kind", KINDS)
def test_no_label_overlaps_or_is_cut(kind: Any, name: str, width: int) -> None:
    assert faults(kind(found(name), width_px=width)) == []


@pytest.mark.parametrize("width", [340, 700])
@settings(max_examples=30)
@given(
    rms=st.floats(-6, 1),
    ratio=st.floats(0, 4),
    pole=st.floats(-1, 6),
    crossings=st.floats(-3, 6),
    hum=st.none() | st.tuples(st.floats(-5, 1), st.floats(-1, 4)),
    probability=st.floats(-12, -0.05),
    design=st.sampled_from([header_tank, vent, follower]),
)
def test_no_label_overlaps_at_any_setting(
    width: int,
    rms: float,
    ratio: float,
    pole: float,
    crossings: float,
    hum: tuple[float, float] | None,
    probability: float,
    design: Any,
) -> None:
    process = hk.Noise.two_pole(rms=10**rms, f1=10**pole, f2=10 ** (pole + ratio))
    scene = noise_scene(
        design(),
        process,
        process.rms * process.crossing_rate / 10**crossings,
        hum=None if hum is None else (10 ** hum[0], 10 ** hum[1]),
        probability=10**probability,
    )
    for kind in KINDS:
        assert faults(kind(scene, width_px=width)) == []


@pytest.mark.parametrize("theme", THEMES)
def test_marks_differ_in_line_and_marker_not_only_in_colour(theme: str) -> None:
    picture = noise(found("hum"), theme=theme)
    markers = {name: tip.get_marker() for name, tip in picture._marks.tips.items()}
    assert len(set(markers.values())) == 3
    dashes = {str(lines.get_linestyle()) for lines in picture._marks.lines.values()}
    assert len(dashes) == 3
    trips = noise_sample(found("hum"), theme=theme)
    assert trips._lines["lower"].is_dashed()
    assert not trips._lines["upper"].is_dashed()
    assert trips._lines["upper"].get_color() == THEMES[theme].upper


def test_curves_are_those_of_the_analyses() -> None:
    picture = noise(found("tank"), width_px=1400)
    for name, area, result in (
        ("again", 0, lambda w: hk.chatter(w, POLES, 0.5).probability),
        ("extra", 0, lambda w: hk.chatter(w, POLES, 0.5).extra_cycles),
        ("standing", 1, lambda w: hk.standing_cycles(w / 2, w / 2, POLES)),
    ):
        for line in picture._curves[name]:
            x, y = (np.asarray(values) for values in line.get_data())
            kept = np.isfinite(y)
            assert kept.any()
            width, value = value_at(picture, area, x[kept], y[kept])
            assert value == pytest.approx(result(width), rel=1e-6)


def test_outside_the_validated_range_curves_are_dashed() -> None:
    picture = noise(found("tank"), width_px=1400)
    for name in ("again", "extra", "standing"):
        within, beyond = picture._curves[name]
        assert not within.is_dashed()
        assert beyond.is_dashed()
    x, y = (np.asarray(values) for values in picture._curves["again"][0].get_data())
    width, _ = value_at(picture, 0, x, y)
    inside = hk.chatter(width, POLES, 0.5).inside_range
    assert np.array_equal(np.isfinite(y), inside)
    assert "outside the validated range" in said(picture)
    assert found("tank").found.note in picture.alt


def test_marks_stand_at_their_widths_and_the_design_on_its_curves() -> None:
    data = found("hum")
    picture = noise(data, width_px=1400)
    for name, width in (
        ("width", data.width), ("noise", data.needed), ("hum", data.needed_for_hum),
    ):  # fmt: skip
        (x,), _ = picture._marks.tips[name].get_data()
        assert value_at(picture, 0, x, 0)[0] == pytest.approx(width)
    (x,), (y,) = picture._own[1].get_data()
    assert value_at(picture, 1, x, y) == pytest.approx((data.width, data.standing))
    # What is shaded is wide enough for both at one time.
    assert value_at(picture, 0, picture._enough[0].get_x(), 0)[0] == pytest.approx(data.together)


def test_values_are_written_at_the_marks_and_in_the_measurand() -> None:
    data = found("hum")
    shown = said(noise(data, width_px=700))
    assert {"width 724.6 mV", "0.604 m"} <= shown
    assert any(text.startswith("noise ") and text.endswith(" mV") for text in shown)
    assert f"switches again: {share(data.found.probability)}" in shown
    assert f"false cycles, standing: {pace(data.standing)}" in shown
    assert {"allowed", "1 in 1,000"} <= shown


@pytest.mark.parametrize(("name", "sign"), [("tank", "✓"), ("vent", "!"), ("chatters", "!")])
def test_the_verdict_has_a_sign_beside_its_colour(name: str, sign: str) -> None:
    data = found(name)
    assert (data.margin >= 0) == (sign == "✓")
    assert any(text.startswith(f"{sign} ") for text in said(noise(data)))


def test_a_goal_beyond_every_known_width_is_said_and_nothing_shaded() -> None:
    picture = noise(found("rare"))
    assert "! no width is known to keep this noise that quiet" in said(picture)
    assert not any(shade.get_visible() for shade in picture._enough)
    assert not picture._marks.tips["noise"].get_visible()


def test_without_a_band_it_says_why_and_still_shows_what_noise_needs() -> None:
    data = found("stuck")
    assert data.found is None
    for kind in KINDS:
        picture = kind(data, width_px=1400)
        assert any(text.startswith("! ") for text in said(picture))
        assert data.levels.message.rstrip(".") in picture.alt
    picture = noise(data)
    assert picture._marks.tips["noise"].get_visible()
    assert not picture._marks.tips["width"].get_visible()
    assert "switches again" in said(picture)
    assert not any("wide enough" in text or "again:" in text for text in said(picture))


@pytest.mark.parametrize("name", ["tank", "chatters", "follower"])
def test_the_sample_is_drawn_with_its_output(name: str) -> None:
    data = found(name)
    picture = noise_sample(data, width_px=1400)
    signal, output = picture._frames
    _, y = picture._signal.get_data()
    ends = sorted(signal.up.px(float(end)) for end in (data.sample.signal.min(),
                                                       data.sample.signal.max()))  # fmt: skip
    assert sorted((np.min(y), np.max(y))) == pytest.approx(ends)
    _, steps = picture._output.get_data()
    levels = data.levels
    begins, ends_at = levels.output_low, levels.output_high
    if name != "follower":
        begins, ends_at = ends_at, begins
    assert steps[0] == pytest.approx(output.up.px(begins))
    assert steps[-1] == pytest.approx(output.up.px(ends_at))


@pytest.mark.parametrize("name", ["tank", "chatters"])
def test_the_number_of_transitions_is_written(name: str) -> None:
    data = found(name)
    count = data.sample.transitions
    expected = "✓ 1 transition" if count == 1 else f"! {count} transitions"
    picture = noise_sample(data)
    assert any(text.startswith(expected) for text in said(picture))
    assert f"{count} transition" in picture.alt
    marks = sum(len(mark.get_data()[0]) for mark in picture._switches.values())
    assert marks == count


def test_every_transition_stands_on_its_trip() -> None:
    data = noise_scene(header_tank().with_parts(R_F="560k"), POLES, 0.5)
    picture = noise_sample(data, width_px=1400)
    assert 1 < data.sample.transitions <= 40
    frame = picture._frames[0]
    for trip in ("upper", "lower"):
        _, y = picture._switches[trip].get_data()
        assert y == pytest.approx(frame.up.px(getattr(data.levels, trip)))


def test_samples_that_are_too_far_apart_are_said() -> None:
    assert found("slow").sample.coarse
    picture = noise_sample(found("slow"))
    assert any("too few to see all transitions" in text for text in said(picture))
    assert "too few" in picture.alt


def test_a_lower_trip_far_below_is_named_at_the_edge() -> None:
    near, far = noise_sample(found("tank")), noise_sample(found("far"))
    assert near._lines["lower"].get_visible()
    assert not far._lines["lower"].get_visible()
    assert any(text.endswith("↓") for text in said(far))
    assert "lower trip" in far.alt


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("kind", [NoisePicture, NoiseSamplePicture])
def test_moved_and_drawn_afresh_look_the_same(kind: Any, name: str) -> None:
    picture = kind("light", 700)
    for other in ("hum", "tank", name):
        picture.update(found(other))
        moved = pixels(picture.png(1)).astype(int)
    afresh = pixels(picture.full_png(1)).astype(int)
    assert np.abs(moved - afresh).max() <= 2


def test_a_small_move_redraws_no_background() -> None:
    pictures = (NoisePicture(), NoiseSamplePicture())
    for seed, volts in enumerate((0.0, 1e-6, 2e-6)):
        design = header_tank().with_device(offset=volts)
        scene = noise_scene(design, POLES, 0.5, seed=seed)
        pictures[0].update(scene)
        pictures[0].png()
    assert pictures[0].full_redraws == 1
    for volts in (0.0, 1e-6, 2e-6):
        pictures[1].update(noise_scene(header_tank().with_device(offset=volts), POLES, 0.5))
        pictures[1].png()
    assert pictures[1].full_redraws == 1


@given(probability=st.floats(1e-9, 0.09))
def test_a_share_reads_back_to_three_digits(probability: float) -> None:
    count = float(share(probability).removeprefix("1 in ").replace(",", ""))
    assert 1 / count == pytest.approx(probability, rel=6e-3)
    assert share(math.nan) == "—"


@given(rate=st.floats(1e-8, 1e6))
def test_a_pace_reads_back_to_three_digits(rate: float) -> None:
    text = pace(rate)
    periods = {"s": 1, "min": 60, "h": 3600, "day": 86400, "year": 31557600, "years": 31557600}
    number = float(text.removeprefix("1 in ").split()[0].replace(",", ""))
    period = periods[text.split()[-1]]
    assert (1 / (number * period) if "years" in text else number / period) == pytest.approx(
        rate, rel=6e-3
    )


def test_upright_axes_have_round_numbers() -> None:
    assert next(text for _, text in decades(-5, 2)) == "1"
    assert dict(decades(-4, 0))[1e-4] == "10⁻⁴"
    assert dict(rates(1e-6, 1))[1.0] == "1/s"

"""Width against noise: what a scene says agrees with its analyses, and its samples with both."""

from __future__ import annotations

import math

import numpy as np
import pytest

import hystkit as hk
from hystkit.base.digits import rounded_up
from hystkit.base.errors import InputError
from hystkit.circuit.demo import header_tank
from hystkit.review.noise_sample import MOST
from hystkit.review.noise_scene import first_noise, first_slope, noise_scene

NOISE = hk.Noise.two_pole(rms="50m", f1=100, f2="10k")
SLOPE = 0.5


def narrow(width: float) -> hk.Design:
    """The header tank with this width [V]: 5 V divided by R_F over both others in parallel."""
    both = 1 / (1 / 46.4e3 + 1 / 26.7e3)
    return header_tank().with_parts(R_F=both * (5 / width - 1))


def test_it_gathers_what_the_analyses_give() -> None:
    found = noise_scene(header_tank(), NOISE, SLOPE, hum=("30m", "50 Hz"), probability="1m")
    width = float(hk.trip_points(header_tank()).width)
    assert found.width == pytest.approx(width)
    assert found.found.probability == hk.chatter(width, NOISE, SLOPE).probability
    assert found.standing == hk.standing_cycles(width / 2, width / 2, NOISE)
    assert found.needed == hk.width_for(probability=1e-3, noise=NOISE, slope=SLOPE)
    assert found.needed_for_hum == hk.hum_width(30e-3, 50, SLOPE)
    assert found.margin == pytest.approx(width - found.needed - found.needed_for_hum)
    # 1.2 V stand for a metre of water.
    assert found.sensed(1.2) == pytest.approx(1.0)


def test_the_curve_holds_every_width_that_is_marked() -> None:
    found = noise_scene(narrow(0.05), NOISE, SLOPE, hum=("0.8", 50))
    curve = found.curve
    for width in (found.width, found.needed, found.needed_for_hum, found.together):
        assert curve.width[0] < width < curve.width[-1]
    for width, name in ((found.width, "found"), (found.needed, "needed")):
        seen = curve.probability > 0
        ends = (np.log(values[seen]) for values in (curve.width, curve.probability))
        at = np.exp(np.interp(np.log(width), *ends))
        wanted = found.found.probability if name == "found" else found.allowed
        assert at == pytest.approx(wanted, rel=0.05)


@pytest.mark.parametrize("share", [2.0, 4.0])
def test_samples_switch_as_often_as_is_expected(share: float) -> None:
    """Counted over 60 samples: the window holds the whole passage, from the first to the last."""
    design = narrow(share * NOISE.rms)
    scenes = [noise_scene(design, NOISE, SLOPE, seed=seed) for seed in range(60)]
    counted = np.array([scene.sample.extra_cycles for scene in scenes])
    error = 2 * counted.std() / math.sqrt(counted.size)
    expected = scenes[0].found.extra_cycles
    # The formula is never optimistic by more than 15 %, and conservative by 2.5 at most.
    assert counted.mean() - error < 1.15 * expected
    assert counted.mean() + error > expected / 2.5
    assert all(scene.sample.transitions % 2 == 1 for scene in scenes)


def test_first_transitions_come_as_early_as_is_expected() -> None:
    early = []
    for seed in range(60):
        scene = noise_scene(header_tank(), NOISE, SLOPE, seed=seed)
        sample = scene.sample
        early.append(scene.levels.upper - sample.ramp[sample.changes[0]])
    found = scene.found
    assert np.mean(early) == pytest.approx(found.early_shift, abs=0.5 * found.jitter)
    assert np.std(early) == pytest.approx(found.jitter, rel=0.35)


def test_hum_narrower_than_it_needs_switches_again_and_wider_once() -> None:
    """Hum alone: the exact need decides, whatever the phase."""
    quiet = NOISE.scaled(1e-6)
    hum = (0.2, 5.0)
    need = hk.hum_width(*hum, SLOPE)
    for share, again in ((0.9, True), (1.1, False)):
        scenes = [
            noise_scene(narrow(share * need), quiet, SLOPE, hum=hum, seed=n) for n in range(20)
        ]
        assert any(scene.sample.transitions > 1 for scene in scenes) == again


def test_the_same_seed_gives_the_same_sample_and_another_another() -> None:
    one, same, other = (noise_scene(header_tank(), NOISE, SLOPE, seed=n).sample for n in (1, 1, 2))
    assert np.array_equal(one.signal, same.signal)
    assert not np.array_equal(one.signal, other.signal)
    assert np.std(one.signal - one.ramp) == pytest.approx(NOISE.rms, rel=0.15)


def test_a_passage_that_takes_too_many_samples_says_so() -> None:
    slow = noise_scene(header_tank(), hk.Noise.two_pole(rms="1m", f1="1k", f2="1M"), 1e-4).sample
    assert slow.coarse
    assert slow.time.size == MOST
    assert not noise_scene(header_tank(), NOISE, SLOPE).sample.coarse


def test_an_outline_keeps_every_extreme() -> None:
    sample = noise_scene(header_tank(), NOISE, SLOPE).sample
    time, volts = sample.outline(sample.signal, 300)
    assert volts.size == 600
    assert (volts.min(), volts.max()) == (sample.signal.min(), sample.signal.max())
    assert np.all(np.diff(time) >= 0)


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"slope": 0}, "slope is not positive"),
        ({"slope": [1.0, 2.0]}, "a single number"),
        ({"noise": 3e-3}, "noise"),
        ({"probability": 2}, "always met"),
        ({"hum": 0.03}, "hum"),
        ({"hum": ("30 mV", 0)}, "hum frequency"),
        ({"seed": -1}, "seed"),
    ],
)
def test_what_cannot_be_used_is_refused(changes: dict[str, object], said: str) -> None:
    given = {"noise": NOISE, "slope": SLOPE, **changes}
    with pytest.raises(InputError, match=said):
        noise_scene(header_tank(), **given)


def test_all_faults_are_named_at_once() -> None:
    with pytest.raises(InputError) as caught:
        noise_scene(header_tank(), None, -1, hum=(0, 0), probability=0, seed=0.5)
    assert len(caught.value.faults) == 6


def test_a_goal_beyond_every_known_width_leaves_the_need_open() -> None:
    found = noise_scene(header_tank(), NOISE, SLOPE, probability=1e-300)
    assert math.isnan(found.needed)
    assert math.isnan(found.margin)


def test_it_begins_with_noise_that_the_band_keeps_quiet() -> None:
    noise = first_noise(header_tank())
    found = noise_scene(header_tank(), noise, first_slope(noise))
    assert found.margin > 0
    assert found.noise.rms == pytest.approx(found.width / 10, rel=0.1)


@pytest.mark.parametrize("value", [1e-9, 0.123, 1.0, 7.9, 4321.0])
def test_lengths_are_rounded_up_by_a_third_at_most(value: float) -> None:
    assert 1 - 1e-9 <= rounded_up(value) / value < 1.34

"""Spread of an oscillator's frequency: derivatives, samples, corners."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.oscillator.frequency import KINDS

CAPACITOR = hk.Part("470n", tol="10 %", tempco="200 ppm/K")
TIMING = hk.Part("1M", tol="1 %", tempco="50 ppm/K")


def toleranced(output: str = "open-collector", **device: Any) -> hk.Design:
    parts = {"R_T": "100k", "R_B": "82k", "R_F": "120k"}
    parts |= {"R_PU": "10k"} if output == "open-collector" else {}
    limits = {"offset": (-5e-3, 5e-3), "r_low": (20.0, 90.0), "bias_minus": (-1e-7, 1e-7)}
    return hk.Design(
        hk.Stage("inverting", output=output),
        {name: hk.Part(value, tol="2 %") for name, value in parts.items()},
        supply=hk.Supply(5.0, tol=0.05),
        device=hk.Device(drop_low=0.1, r_low=40.0, limits=limits, **device),
    )


@pytest.mark.parametrize("delay", [0.0, 20e-3])
@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_effects_are_the_differences_of_the_frequency(output: str, delay: float) -> None:
    design = toleranced(output, delay=delay)
    spread = hk.oscillate(design, TIMING, CAPACITOR).spread((-10, 50))
    h = 1e-4
    for name, one in spread.box.quantities.items():
        ends = [
            frequency(design, name, one.nominal + sign * h * one.half) for sign in (1, -1)
        ]  # fmt: skip
        slope = (ends[0] - ends[1]) / (2 * h)
        # To the error of a central difference.
        assert spread.effects["frequency"][name] == pytest.approx(slope, rel=1e-5, abs=1e-10)


def frequency(design: hk.Design, name: str, value: float) -> float:
    r, c, overrides = TIMING.value, CAPACITOR.value, {name: value}
    if name in ("R_X", "C_X"):
        r, c, overrides = (value if name == "R_X" else r), (value if name == "C_X" else c), {}
    return float(hk.oscillate(design, r, c, **overrides).frequency)


def test_contributions_sum_to_one_and_rank() -> None:
    found = hk.oscillate(toleranced(), TIMING, CAPACITOR).spread().contributions
    for kind in KINDS:
        assert sum(found[kind].values()) == pytest.approx(1.0)
        assert list(found[kind].values()) == sorted(found[kind].values(), reverse=True)
    assert next(iter(found["frequency"])) == "C_X"
    # Without delay the capacitor scales both halves alike.
    assert found["duty"]["C_X"] == pytest.approx(0.0, abs=1e-20)


def test_the_capacitor_alone_gives_what_is_known_in_closed_form() -> None:
    """f = k / C: from k / (C (1 + t)) to k / (C (1 - t))."""
    parts = dict.fromkeys(("R_T", "R_B", "R_F"), "100k")
    design = hk.Design(hk.Stage("inverting"), parts, supply=5.0)
    found = hk.oscillate(design, "1M", hk.Part("100n", tol="20 %"))
    spread = found.spread(samples=4096)
    low, high = spread.extremes["frequency"]
    assert low == pytest.approx(found.frequency / 1.2, rel=1e-12)
    assert high == pytest.approx(found.frequency / 0.8, rel=1e-12)
    assert spread.contributions["period"] == {"C_X": pytest.approx(1.0)}
    assert spread.rss["period"] == pytest.approx(0.2 * found.period, rel=1e-12)
    uniform = found.spread(samples=1 << 15, distribution="uniform").samples["period"]
    assert np.std(uniform) == pytest.approx(0.2 * found.period / np.sqrt(3), rel=1e-3)
    binned = found.spread(samples=4096, distribution="binned").samples["period"]
    assert np.min(np.abs(binned / found.period - 1)) > 0.099


@settings(max_examples=25)
@given(seed=st.integers(0, 10_000), output=st.sampled_from(["push-pull", "open-collector"]))
def test_units_on_the_edges_of_the_box_stay_within_the_extremes(seed: int, output: str) -> None:
    """No theorem, and told so: of thousands of random edges none went beyond what was found."""
    random = np.random.default_rng(seed)
    stage = hk.Stage("inverting", output=output)
    values = 10 ** random.uniform(4, 6, len(stage.parts))
    parts = {n: hk.Part(v, tol="5 %") for n, v in zip(stage.parts, values, strict=True)}
    design = hk.Design(stage, parts, supply=hk.Supply(5.0, tol=0.05))
    found = hk.oscillate(design, hk.Part(1e6, 0.05), CAPACITOR)
    spread = found.spread(samples=8192, seed=seed, distribution="uniform")
    assert spread.oscillates
    given_ = edges(spread.box.intervals, random)
    met = hk.oscillate(design, given_.pop("R_X"), given_.pop("C_X"), **given_)
    for kind in KINDS:
        low, high = spread.extremes[kind]
        for values in (getattr(met, kind), spread.samples[kind]):
            assert low * (1 - 1e-12) <= np.min(values)
            assert np.max(values) <= high * (1 + 1e-12)


def test_an_extreme_between_the_corners_is_found() -> None:
    """One half grows and the other shrinks with the reference; their sum is least in between.

    With the reference V_R, a stiff output from 0 V to V and a narrow band, a half period is
    R C w / V_R or R C w / (V - V_R) to first order, whose sum is least at V_R = V / 2.
    """
    stage = hk.Stage("inverting", reference="source")
    levels = {"V_REF": hk.Part(2.4, tol="10 %")}
    design = hk.Design(stage, {"R_R": "10k", "R_F": "990k"}, supply=5.0, levels=levels)
    spread = hk.oscillate(design, "1M", "1u").spread()
    grid = hk.oscillate(design, "1M", "1u", V_REF=np.linspace(2.16, 2.64, 20_001)).period
    low, high = spread.extremes["period"]
    assert low == pytest.approx(grid.min(), rel=1e-9)
    assert low < min(grid[0], grid[-1]) * 0.999
    assert high == pytest.approx(max(grid[0], grid[-1]), rel=1e-12)


def edges(box: dict[str, Any], random: np.random.Generator) -> dict[str, Any]:
    """64 random edges of a box: one quantity goes from end to end, the others stand at an end."""
    found = {name: np.repeat(random.choice(pair, 64), 33) for name, pair in box.items()}
    moving = random.integers(len(box), size=64)
    for place, (name, pair) in enumerate(box.items()):
        runs = np.repeat(moving == place, 33)
        found[name] = np.where(runs, np.tile(np.linspace(*pair, 33), 64), found[name])
    return found


def test_first_order_agrees_with_samples() -> None:
    spread = hk.oscillate(toleranced(), TIMING, CAPACITOR).spread(sigmas=6, seed=3)
    sampled = np.std(spread.samples["period"]) * 6
    assert spread.rss["period"] == pytest.approx(sampled, rel=0.01)


def test_same_seed_same_samples() -> None:
    found = hk.oscillate(toleranced(), TIMING, CAPACITOR)
    one, other = (found.spread(samples=10_000, seed=7).samples["period"] for _ in range(2))
    assert one.shape == (10_000,)
    np.testing.assert_array_equal(one, other)


def test_nothing_uncertain() -> None:
    parts = dict.fromkeys(("R_T", "R_B", "R_F"), "100k")
    found = hk.oscillate(hk.Design(hk.Stage("inverting"), parts, supply=5.0), "1M", "1u")
    spread = found.spread(samples=100)
    assert spread.extremes["period"] == (found.period, found.period)
    assert np.ptp(spread.samples["period"]) == 0
    assert spread.rss["frequency"] == 0


def test_a_box_that_does_not_oscillate_everywhere() -> None:
    stage = hk.Stage("inverting", reference="source")
    parts = {"R_R": "10k", "R_F": "100k"}
    levels = {"V_REF": hk.Part(4.9, tol="5 %")}
    design = hk.Design(stage, parts, supply=5.0, levels=levels)
    spread = hk.oscillate(design, "1M", "1u").spread(samples=4096)
    assert not spread.oscillates
    assert np.isnan(spread.extremes["period"][1])
    assert 0 < np.count_nonzero(np.isnan(spread.samples["period"])) < 4096
    assert "not in every corner" in spread.to_text()


def test_refusals() -> None:
    found = hk.oscillate(toleranced(), TIMING, CAPACITOR)
    with pytest.raises(hk.InputError) as caught:
        found.spread((60, 20), samples=0, seed=-1, distribution="gauss", sigmas=0)
    assert len(caught.value.faults) == 5
    with pytest.raises(hk.InputError, match="with stated values"):
        hk.oscillate(toleranced(), [1e6, 2e6], 1e-6).spread()
    with pytest.raises(hk.DesignError, match="C_X would drift to zero"):
        hk.oscillate(toleranced(), "1M", hk.Part("1u", 0.1, 0.1)).spread((0, 100))

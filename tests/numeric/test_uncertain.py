"""Ranges over tolerance and temperature, arguments, views and the measurand."""

from __future__ import annotations

import pickle
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest

import hystkit as hk
from tests.analyses.spread_designs import VALUES, uncertain_design

STAGE = hk.Stage("inverting")


def with_part(part: hk.Part, **more: Any) -> hk.Design:
    fixed = {"R_T": VALUES["R_T"], "R_B": VALUES["R_B"]}
    return hk.Design(STAGE, {**fixed, "R_F": part}, supply=more.pop("supply", 5.0), **more)


def test_tolerance_and_drift_widen_both_ends() -> None:
    design = with_part(hk.Part(100e3, tol=0.01, tempco=100e-6))
    box = hk.spread(design, temperature=(-20, 60)).box
    assert box.excursion == 45
    ends = box.intervals["R_F"]
    assert ends == pytest.approx((99e3 * (1 - 0.0045), 101e3 * (1 + 0.0045)), rel=1e-12)
    assert hk.spread(design).box.intervals["R_F"] == pytest.approx((99e3, 101e3))


def test_the_sign_of_a_coefficient_does_not_matter() -> None:
    up, down = (
        hk.spread(with_part(hk.Part(1e5, tempco=sign * 2e-4)), temperature=(25, 85)).box
        for sign in (1, -1)
    )
    assert up.intervals == down.intervals == {"R_F": pytest.approx((98.8e3, 101.2e3))}


def test_offset_drifts_beyond_its_limits() -> None:
    device = hk.Device(offset=1e-3, offset_drift=5e-6, limits={"offset": (-2e-3, 3e-3)})
    design = with_part(hk.Part("100k"), device=device)
    found = hk.spread(design, temperature=(0, 65)).box.quantities["offset"]
    assert (found.low, found.nominal, found.high) == pytest.approx((-2.2e-3, 1e-3, 3.2e-3))
    alone = with_part(hk.Part("100k"), device=hk.Device(offset=1e-3, offset_drift=5e-6))
    assert hk.spread(alone, temperature=(0, 65)).box.intervals == {
        "offset": pytest.approx((0.8e-3, 1.2e-3))
    }
    assert hk.spread(alone).box.intervals == {}


def test_only_what_acts_is_uncertain() -> None:
    limits = {"drop_high": (0, 0.1), "r_high": (0, 10), "leakage": (0, 1e-6)}
    device = hk.Device(limits=limits)
    assert set(hk.spread(with_part(hk.Part("100k"), device=device)).box.quantities) == {
        "drop_high",
        "r_high",
    }
    given = with_part(hk.Part("100k"), device=device, levels={"V_OH": hk.Part(4.9, tol=0.01)})
    assert set(hk.spread(given).box.quantities) == {"V_OH", "r_high"}


def test_both_rails_of_a_split_supply_are_uncertain() -> None:
    design = uncertain_design(hk.Stage("inverting", supply="split"))
    box = hk.spread(design).box
    assert box.intervals["V_EE"] == pytest.approx((-5.15, -4.85))
    assert [box.quantities[n].unit for n in ("V_EE", "R_F", "bias_plus")] == ["V", "Ω", "A"]


def test_a_part_that_would_drift_away_is_named() -> None:
    with pytest.raises(hk.DesignError, match="R_F would drift to zero"):
        hk.spread(with_part(hk.Part("100k", tempco=0.05)), temperature=(-20, 60))


def test_every_bad_argument_is_named() -> None:
    design = with_part(hk.Part("100k"))
    with pytest.raises(hk.InputError) as caught:
        hk.spread(
            design,
            temperature=(60, -20),
            samples=0,
            seed=-1,
            distribution="gaussian",
            sigmas=0,
        )
    text = str(caught.value)
    assert len(caught.value.faults) == 5
    for word in ("temperature", "samples", "seed", "distribution", "sigmas"):
        assert word in text


@pytest.mark.parametrize("temperature", ["warm", 25, (1, 2, 3), (0, float("nan")), (None, 60)])
def test_what_is_no_temperature_range(temperature: Any) -> None:
    with pytest.raises(hk.InputError, match="not a range"):
        hk.spread(with_part(hk.Part("100k")), temperature=temperature)


def test_views_and_copies() -> None:
    design = uncertain_design(STAGE)
    found = hk.spread(design, temperature=(-20, 60), samples=64)
    text = found.to_text()
    assert "-20 to 60 °C" in text
    assert "control points" in text
    assert "normalised squared sensitivities" in text
    assert found._repr_html_().startswith("<table")
    assert r"\begin{tabular}" in found.to_latex()
    assert "of 64" in str(found.yield_within())
    copy = pickle.loads(pickle.dumps(found))
    assert copy == found
    assert copy.extremes == found.extremes


# The measurand.


@dataclass(frozen=True)
class Bent(hk.signals.Signal):
    """A sensor whose voltage falls along a curve: 5 V / (1 + x), x = 5 V / v - 1."""

    unit: str = "°C"
    name: str = "heat"
    span: tuple[float, float] = (0.1, 10.0)

    def _volts(self, quantity: Any, values: Any) -> Any:
        return 5 / (1 + np.asarray(quantity))

    def _quantity(self, volts: Any, values: Any) -> Any:
        return 5 / np.asarray(volts) - 1


def test_without_a_signal_there_is_no_measurand() -> None:
    assert hk.spread(uncertain_design(STAGE)).measurand is None


@pytest.mark.parametrize("slope", [0.5, -0.5])
def test_measurand_of_a_straight_sensor_is_exact(slope: float) -> None:
    signal = hk.signals.Linear(slope, at_zero=1.0, span=(-9, 9), unit="m", name="level")
    design = uncertain_design(STAGE).with_signal(signal)
    found = hk.spread(design, samples=4096)
    heat = found.measurand
    assert heat is not None
    assert heat.low_is == ("lower" if slope > 0 else "upper")
    ends = sorted((v - 1.0) / slope for v in found.extremes[heat.low_is])
    assert heat.extremes["low"] == pytest.approx(tuple(ends), rel=1e-12)
    assert heat.extremes["width"] == pytest.approx(
        tuple(2 * w for w in found.extremes["width"]), rel=1e-12
    )
    assert set(heat.gap.values()) == {0}
    assert heat.rss["width"] == pytest.approx(2 * found.rss["width"], rel=1e-9)
    assert heat.rss["low"] == pytest.approx(2 * found.rss[heat.low_is], rel=1e-9)
    assert np.all(heat.samples["low"] < heat.samples["high"])
    middle = float(np.median(heat.samples["high"]))
    half = heat.yield_within(high=(None, middle), width=(0, 100))
    assert half.value == pytest.approx(0.5, abs=1e-3)


def test_measurand_of_a_bent_sensor_is_bracketed() -> None:
    design = uncertain_design(STAGE, tol=0.05).with_signal(Bent())
    found = hk.spread(design, samples=1 << 16, distribution="uniform")
    heat = found.measurand
    assert heat is not None
    for end in ("low", "high", "width"):
        low, high = heat.extremes[end]
        drawn = heat.samples[end]
        assert low <= drawn.min()
        assert drawn.max() <= high
    low, high = heat.extremes["width"]
    assert 0 < heat.gap["width"] < 0.25 * (high - low)
    assert heat.rss["width"] / 3 == pytest.approx(
        hk.spread(design, samples=1 << 16).measurand.samples["width"].std(), rel=0.05
    )
    assert "heat, width" in found.to_text()

"""Findings on service: noise, cycling, what the output drives, what the load does to the stage."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk

LEVEL = hk.signals.Linear(1.0, span=(0, 5), unit="m", name="level")
QUIET = hk.Noise.two_pole(rms="1m", f1=10, f2="1k")
LOUD = hk.Noise.two_pole(rms="0.2", f1=10, f2="1k")


def stage(**changes: Any) -> hk.Design:
    """Trips at 2.75 V and 2.25 V; the output is high, and the load on, below."""
    given: dict[str, Any] = {"supply": 5.0, "levels": {"V_REF": 2.5}, "signal": LEVEL, **changes}
    parts = given.pop("parts", {"R_R": "10k", "R_F": "90k"})
    return hk.Design(hk.Stage("inverting", reference="source"), parts, **given)


def filling(rate_on: float = 1e-3, rate_off: float = -1e-3, **more: Any) -> hk.Integrating:
    return hk.Integrating(rate_on=rate_on, rate_off=rate_off, unit="m", **more)


def only(name: str, design: hk.Design | None = None, **service: Any) -> hk.Finding:
    found = hk.review(design or stage(), **service)
    (finding,) = [finding for finding in found if finding.name == name]
    return finding


def names(**service: Any) -> set[str]:
    return set(hk.review(stage(), **service).names)


def test_nothing_declared_nothing_found() -> None:
    assert not {"noise", "cycling", "on time", "off time", "drive", "load step"} & names()


# -- noise -----------------------------------------------------------------------------------


@pytest.mark.parametrize(("noise", "severity"), [(QUIET, "pass"), (LOUD, "fault")])
def test_noise_against_the_width(noise: hk.Noise, severity: str) -> None:
    found = only("noise", noise=noise, slope="50 mV/s")
    assert found.severity == severity
    needed = hk.width_for(probability=1e-3, noise=noise, slope=0.05)
    assert found.margin == pytest.approx(0.5 - needed, abs=1e-9)
    assert bool(found.remedy) == (severity != "pass")


def test_a_width_between_half_and_whole_of_what_noise_needs_is_marginal() -> None:
    noise = hk.Noise.two_pole(rms="70m", f1=10, f2="1k")
    needed = hk.width_for(probability=1e-3, noise=noise, slope=0.05)
    assert 0.5 < needed < 1.0
    assert only("noise", noise=noise, slope=0.05).severity == "warning"


def test_noise_is_allowed_more_where_more_often_is_allowed() -> None:
    strict, lax = (only("noise", noise=LOUD, slope=0.05, probability=p) for p in (1e-6, 0.3))
    assert strict.margin < lax.margin


def test_the_plant_gives_the_slope() -> None:
    # 1 mm/s on a signal of 1 V/m.
    by_plant = only("noise", noise=QUIET, plant=filling())
    assert by_plant.margin == pytest.approx(only("noise", noise=QUIET, slope=1e-3).margin)


def test_noise_without_a_slope_is_a_note() -> None:
    assert only("noise", noise=QUIET).severity == "note"


@pytest.mark.parametrize(("amplitude", "severity"), [(0.1, "pass"), (0.3, "warning"), (1, "fault")])
def test_hum_against_the_width(amplitude: float, severity: str) -> None:
    # On a slow passage hum takes twice its amplitude.
    found = only("hum", hum=(amplitude, 50), slope=1e-6)
    assert found.severity == severity
    assert found.margin == pytest.approx(0.5 - 2 * amplitude, abs=1e-4)


def test_hum_comes_on_top_of_noise() -> None:
    noise = hk.Noise.two_pole(rms="40m", f1=10, f2="1k")
    alone = only("noise", noise=noise, slope=0.05).margin
    both = only("hum", noise=noise, slope=0.05, hum=("50 mV", "50 Hz"))
    assert alone > 0
    assert both.margin == pytest.approx(alone - hk.hum_width(0.05, 50, 0.05))
    assert only("hum", hum=("50 mV", "50 Hz")).severity == "note"


# -- cycling ---------------------------------------------------------------------------------


@pytest.mark.parametrize(("most", "severity"), [(3.7, "pass"), (3.5, "warning")])
def test_starts_per_hour(most: float, severity: str) -> None:
    # 0.5 m up and down at 1 mm/s take 1000 s: 3.6 starts per hour.
    found = only("cycling", plant=filling(), starts_per_hour=most)
    assert (found.severity, found.unit) == (severity, "1/h")
    assert found.margin == pytest.approx(most - 3.6)


def test_starts_without_a_limit_are_a_note() -> None:
    assert only("cycling", plant=filling()).severity == "note"


@pytest.mark.parametrize(("least", "severity"), [(499, "pass"), (501, "warning")])
@pytest.mark.parametrize("name", ["on", "off"])
def test_shortest_times(name: str, least: float, severity: str) -> None:
    found = only(f"{name} time", plant=filling(), **{f"min_{name}": least})
    assert found.severity == severity
    assert found.margin == pytest.approx(500 - least)


def test_a_plant_that_does_not_reach_a_trip() -> None:
    weak = hk.FirstOrder(tau=100, on_level=2.6, off_level=0.0, unit="m")
    found = only("cycling", plant=weak)
    assert found.severity == "fault"
    assert "stays on" in found.text


def test_a_band_outside_the_span_of_the_signal() -> None:
    shallow = stage(signal=hk.signals.Linear(1.0, span=(0, 1), unit="m", name="level"))
    found = only("cycling", shallow, plant=filling())
    assert found.severity == "fault"
    assert "outside the span" in found.text


def test_a_load_that_works_the_wrong_way_round() -> None:
    found = only("cycling", plant=filling(-1e-3, 1e-3))
    assert found.severity == "fault"
    assert "load=" in found.remedy
    assert only("cycling", load="low", plant=filling(-1e-3, 1e-3)).severity == "note"


# -- drive -----------------------------------------------------------------------------------

COIL = hk.drives.Coil("360", inductance="0.7", voltage=12)
PULLED_UP = hk.Design(
    hk.Stage("inverting", reference="source", output="open-collector"),
    {"R_R": "10k", "R_F": "90k", "R_PU": "1k"},
    supply=5.0,
    levels={"V_REF": 2.5},
)


def test_a_base_that_holds_the_output_down() -> None:
    found = hk.drive(PULLED_UP, hk.drives.Transistor(beta=100), COIL)
    told = [f for f in hk.review(found.design, drive=found) if f.name == "drive"]
    assert {f.severity for f in told} == {"warning"}
    assert any("holds the high level" in f.text for f in told)


def test_a_drive_that_this_design_does_not_have_in() -> None:
    found = hk.drive(PULLED_UP, hk.drives.Transistor(beta=100), COIL)
    told = [f for f in hk.review(PULLED_UP, drive=found) if f.name == "drive"]
    assert any("from those of this design" in f.text and f.margin < 0 for f in told)


def test_a_drive_that_leaves_the_stage_alone() -> None:
    # A push-pull output without resistance gives an LED what it needs, and keeps its level.
    found = hk.drive(stage(), load=hk.drives.Led(v_f=2, current="5m"))
    assert only("drive", found.design, drive=found).severity == "pass"


# -- load step -------------------------------------------------------------------------------


@pytest.mark.parametrize(("amperes", "severity"), [(4, "pass"), (6, "fault")])
def test_a_load_that_pulls_its_own_signal_back(amperes: float, severity: str) -> None:
    # Behind 0.1 ohm the signal falls by 0.1 V per ampere, against a width of 0.5 V.
    design = stage(signal=hk.signals.Linear(1.0, span=(0, 5), unit="V", name="rail"))
    step = hk.load_step(design, current=amperes, source_resistance=0.1, load="low", sigmas=0)
    found = only("load step", design, load="low", load_step=step)
    assert found.severity == severity
    assert found.margin == pytest.approx(0.5 - 0.1 * amperes)


# -- refusals --------------------------------------------------------------------------------


def test_every_declaration_that_cannot_be_used_is_named() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.review(
            stage(),
            noise=3,
            hum=(0, 50),
            plant=filling(np.array([1e-3, 2e-3])),
            probability=2,
            slope=-1,
        )
    for word in ("noise", "hum", "one plant", "probability", "slope"):
        assert word in str(caught.value)


def test_an_unknown_declaration_is_named() -> None:
    with pytest.raises(hk.UnknownNameError, match="starts_per_hour"):
        hk.review(stage(), start_per_hour=3)


def test_a_load_is_found_again_for_another_design() -> None:
    rail = hk.signals.Linear(1.0, span=(0, 5), unit="V", name="rail")
    step = hk.load_step(stage(signal=rail), current=4, source_resistance=0.1, load="low", sigmas=0)
    narrower = stage(signal=rail, parts={"R_R": "10k", "R_F": "190k"})
    found = only("load step", narrower, load="low", load_step=step)
    # A width of 0.25 V, of which the same load takes 0.4 V.
    assert found.severity == "fault"
    assert found.margin == pytest.approx(0.25 - 0.4)


def test_a_plant_in_another_unit_is_refused() -> None:
    kiln = hk.FirstOrder(600, on_level=40, off_level=10, unit="°C")
    with pytest.raises(hk.InputError, match="different units"):
        hk.review(stage(), plant=kiln)
    with pytest.raises(hk.InputError, match="signal in V"):
        hk.review(stage(signal=None), plant=kiln)


def test_numbers_stay_readable() -> None:
    rare = only("noise", noise=QUIET, slope=1.0)
    assert "fewer than one in 10⁹ of the passages" in rare.text
    quick = only("cycling", plant=filling(0.9, -0.9), starts_per_hour=20_000)
    assert "3240 starts per hour, 50 % on, allowed are 20000" in quick.text


def test_a_base_that_blocks_sinks_nothing_into_the_output() -> None:
    """V_L through R_L stands for a base that conducts; low, the base blocks and feeds nothing."""
    strong = PULLED_UP.with_device(sink_current=6e-3)
    found = hk.drive(strong, hk.drives.Transistor(beta=100), COIL)
    sunk = found.output_current("low")
    # What reaches the output comes through the pull-up, 5 V behind 1 kΩ, and from the feedback.
    assert 5e-3 < sunk < 5.1e-3
    output = only("output low", found.design, drive=found)
    assert output.margin == pytest.approx(6e-3 - sunk)

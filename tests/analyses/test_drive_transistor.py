"""A base behind its resistor: against an independent nodal solution of the clamped output."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.drive.choice import DERATING, RANGE, RATINGS, rating_for
from hystkit.analyses.drive.switched import TransistorDrive
from hystkit.base.quantity import read
from hystkit.circuit.preferred import values as preferred_values
from tests.analyses.drive_designs import NPN, RELAY, corners, stage, trip_by_nodes

FORMS = [(s, o, p) for s in ("inverting", "non-inverting") for o in ("push-pull", "open-collector")
         for p in ("single", "split")]  # fmt: skip


def driven(design: hk.Design, switch: Any = NPN, load: Any = RELAY, **more: Any) -> TransistorDrive:
    found = hk.drive(design, switch, load, **more)
    assert isinstance(found, TransistorDrive)
    return found


@pytest.mark.parametrize(("sense", "output", "supply"), FORMS)
def test_the_stage_sees_the_base_as_a_source_behind_its_resistor(
    sense: str, output: str, supply: str
) -> None:
    design = stage(sense, output, supply)
    found = driven(design)
    assert found.resistor is not None
    values = {**design.values, "R_L": found.resistor.value, "V_L": 0.7}
    # High: the base is a source of 0.7 V. Low: the junction blocks, as if it were not there.
    high, there = trip_by_nodes(design, "high", values, loaded=True)
    low, _ = trip_by_nodes(design, "low", design.values, loaded=False)
    after = found.trips_after
    leaves_high, leaves_low = (
        (after.upper, after.lower) if sense == "inverting" else (after.lower, after.upper)
    )
    assert leaves_high == pytest.approx(high.item(), rel=1e-12)
    assert leaves_low == pytest.approx(low.item(), rel=1e-12, abs=1e-12)
    assert found.v_out_high == pytest.approx(there["out"].item(), rel=1e-12)
    base = (there["out"].item() - 0.7) / found.resistor.value
    assert found.base_current == pytest.approx(base, rel=1e-12)
    assert found.forced_beta == pytest.approx((12 - 0.2) / 360 / base, rel=1e-12)
    # All that leaves the rails: what the nodal currents into the circuit say.
    drawn = there["held", "cc"].item() + there.get(("held", "pu"), np.zeros(1)).item()
    drawn += there["drive"].item() if output == "push-pull" else 0.0
    assert found.supply_current == pytest.approx(drawn, rel=1e-9)


@pytest.mark.parametrize(("sense", "output", "supply"), FORMS)
def test_the_resistor_is_the_largest_that_saturates_in_every_corner(
    sense: str, output: str, supply: str
) -> None:
    """Every E24 value is tried in every corner of the tolerances."""
    design = stage(sense, output, supply)
    found = driven(design)
    needed = 12 * 1.1 / 360 / 10
    fitting = []
    for ohms in preferred_values("E24", *RANGE):
        more = {"R_L": (ohms * 0.95, ohms * 1.05), "V_L": (0.63, 0.77)}
        if supply == "split":
            more["V_EE"] = (-5.1, -4.9)
        values = corners(design, more)
        _, there = trip_by_nodes(design, "high", values, loaded=True)
        currents = (there["out"] - values["V_L"]) / values["R_L"]
        if currents.min() >= needed:
            fitting.append((ohms, currents))
    ohms, currents = fitting[-1]
    assert found.resistor is not None
    assert found.resistor.value == ohms
    assert found.drive_current_range == pytest.approx((currents.min(), currents.max()), rel=1e-9)
    assert found.highest_forced_beta <= 10


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_no_unit_gets_less_base_current_than_stated(output: str) -> None:
    design = stage("non-inverting", output, tol=0.05)
    found = driven(design)
    rng = np.random.default_rng(3)
    assert found.resistor is not None
    more = {"R_L": found.resistor.value * np.array([0.95, 1.05]), "V_L": np.array([0.63, 0.77])}
    ends = corners(design, {name: tuple(pair) for name, pair in more.items()})
    units = {n: rng.uniform(np.min(v), np.max(v), 5000) for n, v in ends.items()}
    for follower in {"V_OH", "V_PU"} & units.keys():
        units[follower] = units["V_CC"] - (0.2 if follower == "V_OH" else 0.0)
    _, there = trip_by_nodes(design, "high", units, loaded=True)
    currents = (there["out"] - units["V_L"]) / units["R_L"]
    low, high = found.drive_current_range
    assert low <= currents.min()
    assert currents.max() <= high
    assert currents.min() < low + 0.35 * (high - low)


def test_a_base_emitter_resistor_takes_its_share() -> None:
    """Kirchhoff's current law at the base: 0.7 V across 1 k takes 0.7 mA from it."""
    design = stage(tol=0.0)
    shunted = hk.drives.Transistor(beta=100, base_emitter="1k")
    found = driven(design, shunted, tol=0.0)
    assert found.resistor is not None
    through = (found.v_out_high - 0.7) / found.resistor.value
    assert found.base_current == pytest.approx(through - 0.7e-3, rel=1e-9)
    assert found.resistor.value < driven(design, tol=0.0).resistor.value  # type: ignore[union-attr]


def test_the_least_base_emitter_resistor_takes_the_most() -> None:
    found = driven(stage(), hk.drives.Transistor(beta=100, base_emitter="470"), tol="5 %")
    assert found.resistor is not None
    ohms = found.resistor.value
    more = {"R_L": (ohms * 0.95, ohms * 1.05), "V_L": (0.7, 0.7), "shunt": (446.5, 493.5)}
    values = corners(found.given, more)
    shunt = values.pop("shunt")
    _, there = trip_by_nodes(found.given, "high", values, loaded=True)
    base = (there["out"] - 0.7) / values["R_L"] - 0.7 / shunt
    assert found.drive_current_range[0] == pytest.approx(base.min(), rel=1e-9)
    assert base.min() >= 13.2 / 360 / 10


@settings(max_examples=25, deadline=None)
@given(beta=st.floats(5, 40), more=st.floats(1.0, 2.0), ohms=st.floats(200, 2000))
def test_less_base_current_means_a_larger_resistor(beta: float, more: float, ohms: float) -> None:
    design = stage(output="open-collector")

    def chosen(forced: float, winding: float) -> float:
        switch = hk.drives.Transistor(beta=500, forced_beta=forced)
        resistor = driven(design, switch, hk.drives.Coil(winding, 0.5, 5)).resistor
        assert resistor is not None
        return resistor.value

    assert chosen(beta, ohms) <= chosen(beta * more, ohms)
    assert chosen(beta, ohms) <= chosen(beta, ohms * more)


def test_a_pull_up_that_is_too_weak_names_one_that_is_not() -> None:
    design = stage(output="open-collector").with_parts(R_PU="4k7")
    with pytest.raises(hk.InfeasibleError) as caught:
        driven(design)
    told = re.search(r"R_PU = (\S+ \S*Ω) or less", str(caught.value))
    assert told is not None
    ohms = read(told[1], unit="Ω")
    assert driven(design.with_parts(R_PU=ohms)).highest_forced_beta <= 10
    series = preferred_values("E24", ohms * 1.01, 4700)
    with pytest.raises(hk.InfeasibleError):
        driven(design.with_parts(R_PU=series[0]))


def test_a_base_without_a_resistor_clamps_the_output() -> None:
    # A silicon junction holds about 0.7 V: common practice.
    found = driven(stage(output="open-collector"), resistor=0)
    assert found.v_out_high == pytest.approx(0.7, abs=0.02)
    assert found.resistor is None
    assert found.resistor_dissipation == 0
    assert any("without a resistor" in text for text in found.warnings)
    assert any("the load holds the high level" in text for text in found.warnings)
    assert found.trips_after.width < 0.3 * found.trips_before.width


def test_a_base_below_the_low_level_ends_the_hysteresis() -> None:
    design = stage(output="open-collector").with_device(drop_low=1.0)
    found = driven(design, resistor=0)
    assert found.trips_after.status != 0
    assert "the stage does not work" in found.warnings[0]
    assert any("may stay on" in text for text in found.warnings)


def test_the_design_carries_the_load_for_everything_downstream() -> None:
    found = driven(stage().with_device(r_low=0.0))
    assert found.resistor is not None
    assert found.design.parts["R_L"] == found.resistor
    assert found.design.levels["V_L"] == NPN.v_be
    assert found.deviation == 0
    trips = hk.trip_points(found.design)
    assert (trips.upper, trips.lower) == (found.trips_after.upper, found.trips_after.lower)
    assert hk.levels(found.design).output_high == pytest.approx(found.v_out_high)


def test_an_own_circuit_gets_its_load_at_the_output() -> None:
    built_in = stage(supply="single")
    own = hk.Design(
        hk.Stage.custom(built_in.elements, name="own"),
        built_in.parts,
        supply=built_in.supply,
        device=built_in.device,
    )
    ours, theirs = driven(own), driven(built_in)
    assert ours.resistor == theirs.resistor
    assert ours.trips_after.upper == pytest.approx(theirs.trips_after.upper, rel=1e-12)
    assert ours.design.stage.name == "own"


def test_heat_and_ratings() -> None:
    found = driven(stage())
    assert found.resistor is not None
    ohms = found.resistor.value
    values = corners(found.given, {"R_L": (ohms * 0.95, ohms * 1.05), "V_L": (0.63, 0.77)})
    _, there = trip_by_nodes(found.given, "high", values, loaded=True)
    heat = (there["out"] - values["V_L"]) ** 2 / values["R_L"]
    assert found.resistor_dissipation == pytest.approx(heat.max(), rel=1e-9)
    largest = 13.2 / 360
    base = found.drive_current_range[1]
    assert found.dissipation == pytest.approx(largest * 0.2 + base * 0.77, rel=1e-9)
    rating = found.resistor_rating
    assert rating in RATINGS
    assert rating == min(r for r in RATINGS if r >= DERATING * heat.max())
    assert rating_for(3.0) is None


def test_what_the_low_level_does_to_a_base() -> None:
    split = driven(stage(supply="split").with_supply(v_ee=-12))
    assert any("a diode from emitter to base" in text for text in split.warnings)
    high_low = stage().with_device(drop_low=0.6)
    assert any("may stay on" in text for text in driven(high_low).warnings)
    divided = hk.drives.Transistor(beta=100, base_emitter="1k", v_ce_max=60)
    assert not any("may stay on" in text for text in driven(high_low, divided).warnings)


@pytest.mark.parametrize(
    ("switch", "load", "device", "said"),
    [
        ({"v_ce_max": 12}, {}, {}, "it is rated for 12 V"),
        ({"v_ce_max": None}, {}, {}, "its rated voltage is not stated"),
        ({"i_c_max": "20m"}, {}, {}, "the switch may carry 20 mA"),
        ({}, {"clamp": None}, {}, "its voltage destroys the switch"),
        ({}, {}, {"source_current": "2m"}, "the output has to source"),
        ({}, {}, {"sink_current": "1u"}, "the output has to sink"),
    ],
)
def test_ratings_that_are_not_kept_are_said(
    switch: dict[str, Any], load: dict[str, Any], device: dict[str, Any], said: str
) -> None:
    npn = hk.drives.Transistor(beta=100, **{"v_ce_max": 60, **switch})
    coil = hk.drives.Coil("360", "0.7", 12, **load)
    found = driven(stage().with_device(**device), npn, coil)
    assert [text for text in found.warnings if said in text]
    assert not driven(stage(), hk.drives.Transistor(beta=100, v_ce_max=60)).warnings


def test_a_given_resistor_is_judged() -> None:
    found = driven(stage(), resistor="10k")
    assert found.highest_forced_beta > 10
    assert any("may not saturate" in text for text in found.warnings)


def test_views_hold_numbers_warnings_and_cautions() -> None:
    found = driven(stage(output="open-collector"))
    for view in (found.to_text(), found._repr_html_(), found.to_latex()):
        for text in (
            "base resistor",
            "forced gain",
            "peak on the switch",
            "the load holds the high",
        ):
            assert text in view
        for caution in ("not a protective device", "licensed practice", "operate the coil without"):
            assert caution in view

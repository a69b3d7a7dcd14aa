"""LEDs, optocouplers and MOSFET gates at the output, against the nodal solution."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.analyses.drive.choice import RANGE
from hystkit.analyses.drive.led import LedDrive
from hystkit.analyses.drive.switched import MosfetDrive
from hystkit.circuit.preferred import values as preferred_values
from tests.analyses.drive_designs import RELAY, corners, stage, trip_by_nodes

LAMP = hk.drives.Led(hk.Part(2.0, tol=0.1), "2m", most="20m", name="alarm lamp")


def lit(design: hk.Design, load: Any = LAMP, **more: Any) -> LedDrive:
    found = hk.drive(design, load=load, **more)
    assert isinstance(found, LedDrive)
    return found


@pytest.mark.parametrize("to", ["ground", "supply"])
@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_the_resistor_is_the_largest_that_lights_in_every_corner(
    sense: str, output: str, to: str
) -> None:
    design = stage(sense, output)
    found = lit(design, to=to)
    state, sign = ("low", -1) if to == "supply" else ("high", 1)
    fitting = []
    for ohms in preferred_values("E24", *RANGE):
        values = corners(design, {"R_L": (ohms * 0.95, ohms * 1.05), "V_F": (1.8, 2.2)})
        drop = values.pop("V_F")
        values["V_L"] = values["V_CC"] - drop if to == "supply" else drop
        _, there = trip_by_nodes(design, state, values, loaded=True)
        currents = sign * (there["out"] - values["V_L"]) / values["R_L"]
        if currents.min() >= 2e-3:
            fitting.append((ohms, currents))
    ohms, currents = fitting[-1]
    assert found.resistor is not None
    assert found.resistor.value == ohms
    assert found.drive_current_range == pytest.approx((currents.min(), currents.max()), rel=1e-9)
    assert found.to == to


@pytest.mark.parametrize("needed", [1e-9, 0.4e-6, 1e-6, 50e-3])
def test_the_whole_ladder_of_resistors_is_looked_through(needed: float) -> None:
    """A stiff output of 5 V, where Ohm's law gives the resistor."""
    stiff = hk.Design(
        hk.Stage("inverting"), {"R_T": "10k", "R_B": "10k", "R_F": "100k"}, supply=5.0
    )
    found = lit(stiff, hk.drives.Led(2.0, needed), tol=0)
    ladder = preferred_values("E24", *RANGE)
    assert found.resistor is not None
    # 7.5 MOhm and 3 MOhm are what Ohm's law gives, and are not lost to rounding.
    assert found.resistor.value == max(v for v in ladder if v <= 3.0 / needed * (1 + 1e-9))
    assert not found.warnings


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_an_led_at_the_supply_blocks_while_the_output_is_high(output: str) -> None:
    design = stage(output=output)
    found = lit(design, to="supply")
    assert found.resistor is not None
    values = {**design.values, "R_L": found.resistor.value, "V_L": 3.0}
    upper, _ = trip_by_nodes(design, "high", design.values, loaded=False)
    lower, there = trip_by_nodes(design, "low", values, loaded=True)
    assert found.trips_after.upper == pytest.approx(upper.item(), rel=1e-12)
    assert found.trips_after.lower == pytest.approx(lower.item(), rel=1e-12)
    assert found.v_out_low == pytest.approx(there["out"].item(), rel=1e-12)
    # The pull-up of an open collector goes to V_CC: a linear load would hold the high level down.
    if output == "open-collector":
        assert "R_L" not in found.design.parts
    trips = hk.trip_points(found.design)
    off = max(abs(trips.upper - upper.item()), abs(trips.lower - lower.item()))
    assert found.deviation == pytest.approx(off, abs=1e-12)
    assert found.deviation < 0.05 * found.trips_after.width


def test_the_supply_feeds_an_led_that_hangs_from_it() -> None:
    design = stage()
    found = lit(design, to="supply")
    assert found.resistor is not None
    values = {**design.values, "R_L": found.resistor.value, "V_L": 3.0}
    _, there = trip_by_nodes(design, "low", values, loaded=True)
    drawn = there["held", "cc"].item() + there["held", "load"].item()
    assert found.supply_current == pytest.approx(drawn, rel=1e-9)


def test_an_optocoupler_gets_enough_at_the_end_of_its_life() -> None:
    # Output current over the transfer ratio, half of which ageing may take: common practice.
    coupler = hk.drives.Optocoupler(1.2, ctr=0.5, output_current="0.5 mA", ageing=0.5)
    assert coupler.current == pytest.approx(2e-3)
    found = lit(stage(), coupler)
    assert found.drive_current_range[0] >= coupler.current
    assert "creepage" in found.to_text()


@pytest.mark.parametrize(
    ("resistor", "said"),
    [(0, "its current is not limited"), ("100k", "needed are"), (50, "allowed are 20 mA")],
)
def test_what_an_led_does_not_get_is_said(resistor: Any, said: str) -> None:
    found = lit(stage(), resistor=resistor)
    assert [text for text in found.warnings if said in text]
    assert not lit(stage()).warnings


def test_an_led_that_does_not_go_out_or_is_reversed_is_said() -> None:
    high_low = stage().with_device(drop_low=2.5)
    assert any("does not go out" in t for t in lit(high_low, hk.drives.Led(1.8, "1m")).warnings)
    split = stage(supply="split").with_supply(v_ee=-12)
    assert any("the other way round" in text for text in lit(split).warnings)


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_a_gate_with_its_pull_down(output: str) -> None:
    design = stage(output=output)
    gate = hk.drives.Mosfet(4.0, r_on=0.1, threshold=1.0, gate_resistor="1k", pull_down="10k",
                            v_ds_max=60)  # fmt: skip
    found = hk.drive(design, gate, RELAY, tol="5 %")
    assert isinstance(found, MosfetDrive)
    high, there = trip_by_nodes(design, "high", {**design.values, "R_L": 11e3, "V_L": 0.0}, True)
    low, _ = trip_by_nodes(design, "low", {**design.values, "R_L": 11e3, "V_L": 0.0}, True)
    assert found.trips_after.upper == pytest.approx(high.item(), rel=1e-12)
    assert found.trips_after.lower == pytest.approx(low.item(), rel=1e-12)
    assert found.gate_voltage == pytest.approx(there["out"].item() * 10 / 11, rel=1e-12)
    assert found.design.parts["R_L"].value == 11e3
    # Every corner, the two resistors apart.
    values = corners(design, {"R_L": (1.0, 1.0), "g": (950, 1050), "d": (9500, 10500)})
    series, down = values.pop("g"), values.pop("d")
    values |= {"R_L": series + down, "V_L": np.zeros(series.size)}
    _, there = trip_by_nodes(design, "high", values, True)
    gates = there["out"] * down / (series + down)
    least, most = found.gate_voltage_range
    assert least <= gates.min()
    assert gates.max() <= most
    assert (least, most) == pytest.approx((gates.min(), gates.max()), rel=2e-3)
    assert found.load_current == pytest.approx(12 / 360.1)
    assert found.dissipation == pytest.approx((13.2 / 360) ** 2 * 0.1)
    assert found.fully_on == (gates.min() >= 4.0)


@pytest.mark.parametrize(
    ("gate", "device", "said"),
    [
        ({"drive_voltage": 10}, {}, "the on-resistance is stated for 10 V"),
        ({"drive_voltage": 4, "threshold": 0.5}, {"drop_low": 0.8}, "begins to conduct at 500 mV"),
        ({"drive_voltage": 4, "v_gs_max": 4.5}, {}, "that it takes"),
        ({"drive_voltage": 4, "pull_down": None}, {}, "floats"),
    ],
)
def test_what_a_gate_does_not_get_is_said(
    gate: dict[str, Any], device: dict[str, Any], said: str
) -> None:
    given = {"r_on": 0.1, "pull_down": "100k", "v_ds_max": 60, **gate}
    found = hk.drive(stage().with_device(**device), hk.drives.Mosfet(**given), RELAY)
    assert [text for text in found.warnings if said in text]
    fine = hk.drives.Mosfet(4.0, r_on=0.1, pull_down="100k", v_ds_max=60)
    assert not hk.drive(stage(), fine, RELAY).warnings


def test_an_unloaded_gate_leaves_the_stage_alone() -> None:
    design = stage()
    found = hk.drive(design, hk.drives.Mosfet(4.0, r_on=0.1), RELAY)
    assert found.design is design
    assert found.drive_current == 0
    assert found.drive_current_range == (0.0, 0.0)
    assert found.resistor is None
    assert found.trips_after.upper == found.trips_before.upper
    assert found.supply_current == found.supply_current_before


def test_every_fault_of_a_request_is_told_at_once() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.drive(3, 4, 5, resistor="q", series="E2", tol=3, to="rail")  # type: ignore[arg-type]
    assert len(caught.value.faults) == 7
    with pytest.raises(hk.InputError, match="a coil needs a switch"):
        hk.drive(stage(), load=RELAY)
    with pytest.raises(hk.InputError, match="an LED hangs at the output itself"):
        hk.drive(stage(), hk.drives.Transistor(100), LAMP)
    with pytest.raises(hk.InputError, match="driven to ground"):
        hk.drive(stage(), hk.drives.Transistor(100), RELAY, to="supply")
    with pytest.raises(hk.InputError, match="part of the MOSFET"):
        hk.drive(stage(), hk.drives.Mosfet(4, 0.1), RELAY, resistor=100)
    with pytest.raises(hk.InputError, match="the resistor is negative"):
        hk.drive(stage(), load=LAMP, resistor=-1)
    with pytest.raises(hk.InputError, match="has a load already"):
        hk.drive(stage().with_parts(R_L="10k"), load=LAMP)


def test_every_fault_of_a_description_is_told_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.drives.Transistor(-1, v_be="x", forced_beta=0, v_ce_max="-3", name=1)  # type: ignore[arg-type]
    assert len(caught.value.faults) == 6
    with pytest.raises(hk.DesignError, match="would not saturate"):
        hk.drives.Transistor(beta=8)
    with pytest.raises(hk.DesignError, match="the threshold is not below"):
        hk.drives.Mosfet(2.0, 0.1, threshold=2.5)
    with pytest.raises(hk.DesignError) as caught:
        hk.drives.Optocoupler(0, ctr=-1, output_current="q", ageing=2)
    assert len(caught.value.faults) == 4
    with pytest.raises(hk.DesignError, match="more than the most"):
        hk.drives.Led(2.0, "30m", most="20m")
    with pytest.raises(hk.DesignError, match="v_f is not a value in V"):
        hk.drives.Led(hk.Part("360 Ω"), "1m")

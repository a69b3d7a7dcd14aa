"""Everything on the volt axis, against the oracle and against plain arithmetic."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given

import hystkit as hk
from hystkit.numeric.status import Status
from tests.circuit.strategies import designs
from tests.numeric import nodal

KINDS = ("upper", "lower", "width", "middle")


def vent(**more: Any) -> hk.Design:
    """An open collector whose load pulls the high level down."""
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {"R_T": "22k1", "R_B": "21k", "R_F": "220k", "R_PU": "4k7", "R_L": "47k"},
        **{"supply": 5, "device": hk.Device(drop_low=0.2), **more},
    )


@given(designs())
def test_levels_are_those_of_the_trips_and_of_the_oracle(design: hk.Design) -> None:
    found, trips = hk.levels(design), hk.trip_points(design)
    assert found.ok == (trips.status == Status.OK)
    assert found.message == Status(int(trips.status)).message
    for kind in KINDS:
        value = getattr(found, kind)
        assert isinstance(value, float)
        np.testing.assert_equal(value, float(getattr(trips, kind)))
    if not found.ok:
        assert math.isnan(found.upper)
        return
    inverting = design.stage.sense == "inverting"
    leaves = {"high": found.upper, "low": found.lower} if inverting else {"high": found.lower}
    leaves.setdefault("low", found.upper)
    voltages = {}
    for state, shown in (("high", found.output_high), ("low", found.output_low)):
        voltages[state] = nodal.voltages(
            design.elements, design.stage.output, state, design.values, leaves[state]
        )
        scale = 1e-9 * (1 + abs(leaves[state]))
        assert shown == pytest.approx(voltages[state]["out"].item(), rel=1e-9, abs=scale)
    at_pins = [nodes[pin].item() for nodes in voltages.values() for pin in ("plus", "minus")]
    assert found.pins is not None
    scale = 1e-9 * (1 + max(map(abs, at_pins)))
    assert found.pins[0] <= min(at_pins) + scale
    assert found.pins[1] >= max(at_pins) - scale


@given(designs())
def test_the_rest_is_stated_by_the_design(design: hk.Design) -> None:
    found = hk.levels(design)
    assert (found.v_ee, found.v_cc) == (design.supply.low_rail, design.supply.v_cc)
    assert found.reference == (design.levels["V_REF"].value if "V_REF" in design.levels else None)
    assert found.signal is design.signal
    if design.signal is None:
        assert found.signal_span is None
    else:
        low, high = found.signal_span or (math.nan, math.nan)
        assert low < high
        assert {low, high} == {design.signal.volts(end) for end in design.signal.span}


def test_the_output_is_taken_at_the_pull_up_and_its_load() -> None:
    found = hk.levels(vent())
    assert found.output_low == pytest.approx(0.2)
    assert found.output_high < 5 * 47 / (47 + 4.7)


def test_the_common_mode_range_needs_both_ends() -> None:
    stated = vent(device=hk.Device(common_mode_low=-0.3, common_mode_high="1.5 V"))
    assert hk.levels(stated).common_mode == pytest.approx((-0.3, 3.5))
    assert hk.levels(stated.with_device(common_mode_high=None)).common_mode is None
    assert hk.levels(vent()).common_mode is None


def test_a_design_that_cannot_switch_says_why() -> None:
    dragged = vent(levels={"V_L": -100})
    found = hk.levels(dragged)
    assert not found.ok
    assert "no hysteresis" in found.message
    assert all(math.isnan(getattr(found, kind)) for kind in KINDS)
    assert found.pins is None
    assert (found.v_ee, found.v_cc) == (0.0, 5.0)

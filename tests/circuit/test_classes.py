"""Typical device classes: what each one is, and a mark that stays until a value is replaced."""

from __future__ import annotations

import json
import math
import pickle
import re

import pytest

import hystkit as hk
from hystkit.circuit.classes import DeviceClass, device_of_class, fitting
from hystkit.circuit.device import LAW_FIELDS, TYPICAL, UNITS
from hystkit.circuit.reading import members
from hystkit.circuit.record import from_record, to_record
from tests.circuit.test_code import run

CLASSES = tuple(hk.device_classes.values())
QUAD = "open-collector quad comparator class"
every_class = pytest.mark.parametrize("one", CLASSES, ids=lambda one: one.name)


def design_of(one: DeviceClass) -> hk.Design:
    """A stage that the class fits, on rails that its output and inputs can work with."""
    split = one.name.startswith("dual-supply")
    parts = {"R_T": "100k", "R_B": "100k", "R_F": "470k"}
    pulled = {"R_PU": "4k7"} if one.output == "open-collector" else {}
    stage = hk.Stage("inverting", supply="split" if split else "single", output=one.output)
    supply = hk.Supply(12, -12) if split else hk.Supply(5)
    return hk.Design(stage, parts | pulled, supply=supply, device=one.device)


@every_class
def test_every_stated_value_is_marked(one: DeviceClass) -> None:
    stated = {n for n in UNITS if getattr(one.device, n) != getattr(hk.Device(), n)}
    assert stated | set(one.device.limits) <= set(one.device.typical)
    assert one.device.name == one.name
    # Numbers that the checks of a review need.
    assert {"offset", "bias_plus", "bias_minus", "common_mode_low", "common_mode_high", "delay",
            "gain", "sink_current"} <= set(one.device.typical)  # fmt: skip


@every_class
def test_values_are_of_the_right_size(one: DeviceClass) -> None:
    # Common practice: from comparators of a few ns to op-amps of some tens of microseconds.
    device = one.device
    assert 1e-9 < device.delay < 1e-4
    assert 1e3 <= device.gain <= 1e7
    assert 1e-3 <= device.sink_current <= 0.1
    low, high = device.limits["offset"]
    assert low == -high
    assert 1e-4 < high <= 0.015
    assert all(abs(end) <= 1e-6 for n in ("bias_plus", "bias_minus") for end in device.limits[n])
    assert device.offset_drift < 1e-4
    assert device.limits.keys() <= {*LAW_FIELDS}
    # An open collector has no current of its own when high, and a push-pull output no leakage.
    opened = one.output == "open-collector"
    assert (device.source_current is None) is opened
    assert ("leakage" in device.typical) is opened


def test_names_tell_the_kind_and_no_product() -> None:
    assert {QUAD, "rail-to-rail push-pull comparator class", "single-supply bipolar op-amp class",
            "open-drain micropower comparator class", "rail-to-rail CMOS op-amp class",
            "dual-supply JFET op-amp class"} <= {*hk.device_classes}  # fmt: skip
    for name in hk.device_classes:
        assert name.endswith(" class")
        assert not re.search(r"[0-9]", name)


@every_class
def test_a_class_makes_a_stage_that_switches(one: DeviceClass) -> None:
    found = hk.levels(design_of(one))
    assert found.ok
    assert found.upper_interval is not None
    assert all(math.isfinite(end) for end in (*found.upper_interval, *(found.common_mode or ())))


@every_class
def test_the_mark_survives_code_record_and_pickle(one: DeviceClass) -> None:
    design = design_of(one)
    assert run(design.as_code()) == design
    assert "typical=('" in design.as_code()
    record = to_record(design)
    assert from_record(json.loads(json.dumps(record))) == design
    assert members(record["device"]["typical"]) == one.device.typical
    assert pickle.loads(pickle.dumps(one)) == one


def test_a_record_without_marks_is_read_as_before() -> None:
    record = to_record(design_of(CLASSES[0]))
    del record["device"]["typical"]
    assert from_record(record).device.typical == ()


@every_class
def test_views_carry_the_mark(one: DeviceClass) -> None:
    for shown in (str(one), one._repr_html_()):
        assert TYPICAL in shown
    assert TYPICAL in one.device.title
    page = hk.page_fragment(design_of(one))
    assert TYPICAL in page


def test_a_value_that_is_given_loses_its_mark_and_its_limits() -> None:
    typical = hk.device_classes[QUAD].device
    own = typical.with_values(offset="1 mV", drop_low=0.3, limits={"drop_low": (0.2, 0.5)})
    assert own.typical == tuple(n for n in typical.typical if n not in ("offset", "drop_low"))
    assert own.limits == {"drop_low": (0.2, 0.5)}
    # Confirmed as it is: the same number, from a datasheet.
    confirmed = typical.with_values(delay=typical.delay)
    assert "delay" not in confirmed.typical
    assert confirmed.limits == typical.limits
    assert typical.with_values(name="mine").typical == typical.typical
    design = design_of(hk.device_classes[QUAD]).with_device(offset=0.001)
    assert "offset" not in design.device.typical
    assert "offset" not in design.device.limits
    assert design.device.limits["drop_low"] == typical.limits["drop_low"]


def test_own_limits_stay_with_own_values() -> None:
    own = hk.Device(offset=1e-3, limits={"offset": (-3e-3, 3e-3)})
    assert own.with_values(offset=2e-3).limits == own.limits
    with pytest.raises(hk.DesignError, match="do not enclose"):
        own.with_values(offset=4e-3)


def test_without_marks_there_is_no_remark() -> None:
    own = hk.Device(name="mine")
    assert own.title == "mine"
    assert hk.Device().title == ""
    assert hk.Device(typical=("gain",)).title == TYPICAL


def test_marks_are_in_one_order() -> None:
    one, other = (hk.Device(typical=names) for names in (("gain", "offset"), ["offset", "gain"]))
    assert one == other
    assert one.typical == ("offset", "gain")


def test_marks_of_unknown_fields_are_refused() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Device(typical=("ofset", "limits"))
    assert [fault.asked for fault in caught.value.faults] == ["ofset", "limits"]
    assert caught.value.faults[0].remedy == "offset"
    with pytest.raises(hk.DesignError, match="not a collection of field names"):
        hk.Device(typical="offset")


def test_a_class_that_does_not_fit_is_refused_with_those_that_do() -> None:
    for output in ("push-pull", "open-collector"):
        assert fitting(output)
        for name, one in hk.device_classes.items():
            if one.output == output:
                assert device_of_class(name, output) == one.device
                continue
            with pytest.raises(hk.DesignError) as caught:
                device_of_class(name, output)
            assert all(fit in caught.value.faults[0].remedy for fit in fitting(output))
            assert one.output in caught.value.faults[0].have
    with pytest.raises(hk.UnknownNameError) as unknown:
        device_of_class("open-colector quad comparator class", "open-collector")
    assert unknown.value.faults[0].remedy == QUAD


def test_the_bill_says_what_is_typical() -> None:
    device = hk.device_classes[QUAD].device
    found = hk.size(hk.Stage("inverting", output="open-collector"), supply=5.0, upper=2.7,
                    lower=2.3, parts={"R_PU": "4k7"}, device=device, count=1)  # fmt: skip
    (line,) = [line for line in found[0].bill if line.reference == "U"]
    assert (line.value, line.rating) == (QUAD, TYPICAL)
    own = found[0].design.with_device(**{name: getattr(device, name) for name in device.typical})
    assert own.device.typical == ()
    assert own.device.title == QUAD

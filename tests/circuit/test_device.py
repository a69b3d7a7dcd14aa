"""The device as its datasheet describes it: units, signs and limits."""

from __future__ import annotations

import copy
import pickle
from dataclasses import fields
from typing import Any

import pytest

import hystkit as hk
from hystkit.circuit.device import LAW_FIELDS, UNITS

NUMBERS = tuple(f.name for f in fields(hk.Device) if f.name in UNITS)
SIGNED = ("offset", "bias_plus", "bias_minus", "leakage", "common_mode_low", "common_mode_high")


def test_every_number_has_a_unit() -> None:
    assert {f.name for f in fields(hk.Device)} - {"name", "limits", "typical"} == UNITS.keys()


@pytest.mark.parametrize("name", NUMBERS)
def test_a_field_is_read_in_its_unit(name: str) -> None:
    given: dict[str, Any] = {name: f"5 m{UNITS[name]}" if UNITS[name] else "5m"}
    assert getattr(hk.Device(**given), name) == 0.005


@pytest.mark.parametrize("name", NUMBERS)
def test_only_what_has_a_direction_may_be_negative(name: str) -> None:
    given: dict[str, Any] = {name: -0.5}
    if name in SIGNED:
        assert getattr(hk.Device(**given), name) == -0.5
        return
    with pytest.raises(hk.DesignError, match=f"{name} is negative"):
        hk.Device(**given)


@pytest.mark.parametrize("name", NUMBERS)
def test_nothing_is_not_a_number_unless_a_datasheet_may_be_silent(name: str) -> None:
    given: dict[str, Any] = {name: None}
    if next(f for f in fields(hk.Device) if f.name == name).default is None:
        assert hk.Device(**given) == hk.Device()
        return
    with pytest.raises(hk.DesignError, match=name):
        hk.Device(**given)


def test_every_fault_of_a_device_is_reported_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Device(
            drop_high="0,2",
            r_low=-1,
            offset=float("nan"),
            delay="5 V",
            limits={"drop_low": (0.1, 0.3), "leakage": 5, "ofset": (0, 1), "offset": (0, 1)},  # type: ignore[dict-item]
        )
    assert [fault.problem.split(" is ")[0] for fault in caught.value.faults] == [
        "drop_high",
        "r_low",
        "offset",
        "delay",
        "the limits of drop_low do not enclose its typical value.",
        "the limits of leakage are not two numbers.",
        "there",
    ]
    assert caught.value.faults[-1].remedy == "offset"


@pytest.mark.parametrize("name", LAW_FIELDS)
def test_limits_enclose_the_typical_value(name: str) -> None:
    typical: dict[str, Any] = {name: 0.5}
    assert hk.Device(**typical, limits={name: ("500m", 1)}).limits[name] == (0.5, 1.0)
    for pair in ((0, 0.4), (0.6, 1), (1, 0)):
        with pytest.raises(hk.DesignError, match="do not enclose"):
            hk.Device(**typical, limits={name: pair})


@pytest.mark.parametrize("pair", ["12", (1,), (1, 2, 3), None])
def test_limits_are_two_numbers(pair: Any) -> None:
    with pytest.raises(hk.DesignError, match="not two numbers"):
        hk.Device(limits={"offset": pair})


def test_a_device_is_a_value() -> None:
    device = hk.Device(offset="2 mV", limits={"offset": (-5e-3, 5e-3)}, name="comparator class")
    for twin in (pickle.loads(pickle.dumps(device)), copy.copy(device), copy.deepcopy(device)):
        assert twin == device
        assert hash(twin) == hash(device)
    assert device.law_fields == {name: getattr(device, name) for name in LAW_FIELDS}
    assert device != hk.Device(offset="2 mV", name="comparator class")


@pytest.mark.parametrize("field", ["name", "limits", "typical"])
def test_a_field_of_another_kind(field: str) -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Device(**{field: 3}, delay=-1)  # type: ignore[arg-type]
    assert [fault.problem.split()[0] for fault in caught.value.faults] == ["delay", field]

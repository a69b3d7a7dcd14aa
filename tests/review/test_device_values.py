"""Findings on typical values: provoked by a class of devices, cleared by values of one's own."""

from __future__ import annotations

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank


def with_class(name: str) -> hk.Design:
    return header_tank().with_device(**vars(hk.device_classes[name].device))


def named(design: hk.Design, name: str) -> list[hk.Finding]:
    return [finding for finding in hk.review(design) if finding.name == name]


def test_typical_values_are_named_until_each_is_replaced() -> None:
    design = with_class("rail-to-rail push-pull comparator class")
    typical = design.device.typical
    for left in range(len(typical), 0, -1):
        (finding,) = named(design, "device values")
        assert finding.severity == "note"
        assert "rail-to-rail push-pull comparator class" in finding.text
        told = finding.text.partition(": ")[2].split(", ")
        assert told == [name.replace("_", " ") for name in design.device.typical]
        assert len(told) == left
        first = design.device.typical[0]
        design = design.with_device(**{first: getattr(design.device, first)})
    assert named(design, "device values") == []


@pytest.mark.parametrize("name", hk.device_classes)
def test_a_class_with_the_other_output_is_a_warning(name: str) -> None:
    one = hk.device_classes[name]
    found = named(with_class(name), "device class")
    if one.output == header_tank().stage.output:
        assert found == []
        return
    (finding,) = found
    assert finding.severity == "warning"
    assert "open-collector output" in finding.text
    assert finding.remedy


def test_values_of_ones_own_are_not_remarked() -> None:
    design = header_tank().with_device(offset=1e-3, name="open-collector quad comparator class")
    assert named(design, "device values") == named(design, "device class") == []


def test_a_class_gives_the_other_checks_their_limits() -> None:
    stated = hk.review(with_class("rail-to-rail push-pull comparator class"))
    for name in ("offset", "bias", "common mode", "output low", "output high", "loop gain"):
        assert "not stated" not in stated[name].text
        assert stated[name].severity in ("pass", "warning")

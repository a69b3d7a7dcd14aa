"""The device section: a class fills it at once, an own value takes its mark away."""

from __future__ import annotations

import html

import pytest

import hystkit as hk
from hystkit.circuit.classes import fitting
from hystkit.circuit.demo import header_tank
from hystkit.panels.device import LABELS, OWN_VALUES
from hystkit.panels.revise import revised
from tests.panels.conftest import MakePanel
from tests.panels.front import clean, send, type_in

PUSH_PULL = "rail-to-rail push-pull comparator class"
QUAD = "open-collector quad comparator class"


def choose(panel: hk.panels.TripPanel, name: str) -> None:
    """Choose from the list of classes, as its view in a browser does."""
    field = panel.device.choice.field
    send(field, index=list(field.options).index(name))


def typical_rows(panel: hk.panels.TripPanel) -> set[str]:
    rows = panel.device.entries.items()
    return {name for name, row in rows if "typical" in row._label.value}


def test_only_classes_that_fit_are_offered(panel: hk.panels.TripPanel) -> None:
    field = panel.device.choice.field
    for output in ("push-pull", "open-collector"):
        panel.set(output=output)
        assert field.options == (OWN_VALUES, *fitting(output))
        assert field.value == OWN_VALUES


def test_a_class_fills_every_value_at_once(panel: hk.panels.TripPanel) -> None:
    seen: list[hk.Design] = []
    panel.observe(lambda change: seen.append(change["new"]), names="design")
    choose(panel, PUSH_PULL)
    device = hk.device_classes[PUSH_PULL].device
    assert [design.device for design in seen] == [device]
    assert panel.device.choice.field.value == PUSH_PULL
    assert panel.device.entries["gain"].field.value == "100000"
    assert panel.device.entries["offset"].field.value == ""
    assert "-5 mV to 5 mV" in panel.device.entries["offset"]._label.value
    assert typical_rows(panel) == {*LABELS} & {*device.typical}
    assert html.escape(device.title) in panel.device.fold.summary.value
    assert "datasheet" in panel.device.remark.value
    assert "typical of the" in panel.reviewed["device values"].text
    assert clean(panel)


def test_an_own_value_takes_the_class_off_and_its_mark_away(panel: hk.panels.TripPanel) -> None:
    choose(panel, PUSH_PULL)
    type_in(panel.device.entries["offset"].field, "8 mV")
    assert panel.design.device.offset == 8e-3
    assert panel.design.device.limits.keys() == {"r_high", "r_low", "bias_plus", "bias_minus"}
    assert panel.device.choice.field.value == OWN_VALUES
    assert "offset" not in typical_rows(panel)
    assert "delay" in typical_rows(panel)
    # Chosen again, it is as at first.
    choose(panel, PUSH_PULL)
    assert panel.design.device == hk.device_classes[PUSH_PULL].device
    assert clean(panel)


def test_own_values_keep_their_marks_and_lose_the_name(panel: hk.panels.TripPanel) -> None:
    choose(panel, PUSH_PULL)
    choose(panel, OWN_VALUES)
    typical = hk.device_classes[PUSH_PULL].device
    assert panel.design.device == typical.with_values(name="")
    assert panel.device.choice.field.value == OWN_VALUES
    assert panel.design.device.typical == typical.typical
    # For values that were never of a class the choice says nothing.
    panel.set(device_class=None, **dict.fromkeys(typical.typical), device_name="mine")
    assert panel.design.device == hk.Device(name="mine")
    assert panel.device.remark.value == ""


def test_another_output_keeps_the_values_and_says_so(panel: hk.panels.TripPanel) -> None:
    choose(panel, PUSH_PULL)
    panel.set(output="open-collector")
    assert panel.design.device == hk.device_classes[PUSH_PULL].device
    assert panel.device.choice.field.value == OWN_VALUES
    assert panel.reviewed["device class"].severity == "warning"
    choose(panel, QUAD)
    assert "device class" not in panel.reviewed.names


def test_a_class_comes_with_the_form_and_with_values_of_ones_own() -> None:
    made = revised(header_tank(), {"output": "open-collector", "device_class": QUAD, "delay": 2e-6})
    assert made.stage.output == "open-collector"
    assert made.device == hk.device_classes[QUAD].device.with_values(delay=2e-6)


def test_a_class_that_does_not_fit_is_refused(panel: hk.panels.TripPanel) -> None:
    before = panel.design
    with pytest.raises(hk.DesignError) as caught:
        panel.set(device_class=QUAD, r_low=-1)
    assert "does not fit the output" in str(caught.value)
    with pytest.raises(hk.DesignError, match=f"try     {PUSH_PULL}"):
        panel.set(device_class="rail-to-rail push-pull comparators")
    assert panel.design == before


def test_the_gain_is_a_plain_number(panel: hk.panels.TripPanel) -> None:
    row = panel.device.entries["gain"]
    assert row.field.placeholder == "not stated"
    type_in(row.field, "200k")
    assert panel.design.device.gain == 200e3
    type_in(row.field, "many")
    assert "open-loop gain is not a number" in row.note.text
    assert panel.design.device.gain == 200e3


def test_a_class_in_one_panel_is_a_class_in_another(make: MakePanel) -> None:
    one, other = make(header_tank()), make(header_tank())
    choose(one, PUSH_PULL)
    other.design = one.design
    assert other.device.choice.field.value == PUSH_PULL
    scope: dict[str, object] = {"hk": hk}
    assert eval(other.as_code(), scope) == one.design

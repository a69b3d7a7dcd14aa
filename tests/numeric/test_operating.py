"""Voltages and currents in one output state, against Kirchhoff's law and the nodal oracle."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.circuit.netlist import netlist
from hystkit.numeric.operating import feedback_factor, input_resistance, operating_point
from tests.circuit.custom import BRIDGE, TAPPED
from tests.numeric import nodal
from tests.numeric.circuits import random_values

COUNT = 40
#: The twenty forms, bare and with all optional parts, and two circuits with inner nodes.
STAGES = (
    *hk.Stage.all(),
    *(stage.with_options(*stage.optional) for stage in hk.Stage.all()),
    TAPPED,
    BRIDGE,
)
STATES = ("high", "low")

every = pytest.mark.parametrize("stage", STAGES)
both = pytest.mark.parametrize("state", STATES)


def values_of(stage: hk.Stage) -> tuple[dict[str, Any], np.ndarray]:
    """Random values; where there is a pull-up, half of them go to V_CC."""
    random = np.random.default_rng(STAGES.index(stage))
    values: dict[str, Any] = random_values(stage, COUNT, random)
    if "V_PU" in values:
        values["V_PU"] = np.where(random.random(COUNT) < 0.5, values["V_CC"], values["V_PU"])
    return values, random.uniform(-5, 15, COUNT)


def solved(stage: hk.Stage, state: str, values: dict[str, Any], signal: Any) -> dict[Any, Any]:
    return nodal.unknowns(stage.elements, stage.output, state, values, signal)


def currents_out_of(node: str, point: Any, stage: hk.Stage) -> np.ndarray:
    total = np.zeros(COUNT)
    for resistor in netlist(stage.elements).resistors:
        total += (resistor.node_a == node) * point.currents[resistor.name]
        total -= (resistor.node_b == node) * point.currents[resistor.name]
    return total


@every
@both
def test_currents_sum_to_zero_at_every_free_node(stage: hk.Stage, state: str) -> None:
    values, signal = values_of(stage)
    point = operating_point(stage, state, values, signal)
    net = netlist(stage.elements)
    assert net.free
    scale = sum(np.abs(current) for current in point.currents.values()) + 1e-9
    for node in net.free:
        into = np.zeros(COUNT)
        if net.merged.get("out") == node:
            into = into + device_current(stage, state, values, point)
        for pin, bias in (("plus", "I_BP"), ("minus", "I_BN")):
            into = into - (net.merged[pin] == node) * values[bias]
        if net.merged.get("out") == node and stage_is_stiff(stage, state):
            # Without output resistance the device gives whatever the node takes.
            stiff = values["R_OH" if state == "high" else "R_OL"] == 0
            into = np.where(stiff, currents_out_of(node, point, stage), into)
        leaving = currents_out_of(node, point, stage)
        np.testing.assert_allclose(leaving / scale, into / scale, rtol=0, atol=1e-7)


def stage_is_stiff(stage: hk.Stage, state: str) -> bool:
    return stage.output == "push-pull" or state == "low"


def device_current(stage: hk.Stage, state: str, values: dict[str, Any], point: Any) -> Any:
    """Current out of the output pin by Ohm's law in the device, not by the node's balance."""
    if not stage_is_stiff(stage, state):
        return -values["I_LK"]
    level, resistance = ("V_OH", "R_OH") if state == "high" else ("V_OL", "R_OL")
    inside = np.where(values[resistance] == 0, 1.0, values[resistance])
    return (values[level] - point.voltages["out"]) / inside


@every
@both
def test_voltages_are_those_of_the_oracle(stage: hk.Stage, state: str) -> None:
    values, signal = values_of(stage)
    point = operating_point(stage, state, values, signal)
    known = solved(stage, state, values, signal)
    merged = netlist(stage.elements).merged
    for node, stands in merged.items():
        np.testing.assert_allclose(
            np.broadcast_to(point.voltages[stands], COUNT), known[node], rtol=1e-7, atol=1e-6
        )


@every
@both
def test_currents_are_those_of_the_oracle(stage: hk.Stage, state: str) -> None:
    values, signal = values_of(stage)
    point = operating_point(stage, state, values, signal)
    known = solved(stage, state, values, signal)
    scale = sum(np.abs(current) for current in point.currents.values())
    driven = known["drive"] if stage_is_stiff(stage, state) else -values["I_LK"]
    np.testing.assert_allclose(point.output_current / scale, driven / scale, atol=1e-7)
    drawn = known.get(("held", "cc"), 0.0)
    if "V_PU" in values:
        drawn = drawn + (values["V_PU"] == values["V_CC"]) * known[("held", "pu")]
    if state == "high" and stage.output == "push-pull":
        drawn = drawn + np.maximum(driven, 0)
    np.testing.assert_allclose(point.supply_current / scale, drawn / scale, atol=1e-7)
    for resistor in stage.elements:
        if isinstance(resistor, hk.Resistor):
            across = known[resistor.node_a] - known[resistor.node_b]
            np.testing.assert_allclose(
                point.currents[resistor.name] / scale,
                across / values[resistor.name] / scale,
                atol=1e-7,
            )


@every
@both
@pytest.mark.parametrize(("pin", "bias"), [("plus", "I_BP"), ("minus", "I_BN")])
def test_input_resistance_is_what_bias_current_sees(
    stage: hk.Stage, state: str, pin: str, bias: str
) -> None:
    values, signal = values_of(stage)
    step = 1e-3  # the circuit is linear: any step gives the derivative
    low, high = (
        solved(stage, state, {**values, bias: values[bias] + move}, signal)[pin]
        for move in (-step, step)
    )
    found = input_resistance(stage, pin, state, values)
    np.testing.assert_allclose(
        np.broadcast_to(found, COUNT), (low - high) / (2 * step), rtol=1e-6, atol=1e-6
    )
    assert np.all(np.asarray(found) >= 0)


@every
@both
def test_feedback_factor_is_what_comes_back(stage: hk.Stage, state: str) -> None:
    values, signal = values_of(stage)
    driver, step = "V_OH" if state == "high" else "V_OL", 10.0
    if not stage_is_stiff(stage, state):
        driver, step = "I_LK", 1e-3
    before, after = (
        solved(stage, state, {**values, driver: values[driver] + move}, signal)
        for move in (0.0, step)
    )
    moved = {node: after[node] - before[node] for node in ("plus", "minus", "out")}
    found = np.broadcast_to(feedback_factor(stage, state, values), COUNT)
    np.testing.assert_allclose(found, (moved["plus"] - moved["minus"]) / moved["out"], atol=1e-6)
    assert np.all(np.abs(found) <= 1)


def test_feedback_and_input_resistance_by_hand() -> None:
    stage = hk.Stage("inverting", reference="source").with_options("R_S")
    parts = {"R_R": "10k", "R_F": "90k", "R_S": "4k7"}
    design = hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5})
    for state in STATES:
        assert feedback_factor(stage, state, design.values) == pytest.approx(0.1)
        assert input_resistance(stage, "plus", state, design.values) == pytest.approx(9e3)
        assert input_resistance(stage, "minus", state, design.values) == pytest.approx(4.7e3)
    point = operating_point(stage, "high", design.values, 2.0)
    assert point.state == "high"
    assert point.voltages["plus"] == pytest.approx(2.75)
    assert point.voltages["signal"] == 2.0
    assert point.output_current == pytest.approx(25e-6)
    assert point.supply_current == pytest.approx(25e-6)


def test_a_pin_wired_to_a_source_sees_nothing() -> None:
    stage = hk.Stage("inverting", reference="source")
    design = hk.Design(stage, {"R_R": "10k", "R_F": "90k"}, supply=5.0, levels={"V_REF": 2.5})
    assert input_resistance(stage, "minus", "low", design.values) == 0


def test_the_supply_feeds_divider_and_pull_up_only_where_it_is_theirs() -> None:
    stage = hk.Stage("inverting", output="open-collector")
    parts = {"R_T": "10k", "R_B": "10k", "R_F": "1M", "R_PU": "1k"}
    shared = hk.Design(stage, parts, supply=5.0)
    own = hk.Design(stage, parts, supply=5.0, levels={"V_PU": 12.0})
    drawn = [
        float(operating_point(stage, "low", design.values, 4.0).supply_current)
        for design in (shared, own)
    ]
    # Pulled low: 5 mA through the pull-up, and the divider with R_F from its tap to 0 V.
    tap = 5 / 10e3 / (2 / 10e3 + 1 / 1e6)
    assert drawn == pytest.approx([5e-3 + (5 - tap) / 10e3, (5 - tap) / 10e3])

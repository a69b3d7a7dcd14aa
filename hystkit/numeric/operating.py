"""Voltages and currents of a stage in one output state: what its parts and pins carry."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
import sympy as sp

from hystkit.circuit.elements import FIXED_NODES, OUTPUT_NODE
from hystkit.circuit.netlist import netlist
from hystkit.circuit.stage import Stage
from hystkit.numeric.compile import Compiled, compiled, kernel
from hystkit.symbolic.ledger import expand
from hystkit.symbolic.symbols import symbol


@dataclass(frozen=True, eq=False)
class OperatingPoint:
    """Voltages and currents in one output state.

    Attributes
    ----------
    state : {"high", "low"}
        Output state.
    voltages : dict
        Every node, fixed ones included, to its voltage [V].
    currents : dict
        Every resistor to the current from its first to its second declared node [A].
    output_current : float or ndarray
        Current out of the output pin [A]: positive sources, negative sinks.
    supply_current : float or ndarray
        Current that network and output draw from V_CC [A], without the device's own.
    """

    state: str
    voltages: dict[str, Any]
    currents: dict[str, Any]
    output_current: Any
    supply_current: Any


def operating_point(
    stage: Stage, state: str, values: Mapping[str, Any], signal: Any
) -> OperatingPoint:
    """Evaluate a stage with its output in one state.

    Parameters
    ----------
    stage : Stage
        The circuit.
    state : {"high", "low"}
        Output state.
    values : mapping of str to float or ndarray
        Every symbol of the full law, as ``design.values``; arrays broadcast.
    signal : float or ndarray
        Signal voltage [V].

    Returns
    -------
    OperatingPoint
        Of the broadcast shape.

    Notes
    -----
    Static. A pull-up is taken to load V_CC where V_PU equals it.
    """
    net = netlist(stage.elements)
    free = kernel(stage).voltages(state, values, signal)
    held = {node: fixed_voltage(node, values, signal) for node in net.nodes & FIXED_NODES.keys()}
    voltages = {**free, **held}
    currents = {
        r.name: (voltages[r.node_a] - voltages[r.node_b]) / values[r.name] for r in net.resistors
    }
    output = _current_out_of(OUTPUT_NODE, net.resistors, currents)
    if state == "high" and stage.output == "open-collector":
        output = -values["I_LK"] * np.ones_like(output)
    drawn = _current_out_of("cc", net.resistors, currents)
    if "pu" in net.nodes:
        drawn = drawn + np.where(
            np.equal(values["V_PU"], values["V_CC"]),
            _current_out_of("pu", net.resistors, currents),
            0.0,
        )
    if state == "high" and stage.output == "push-pull":
        drawn = drawn + np.maximum(output, 0.0)
    return OperatingPoint(state, voltages, currents, output, drawn)


def fixed_voltage(node: str, values: Mapping[str, Any], signal: Any) -> Any:
    """Give the voltage of a fixed node.

    Parameters
    ----------
    node : str
        One of `FIXED_NODES`.
    values : mapping of str to float or ndarray
        Every symbol of the full law.
    signal : float or ndarray
        Signal voltage [V].

    Returns
    -------
    float or ndarray
        [V]; 0 for ground and for the negative rail of a single supply.
    """
    return signal if node == "signal" else values.get(FIXED_NODES[node], 0.0)


def input_resistance(stage: Stage, pin: str, state: str, values: Mapping[str, Any]) -> Any:
    """Resistance that an input pin sees, which its bias current flows through.

    Parameters
    ----------
    stage : Stage
        The circuit.
    pin : {"plus", "minus"}
        Input.
    state : {"high", "low"}
        Output state.
    values : mapping of str to float or ndarray
        Every symbol of the full law; arrays broadcast.

    Returns
    -------
    float or ndarray
        [Ohm]; 0 where the pin is wired to a source.

    Notes
    -----
    The exact derivative of the pin's voltage with respect to its bias current.
    """
    names, function = _input_resistance(stage, pin, state)
    return function(*(values[name] for name in names))[0]


@lru_cache(maxsize=256)
def _input_resistance(stage: Stage, pin: str, state: str) -> Compiled:
    law = kernel(stage).law
    node = netlist(stage.elements).merged[pin]
    found = law.states[state].potentials.get(node, sp.S.Zero)
    current = symbol("I_BP" if pin == "plus" else "I_BN")
    return compiled((-expand(found, law.definitions).diff(current),))


def _current_out_of(node: str, resistors: tuple[Any, ...], currents: Mapping[str, Any]) -> Any:
    total: Any = 0.0
    for resistor in resistors:
        if node == resistor.node_a:
            total = total + currents[resistor.name]
        elif node == resistor.node_b:
            total = total - currents[resistor.name]
    return total


def feedback_factor(stage: Stage, state: str, values: Mapping[str, Any]) -> Any:
    """Share of a move of the output node that arrives between the inputs.

    Parameters
    ----------
    stage : Stage
        The circuit.
    state : {"high", "low"}
        Output state, for the shape of `values` only: the share is that of the network.
    values : mapping of str to float or ndarray
        Every symbol of the full law; arrays broadcast.

    Returns
    -------
    float or ndarray
        d(v(plus) - v(minus)) / dv(out) with the signal held; positive for positive feedback.

    Notes
    -----
    A quotient of two exact derivatives with respect to what drives the output.
    """
    names, function = _feedback_factor(stage, state)
    between, out = function(*(values[name] for name in names))
    return between / out


@lru_cache(maxsize=256)
def _feedback_factor(stage: Stage, state: str) -> Compiled:
    law = kernel(stage).law
    merged = netlist(stage.elements).merged
    zero = sp.S.Zero
    found = {n: law.states[state].potentials.get(merged[n], zero) for n in ("plus", "minus", "out")}
    plus, minus, out = (expand(v, law.definitions) for v in found.values())
    opened = state == "high" and stage.output == "open-collector"
    driver = symbol("I_LK") if opened else symbol("V_OH" if state == "high" else "V_OL")
    return compiled(((plus - minus).diff(driver), out.diff(driver)))

"""A design as the Python expression that rebuilds it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from typing import TYPE_CHECKING, Any

from hystkit.base.errors import QuantityError
from hystkit.base.quantity import code, read
from hystkit.circuit.elements import Element, Resistor
from hystkit.circuit.parts import Part
from hystkit.circuit.signals.kinds import stated

if TYPE_CHECKING:
    from hystkit.circuit.design import Design
    from hystkit.circuit.device import Device
    from hystkit.circuit.parts import Supply
    from hystkit.circuit.stage import Stage


def design_code(design: Design) -> str:
    """Write the Python that rebuilds a design.

    Parameters
    ----------
    design : Design
        Any design whose signal is a frozen dataclass of `hystkit.signals`.

    Returns
    -------
    str
        One expression, a line for each argument; needs only ``import hystkit as hk``.
    """
    lines = [
        _stage_code(design.stage),
        f"parts={_parts_code(design.parts, 'Ω')}",
        f"supply={_supply_code(design.supply)}",
    ]
    device = _device_code(design.device)
    if device != "hk.Device()":
        lines.append(f"device={device}")
    if design.levels:
        lines.append(f"levels={_parts_code(design.levels, 'V')}")
    if design.signal is not None:
        lines.append(f"signal={_signal_code(design.signal)}")
    if design.name:
        lines.append(f"name={design.name!r}")
    return "hk.Design(\n" + "".join(f"    {line},\n" for line in lines) + ")"


def _stage_code(stage: Stage) -> str:
    if not stage.is_custom:
        return (
            f'hk.Stage("{stage.sense}", supply="{stage.supply}", '
            f'reference="{stage.reference}", output="{stage.output}")'
        )
    wiring = "".join(f"            {_element_code(e)},\n" for e in stage.wiring)
    name = f", name={stage.name!r}" if stage.name else ""
    return (
        f"hk.Stage.custom(\n        [\n{wiring}        ],\n"
        f'        supply="{stage.supply}", output="{stage.output}", sense="{stage.sense}"{name}\n'
        "    )"
    )


def _element_code(element: Element) -> str:
    if isinstance(element, Resistor):
        return f'hk.Resistor("{element.name}", "{element.node_a}", "{element.node_b}")'
    return f'hk.Wire("{element.node_a}", "{element.node_b}")'


def _parts_code(parts: Any, unit: str) -> str:
    return "{" + ", ".join(f'"{n}": {_part_code(p, unit)}' for n, p in parts.items()) + "}"


def _part_code(part: Part, unit: str) -> str:
    value = _ohm_literal(part.value) if unit == "Ω" else repr(part.value)
    extras = [f"{n}={getattr(part, n)!r}" for n in ("tol", "tempco") if getattr(part, n)]
    return f"hk.Part({', '.join([value, *extras])})" if extras else value


def _ohm_literal(value: float) -> str:
    """Give the letter code where it is exact, else the number."""
    text = code(value)
    try:
        return f'"{text}"' if read(text, unit="Ω") == value else repr(value)
    except QuantityError:
        return repr(value)


def _supply_code(supply: Supply) -> str:
    rails = [repr(supply.v_cc)] + ([repr(supply.v_ee)] if supply.split else [])
    return f"hk.Supply({', '.join(rails + ([f'tol={supply.tol!r}'] if supply.tol else []))})"


def _device_code(device: Device) -> str:
    given = [
        f"{f.name}={_plain(getattr(device, f.name))!r}"
        for f in fields(device)
        if getattr(device, f.name) != f.default
    ]
    return f"hk.Device({', '.join(given)})"


def _plain(value: Any) -> Any:
    return dict(value) if isinstance(value, Mapping) else value


def _signal_code(value: Any) -> str:
    """Write a signal, a sensor or one of their fields."""
    if isinstance(value, Part):
        return f"hk.{value!r}"
    if not is_dataclass(value):
        return repr(value)
    given = ", ".join(f"{name}={_signal_code(v)}" for name, v in stated(value).items())
    return f"hk.signals.{type(value).__name__}({given})"

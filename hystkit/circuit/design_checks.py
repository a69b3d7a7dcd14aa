"""Do these values belong to this stage? Every fault of a design, found in one pass."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING

from hystkit.base.errors import DesignError, Fault
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read, show
from hystkit.circuit.device import Device
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.reading import collect, wrong_kind
from hystkit.circuit.signals import Signal
from hystkit.circuit.stage import Stage

if TYPE_CHECKING:
    from hystkit.circuit.reading import Quantity

_LEVELS = ("V_REF", "V_PU", "V_L", "V_OH", "V_OL")


def read_parts(
    values: Mapping[str, Part | Quantity], unit: str, faults: list[Fault]
) -> dict[str, Part | None]:
    """Read parts or levels.

    Parameters
    ----------
    values : mapping of str to Part, float or str
        As they were given.
    unit : str
        Unit of bare values, "Ω" or "V".
    faults : list of Fault
        Where a fault is added for each value that cannot be read.

    Returns
    -------
    dict
        Name to part, None where it could not be read.
    """
    return {name: _as_part(name, value, unit, faults) for name, value in values.items()}


def read_supply(supply: Supply | Quantity, faults: list[Fault]) -> Supply | None:
    """Read a supply, of which the positive rail alone may be given.

    Parameters
    ----------
    supply : Supply, float or str
        As it was given.
    faults : list of Fault
        Where its faults are added.

    Returns
    -------
    Supply or None
        None where it cannot be used.
    """
    if isinstance(supply, Supply):
        return supply
    try:
        return Supply(supply)
    except DesignError as error:
        faults.extend(error.faults)
        return None


def kind_faults(
    stage: object, parts: object, levels: object, device: object, signal: object, name: object
) -> list[Fault]:
    """Find arguments of a design that are of another kind than those it takes.

    Parameters
    ----------
    stage, parts, levels, device, signal, name : object
        As they were given.

    Returns
    -------
    list of Fault
        Empty where each can be looked into.
    """
    values = {"parts": parts, "levels": levels}
    examples = {"parts": '{"R_F": "100k", ...}', "levels": '{"V_REF": 2.5}'}
    wanted: list[tuple[bool, tuple[str, object, str, str]]] = [
        (isinstance(stage, Stage), ("stage", stage, "a Stage", 'Stage("inverting")')),
        *(
            (isinstance(given, Mapping), (key, given, "a mapping of names", examples[key]))
            for key, given in values.items()
        ),
        (isinstance(device, Device), ("device", device, "a Device", "Device(drop_low=0.2)")),
        (
            signal is None or isinstance(signal, Signal),
            ("signal", signal, "a signal", 'signals.Linear(1.2, span=(0, 2), unit="m")'),
        ),
        (isinstance(name, str), ("name", name, "text", f"name={str(name)!r}")),
    ]
    return [wrong_kind(*told) for fits, told in wanted if not fits]


def design_faults(
    stage: Stage,
    parts: Mapping[str, Part | None],
    levels: Mapping[str, Part | None],
    supply: Supply | None,
    device: Device,
) -> list[Fault]:
    """Find everything in the values that does not fit the stage.

    Parameters
    ----------
    stage : Stage
        The circuit form with its optional parts.
    parts, levels : mapping of str to Part
        As read; None where a value could not be read, which is a fault of its own.
    supply : Supply or None
        Rails; None where they could not be read.
    device : Device
        Comparator or op-amp.

    Returns
    -------
    list of Fault
        Empty when the design is sound.
    """
    return [
        *_part_faults(stage, parts),
        *_level_faults(stage, levels),
        *(_supply_faults(stage, supply) if supply else ()),
        *(_swing_faults(stage, levels, supply, device) if supply else ()),
    ]


def _as_part(name: str, value: Part | Quantity, unit: str, faults: list[Fault]) -> Part | None:
    if isinstance(value, Part):
        if value.unit in ("", unit):
            return value
        faults.append(
            Fault(
                f"{name} is not in {unit}.",
                asked=f"a part in {unit}",
                have=show(value.value, value.unit),
                remedy=f"{name} = {'10k' if unit == 'Ω' else '2.5 V'}",
            )
        )
        return None
    number = collect(faults, lambda: read(value, unit=unit, name=name))
    return None if math.isnan(number) else Part(number)


def _part_faults(stage: Stage, parts: Mapping[str, Part | None]) -> Iterator[Fault]:
    missing = [name for name in stage.parts if name not in parts]
    if missing:
        yield Fault(
            f"{_listed(missing)} {'is' if len(missing) == 1 else 'are'} missing.",
            asked=f"{stage.title}",
            have=_listed(list(parts)) or "no parts",
            rule=f"this stage needs {_listed(list(stage.parts))}",
            remedy="parts={" + ", ".join(f'"{name}": "10k"' for name in missing) + ", ...}",
        )
    known = (*stage.parts, *stage.optional)
    for name, part in parts.items():
        if name not in known:
            yield unknown_name_fault("part of this stage", name, tuple(dict.fromkeys(known)))
        elif part is not None and not part.value > 0:
            yield Fault(
                f"{name} is not positive.",
                asked=f"{name} = {part.value:g} Ω",
                rule="a resistance is above zero; a part that is absent is left out",
                remedy=f"a value such as {name} = 10k"
                + (", or leave it out" if name in stage.optional else ""),
            )


def _level_faults(stage: Stage, levels: Mapping[str, Part | None]) -> Iterator[Fault]:
    if "V_REF" in stage.levels and "V_REF" not in levels:
        yield Fault(
            "V_REF is missing.",
            asked=stage.title,
            rule="a reference source needs its voltage",
            remedy='levels={"V_REF": 2.5}',
        )
    for name in levels:
        if name in stage.levels:
            continue
        if name not in _LEVELS:
            yield unknown_name_fault("level of this stage", name, stage.levels)
            continue
        yield Fault(
            f"this stage has no {name}.",
            asked=f"levels with {name}",
            have=f"levels of the stage: {_listed(list(stage.levels))}",
            remedy=f"leave {name} out" + _LEVEL_HINT.get(name, ""),
        )


_LEVEL_HINT = {
    "V_REF": ', or choose reference="source"',
    "V_PU": ', or choose output="open-collector"',
    "V_L": ", or fit R_L",
    "V_OH": ", and set the high level of an open collector with V_PU",
}


def _supply_faults(stage: Stage, supply: Supply) -> Iterator[Fault]:
    if supply.split == (stage.supply == "split"):
        return
    have = f"V_CC = {supply.v_cc:g} V, V_EE = {supply.v_ee:g} V" if supply.split else "V_CC only"
    yield Fault(
        f"a stage on a {stage.supply} supply was given a {'split' if supply.split else 'single'}"
        " one.",
        asked=f'Stage(..., supply="{stage.supply}")',
        have=have,
        remedy="Supply(12, -12) with both rails"
        if stage.supply == "split"
        else 'Supply(5.0) with the positive rail only, or Stage(..., supply="split")',
    )


def _swing_faults(
    stage: Stage, levels: Mapping[str, Part | None], supply: Supply, device: Device
) -> Iterator[Fault]:
    high_name = "V_OH" if stage.output == "push-pull" else "V_PU"
    if high_name not in stage.levels:
        return
    drop = device.drop_high if high_name == "V_OH" else 0.0
    high = _given(levels, high_name, supply.v_cc - drop)
    low = _given(levels, "V_OL", supply.low_rail + device.drop_low)
    if high <= low:
        yield Fault(
            f"{high_name} is not above V_OL.",
            asked=f"{high_name} = {high:g} V, V_OL = {low:g} V",
            have=f"V_CC = {supply.v_cc:g} V, V_EE = {supply.low_rail:g} V, "
            f"drops {device.drop_high:g} V and {device.drop_low:g} V",
            rule=f"{high_name} > V_OL, or there are no two output states",
            remedy="smaller drops, a higher supply, or other levels",
        )


def _given(levels: Mapping[str, Part | None], name: str, default: float) -> float:
    part = levels.get(name)
    return default if part is None else part.value


def _listed(names: list[str]) -> str:
    return ", ".join(names)

"""One change of a design, with all that follows from it, in one step."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, replace
from typing import Any, TypeVar

from hystkit.base.errors import DesignError, Fault, HystkitError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.classes import device_classes, device_of_class
from hystkit.circuit.design import Design, PartLike
from hystkit.circuit.device import Device
from hystkit.circuit.forms import CHOICES
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.reading import Quantity
from hystkit.circuit.stage import Stage

T = TypeVar("T")

#: Values with which a part or level begins that the design never had.
FIRST_VALUES: Mapping[str, float] = {
    "R_T": 100e3, "R_B": 100e3, "R_R": 10e3, "R_I": 10e3, "R_G": 100e3, "R_F": 100e3,
    "R_S": 1e3, "R_PU": 4.7e3, "R_L": 10e3,
}  # fmt: skip

_RAILS = ("V_CC", "V_EE", "supply_tol")
_LEVELS = ("V_REF", "V_PU", "V_L", "V_OH", "V_OL")
_DEVICE = tuple(f.name for f in fields(Device) if f.name != "name")
_OTHER = ("device_class", "device_name", "name", "signal")


@dataclass
class Spare:
    """Parts and levels that a design had and that its present form has no use for.

    Attributes
    ----------
    parts, levels : dict of str to Part
        By name.
    v_ee : float or None
        Negative rail of the last split supply [V].
    """

    parts: dict[str, Part] = field(default_factory=dict)
    levels: dict[str, Part] = field(default_factory=dict)
    v_ee: float | None = None

    def remember(self, design: Design) -> None:
        """Take note of a design.

        Parameters
        ----------
        design : Design
            What is shown now.
        """
        self.parts.update(design.parts)
        for name in design.stage.levels:
            self.levels.pop(name, None)
        self.levels.update(design.levels)
        if design.supply.split:
            self.v_ee = design.supply.v_ee


def revised(design: Design, changes: Mapping[str, Any], spare: Spare | None = None) -> Design:
    """Change a design.

    Parameters
    ----------
    design : Design
        What there is.
    changes : mapping
        Parts and levels by name (a bare value keeps the tolerance; None takes an optional part
        out and returns a level to its default), "V_CC", "V_EE", "supply_tol", the fields of
        `Device` ("device_name" for its name; None for the default), "device_class" (every value
        of a class in `hystkit.device_classes`, under those that are given beside it; None for
        values that are of no class any more), the choices "sense", "supply", "reference" and
        "output" of a built-in form, "name" and "signal".
    spare : Spare, optional
        Where a part that a new form needs may come from.

    Returns
    -------
    Design
        The changed copy. What still applies is carried over.

    Raises
    ------
    UnknownNameError
        If a name is none of these.
    DesignError
        Naming every fault of the changed design.
    """
    spare = spare or Spare()
    _check_names(design, changes)
    choices = {name: changes[name] for name in CHOICES if name in changes}
    form = _form(design.stage, choices)
    parts = _parts(design, changes, form, spare)
    stage = form.with_options(*(name for name in form.optional if name in parts))
    faults: list[Fault] = []
    device = _built(faults, lambda: _device(design.device, changes, stage.output))
    supply = _built(faults, lambda: _supply(design.supply, changes, stage, spare))
    # Where a supply or device cannot be built, the old one stands in, to find other faults too.
    rails = supply or (design.supply if design.stage.supply == stage.supply else None)
    if rails is None:
        raise DesignError.of("this change", faults)
    made = _built(
        faults,
        lambda: Design(
            stage,
            parts,
            supply=rails,
            device=device or design.device,
            levels=_levels(design, changes, stage, spare, rails),
            signal=changes.get("signal", design.signal),
            name=changes.get("name", design.name),
        ),
    )
    if faults or made is None:
        raise DesignError.of("this change", faults)
    return made


def _check_names(design: Design, changes: Mapping[str, Any]) -> None:
    stage = design.stage
    choices = () if stage.is_custom else tuple(CHOICES)
    parts = stage.parts if stage.is_custom else tuple(FIRST_VALUES)
    known = (*parts, *_RAILS, *_LEVELS, *_DEVICE, *choices, *_OTHER)
    faults = [unknown_name_fault("value", name, known) for name in changes if name not in known]
    if faults:
        raise UnknownNameError.of("this change", faults)


def _form(stage: Stage, choices: Mapping[str, str]) -> Stage:
    if not choices:
        return stage
    present = {name: getattr(stage, name) for name in CHOICES}
    return Stage(**{**present, **choices})


def _parts(
    design: Design, changes: Mapping[str, Any], form: Stage, spare: Spare
) -> dict[str, PartLike]:
    """Give the parts: those that the form can have, changed, and those that it lacks."""
    # An optional part comes along only if it was one before: a new form begins bare.
    applicable = {*form.required, *({*form.optional} & {*design.stage.optional})}
    parts: dict[str, PartLike] = {n: p for n, p in design.parts.items() if n in applicable}
    if form is not design.stage:
        for name in form.required:
            if name not in parts:
                parts[name] = spare.parts.get(name) or FIRST_VALUES[name]
    names = FIRST_VALUES if not form.is_custom else form.parts
    for name in names:
        if name in changes:
            _put(parts, name, changes[name], spare.parts.get(name))
    return parts


def _levels(
    design: Design, changes: Mapping[str, Any], stage: Stage, spare: Spare, supply: Supply
) -> dict[str, PartLike]:
    """Give the levels: those that the stage still has, changed, and those that it lacks."""
    levels: dict[str, PartLike] = {n: p for n, p in design.levels.items() if n in stage.levels}
    for name in stage.levels:
        if name not in design.stage.levels and name in spare.levels:
            levels[name] = spare.levels[name]
    if stage.supply != design.stage.supply:
        # Output levels belong to the rails that they were stated for.
        levels = {n: p for n, p in levels.items() if n not in ("V_OH", "V_OL", "V_PU")}
    if "V_REF" in stage.levels and "V_REF" not in (*levels, *design.stage.levels):
        levels["V_REF"] = supply.v_cc / 2
    for name in _LEVELS:
        if name in changes:
            _put(levels, name, changes[name], spare.levels.get(name))
    return levels


def _put(
    into: dict[str, PartLike], name: str, change: PartLike | None, before: Part | None
) -> None:
    if change is None:
        into.pop(name, None)
        return
    old = into.get(name, before)
    into[name] = change
    if isinstance(old, Part) and not isinstance(change, Part):
        try:
            into[name] = old.with_value(change)
        except DesignError:
            return  # left as it is, for the design to name it together with its other faults


def _device(device: Device, changes: Mapping[str, Any], output: str) -> Device:
    if changes.get("device_class") is not None:
        device = device_of_class(changes["device_class"], output)
    elif "device_class" in changes and device.name in device_classes:
        device = replace(device, name="")
    given: dict[str, Any] = {name: changes[name] for name in _DEVICE if name in changes}
    if "device_name" in changes:
        given["name"] = changes["device_name"]
    defaults = {f.name: f.default for f in fields(Device)}
    given = {name: defaults[name] if value is None else value for name, value in given.items()}
    return device.with_values(**given) if given else device


def _supply(supply: Supply, changes: Mapping[str, Any], stage: Stage, spare: Spare) -> Supply:
    v_cc: Quantity = changes.get("V_CC", supply.v_cc)
    tol: Quantity = changes.get("supply_tol", supply.tol)
    if stage.supply == "single" and "V_EE" not in changes:
        if supply.split and supply.v_cc <= 0 and "V_CC" not in changes:
            v_cc = supply.v_cc - supply.low_rail
        return Supply(v_cc, tol=tol)
    v_ee = changes.get("V_EE", supply.v_ee)
    if v_ee is None:
        v_ee = spare.v_ee if spare.v_ee is not None else -supply.v_cc
    return Supply(v_cc, v_ee, tol=tol)


def _built(faults: list[Fault], build: Callable[[], T]) -> T | None:
    try:
        return build()
    except HystkitError as error:
        faults += error.faults
        return None

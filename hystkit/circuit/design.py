"""A stage with its values: parts, supply, device, levels and, where stated, the signal."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import Any

from hystkit.base.errors import DesignError, Fault, UnknownNameError
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import code, read, show, show_own
from hystkit.circuit.code import design_code
from hystkit.circuit.design_checks import design_faults, kind_faults, read_parts, read_supply
from hystkit.circuit.device import Device
from hystkit.circuit.elements import Element
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.reading import Quantity, collect
from hystkit.circuit.signals import Signal
from hystkit.circuit.stage import Stage

PartLike = Part | Quantity


@dataclass(frozen=True)
class Design(Viewed):
    """A complete, frozen design; changed copies come from the ``with_...`` methods.

    Parameters
    ----------
    stage : Stage
        The circuit form; optional parts that `parts` names are fitted to it.
    parts : mapping of str to Part, float or str
        Every required part of the stage and any optional ones [Ohm].
    supply : Supply, float or str
        The rails; a bare number is a single supply [V].
    device : Device, optional
        The comparator or op-amp; ideal when left out.
    levels : mapping of str to Part, float or str, optional
        V_REF (required with a reference source), V_PU (V_CC unless given), V_L (0 V unless
        given) [V]. V_OH and V_OL may be given too and then win over the device's drops.
    signal : Signal, optional
        Quantity <-> volts, such as `signals.Linear`; a ratiometric one takes V_CC from `supply`.
    name : str, default ""
        What to call the design in reports.

    Raises
    ------
    DesignError
        Naming every fault of the design at once.

    Examples
    --------
    >>> tank = Design(Stage("inverting"), {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}, supply=5.0)
    >>> tank.with_parts(R_F="120k").parts["R_F"].value
    120000.0
    """

    stage: Stage
    parts: Named[Part]
    supply: Supply
    device: Device
    levels: Named[Part]
    signal: Signal | None
    name: str

    def __init__(
        self,
        stage: Stage,
        parts: Mapping[str, PartLike],
        *,
        supply: Supply | Quantity,
        device: Device | None = None,
        levels: Mapping[str, PartLike] | None = None,
        signal: Signal | None = None,
        name: str = "",
    ) -> None:
        device = Device() if device is None else device
        levels = {} if levels is None else levels
        faults = kind_faults(stage, parts, levels, device, signal, name)
        if faults:
            read_supply(supply, faults)
            raise DesignError.of("this design", faults)
        resistors = read_parts(parts, "Ω", faults)
        voltages = read_parts(levels, "V", faults)
        rails = read_supply(supply, faults)
        stage = stage.with_options(
            *(n for n in stage.optional if n in parts or n in stage.including)
        )
        faults += design_faults(stage, resistors, voltages, rails, device)
        if faults:
            raise DesignError.of("this design", faults)
        ordered = {name: resistors[name] for name in stage.parts}
        # A ratiometric signal is a share of this design's supply, whatever it was given with.
        sensed = signal.at(rails.v_cc) if signal is not None and rails is not None else signal
        filled = (stage, Named(ordered), rails, device, Named(voltages), sensed, name)
        for field, value in zip(fields(self), filled, strict=True):
            object.__setattr__(self, field.name, value)

    @property
    def elements(self) -> tuple[Element, ...]:
        """The complete circuit, with the optional parts that are fitted."""
        return self.stage.elements

    @cached_property
    def values(self) -> dict[str, float]:
        """Value of every symbol of the full law, in [Ohm], [V] and [A]."""
        return {
            **{name: part.value for name, part in self.parts.items()},
            **law_values(
                self.stage,
                self.device.law_fields,
                {name: part.value for name, part in self.levels.items()},
                self.supply.v_cc,
                self.supply.low_rail,
            ),
        }

    def with_parts(self, **changes: PartLike | None) -> Design:
        """Give a copy with other part values.

        Parameters
        ----------
        **changes : Part, float, str or None
            New values [Ohm]; a bare value keeps the part's tolerance and tempco, None takes an
            optional part out.

        Returns
        -------
        Design
            The changed copy.
        """
        names = tuple(name for name, change in changes.items() if change is None)
        stage = self.stage.with_options(*(n for n in self.stage.including if n not in names))
        known = (*self.stage.parts, *self.stage.optional)
        return self._with(stage=stage, parts=_changed(self.parts, changes, "Ω", known))

    def with_levels(self, **changes: PartLike | None) -> Design:
        """Give a copy with other levels.

        Parameters
        ----------
        **changes : Part, float, str or None
            New values [V]; a bare value keeps the tolerance, None returns to the default.

        Returns
        -------
        Design
            The changed copy.
        """
        return self._with(levels=_changed(self.levels, changes, "V", self.stage.levels))

    def with_supply(self, **changes: Any) -> Design:
        """Give a copy with another supply.

        Parameters
        ----------
        **changes : float or str
            Fields of `Supply`.

        Returns
        -------
        Design
            The changed copy.
        """
        _check_fields(self.supply, "supply", changes)
        return self._with(supply=replace(self.supply, **changes))

    def with_device(self, **changes: Any) -> Design:
        """Give a copy with another device.

        Parameters
        ----------
        **changes : float, str or None
            Fields of `Device`.

        Returns
        -------
        Design
            The changed copy; values that are given are no longer typical of a class.
        """
        _check_fields(self.device, "device", changes)
        return self._with(device=self.device.with_values(**changes))

    def with_signal(self, signal: Signal | None) -> Design:
        """Give a copy with another signal description.

        Parameters
        ----------
        signal : Signal or None
            Quantity <-> volts.

        Returns
        -------
        Design
            The changed copy.
        """
        return self._with(signal=signal)

    @property
    def _title(self) -> str:
        return self.name or "Design"

    def _fields(self) -> Sequence[Field]:
        supply, signal = self.supply, self.signal
        rails = f" and {show(supply.low_rail, 'V')}" if supply.split else ""
        tol = f"± {show(supply.tol, '%')}" if supply.tol else ""
        rows = [
            Field("form", self.stage.title),
            *(Field(n, code(p.value, 6), note=p.rating) for n, p in self.parts.items()),
            *(Field(n, p.value, "V", p.rating) for n, p in self.levels.items()),
            Field("supply", f"{show(supply.v_cc, 'V')}{rails}", note=tol),
            Field("device", self.device.title or "without a name"),
        ]
        if signal is not None:
            low, high = signal.span
            span = f"{show_own(low)} to {show_own(high, signal.unit)}"
            rows.append(Field("signal", signal.name, note=span))
        return rows

    def _with(self, **changes: Any) -> Design:
        return replace(self, **changes)

    def as_code(self) -> str:
        """Write the Python that rebuilds this design.

        Returns
        -------
        str
            One expression that needs only ``import hystkit as hk``.
        """
        return design_code(self)


def law_values(
    stage: Stage, device: Mapping[str, Any], given: Mapping[str, Any], v_cc: Any, v_ee: Any
) -> dict[str, Any]:
    """Give the value of every voltage, current and output resistance of a stage's law.

    Parameters
    ----------
    stage : Stage
        Tells which of them the law knows.
    device : mapping of str to float or ndarray
        Device fields that enter the law, as ``Device.law_fields``.
    given : mapping of str to float or ndarray
        Levels that were given [V]; the others take their defaults, which follow the rails.
    v_cc, v_ee : float or ndarray
        Rails [V].

    Returns
    -------
    dict
        Symbol name to value in [V], [A] and [Ohm].
    """
    rails = {"V_CC": v_cc, **({"V_EE": v_ee} if stage.supply == "split" else {})}
    defaults = {
        "V_PU": v_cc,
        "V_L": 0.0,
        "V_OH": v_cc - device["drop_high"],
        "V_OL": v_ee + device["drop_low"],
    }
    levels = {name: given.get(name, defaults.get(name)) for name in stage.levels}
    high = (
        {"R_OH": device["r_high"]} if stage.output == "push-pull" else {"I_LK": device["leakage"]}
    )
    return {
        **rails,
        **levels,
        **high,
        "R_OL": device["r_low"],
        "V_OS": device["offset"],
        "I_BP": device["bias_plus"],
        "I_BN": device["bias_minus"],
    }


def _changed(
    parts: Named[Part], changes: Mapping[str, PartLike | None], unit: str, known: tuple[str, ...]
) -> dict[str, PartLike]:
    faults = [
        unknown_name_fault("part or level of this stage", name, known)
        for name, change in changes.items()
        if change is None and name not in known
    ]
    kept: dict[str, PartLike] = dict(parts)
    for name, change in changes.items():
        if change is None:
            kept.pop(name, None)
        else:
            kept[name] = _changed_part(parts.get(name), name, change, unit, faults)
    if faults:
        raise DesignError.of("these changes", faults)
    return kept


def _changed_part(
    old: Part | None, name: str, change: PartLike, unit: str, faults: list[Fault]
) -> PartLike:
    """Put a bare value in place of the old one; the tolerance stays."""
    if old is None or isinstance(change, Part):
        return change
    number = collect(faults, lambda: read(change, unit=unit, name=name))
    return old if math.isnan(number) else old.with_value(number)


def _check_fields(subject: Supply | Device, kind: str, changes: Mapping[str, Any]) -> None:
    known = [field.name for field in fields(subject)]
    faults = [unknown_name_fault(f"field of a {kind}", n, known) for n in changes if n not in known]
    if faults:
        raise UnknownNameError.of("these changes", faults)

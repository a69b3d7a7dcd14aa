"""Limits of what a stage draws, sees and drives, and the quantities that they limit."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import Fault, InputError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, collect, set_frozen
from hystkit.numeric.operating import input_resistance, operating_point

Floats = NDArray[np.float64]
#: Names of the limits, and their units.
UNITS = {"supply_current": "A", "input_resistance": "Ω", "output_current": "A"}
_STATES = ("high", "low")


@dataclass(frozen=True)
class Limits:
    """What a sized design keeps, at nominal values, at both trips and in both output states.

    Parameters
    ----------
    supply_current : float or str, optional
        Most that network and output draw from V_CC, without the device's own current [A].
    input_resistance : float or str, optional
        Most that either input sees [Ohm].
    output_current : float or str, optional
        Most that the output sources or sinks [A].

    Raises
    ------
    InputError
        Naming every limit that is not a number above zero.
    """

    supply_current: float = math.inf
    input_resistance: float = math.inf
    output_current: float = math.inf

    def __init__(
        self,
        supply_current: Quantity = math.inf,
        input_resistance: Quantity = math.inf,
        output_current: Quantity = math.inf,
    ) -> None:
        given = locals()
        faults: list[Fault] = []
        for field in fields(self):
            set_frozen(self, field.name, _limit(faults, field.name, given[field.name]))
        if faults:
            raise InputError.of("these limits", faults)

    @classmethod
    def of(cls, given: Limits | Mapping[str, Quantity] | None) -> Limits:
        """Take limits as they are, or read them from a mapping of their names.

        Parameters
        ----------
        given : Limits, mapping or None
            Names to numbers or text such as "1 mA".

        Returns
        -------
        Limits
            Without limit where none is given.

        Raises
        ------
        InputError
            Naming every limit that does not exist or cannot be used.
        """
        if isinstance(given, Limits):
            return given
        unknown = [unknown_name_fault("limit", n, UNITS) for n in given or {} if n not in UNITS]
        if unknown:
            raise InputError.of("these limits", unknown)
        return cls(**(given or {}))

    @property
    def given(self) -> dict[str, float]:
        """The limits that were given, by name."""
        return {name: most for name, most in vars(self).items() if math.isfinite(most)}


def _limit(faults: list[Fault], name: str, value: Quantity) -> float:
    if value == math.inf:
        return math.inf
    number = collect(faults, lambda: read(value, unit=UNITS[name], name=name))
    if number <= 0:
        faults.append(
            Fault(
                f"the limit of {name.replace('_', ' ')} is not above zero.",
                asked=f"{name} = {value!r}",
                remedy=f"a magnitude in {UNITS[name]}, or leave it out",
            )
        )
    return number


def loads(
    template: Design, limits: Limits, points: Mapping[str, Floats], trips: tuple[Floats, ...]
) -> dict[str, Floats]:
    """Largest of each limited quantity at both trips and in both output states.

    Parameters
    ----------
    template : Design
        Gives every value that `points` does not.
    limits : Limits
        Only what it limits is worked out.
    points : mapping of str to ndarray, shape (n,)
        Values of parts [Ohm].
    trips : pair of ndarray, shape (n,)
        Upper and lower trip at these points [V].

    Returns
    -------
    dict
        Names of the limits to ndarray, shape (n,), in [A] and [Ohm].
    """
    stage, values = template.stage, {**template.values, **points}
    found: dict[str, list[Any]] = {name: [] for name in limits.given}
    if "input_resistance" in found:
        found["input_resistance"] = _resistances(template, values)
    if found.keys() - {"input_resistance"}:
        for state in _STATES:
            for trip in trips:
                at = operating_point(stage, state, values, trip)
                _append(found, "supply_current", at.supply_current)
                _append(found, "output_current", np.abs(at.output_current))
    shape = np.shape(trips[0])
    return {n: np.broadcast_to(np.maximum.reduce(np.broadcast_arrays(*f)), shape)
            for n, f in found.items()}  # fmt: skip


def least_loads(
    template: Design, limits: Limits, corners: Mapping[str, Floats], trips: tuple[Floats, ...]
) -> dict[str, Floats]:
    """Lower bound of each limited quantity over boxes of part values.

    Parameters
    ----------
    template : Design
        Gives every value that `corners` does not.
    limits : Limits
        Only what it limits is worked out.
    corners : mapping of str to ndarray, shape (corners, boxes)
        Values of parts in the corners of each box [Ohm].
    trips : pair of ndarray, shape (corners, boxes)
        Upper and lower trip there [V].

    Returns
    -------
    dict
        Names of the limits to ndarray, shape (boxes,), in [A] and [Ohm]; 0 where nothing can be
        told.
    """
    values = {**template.values, **corners}
    found: dict[str, list[Any]] = {name: [] for name in limits.given}
    if "input_resistance" in found:
        seen = _resistances(template, values)
        found["input_resistance"] = [np.broadcast_to(r, trips[0].shape).min(axis=0) for r in seen]
    if found.keys() - {"input_resistance"}:
        for trip in trips:
            # The signal moves on its own, between the ends of the trip in the box.
            ends = np.stack([trip.min(axis=0), trip.max(axis=0)])[:, None, :]
            for state in _STATES:
                at = operating_point(template.stage, state, values, ends)
                out = np.broadcast_to(at.output_current, (2, *trip.shape))
                lowest, highest = out.min(axis=(0, 1)), out.max(axis=(0, 1))
                # The sign may turn inside the box: then the magnitude may be zero there.
                _append(found, "output_current", np.maximum(np.maximum(lowest, -highest), 0.0))
                sourced = np.maximum(out, 0.0) * _draws_from_cc(template, state)
                network = np.broadcast_to(at.supply_current, out.shape) - sourced
                least = network.min(axis=(0, 1)) + sourced.min(axis=(0, 1))
                _append(found, "supply_current", least)
    return {n: np.nan_to_num(np.maximum.reduce(f), nan=0.0) for n, f in found.items()}


def _draws_from_cc(template: Design, state: str) -> float:
    """Tell whether what the output sources in a state comes from V_CC, 1 or 0."""
    return float(state == "high" and template.stage.output == "push-pull")


def _resistances(template: Design, values: Mapping[str, Any]) -> list[Any]:
    """Resistance that each input sees in each output state [Ohm]."""
    return [
        input_resistance(template.stage, pin, state, values)
        for pin in ("plus", "minus")
        for state in _STATES
    ]


def _append(found: dict[str, list[Any]], name: str, value: Any) -> None:
    if name in found:
        found[name].append(value)

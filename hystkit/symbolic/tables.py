"""Symbols, parts and trips as tables for a report."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import sympy as sp

from hystkit.base.fields import Field, Viewed
from hystkit.circuit.design import Design
from hystkit.circuit.trip_texts import TripTexts
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.symbols import NON_IDEAL, latex_name, meaning, symbol


@dataclass(frozen=True)
class PartsAndTrips(Viewed):
    """The values of a design and the trip points that its law gives.

    Attributes
    ----------
    law : SwitchingLaw
        Of the design's stage.
    design : Design
        The values.
    """

    law: SwitchingLaw
    design: Design

    def _fields(self) -> Sequence[Field]:
        given = [
            Field(name, value, unit, _tolerance(self.design, name, text), latex_name(name))
            for name, value in self.design.values.items()
            for text, unit in [meaning(name)]
            if value != 0 or name not in NON_IDEAL
        ]
        return [*given, *trip_fields(self.law, self.design)]


def trip_fields(law: SwitchingLaw, design: Design) -> list[Field]:
    """Give the trip points as fields, in volts and in the measurand.

    Parameters
    ----------
    law : SwitchingLaw
        Of the design's stage.
    design : Design
        The values.

    Returns
    -------
    list of Field
        Upper, lower and width.
    """
    # Quantity by quantity: putting them all into one formula takes far longer.
    values = exact_values(design)
    for left, right in law.named_rows:
        values[left] = right.xreplace(values)
    upper, lower = (float(values[symbol(name)]) for name in ("V_upper", "V_lower"))
    trips = TripTexts(upper, lower, design.signal)
    fields = []
    for trip in ("upper", "lower", "width"):
        name = f"V_{trip}"
        quantity = trips.quantity(trip) if trip != "width" else ""
        note = "; ".join(filter(None, (meaning(name)[0], quantity)))
        digits = trips.digits(trip)
        fields.append(Field(name, trips.volts[trip], "V", note, latex_name(name), digits))
    return fields


def exact_values(design: Design) -> dict[sp.Symbol, sp.Rational]:
    """Give the design's values as exact rationals.

    Parameters
    ----------
    design : Design
        The values.

    Returns
    -------
    dict
        Symbol to rational.
    """
    return {symbol(name): sp.Rational(value) for name, value in design.values.items()}


def _tolerance(design: Design, name: str, text: str) -> str:
    part = design.parts.get(name) or design.levels.get(name)
    tol = part.tol if part is not None else design.supply.tol if name in ("V_CC", "V_EE") else 0.0
    return f"{text}, ±{100 * tol:g} %" if tol else text

"""Texts of the tables and of the summary, as the script writes them, too."""

from __future__ import annotations

import math

from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.signals import Linear
from hystkit.figures.lettering import in_measurand, short_unit, trip_digits, written, written_span
from hystkit.numeric.views import Interval, Levels
from hystkit.symbolic.symbols import NON_IDEAL, meaning

TRIPS = ("upper", "lower", "width", "middle")
DASH = "—"


def trip_cells(levels: Levels) -> dict[str, str]:
    """Write what stands in the table of trips.

    Parameters
    ----------
    levels : Levels
        Of the design.

    Returns
    -------
    dict
        Cell such as "upper.volts", "upper.within" or "upper.measurand" to text.
    """
    cells = {}
    for trip in TRIPS:
        value = float(getattr(levels, trip))
        digits = 4 if trip == "width" else trip_digits(value, levels.width)
        cells[f"{trip}.volts"] = written(value, digits=digits)
        cells[f"{trip}.measurand"] = _in_measurand(levels, trip)
        span: Interval | None = getattr(levels, f"{trip}_interval", None)
        known = span if span and all(map(math.isfinite, span)) else None
        missing = levels.not_evaluated if trip in ("upper", "lower") else ""
        cells[f"{trip}.within"] = written_span(*known) if known else missing
        cells[f"{trip}.range"] = _range(levels, known) if known else ""
    return cells


def _in_measurand(levels: Levels, trip: str) -> str:
    signal = levels.signal
    if signal is None:
        return ""
    trips = (levels.lower, levels.upper)
    if trip != "width":
        return in_measurand(signal, getattr(levels, trip), trips)
    lower, upper = (float(signal.quantity(volts)) for volts in trips)
    # A difference stands for itself: it is written in the unit, not converted.
    itself = Linear(1.0, span=signal.span, unit=signal.unit)
    return in_measurand(itself, abs(upper - lower), (lower, upper))


def _range(levels: Levels, span: Interval) -> str:
    """Write an interval in the measurand, the lower end first.

    A ratiometric sensor moves with the supply as the trips do: none is stated for it.
    """
    signal = levels.signal
    if signal is None or signal.ratiometric:
        return ""
    ends = sorted(span, reverse=signal.decreasing)
    trips = (levels.lower, levels.upper)
    low, high = (in_measurand(signal, end, trips) for end in ends)
    return f"{low.removesuffix(short_unit(signal)).rstrip()} to {high}"


def value_rows(design: Design) -> list[tuple[str, str, str, str]]:
    """Write the table of values.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    list of tuple
        Symbol, value, tolerance and meaning of each; non-idealities of zero have an empty value.
    """
    found = {**design.parts, **design.levels}
    rows = []
    for name, value in design.values.items():
        text, unit = meaning(name)
        tol = found[name].tol if name in found else 0.0
        if name in ("V_CC", "V_EE"):
            tol = design.supply.tol
        shown = "" if name in NON_IDEAL and value == 0 else written(value, unit)
        rows.append((name, shown, tolerance_text(tol), text))
    return rows


def tolerance_text(tol: float) -> str:
    """Write a tolerance; nothing for none.

    Parameters
    ----------
    tol : float
        Relative, as a fraction.

    Returns
    -------
    str
        Such as "±1 %".
    """
    return f"±{show(tol, '%')}" if tol else ""

"""What the script needs to know of a design: its form, its values and the tables of the reader."""

from __future__ import annotations

import hashlib
import json
import math
from typing import Any

import numpy as np

from hystkit.base.quantity import TOLERANCE_LETTERS
from hystkit.base.units import unit_of
from hystkit.circuit.checks import infer_sense
from hystkit.circuit.design import Design
from hystkit.circuit.device import LAW_FIELDS
from hystkit.circuit.preferred import SERIES
from hystkit.circuit.stage import Stage
from hystkit.export.page.pen import ADVANCES, SIGNS
from hystkit.numeric.extremes import MAX_RESISTANCES, TOO_MANY
from hystkit.numeric.status import Status

#: Series that the sliders can step through.
SLIDER_SERIES = ("E12", "E24", "E48", "E96", "E192")
COMMON_MODE = ("common_mode_low", "common_mode_high")
#: Points of a sensor that is not a straight line, over its span and a quarter beyond.
_CURVE_POINTS = 385
_MOST_BEYOND = 0.25


def device_fields(stage: Stage) -> tuple[str, ...]:
    """Device fields that have a meaning for a stage.

    Parameters
    ----------
    stage : Stage
        The circuit form.

    Returns
    -------
    tuple of str
        In the order of a datasheet.
    """
    push_pull = stage.output == "push-pull"
    high = ("drop_high", "drop_low", "r_high", "r_low") if push_pull else ("drop_low", "r_low")
    leak = () if push_pull else ("leakage",)
    return (*high, *leak, "offset", "bias_plus", "bias_minus", *COMMON_MODE)


def form_key(stage: Stage) -> str:
    """Name a circuit form, for links and for fragments that stand on one page.

    Parameters
    ----------
    stage : Stage
        With its optional parts.

    Returns
    -------
    str
        The same for all designs of the same circuit.
    """
    wiring = [[getattr(e, "name", ""), *e.nodes] for e in stage.elements]
    told = json.dumps([stage.sense, stage.supply, stage.output, wiring])
    return "hk" + hashlib.sha256(told.encode()).hexdigest()[:8]


def form_data(design: Design) -> dict[str, Any]:
    """Describe what stays fixed while values change.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    dict
        JSON values.
    """
    stage = design.stage
    return {
        "parts": list(stage.parts),
        "levels": list(stage.levels),
        "split": stage.supply == "split",
        "pushPull": stage.output == "push-pull",
        "inverting": stage.sense == "inverting",
        "custom": stage.is_custom,
        "limits": {name: list(pair) for name, pair in design.device.limits.items()},
        "mostResistances": MAX_RESISTANCES,
        "exact": has_exact_intervals(stage),
        "signal": None if design.signal is None else signal_data(design),
    }


def state_data(design: Design) -> dict[str, dict[str, float | None]]:
    """Give the values that the page can change, and their tolerances.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    dict
        "value": name to value in SI units, None for a level that follows its rail or a device
        value that is not stated; "tol": name to relative tolerance, that of the supply at V_CC.
    """
    value: dict[str, float | None] = {name: part.value for name, part in design.parts.items()}
    value["V_CC"] = design.supply.v_cc
    if design.supply.split:
        value["V_EE"] = design.supply.low_rail
    for name in design.stage.levels:
        value[name] = design.levels[name].value if name in design.levels else None
    for name in (*LAW_FIELDS, *COMMON_MODE):
        value[name] = getattr(design.device, name)
    toleranced = {**design.parts, **design.levels}
    tol: dict[str, float | None] = {name: part.tol for name, part in toleranced.items() if part.tol}
    if design.supply.tol:
        tol["V_CC"] = design.supply.tol
    return {"value": value, "tol": tol}


def has_exact_intervals(stage: Stage) -> bool:
    """Tell whether the page can state exact intervals.

    Parameters
    ----------
    stage : Stage
        The circuit form.

    Returns
    -------
    bool
        False where the signal reaches both inputs: a trip point may then run to infinity between
        two corners, which the page does not look for.
    """
    return not stage.is_custom or infer_sense(stage.wiring) is not None


def signal_data(design: Design) -> dict[str, Any]:
    """Describe the sensor of a design: a straight line, or a table to interpolate in.

    Parameters
    ----------
    design : Design
        With a signal; a ratiometric one is described by its share of V_CC.

    Returns
    -------
    dict
        JSON values.
    """
    signal: Any = design.signal
    ratiometric = bool(getattr(signal, "ratiometric", False))
    signal = signal.at(1.0) if ratiometric else signal
    told = {
        "name": signal.name,
        "unit": signal.unit,
        "span": [float(end) for end in signal.span],
        "ratiometric": ratiometric,
    }
    line = _line(signal)
    if line is not None:
        return {**told, "kind": "linear", "at_zero": line[0], "per_unit": line[1]}
    low, high = signal.span
    beyond = _MOST_BEYOND * (high - low)
    quantities = np.linspace(low - beyond, high + beyond, _CURVE_POINTS)
    points = [(float(q), _volts(signal, float(q))) for q in quantities]
    kept = _monotone([(q, v) for q, v in points if math.isfinite(v)])
    return {
        **told,
        "kind": "table",
        "quantities": [float(f"{q:.9g}") for q, _ in kept],
        "volts": [float(f"{v:.9g}") for _, v in kept],
    }


def _line(signal: Any) -> tuple[float, float] | None:
    """Give voltage at zero and slope where the sensor is a straight line."""
    if hasattr(signal, "per_unit") and hasattr(signal, "at_zero"):
        return float(signal.at_zero), float(signal.per_unit)
    low, high = signal.span
    at = np.linspace(low - (high - low) / 8, high + (high - low) / 8, 11)
    volts = np.array([_volts(signal, float(q)) for q in at])
    slope = (volts[-1] - volts[0]) / (at[-1] - at[0])
    offset = volts[0] - slope * at[0]
    with np.errstate(invalid="ignore"):
        straight = np.abs(offset + slope * at - volts) <= 1e-13 * np.max(np.abs(volts))
    return (float(offset), float(slope)) if slope and np.all(straight) else None


def _monotone(points: list[tuple[float, float]]) -> list[tuple[float, float]]:
    """Keep the stretch around the middle over which the voltage runs one way."""
    middle = len(points) // 2
    sign = math.copysign(1.0, points[middle + 1][1] - points[middle][1])
    first = last = middle
    while first > 0 and sign * (points[first][1] - points[first - 1][1]) > 0:
        first -= 1
    while last + 1 < len(points) and sign * (points[last + 1][1] - points[last][1]) > 0:
        last += 1
    return points[first : last + 1]


def tables() -> dict[str, Any]:
    """Give the tables that the script reads and writes numbers with; the same for all designs.

    Returns
    -------
    dict
        JSON values.
    """
    units = {}
    for symbol in ("Ω", "V", "A", "%"):
        known = unit_of(symbol)
        units[symbol] = {
            "names": sorted(known.names),
            "suffixes": dict(known.suffixes),
            "marks": dict(known.marks),
            "shown": {str(scale): text for scale, text in known.shown.items()},
        }
    return {
        "units": units,
        "tolerances": dict(TOLERANCE_LETTERS),
        "series": {name: list(SERIES[name]) for name in SLIDER_SERIES},
        "tooMany": TOO_MANY,
        "status": {status.name: status.message for status in Status},
        "advances": list(ADVANCES),
        "signs": SIGNS,
    }


def _volts(signal: Any, quantity: float) -> float:
    with np.errstate(all="ignore"):
        try:
            return float(signal.volts(quantity))
        except (ArithmeticError, ValueError):
            return math.nan

"""Which quantities of a design are uncertain, and how far each may lie off."""

from __future__ import annotations

from hystkit.circuit.design import Design
from hystkit.numeric.views import Interval


def toleranced(design: Design, excursion: float = 0.0) -> dict[str, Interval]:
    """Lowest and highest value of every quantity that is uncertain.

    Parameters
    ----------
    design : Design
        Tolerances and temperature coefficients stand at its parts and levels, a tolerance at its
        supply, limits and the offset's drift at its device.
    excursion : float, default 0
        Farthest distance from the temperature that the values are stated for [K].

    Returns
    -------
    dict
        Symbol or device field to (lowest, highest).
    """
    found = {**design.parts, **design.levels}
    box = {n: _ends(p.value, p.tol, abs(p.tempco) * excursion) for n, p in found.items()}
    box["V_CC"] = _ends(design.supply.v_cc, design.supply.tol)
    if design.supply.split:
        box["V_EE"] = _ends(design.supply.low_rail, design.supply.tol)
    for name, (low, high) in _device_limits(design, excursion).items():
        if acts(design, name):
            box[name] = (low, high)
    return {name: (low, high) for name, (low, high) in box.items() if low < high}


def _device_limits(design: Design, excursion: float) -> dict[str, Interval]:
    limits = dict(design.device.limits)
    drift = design.device.offset_drift * excursion
    if drift:
        low, high = limits.get("offset", (design.device.offset, design.device.offset))
        limits["offset"] = (low - drift, high + drift)
    return limits


def acts(design: Design, name: str) -> bool:
    """Tell whether a device field enters the law of a design.

    Parameters
    ----------
    design : Design
        Levels that are given replace the drops; an open collector has no high side of its own.
    name : str
        A field of `LAW_FIELDS`.

    Returns
    -------
    bool
        Whether the trips depend on it.
    """
    push_pull = design.stage.output == "push-pull"
    return {
        "drop_high": push_pull and "V_OH" not in design.levels,
        "drop_low": "V_OL" not in design.levels,
        "r_high": push_pull,
        "leakage": not push_pull,
    }.get(name, True)


def is_resistance(design: Design, name: str) -> bool:
    """Tell the resistances of a box from its voltages and currents.

    Parameters
    ----------
    design : Design
        Names its parts.
    name : str
        Symbol or device field.

    Returns
    -------
    bool
        True for parts and for the device's output resistances.
    """
    return name in design.parts or name in ("r_high", "r_low")


def _ends(value: float, tol: float, drift: float = 0.0) -> Interval:
    low, high = sorted((value * (1 - tol) * (1 - drift), value * (1 + tol) * (1 + drift)))
    return low, high

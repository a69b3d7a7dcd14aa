"""Checks on the trips themselves: order, size against what moves them, supply."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from itertools import product

import numpy as np

from hystkit.base.quantity import show
from hystkit.numeric.extremes import not_evaluated, trip_intervals
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding

Check = Callable[[Evidence], Iterator[Finding]]

#: Share of the width that an error may take, common practice: a tenth.
SMALL_SHARE = 0.1
#: Symbols of the bias currents, and the device fields that hold them.
_BIAS = {"I_BP": "bias_plus", "I_BN": "bias_minus"}


def order(evidence: Evidence) -> Iterator[Finding]:
    """Check that the trips stay in order over all tolerances.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Distance between the lowest upper and the highest lower trip; at the nominal supply where
        the signal is a share of it, for both then follow it together.
    """
    signal = evidence.design.signal
    follows = signal is not None and signal.ratiometric
    held = evidence.design.with_supply(tol=0.0) if follows else evidence.design
    intervals = trip_intervals(held)
    if intervals is None:
        why = not_evaluated(held)
        yield Finding(
            "order",
            "note",
            why or "no tolerances stated: trips are nominal only",
            remedy="no tolerance on those that matter least" if why else "state them",
        )
        return
    (upper_low, upper_high), (lower_low, lower_high) = intervals
    gap = upper_low - lower_high
    if math.isnan(gap):
        yield Finding(
            "order",
            "fault",
            "the stage does not switch at some combination of tolerances",
            remedy="a wider band or tighter tolerances",
        )
        return
    spread = max(upper_high - upper_low, lower_high - lower_low)
    severity = "pass" if gap > 0 else "warning"
    yield Finding(
        "order",
        severity,
        f"upper from {show(upper_low, 'V')}, lower up to {show(lower_high, 'V')};"
        f" the trips spread by {show(spread, 'V', 3)}{', the supply apart' if follows else ''}",
        gap,
        "V",
        ""
        if gap > 0
        else "a wider band or tighter tolerances: from unit to unit the bands overlap",
    )


def offset(evidence: Evidence) -> Iterator[Finding]:
    """Check the input offset against the width.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        How much of a tenth of the width the offset leaves.
    """
    largest = _largest_offset(evidence)
    if largest == 0:
        yield Finding("offset", "note", "input offset not stated", remedy="the datasheet's limits")
        return
    move = _offset_move(evidence)
    yield share_of_width(
        "offset",
        f"an offset of {show(largest, 'V')} moves the trips by {show(move, 'V', 3)}",
        move,
        evidence.width,
        "a device with less offset, or a wider band",
    )


def bias(evidence: Evidence) -> Iterator[Finding]:
    """Check what the bias currents do against the width.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        How much of a tenth of the width they leave.
    """
    if not np.any(_bias_ends(evidence)):
        yield Finding("bias", "note", "bias currents not stated", remedy="the datasheet's limits")
        return
    move = _bias_move(evidence)
    seen = evidence.input_resistances()
    yield share_of_width(
        "bias",
        f"bias currents move a trip by {show(move, 'V', 3)}; the inputs see"
        f" {show(seen['plus'], 'Ω', 3)} (plus) and {show(seen['minus'], 'Ω', 3)} (minus)",
        move,
        evidence.width,
        "smaller resistances at the inputs, or a device with less bias current",
    )


def supply(evidence: Evidence) -> Iterator[Finding]:
    """Check how far the supply moves the trips.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Rate per volt of V_CC, and against the width over the supply's tolerance.
    """
    rails, tol = evidence.design.supply, evidence.design.supply.tol
    step = (abs(rails.v_cc) or 1.0) * (tol or 0.01)
    # Trips are affine in the rails with all that follows them: a difference is the exact rate.
    rate_move = evidence.moves({}, V_CC=rails.v_cc + np.array((-step, step)))
    rate = f"the supply moves the trips by {show(rate_move / step, 'V', 3)} per volt of V_CC"
    if tol == 0:
        yield Finding("supply", "note", f"{rate}; its tolerance is not stated", remedy="state it")
        return
    ends = [rail * np.array((1 - tol, 1 + tol)) for rail in (rails.v_cc, rails.low_rail)]
    names = ("V_CC", "V_EE")[: 1 + rails.split]
    corners = np.array(list(product(*ends[: len(names)]))).T
    move = evidence.moves({}, **dict(zip(names, corners, strict=True)))
    yield share_of_width(
        "supply",
        f"{rate}, {show(move, 'V', 3)} over its tolerance",
        move,
        evidence.width,
        "a reference of its own, or a sensor that follows the supply too",
    )


def error_move(evidence: Evidence) -> float:
    """Give how far offset and bias currents move a trip together.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Returns
    -------
    float
        [V]; 0 where neither is stated.
    """
    return _offset_move(evidence) + _bias_move(evidence)


def _largest_offset(evidence: Evidence) -> float:
    device = evidence.design.device
    return max(device.limits.get("offset", (device.offset, device.offset)), key=abs)


def _offset_move(evidence: Evidence) -> float:
    return evidence.moves({"V_OS": 0.0}, V_OS=_largest_offset(evidence))


def _bias_ends(evidence: Evidence) -> list[tuple[float, float]]:
    device = evidence.design.device
    return [device.limits.get(f, (getattr(device, f),) * 2) for f in _BIAS.values()]


def _bias_move(evidence: Evidence) -> float:
    # Both currents act at once, each at either of its limits.
    corners = np.array(list(product(*_bias_ends(evidence)))).T
    return evidence.moves(dict.fromkeys(_BIAS, 0.0), **dict(zip(_BIAS, corners, strict=True)))


def share_of_width(name: str, text: str, move: float, width: float, remedy: str) -> Finding:
    """Judge what moves a trip against the width.

    Parameters
    ----------
    name, text : str
        Of the finding.
    move, width : float
        Largest move of a trip, and the nominal width [V].
    remedy : str
        What to change where it is too much.

    Returns
    -------
    Finding
        A pass up to a tenth of the width, a fault from the whole of it.
    """
    allowed = SMALL_SHARE * width
    if math.isnan(move):
        return Finding(
            name, "fault", "the stage does not switch at the limits of this", remedy=remedy
        )
    if move <= allowed:
        return Finding(name, "pass", text, allowed - move, "V")
    severity = "fault" if move >= width else "warning"
    text = f"{text}: {100 * move / width:.0f} % of the width"
    return Finding(name, severity, text, allowed - move, "V", remedy)


TRIP_CHECKS: tuple[Check, ...] = (order, offset, bias, supply)

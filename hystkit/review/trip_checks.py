"""Checks on the trips themselves: order, size against what moves them, supply."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from hystkit.base.quantity import show
from hystkit.numeric.extremes import trip_intervals
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding

Check = Callable[[Evidence], Iterator[Finding]]

#: Share of the width that an error may take, common practice: a tenth.
SMALL_SHARE = 0.1


def order(evidence: Evidence) -> Iterator[Finding]:
    """Check that the trips stay in order over all tolerances.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Distance between the lowest upper and the highest lower trip.
    """
    intervals = trip_intervals(evidence.design)
    if intervals is None:
        yield Finding(
            "order", "note", "no tolerances stated: trips are nominal only", remedy="state them"
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
        f" the trips spread by {show(spread, 'V', 3)}",
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
    device = evidence.design.device
    low, high = device.limits.get("offset", (device.offset, device.offset))
    largest = max((low, high), key=abs)
    if largest == 0:
        yield Finding("offset", "note", "input offset not stated", remedy="the datasheet's limits")
        return
    bare = evidence.without(V_OS=0.0)
    moved = evidence.without(V_OS=largest)
    move = max(abs(moved.upper - bare.upper), abs(moved.lower - bare.lower))
    yield _share(
        "offset",
        f"an offset of {show(largest, 'V')} moves the trips by {show(float(move), 'V', 3)}",
        float(move),
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
    device = evidence.design.device
    largest = {
        name: max(device.limits.get(field, (getattr(device, field),) * 2), key=abs)
        for name, field in (("I_BP", "bias_plus"), ("I_BN", "bias_minus"))
    }
    if not any(largest.values()):
        yield Finding("bias", "note", "bias currents not stated", remedy="the datasheet's limits")
        return
    bare = evidence.without(I_BP=0.0, I_BN=0.0)
    moves = [
        abs(getattr(evidence.without(**{"I_BP": 0.0, "I_BN": 0.0, name: value}), trip) - nominal)
        for name, value in largest.items()
        for trip, nominal in (("upper", bare.upper), ("lower", bare.lower))
    ]
    seen = evidence.input_resistances()
    yield _share(
        "bias",
        f"bias currents move a trip by {show(float(max(moves)), 'V', 3)}; the inputs see"
        f" {show(seen['plus'], 'Ω', 3)} (plus) and {show(seen['minus'], 'Ω', 3)} (minus)",
        float(max(moves)),
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
    v_cc, tol = evidence.design.supply.v_cc, evidence.design.supply.tol
    step = v_cc * (tol or 0.01)
    # Trips are affine in the supply with all that follows it: a difference is the exact rate.
    move = evidence.shift(V_CC=v_cc + step)
    rate = f"the supply moves the trips by {show(move / step, 'V', 3)} per volt of V_CC"
    if tol == 0:
        yield Finding("supply", "note", f"{rate}; its tolerance is not stated", remedy="state it")
        return
    yield _share(
        "supply",
        f"{rate}, {show(move, 'V', 3)} over its tolerance",
        move,
        evidence.width,
        "a reference of its own, or a sensor that follows the supply too",
    )


def _share(name: str, text: str, move: float, width: float, remedy: str) -> Finding:
    allowed = SMALL_SHARE * width
    if move <= allowed:
        return Finding(name, "pass", text, allowed - move, "V")
    severity = "fault" if move >= width else "warning"
    return Finding(
        name, severity, f"{text}: {move / width:.0%} of the width", allowed - move, "V", remedy
    )


TRIP_CHECKS: tuple[Check, ...] = (order, offset, bias, supply)

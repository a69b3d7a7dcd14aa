"""Checks on what surrounds the stage: the signal's reach and source, sensor faults, start-up."""

from __future__ import annotations

import math
from collections.abc import Iterator

from hystkit.base.quantity import code, show
from hystkit.numeric.source import SOURCE, has_resistance
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding
from hystkit.review.trip_checks import Check, share_of_width


def reach(evidence: Evidence) -> Iterator[Finding]:
    """Check that the signal passes both trips within its span.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Distance of the worst trip from the end of the span.
    """
    found = evidence.levels
    if found.signal_span is None:
        yield Finding("reach", "note", "signal not described", remedy="signal=hk.signals...")
        return
    low, high = found.signal_span
    if not (math.isfinite(low) and math.isfinite(high)):
        yield Finding(
            "reach",
            "warning",
            "the signal has no voltage at an end of its span",
            remedy="a span over which it is known",
        )
        return
    margin = min(found.lower - low, high - found.upper)
    yield Finding(
        "reach",
        "pass" if margin > 0 else "fault",
        f"the signal spans {show(low, 'V')} to {show(high, 'V')}",
        margin,
        "V",
        "" if margin > 0 else "trips inside the span, or the stage sticks in one state",
    )


def source_resistance(evidence: Evidence) -> Iterator[Finding]:
    """Check what the resistance of the signal's source does to the trips.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        How much of a tenth of the width is left by the move from the design's trips to those at
        which the source has the resistance that it has there; none without a signal.
    """
    signal = evidence.design.signal
    if signal is None:
        return
    name = "source resistance"
    if not has_resistance(signal):
        yield Finding(name, "pass", "the signal's source is stated without a resistance")
        return
    found, start = evidence.at_source, evidence.levels
    move = float(max(abs(found.upper - start.upper), abs(found.lower - start.lower)))
    remedies = ["a buffer behind the source"]
    if evidence.design.stage.sense == "non-inverting":
        remedies.append("a larger R_I")
    text = ""
    if not math.isnan(move):
        ohms = sorted(evidence.source_ohms())
        span = " to ".join(dict.fromkeys(show(end, "Ω", 3) for end in ohms))
        text = f"the source has {span} at the trips and moves them by {show(move, 'V', 3)}"
        if SOURCE in evidence.design.parts:
            text += f" from where {code(evidence.design.parts[SOURCE].value)} puts them"
        remedies.insert(0, f"{SOURCE}={code(sum(ohms) / 2, 3)} fitted in the design")
    yield share_of_width(name, text, move, evidence.width, ", or ".join(remedies))


def sensor_faults(evidence: Evidence) -> Iterator[Finding]:
    """Tell what the load does when the sensor is open or shorted.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        One for open and one for short, where the signal tells its reading.
    """
    signal = evidence.design.signal
    for name, reading in (("open", "on_open"), ("short", "on_short")):
        volts = getattr(signal, reading, None)
        check = f"sensor {name}"
        if signal is None:
            return
        if volts is None:
            yield Finding(check, "note", "reading not known", remedy="test it on the built stage")
            continue
        state = evidence.state_at(float(volts))
        if state is None:
            yield Finding(
                check,
                "warning",
                f"reads {show(float(volts), 'V')}, inside the band: the load stays as it is",
                remedy="trips that leave this reading outside the band",
            )
            continue
        on = state == evidence.load
        text = f"reads {show(float(volts), 'V')}: the load is {'on' if on else 'off'}"
        if evidence.safe is None:
            yield Finding(check, "note", f"{text}; no safe state declared", remedy="safe=...")
            continue
        good = on == (evidence.safe == "on")
        yield Finding(
            check,
            "pass" if good else "fault",
            f"{text}, safe is {evidence.safe}",
            remedy="" if good else "the sensor in the other arm, the other sense, or a watch on it",
        )


def start_up(evidence: Evidence) -> Iterator[Finding]:
    """Tell what decides the state when the supply comes up inside the band.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Whether the start state is provided for, and whether it is the safe one.
    """
    found = evidence.levels
    band = f"between {show(found.lower, 'V')} and {show(found.upper, 'V')}"
    if evidence.start is None:
        yield Finding(
            "start-up",
            "note",
            f"with the signal {band} at power-up or after a brown-out either state may result",
            remedy="a reset or a capacitor that decides it; then start=...",
        )
        return
    on = evidence.start == evidence.load
    text = f"starts with the load {'on' if on else 'off'} when the signal is {band}"
    wrong = evidence.safe is not None and on != (evidence.safe == "on")
    yield Finding(
        "start-up",
        "warning" if wrong else "pass",
        f"{text}, safe is {evidence.safe}" if evidence.safe else text,
        remedy="a start in the other state" if wrong else "",
    )


PLANT_CHECKS: tuple[Check, ...] = (reach, source_resistance, sensor_faults, start_up)

"""Checks on the device: input range, output currents and levels, loop gain."""

from __future__ import annotations

from collections.abc import Iterator

from hystkit.base.quantity import show
from hystkit.circuit.classes import device_classes
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding
from hystkit.review.trip_checks import Check

#: Beyond V_EE by more than this an input may forward-bias its junction and turn the output over.
BELOW_RAIL = 0.3
#: Share of the high level that loading may take, common practice: a tenth.
LOADING = 0.1
#: Loop gain from which the output snaps over cleanly, common practice.
CLEAR_LOOP_GAIN = 10.0


def common_mode(evidence: Evidence) -> Iterator[Finding]:
    """Check the input pins at both trips and over the signal span, at the lowest supply.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Distance of the worst pin from the nearest end of the range.
    """
    found = evidence.levels
    if found.common_mode is None:
        yield Finding(
            "common mode", "note", "input range of the device not stated", remedy="state it"
        )
        return
    supply = evidence.design.supply
    low = found.common_mode[0]
    high = found.common_mode[1] - supply.tol * abs(supply.v_cc)
    pins = [*evidence.pin_voltages(), *(found.pins or ())]
    margin = min(min(pins) - low, high - max(pins))
    text = (
        f"pins from {show(min(pins), 'V')} to {show(max(pins), 'V')}, allowed"
        f" {show(low, 'V')} to {show(high, 'V')} at the lowest supply"
    )
    if margin >= 0:
        yield Finding("common mode", "pass", text, margin, "V")
        return
    at_trips = found.pins is not None and low <= found.pins[0] and found.pins[1] <= high
    overturned = min(pins) < found.v_ee - BELOW_RAIL
    yield Finding(
        "common mode",
        "warning" if at_trips and not overturned else "fault",
        text + (", beyond the negative rail by more than 0.3 V" if overturned else ""),
        margin,
        "V",
        "a device with a wider input range, a divided signal, or trips nearer to the middle",
    )


def output_current(evidence: Evidence) -> Iterator[Finding]:
    """Check what the output sources and sinks.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        One for each state in which the device drives.
    """
    device = evidence.design.device
    sides = [("output low", "low", -1, device.sink_current)]
    if evidence.design.stage.output == "push-pull":
        sides.append(("output high", "high", 1, device.source_current))
    for name, state, sign, most in sides:
        current = _driven(evidence, state, sign)
        verb = "sinks" if state == "low" else "sources"
        text = f"the output {verb} {show(current, 'A', 3)}"
        if most is None:
            yield Finding(name, "note", f"{text}; the limit is not stated", remedy="state it")
            continue
        margin = most - current
        yield Finding(
            name,
            "pass" if margin >= 0 else "fault",
            f"{text}, allowed {show(most, 'A', 3)}",
            margin,
            "A",
            "" if margin >= 0 else "larger pull-up, feedback or load resistors",
        )


def _driven(evidence: Evidence, state: str, sign: int) -> float:
    """Highest current that the output drives; that of a declared drive knows when it blocks."""
    drive = evidence.service.drive
    if drive is not None and evidence.design in (drive.design, drive.given):
        return drive.output_current(state)
    return max(sign * float(p.output_current) for p in evidence.points if p.state == state)


def loading(evidence: Evidence) -> Iterator[Finding]:
    """Check how far pull-up, feedback and load drag the high level down.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Loss of the high level.
    """
    values = evidence.design.values
    unloaded = values["V_OH"] if "V_OH" in values else values.get("V_PU")
    if unloaded is None:
        return
    swing = unloaded - values["V_OL"]
    loss = max(unloaded - float(p.voltages["out"]) for p in evidence.points if p.state == "high")
    margin = LOADING * swing - loss
    text = f"the high level loses {show(loss, 'V', 3)} of a swing of {show(swing, 'V', 3)}"
    yield Finding(
        "loading",
        "pass" if margin >= 0 else "warning",
        text,
        margin,
        "V",
        "" if margin >= 0 else "a smaller pull-up, or larger feedback and load resistors",
    )


def loop_gain(evidence: Evidence) -> Iterator[Finding]:
    """Check that positive feedback is real: gain times feedback above one.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        Loop gain less one.
    """
    share = evidence.feedback()
    gain = evidence.design.device.gain
    text = f"{share:.3g} of the output's move comes back"
    if gain is None:
        yield Finding(
            "loop gain", "note", f"{text}; the gain is not stated", remedy="the datasheet's least"
        )
        return
    loop = gain * share
    severity = "pass" if loop >= CLEAR_LOOP_GAIN else "warning" if loop > 1 else "fault"
    yield Finding(
        "loop gain",
        severity,
        f"{text}: loop gain {loop:.3g}",
        loop - 1,
        "",
        "" if severity == "pass" else "a smaller R_F, or a device with more gain",
    )


def typical_values(evidence: Evidence) -> Iterator[Finding]:
    """Tell which values of the device belong to a class, and whether it has this output.

    Parameters
    ----------
    evidence : Evidence
        The design.

    Yields
    ------
    Finding
        One while a value is typical of a class, one where the class has the other output.
    """
    device, output = evidence.design.device, evidence.design.stage.output
    if not device.typical:
        return
    known = device_classes.get(device.name)
    if known is not None and known.output != output:
        yield Finding(
            "device class",
            "warning",
            f"the {device.name} has a {known.output} output, the stage has a {output} one",
            remedy="a class with the output of the stage, or the other output",
        )
    names = ", ".join(name.replace("_", " ") for name in device.typical)
    yield Finding(
        "device values",
        "note",
        f"typical of {f'the {device.name}' if device.name else 'a class'}: {names}",
        remedy="replace them from the datasheet of the device",
    )


DEVICE_CHECKS: tuple[Check, ...] = (
    common_mode,
    output_current,
    loading,
    loop_gain,
    typical_values,
)

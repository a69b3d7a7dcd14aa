"""Checks on the stage in service: noise, cycling, what it drives, what its load does to it."""

from __future__ import annotations

import math
from collections.abc import Iterator

from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.analyses.noise.chatter import chatter
from hystkit.analyses.noise.inverse import width_for
from hystkit.base.quantity import show
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding
from hystkit.review.trip_checks import Check


def noise(evidence: Evidence) -> Iterator[Finding]:
    """Check the width against the noise on a passage through the band.

    Parameters
    ----------
    evidence : Evidence
        The design, with the noise and a slope, or a plant that gives one.

    Yields
    ------
    Finding
        Width beyond what the noise needs; none where no noise is declared.
    """
    service = evidence.service
    if service.noise is None:
        return
    slope = evidence.slope
    if math.isnan(slope):
        yield Finding(
            "noise",
            "note",
            f"noise of {show(service.noise.rms, 'V', 3)} rms; the signal's slope is not known",
            remedy="slope=... in V/s, or plant=...",
        )
        return
    needed = float(width_for(probability=service.probability, noise=service.noise, slope=slope))
    found = chatter(evidence.width, service.noise, slope)
    margin = evidence.width - needed
    chance = f"{float(found.probability):.2g} of the passages at {show(slope, 'V/s', 3)}"
    text = f"noise switches again in {chance}, allowed are {service.probability:.2g}"
    yield Finding(
        "noise",
        "pass" if margin >= 0 else "fault" if evidence.width < needed / 2 else "warning",
        text if found.inside_range else f"{text}; {found.note}",
        margin,
        "V",
        "" if margin >= 0 else f"a width of {show(needed, 'V', 3)}, a filter, or a faster passage",
    )


def cycling(evidence: Evidence) -> Iterator[Finding]:
    """Check that the plant cycles between the trips, and how often the load starts.

    Parameters
    ----------
    evidence : Evidence
        The design, with a plant and, where declared, what the load stands.

    Yields
    ------
    Finding
        Whether it cycles, and one for each declared limit; none without a plant.
    """
    cycle, service = evidence.cycle, evidence.service
    if cycle is None:
        return
    status = CycleStatus(int(cycle.status))
    if status is not CycleStatus.CYCLES:
        note = status is CycleStatus.UNPROVED
        yield Finding(
            "cycling",
            "note" if note else "fault",
            status.message,
            remedy="hk.simulate" if note else _REMEDIES.get(status, "trips that the plant reaches"),
        )
        return
    yield from _starts(cycle, service.starts_per_hour)
    yield from _times(cycle, {"on": service.min_on, "off": service.min_off})


def drive(evidence: Evidence) -> Iterator[Finding]:
    """Check what the output drives, and that the design has it in.

    Parameters
    ----------
    evidence : Evidence
        The design, with a drive.

    Yields
    ------
    Finding
        Every warning of the drive, or that it has none; none without a drive.
    """
    found = evidence.service.drive
    if found is None:
        return
    for warning in found.warnings:
        yield Finding("drive", "warning", warning, remedy="other values in hk.drive")
    moved = max(
        abs(float(found.trips_after.upper) - evidence.levels.upper),
        abs(float(found.trips_after.lower) - evidence.levels.lower),
    )
    allowed = _UNSAID * evidence.width
    if not moved <= allowed:
        yield Finding(
            "drive",
            "warning",
            f"with what it drives the trips lie {show(moved, 'V', 3)} from those of this design",
            allowed - moved,
            "V",
            "review the design of the drive: hk.drive(...).design",
        )
    elif not found.warnings:
        yield Finding("drive", "pass", f"the load takes {show(found.drive_current, 'A', 3)}")


def load_step(evidence: Evidence) -> Iterator[Finding]:
    """Check that switching the load does not turn the stage back.

    Parameters
    ----------
    evidence : Evidence
        The design, with a load step.

    Yields
    ------
    Finding
        What the load's effect leaves of the width; none without a load step.
    """
    found = evidence.load_step
    if found is None:
        return
    margin = float(found.margin)
    good = margin > 0
    yield Finding(
        "load step",
        "pass" if good else "fault",
        found.message,
        margin,
        "V",
        ""
        if good
        else f"a width of more than {show(float(found.width) - margin, 'V', 3)}, a stiffer supply"
        " or ground, or a reading taken before the load's resistance",
    )


#: Share of the width by which the trips of a design may differ from those with its load.
_UNSAID = 0.01
_REMEDIES = {
    CycleStatus.WRONG_WAY: "the other sense, or load=... in the other state",
    CycleStatus.CHATTERS: "a wider band",
}


def _starts(cycle: Cycle, most: float | None) -> Iterator[Finding]:
    starts = float(cycle.starts_per_hour)
    text = f"{starts:.3g} starts per hour, {float(cycle.duty):.0%} on"
    if most is None:
        yield Finding("cycling", "note", f"{text}; what the load stands is not declared",
                      remedy="starts_per_hour=...")  # fmt: skip
        return
    good = starts <= most
    yield Finding(
        "cycling",
        "pass" if good else "warning",
        f"{text}, allowed are {most:.3g}",
        most - starts,
        "1/h",
        "" if good else "a wider band: hk.width_window tells how wide",
    )


def _times(cycle: Cycle, least: dict[str, float | None]) -> Iterator[Finding]:
    for name, wanted in least.items():
        if wanted is None:
            continue
        time = float(getattr(cycle, f"{name}_time"))
        good = time >= wanted
        yield Finding(
            f"{name} time",
            "pass" if good else "warning",
            f"{name} for {show(time, 's', 3)}, at least {show(wanted, 's', 3)} is asked for",
            time - wanted,
            "s",
            "" if good else "a wider band, or a timer",
        )


SERVICE_CHECKS: tuple[Check, ...] = (noise, cycling, drive, load_step)

"""Checks on the stage in service: noise, cycling, what it drives, what its load does to it."""

from __future__ import annotations

import math
from collections.abc import Iterator

from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.analyses.noise.chatter import chatter
from hystkit.analyses.noise.hum import hum_width
from hystkit.analyses.noise.inverse import width_for
from hystkit.analyses.noise.model import Noise
from hystkit.base.quantity import show, show_own
from hystkit.review.evidence import Evidence
from hystkit.review.finding import Finding
from hystkit.review.service import Service
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
        yield _without_slope("noise", f"noise of {show(service.noise.rms, 'V', 3)} rms")
        return
    needed = _for_noise(service, service.noise, slope)
    found = chatter(evidence.width, service.noise, slope)
    chance = f"{_share(float(found.probability))} of the passages at {show(slope, 'V/s', 3)}"
    text = f"noise switches again in {chance}, allowed are {_share(service.probability)}"
    text = text if found.inside_range else f"{text}; {found.note}"
    yield _wide_enough("noise", text, evidence.width, needed)


def hum(evidence: Evidence) -> Iterator[Finding]:
    """Check the width against hum on a passage through the band, on top of the noise.

    Parameters
    ----------
    evidence : Evidence
        The design, with hum and a slope, or a plant that gives one.

    Yields
    ------
    Finding
        Width beyond what hum and noise need; none where no hum is declared.
    """
    service = evidence.service
    if service.hum is None:
        return
    amplitude, frequency = service.hum
    told = f"hum of {show(amplitude, 'V', 3)} at {show(frequency, 'Hz', 3)}"
    slope = evidence.slope
    if math.isnan(slope):
        yield _without_slope("hum", told)
        return
    needed = float(hum_width(amplitude, frequency, slope))
    text = f"{told} takes {show(needed, 'V', 3)} at {show(slope, 'V/s', 3)}"
    if service.noise is not None:
        quiet = _for_noise(service, service.noise, slope)
        text, needed = f"{text}, noise {show(quiet, 'V', 3)}", needed + quiet
    yield _wide_enough("hum", text, evidence.width, needed)


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
    if service.plant is None:
        return
    if cycle is None:
        text = "no cycle: the band lies outside the span of the signal"
        yield Finding("cycling", "fault", text, remedy="trips within the span")
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
#: No rarer chance is told: nobody sees it happen.
_RAREST = 1e-9
_REMEDIES = {
    CycleStatus.WRONG_WAY: "the other sense, or load=... in the other state",
    CycleStatus.CHATTERS: "a wider band",
}


def _for_noise(service: Service, noise: Noise, slope: float) -> float:
    return float(width_for(probability=service.probability, noise=noise, slope=slope))


def _without_slope(name: str, text: str) -> Finding:
    remedy = "slope=... in V/s, or plant=..."
    return Finding(name, "note", f"{text}; the signal's slope is not known", remedy=remedy)


def _wide_enough(name: str, text: str, width: float, needed: float) -> Finding:
    good = width >= needed
    severity = "pass" if good else "fault" if width < needed / 2 else "warning"
    remedy = "" if good else f"a width of {show(needed, 'V', 3)}, a filter, or a faster passage"
    return Finding(name, severity, text, width - needed, "V", remedy)


def _share(probability: float) -> str:
    return "fewer than one in 10⁹" if probability < _RAREST else show(probability, digits=2)


def _starts(cycle: Cycle, most: float | None) -> Iterator[Finding]:
    starts = float(cycle.starts_per_hour)
    text = f"{show_own(starts, digits=3)} starts per hour, {show(float(cycle.duty), '%', 3)} on"
    if most is None:
        yield Finding("cycling", "note", f"{text}; what the load stands is not declared",
                      remedy="starts_per_hour=...")  # fmt: skip
        return
    good = starts <= most
    yield Finding(
        "cycling",
        "pass" if good else "warning",
        f"{text}, allowed are {show_own(most, digits=3)}",
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


SERVICE_CHECKS: tuple[Check, ...] = (noise, hum, cycling, drive, load_step)

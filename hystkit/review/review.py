"""The review of a design: every check that applies, the worst finding first."""

from __future__ import annotations

from typing import Any

from hystkit.base.errors import InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.review.axis import unit_faults
from hystkit.review.device_checks import DEVICE_CHECKS
from hystkit.review.evidence import Evidence
from hystkit.review.finding import SIGNS, Finding, Review
from hystkit.review.plant_checks import PLANT_CHECKS
from hystkit.review.service import Service, service_of
from hystkit.review.service_checks import SERVICE_CHECKS
from hystkit.review.trip_checks import TRIP_CHECKS


def review(
    design: Design,
    *,
    load: str = "high",
    safe: str | None = None,
    start: str | None = None,
    **service: Any,
) -> Review:
    """Check a design against what usually goes wrong.

    Parameters
    ----------
    design : Design
        What is reviewed. Checks whose limits it does not state say so.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    safe : {"on", "off"}, optional
        State that the load must take when the sensor fails.
    start : {"high", "low"}, optional
        Output state that the stage is made to start in, by a reset or a capacitor.
    **service : object
        What is declared about service, as for `Service`: noise, slope, probability, hum,
        plant, starts_per_hour, min_on, min_off, drive, load_step.

    Returns
    -------
    Review
        Findings, the worst first.

    Raises
    ------
    UnknownNameError
        If one of the choices or declarations does not exist.
    InputError
        Naming every declaration that cannot be used.

    Notes
    -----
    Limits of the checks are common practice and stand beside each check. A review finds what is
    stated in the design only; it replaces neither a test of the built stage nor the judgement of
    a licensed engineer where people can be hurt.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> review(header_tank())["common mode"].severity
    'pass'
    """
    _check_choices(load, safe, start)
    declared = service_of(service)
    _check_units(design, declared)
    evidence = Evidence(design, load, safe, start, declared)
    if not evidence.levels.ok:
        text = f"no trip points: {evidence.levels.message}"
        return Review((Finding("order", "fault", text, remedy="other part values or levels"),))
    checks = (*TRIP_CHECKS, *DEVICE_CHECKS, *PLANT_CHECKS, *SERVICE_CHECKS)
    found = [finding for check in checks for finding in check(evidence)]
    return Review(tuple(sorted(found, key=lambda f: list(SIGNS).index(f.severity))))


def _check_units(design: Design, service: Service) -> None:
    unit = "V" if design.signal is None else design.signal.unit
    faults = [] if service.plant is None else unit_faults(service.plant, unit)
    if faults:
        raise InputError.of("this review", faults)


def _check_choices(load: str, safe: str | None, start: str | None) -> None:
    choices = {
        "load": (load, ("high", "low")),
        "safe": (safe, ("on", "off")),
        "start": (start, ("high", "low")),
    }
    faults = [
        unknown_name_fault(f"choice for {name}", value, known)
        for name, (value, known) in choices.items()
        if value is not None and value not in known
    ]
    if faults:
        raise UnknownNameError.of("this review", faults)

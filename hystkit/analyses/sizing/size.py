"""From wanted trip points to real parts."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np

from hystkit.analyses.sizing.advice import reason, suggestions
from hystkit.analyses.sizing.candidate import Candidate, Sizing, Suggestion
from hystkit.analyses.sizing.request import Range, Request
from hystkit.analyses.sizing.search import best_points
from hystkit.analyses.sizing.target import (
    Limits,
    Target,
    Wanted,
    measurand_target,
    volt_target,
)
from hystkit.base.errors import DesignError, Fault, HystkitError, InputError
from hystkit.base.quantity import parse_percent, read
from hystkit.circuit.design import Design, PartLike
from hystkit.circuit.device import Device
from hystkit.circuit.parts import Supply
from hystkit.circuit.signal import Signal
from hystkit.circuit.stage import Stage

#: Candidates whose worst case is worked out, where windows are asked for.
_WORKED_OUT = 60


def size(
    stage: Stage | None = None,
    *,
    supply: Supply | float | str,
    upper: Wanted | None = None,
    lower: Wanted | None = None,
    on_at: Wanted | None = None,
    off_at: Wanted | None = None,
    load: str = "high",
    free: tuple[str, ...] | None = None,
    parts: Mapping[str, PartLike] | None = None,
    series: str | Mapping[str, str] = "E96",
    ranges: Range | Mapping[str, Range] = (1e3, 1e6),
    tol: float | str | Mapping[str, float | str] = 0.01,
    device: Device | None = None,
    levels: Mapping[str, PartLike] | None = None,
    signal: Signal | None = None,
    limits: Limits | Mapping[str, float | str] | None = None,
    count: int = 10,
    suggest: bool = True,
) -> Sizing:
    """Find real parts for wanted trip points.

    Parameters
    ----------
    stage : Stage, optional
        The form; without it every built-in form that the levels and the supply allow.
    supply : Supply, float or str
        Rails [V].
    upper, lower : float, str or pair, optional
        Wanted trips [V], as numbers or as windows (low, high).
    on_at, off_at : float, str or pair, optional
        Instead of these: where the load switches on and off, in the signal's unit.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    free : tuple of str, optional
        Parts that are searched; all that `parts` does not give when left out.
    parts : mapping of str to Part, float or str, optional
        Parts that are fixed [Ohm].
    series, ranges, tol : one for all free parts, or a mapping by part
        Preferred series, allowed range [Ohm] and tolerance.
    device, levels, signal
        As for `Design`.
    limits : Limits or mapping, optional
        supply_current [A], input_resistance [Ohm], output_current [A].
    count : int, default 10
        How many candidates are wanted.
    suggest : bool, default True
        Whether changes are tried where nothing fits.

    Returns
    -------
    Sizing
        Candidates, best first. With windows, those whose exact worst case over all tolerances
        keeps both windows come first, by margin; else by error.

    Raises
    ------
    InputError
        If the request is incomplete or contradicts itself.
    InfeasibleWidthError
        If the width exceeds the output swing of the only form asked for.

    Notes
    -----
    The nominal error is the largest distance of a trip from what is wanted. Its smallest values
    are exact over the whole grid of preferred values: see `hystkit.analyses.sizing.search`. Holds
    for stages whose trips are monotone in each part, as all built-in forms are. That no point at
    all keeps the limits is judged on a thinned grid.

    Examples
    --------
    >>> found = size(Stage("inverting"), upper=2.7, lower=2.3, supply=5.0, series="E24", count=3)
    >>> found[0].design.parts["R_F"].value / found[0].design.parts["R_T"].value
    5.744680851063830
    """
    supply = supply if isinstance(supply, Supply) else Supply(supply)
    common = {"supply": supply, "device": device, "levels": levels or {}, "signal": signal}
    wanted = {"upper": upper, "lower": lower, "on_at": on_at, "off_at": off_at}
    kept = Limits.of(limits)

    def request_for(form: Stage, searched: tuple[str, ...] | None) -> Request:
        target = _target(wanted, signal, form, load)
        request = _request(form, common, target, searched, parts or {}, series, ranges, tol, kept)
        request.check_swing()
        return request

    if stage is not None:
        asked: tuple[Request, ...] = (request_for(stage, free),)
        others = [s for s in _possible_stages(supply, levels or {}) if s != stage]
        alternatives = _feasible(lambda s: request_for(s, None), others)[0] if suggest else ()
    else:
        asked, refusals = _feasible(
            lambda s: request_for(s, free), _possible_stages(supply, levels or {})
        )
        alternatives = ()
        if not asked:
            raise refusals[0]
    return _sized(asked, alternatives, count, suggest)


def _feasible(
    build: Callable[[Stage], Request], stages: Iterable[Stage]
) -> tuple[tuple[Request, ...], list[HystkitError]]:
    """Build the request of each form that can be asked for this, and keep the refusals."""
    requests, refusals = [], []
    for stage in stages:
        try:
            requests.append(build(stage))
        except HystkitError as error:
            refusals.append(error)
    return tuple(requests), refusals


def _sized(
    requests: tuple[Request, ...], alternatives: tuple[Request, ...], count: int, suggest: bool
) -> Sizing:
    found = _ranked([c for request in requests for c in _candidates(request, count)])[:count]
    why = reason(found, requests[0].limits)
    tried: tuple[Suggestion, ...] = ()
    if why and suggest:
        tried = tuple(
            suggestions(
                requests, alternatives, found[0] if found else None, lambda r: _candidates(r, 3)
            )
        )
    points = sum(
        request.grid.combinations * request.grid.values[request.grid.line].size
        for request in requests
    )
    return Sizing(found, requests[0].limits, points, why, tried)


def _candidates(request: Request, count: int) -> tuple[Candidate, ...]:
    if not request.allowed(request.grid.thinned()).any():
        return ()
    wanted = max(count, _WORKED_OUT if request.target.has_windows else 4 * count)
    points, errors = best_points(request.grid, request.error, request.allowed, wanted)
    designs = [
        request.design({name: values[i] for name, values in points.items()})
        for i in range(errors.size)
    ]
    return _ranked(
        [Candidate(d, request.target, float(e)) for d, e in zip(designs, errors, strict=True)]
    )[:count]


def _ranked(candidates: list[Candidate]) -> tuple[Candidate, ...]:
    def key(candidate: Candidate) -> tuple[Any, ...]:
        # Equal to nine digits is equal: then the parts that lie nearest to 30 kOhm go first.
        spread = sum(abs(np.log(p.value / 3e4)) for p in candidate.design.parts.values())
        if candidate.target.has_windows:
            return (not candidate.holds, -round(candidate.margin, 9), spread)
        return (round(candidate.error, 9), spread)

    return tuple(sorted(candidates, key=key))


def _target(
    wanted: Mapping[str, Wanted | None], signal: Signal | None, stage: Stage, load: str
) -> Target:
    upper, lower, on_at, off_at = wanted.values()
    if upper is not None and lower is not None and on_at is None and off_at is None:
        return volt_target(upper, lower)
    if on_at is not None and off_at is not None and upper is None and lower is None:
        if signal is not None:
            return measurand_target(on_at, off_at, signal, stage.sense, load)
        raise InputError(
            "on_at and off_at need the signal that they are read from.",
            asked=f"on_at = {on_at}, off_at = {off_at}",
            have="no signal",
            remedy="signal=hk.signals.Linear(...), or upper= and lower= in volts",
        )
    given = ", ".join(name for name, value in wanted.items() if value is not None) or "nothing"
    raise InputError(
        "the wanted trips are incomplete.",
        asked=given,
        rule="upper and lower together, or on_at and off_at together",
        remedy="upper=2.7, lower=2.3",
    )


def _request(
    stage: Stage,
    common: Mapping[str, Any],
    target: Target,
    free: tuple[str, ...] | None,
    parts: Mapping[str, PartLike],
    series: str | Mapping[str, str],
    ranges: Range | Mapping[str, Range],
    tol: float | str | Mapping[str, float | str],
    limits: Limits,
) -> Request:
    stage = stage.with_options(*(n for n in stage.optional if n in parts or n in (free or ())))
    searched = free or tuple(name for name in stage.parts if name not in parts)
    missing = [n for n in stage.parts if n not in searched and n not in parts]
    if missing or not searched:
        fault = Fault(
            f"{', '.join(missing) or 'every part'} is neither free nor given."
            if missing
            else "no part is free.",
            asked=f"free {', '.join(searched) or 'none'}, parts {', '.join(parts) or 'none'}",
            rule=f"this stage has {', '.join(stage.parts)}",
            remedy='free=(...) names what is searched, parts={"R_PU": "4k7"} what is fixed',
        )
        raise InputError.of("this request", [fault])
    each: dict[str, dict[str, Any]] = {
        "series": {n: _for(series, n) for n in searched},
        "ranges": {n: tuple(read(end, unit="Ω") for end in _for(ranges, n)) for n in searched},
        "tol": {n: parse_percent(_for(tol, n)) for n in searched},
    }
    placeholder = {name: 1e4 for name in searched if name not in parts}
    template = Design(stage, {**parts, **placeholder}, **common)
    return Request(template, target, searched, **each, limits=limits)


def _for(setting: Any, name: str) -> Any:
    if not isinstance(setting, Mapping):
        return setting
    if name in setting:
        return setting[name]
    raise InputError(
        f"a setting for {name} is missing.",
        asked=f"settings for {', '.join(setting)}",
        rule="a mapping names every free part",
        remedy=f'add "{name}", or give one setting for all',
    )


def _possible_stages(supply: Supply, levels: Mapping[str, PartLike]) -> tuple[Stage, ...]:
    """Built-in forms that need nothing which was not given."""
    kind = "split" if supply.split else "single"
    fitting = [
        s
        for s in Stage.all()
        if s.supply == kind and all(n in s.levels for n in levels) and _has_reference(s, levels)
    ]
    if not fitting:
        raise DesignError(
            "no built-in form goes with these levels.",
            asked=f"levels {', '.join(levels)}, {kind} supply",
            remedy="other levels, or name the stage",
        )
    return tuple(fitting)


def _has_reference(stage: Stage, levels: Mapping[str, PartLike]) -> bool:
    return stage.reference != "source" or "V_REF" in levels

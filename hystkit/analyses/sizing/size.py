"""From wanted trip points to real parts."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from math import isfinite
from numbers import Integral, Real
from typing import Any

from hystkit.analyses.sizing.advice import reason, suggestions
from hystkit.analyses.sizing.ask import Ask
from hystkit.analyses.sizing.candidate import Candidate, Sizing, Suggestion
from hystkit.analyses.sizing.limits import Limits
from hystkit.analyses.sizing.ranking import COMPARED, ranked, rounded_error
from hystkit.analyses.sizing.request import Request
from hystkit.analyses.sizing.requirement import Wanted
from hystkit.analyses.sizing.stock import Range, Settings, Source
from hystkit.analyses.sizing.wanted import read_requirement
from hystkit.base.errors import Fault, HystkitError, InfeasibleError, InputError
from hystkit.circuit.design import PartLike
from hystkit.circuit.design_checks import read_supply
from hystkit.circuit.device import Device
from hystkit.circuit.parts import Supply
from hystkit.circuit.reading import Quantity
from hystkit.circuit.signals import Signal
from hystkit.circuit.stage import Stage
from hystkit.numeric.uncertain import REFERENCE_TEMPERATURE
from hystkit.numeric.views import Interval


def size(
    stage: Stage | None = None,
    *,
    supply: Supply | Quantity,
    upper: Wanted | None = None,
    lower: Wanted | None = None,
    on_at: Wanted | None = None,
    off_at: Wanted | None = None,
    load: str = "high",
    free: tuple[str, ...] | None = None,
    parts: Mapping[str, PartLike] | None = None,
    series: Source | Mapping[str, Source] = "E96",
    ranges: Range | Mapping[str, Range] = (1e3, 1e6),
    tol: Quantity | Mapping[str, Quantity] = 0.01,
    tempco: Quantity | Mapping[str, Quantity] = 0.0,
    temperature: Interval | None = None,
    device: Device | None = None,
    levels: Mapping[str, PartLike] | None = None,
    signal: Signal | None = None,
    limits: Limits | Mapping[str, Quantity] | None = None,
    count: int = 10,
    suggest: bool = True,
) -> Sizing:
    """Find real parts for wanted trip points.

    Parameters
    ----------
    stage : Stage, optional
        The form; without it every built-in form that the supply and the levels allow. Where one of
        these leaves more than three parts to be found, the least important are given customary
        values.
    supply : Supply, float or str
        Rails [V].
    upper, lower : float, str or pair, optional
        Wanted trips [V]: numbers, or windows (low, high) that hold over all tolerances.
    on_at, off_at : float, str or pair, optional
        Instead of these: where the load switches on and off, in the signal's unit.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    free : tuple of str, optional
        Parts that are searched; all that `parts` does not give when left out.
    parts : mapping of str to Part, float or str, optional
        Parts that are fixed [Ohm].
    series : str or sequence of values, or a mapping of these by part
        Preferred series, or the values at hand [Ohm].
    ranges : pair, or a mapping of pairs by part
        Lowest and highest value of a series that is allowed [Ohm].
    tol, tempco : float or str, or a mapping of these by part
        Tolerance, and magnitude of the temperature coefficient [1/K], of the free parts.
    temperature : pair of float, optional
        Range in service [°C]; values and tolerances hold at 25 °C. Without it nothing drifts.
    device : Device, optional
        The comparator or op-amp; ideal when left out.
    levels : mapping of str to Part, float or str, optional
        As for `Design` [V].
    signal : Signal, optional
        Quantity <-> volts; its own tolerances are taken off windows in its unit.
    limits : Limits or mapping, optional
        supply_current [A], input_resistance [Ohm], output_current [A], at nominal values.
    count : int, default 10
        How many candidates are wanted.
    suggest : bool, default True
        Whether changes are tried where nothing fits.

    Returns
    -------
    Sizing
        Candidates, best first: with windows by the error over all tolerances, else by the nominal
        error. The error is the largest distance of a trip from what is wanted, with windows in
        half-widths of the window. Among equals, parts near 30 kOhm come first. Windows that cannot
        be held are another matter: candidates that leave one stand in the order of their yield,
        chosen among the 32 combinations of smallest error.

    Raises
    ------
    InputError
        If the request is incomplete, contradicts itself or is too wide to be searched; all its
        faults are named.
    InfeasibleError
        If no values of the parts can give what is wanted, whatever the series.

    Notes
    -----
    Exact: no combination of the values allowed, of all there are, has a smaller error than those
    found; see `hystkit.analyses.sizing.bounds` for the proof. Static: delay and noise are
    outside. Where a load is to switch at quantities, the resistance of the signal's source comes in
    as R_S, with a tolerance that covers the windows and the signal's own tolerances; give R_S
    among `parts` to replace it. With trips in volts, an R_S among `parts` that the source can have
    stands for it, and is no part of the bill.

    Examples
    --------
    >>> found = size(Stage("inverting"), upper=2.7, lower=2.3, supply=5.0, series="E24", count=3)
    >>> found[0].values, f"{found[0].error * 1e3:.3f} mV"
    ('R_T 47k, R_B 47k, R_F 270k', '0.170 mV')
    """
    faults: list[Fault] = []
    wanted = {"upper": upper, "lower": lower, "on_at": on_at, "off_at": off_at}
    rails = read_supply(supply, faults)
    if signal is not None and rails is not None:
        signal = signal.at(rails.v_cc)
    requirement = read_requirement(wanted, signal, load, faults)
    kept = _limits(limits, faults)
    excursion = _excursion(temperature, faults)
    faults += _count_faults(count)
    if faults or requirement is None or rails is None:
        raise InputError.of("this request", [*dict.fromkeys(faults)])
    ask = Ask(
        requirement,
        Settings(series, ranges, tol, tempco),
        rails,
        parts or {},
        device,
        levels or {},
        signal,
        kept,
        excursion,
    )
    if stage is None:
        return _over_all_forms(ask, count, suggest)
    return _in_one_form(ask, stage, free, count, suggest)


def _in_one_form(
    ask: Ask, stage: Stage, free: tuple[str, ...] | None, count: int, suggest: bool
) -> Sizing:
    def others() -> Iterable[Request]:
        return (r for title, r in ask.alternatives()[0].items() if title != stage.title)

    try:
        request = ask.request(stage, free)
        found = request.candidates(max(count, COMPARED))
    except InfeasibleError as error:
        raise _with_another_form(error, others()) if suggest else error from None
    return _result(ask, [request], found, count, others() if suggest else None, {})


def _over_all_forms(ask: Ask, count: int, suggest: bool) -> Sizing:
    requests, refused = ask.alternatives()
    found: list[tuple[float, int, Candidate, Request]] = []
    for title, request in [*requests.items()]:
        try:
            candidates = request.candidates(max(count, COMPARED))
        except HystkitError as error:
            refused[title] = error
            del requests[title]
            continue
        found += [(rounded_error(c), len(found) + i, c, request) for i, c in enumerate(candidates)]
    if not requests:
        told = [fault for error in refused.values() for fault in error.faults]
        kind = (
            InfeasibleError
            if any(isinstance(e, InfeasibleError) for e in refused.values())
            else InputError
        )
        raise kind.of("every form", [*dict.fromkeys(told)])
    found.sort(key=lambda entry: entry[:2])
    order = [entry[3] for entry in found] or [*requests.values()]
    reasons = {title: error.faults[0].problem for title, error in refused.items()}
    return _result(
        ask,
        [order[0], *(r for r in requests.values() if r is not order[0])],
        tuple(entry[2] for entry in found[: max(count, COMPARED)]),
        count,
        [] if suggest else None,
        reasons,
    )


def _result(
    ask: Ask,
    requests: list[Request],
    found: tuple[Candidate, ...],
    count: int,
    others: Iterable[Request] | None,
    refused: dict[str, str],
) -> Sizing:
    why = reason(found, ask.limits)
    tried: tuple[Suggestion, ...] = ()
    if why and others is not None:
        tried = tuple(suggestions(requests[0], others, found[0] if found else None))
    unit = "V" if ask.signal is None else ask.signal.unit
    searched = sum(request.grid.size for request in requests)
    shown = ranked(found)[:count]
    return Sizing(shown, ask.requirement.text(unit), searched, refused, why, tried)


def _with_another_form(error: InfeasibleError, others: Iterable[Request]) -> InfeasibleError:
    """Name a form that can do it, if one does."""
    for request in others:
        try:
            candidates = request.candidates(1)
        except HystkitError:
            continue
        if candidates and candidates[0].holds:
            fault = error.faults[0]
            remedy = f"{fault.remedy}, or the form {request.template.stage.title}"
            return type(error)(
                fault.problem, asked=fault.asked, have=fault.have, rule=fault.rule, remedy=remedy
            )
    return error


def _limits(given: Limits | Mapping[str, Quantity] | None, faults: list[Fault]) -> Limits:
    try:
        return Limits.of(given)
    except HystkitError as error:
        faults += error.faults
        return Limits()


def _excursion(temperature: Any, faults: list[Fault]) -> float:
    """Farthest distance from the temperature that values are stated for [K]."""
    if temperature is None:
        return 0.0
    ends = temperature if isinstance(temperature, (tuple, list)) else ()
    good = all(isinstance(end, Real) and isfinite(end) for end in ends)
    if len(ends) != 2 or not good or ends[0] > ends[1]:
        faults.append(
            Fault(
                "the temperature is not a range.",
                asked=f"temperature={temperature!r}",
                rule="two numbers in °C, the lower one first",
                remedy="temperature=(-20, 60), or None to leave drift out",
            )
        )
        return 0.0
    return float(max(abs(end - REFERENCE_TEMPERATURE) for end in ends))


def _count_faults(count: Any) -> list[Fault]:
    if not isinstance(count, bool) and isinstance(count, Integral) and int(count) >= 1:
        return []
    fault = Fault(
        "the number of candidates is not a whole number of at least 1.",
        asked=f"count={count!r}",
        remedy="count=10",
    )
    return [fault]

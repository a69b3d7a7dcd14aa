"""When nothing fits: why, and the smallest changes after which something does."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from hystkit.analyses.sizing.candidate import Candidate, Suggestion
from hystkit.analyses.sizing.limits import UNITS, Limits
from hystkit.analyses.sizing.request import Request
from hystkit.analyses.sizing.requirement import SOURCE, Requirement, shown_window
from hystkit.analyses.sizing.stock import Stock
from hystkit.base.errors import HystkitError
from hystkit.base.quantity import TOLERANCE_LETTERS, show
from hystkit.circuit.preferred import SERIES

#: Tolerances that parts are made in, from wide to close; the letters of IEC 60062 and one closer.
TOLERANCES = (*sorted(TOLERANCE_LETTERS.values(), reverse=True), 5e-4, 1e-4)
#: How much further the range of values may go, at both ends.
FURTHER = (10.0, 100.0)
# A relaxed limit is found to this ratio.
_FINE = 1.05

_DEAD = "no combination of values switches with every combination of tolerances"

Change = tuple[str, Request, dict[str, Any]]


def reason(candidates: tuple[Candidate, ...], limits: Limits) -> str:
    """Say why nothing fits.

    Parameters
    ----------
    candidates : tuple of Candidate
        Best first, as searched.
    limits : Limits
        What they had to keep.

    Returns
    -------
    str
        Empty where something fits.
    """
    listed = ", ".join(f"{_words(n)} {show(most, UNITS[n])}" for n, most in limits.given.items())
    if not candidates:
        return f"no combination of values keeps the limits ({listed})" if listed else _DEAD
    best = candidates[0]
    if best.holds:
        return ""
    within = f", within the limits ({listed})" if listed else ""
    if not best.target.has_windows:
        return (
            f"the nearest trips lie {show(best.error, 'V')} off, more than half of the wanted "
            f"width of {show(best.target.width, 'V')}{within}"
        )
    if not np.isfinite(best.worst_error):
        return _DEAD
    if best.switching:
        return f"{_told_in_the_measurand(best)}{within}"
    if best.error > 1:
        return (
            "even the nominal trips of the best combination leave a window: they lie "
            f"{best.error:.3g} half-widths from its middle{within}"
        )
    found = {name: (best.extremes[name], getattr(best.target, name)) for name in ("upper", "lower")}
    worst = max(found, key=lambda name: max(_beyond(*found[name])))
    spread, window = found[worst]
    return (
        f"over all tolerances the best combination leaves the window of the {worst} trip by "
        f"{show(-best.margin, 'V')}: the trip spreads over {show(spread[1] - spread[0], 'V')}, "
        f"the window is {show(window[1] - window[0], 'V')} wide{within}"
    )


def _told_in_the_measurand(best: Candidate) -> str:
    signal, requirement = best.design.signal, best.requirement
    unit = "" if signal is None else signal.unit
    windows = dict(zip(best.switching, (requirement.first, requirement.second), strict=True))
    worst = max(windows, key=lambda edge: max(_beyond(best.switching[edge], windows[edge])))
    found, window = (shown_window(one[worst], unit, 4) for one in (best.switching, windows))
    return (
        f"over all tolerances, those of the signal included, the load goes {worst[:-3]} at "
        f"{found} with the best combination, the window is {window}"
    )


def suggestions(
    request: Request, alternatives: Iterable[Request], best: Candidate | None
) -> Iterator[Suggestion]:
    """Try the smallest changes, each by running it.

    Parameters
    ----------
    request : Request
        That nothing fits; of the form that comes nearest.
    alternatives : iterable of Request
        The same of other forms.
    best : Candidate or None
        The best candidate; None where no combination is allowed.

    Yields
    ------
    Suggestion
        Only changes after which a candidate does what was asked: of every kind of change that
        helps by itself the smallest; where none does, of two kinds together.
    """
    found = [
        _first_that_holds(_finer_series(request)),
        _loosest_that_holds(_tighter(request)),
        _loosest_that_holds(_steadier_supply(request)),
        _first_that_holds(_wider_range(request)),
    ]
    if not any(found):
        found = [_finer_and_tighter(request), _tighter_and_steadier(request)]
    yield from (s for s in found if s is not None)
    form = _first_that_holds(_forms(alternatives))
    if form is not None:
        yield form
    if best is not None and best.target.has_windows:
        window = _wider_window(request, best)
        if window is not None:
            yield window
    yield from _relaxed_limits(request)


def _first_that_holds(tries: Iterable[Change]) -> Suggestion | None:
    for text, request, changes in tries:
        try:
            candidates = request.candidates(1)
        except HystkitError:  # what cannot be asked for does not help
            continue
        if candidates and candidates[0].holds:
            return Suggestion(text, candidates[0], changes)
    return None


def _loosest_that_holds(tries: Iterable[Change]) -> Suggestion | None:
    """Find the first change that helps, of changes of which each helps if the one before does."""
    ordered = [*tries]
    found = _first_that_holds(ordered[-1:])
    low, high = 0, len(ordered) - 1
    while found is not None and low < high:
        middle = (low + high) // 2
        looser = _first_that_holds([ordered[middle]])
        low, high = (middle + 1, high) if looser is None else (low, middle)
        found = looser or found
    return found


def _finer_series(request: Request) -> Iterator[Change]:
    for name in SERIES:
        stock = {part: one.with_series(name) for part, one in request.stock.items()}
        if stock != request.stock:
            yield f"series {name}", request.changed(stock=stock), {"series": _sources(stock)}


def _tighter(request: Request) -> Iterator[Change]:
    if not request.target.has_windows:
        return
    old = request.template.parts
    for tol in TOLERANCES:
        real = {n for n in old if not (request.has_source and n == SOURCE)}
        closer = [name for name, part in old.items() if part.tol > tol and name in real]
        if not closer:
            continue
        stock = {part: one.with_tol(tol) for part, one in request.stock.items()}
        parts = {
            name: replace(old[name], tol=min(old[name].tol, tol)) for name in old if name in real
        }
        fixed = {name: part for name, part in parts.items() if name not in stock}
        template = request.template.with_parts(**fixed)
        changed = request.changed(stock=stock, template=template)
        text = f"tolerance {show(tol, '%')} for {', '.join(closer)}"
        yield text, changed, {"tol": _tolerances(stock), "parts": fixed}


def _steadier_supply(request: Request) -> Iterator[Change]:
    supply = request.template.supply
    for tol in TOLERANCES:
        if tol < supply.tol and request.target.has_windows:
            changed = replace(supply, tol=tol)
            template = request.template.with_supply(tol=tol)
            text = f"supply tolerance {show(tol, '%')}"
            yield text, request.changed(template=template), {"supply": changed}


def _finer_and_tighter(request: Request) -> Suggestion | None:
    for series, finer, first in _finer_series(request):
        found = _loosest_that_holds(_tighter(finer))
        if found is not None:
            text = f"{series} and {found.text}"
            return Suggestion(text, found.candidate, first | found.changes)
    return None


def _tighter_and_steadier(request: Request) -> Suggestion | None:
    supplies = {change["supply"].tol: change for _, _, change in _steadier_supply(request)}

    def both() -> Iterator[Change]:
        for text, closer, change in _tighter(request):
            tol = max(one.tol for one in closer.stock.values())
            if tol in supplies:
                template = closer.template.with_supply(tol=tol)
                joined = f"{text} and the supply"
                yield joined, closer.changed(template=template), change | supplies[tol]

    return _loosest_that_holds(both())


def _wider_range(request: Request) -> Iterator[Change]:
    if any(one.drawer for one in request.stock.values()):
        return
    for factor in FURTHER:
        stock = {part: one.reaching(factor) for part, one in request.stock.items()}
        low = min(one.range[0] for one in stock.values())
        high = max(one.range[1] for one in stock.values())
        text = f"values from {show(low, 'Ω')} to {show(high, 'Ω')}"
        ranges = {part: one.range for part, one in stock.items()}
        yield text, request.changed(stock=stock), {"ranges": ranges}


def _forms(alternatives: Iterable[Request]) -> Iterator[Change]:
    for other in alternatives:
        parts = {n: p for n, p in other.template.parts.items() if n not in other.stock}
        given = ", ".join(f"{n} {show(parts[n].value, 'Ω')}" for n in other.chosen)
        text = f"the form {other.template.stage.title}" + (f" with {given}" if given else "")
        changes = {
            "stage": other.template.stage,
            "parts": parts,
            "free": tuple(other.stock),
            "series": _sources(other.stock),
            "ranges": {n: one.range for n, one in other.stock.items()},
            "tol": _tolerances(other.stock),
            "tempco": {n: one.tempco for n, one in other.stock.items()},
        }
        yield text, other, changes


def _wider_window(request: Request, best: Candidate) -> Suggestion | None:
    """Widen both windows until the best candidate holds, and ask again."""
    low, high = 1.0, 2.0
    while not _holds_in(request, best, high):
        low, high = high, 2 * high
        if _overlap(request.requirement.widened(low)):
            return None
    while high / low > 1.0005:
        middle = (low * high) ** 0.5
        low, high = (low, middle) if _holds_in(request, best, middle) else (middle, high)
    wider = request.requirement.widened(high)
    if _overlap(wider):
        return None
    signal = request.template.signal
    text = f"windows {high:.3g} times as wide: {wider.text('V' if signal is None else signal.unit)}"
    changed = request.changed(requirement=wider)
    return _first_that_holds([(text, changed, dict(wider.arguments))])


def _holds_in(request: Request, best: Candidate, factor: float) -> bool:
    wider = request.changed(requirement=request.requirement.widened(factor))
    values = {name: best.design.parts[name].value for name in request.stock}
    return wider.candidate(values).holds


def _relaxed_limits(request: Request) -> Iterator[Suggestion]:
    """Raise one limit, to the smallest value with which something fits."""
    for name, most in request.limits.given.items():

        def asked(limit: float, name: str = name) -> Change:
            limits = replace(request.limits, **{name: limit})
            text = f"{_words(name)} {show(limit, UNITS[name])}"
            return text, request.changed(limits=limits), {"limits": limits}

        low, high = most, 2 * most
        found = _first_that_holds([asked(high)])
        while found is None and high < 1e6 * most:
            low, high = high, 4 * high
            found = _first_that_holds([asked(high)])
        if found is None:
            continue
        while high / low > _FINE:
            middle = float(f"{(low * high) ** 0.5:.4g}")
            nearer = _first_that_holds([asked(middle)])
            low, high = (middle, high) if nearer is None else (low, middle)
            found = nearer or found
        yield found


def _sources(stock: dict[str, Stock]) -> dict[str, Any]:
    return {name: one.source for name, one in stock.items()}


def _tolerances(stock: dict[str, Stock]) -> dict[str, float]:
    return {name: one.tol for name, one in stock.items()}


def _overlap(requirement: Requirement) -> bool:
    """Whether windows are so wide that the two trips could change places."""
    (_, b), (c, _) = sorted((requirement.first, requirement.second))
    return c <= b


def _beyond(found: tuple[float, float], window: tuple[float, float]) -> tuple[float, float]:
    return window[0] - found[0], found[1] - window[1]


def _words(name: str) -> str:
    return name.replace("_", " ")

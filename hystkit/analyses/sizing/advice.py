"""When nothing fits: why, and the smallest changes after which something does."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import replace

import numpy as np

from hystkit.analyses.sizing.candidate import Candidate, Suggestion
from hystkit.analyses.sizing.request import Request
from hystkit.analyses.sizing.target import Limits
from hystkit.base.quantity import show

#: Series and tolerances in the order in which they are tried, common practice for stock parts.
FINER = ("E12", "E24", "E48", "E96", "E192")
TIGHTER = (0.05, 0.02, 0.01, 0.005, 0.0025, 0.001, 0.0005)

#: Runs a request and gives its candidates, best first.
Run = Callable[[Request], tuple[Candidate, ...]]


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
    if not candidates:
        given = [f"{n.replace('_', ' ')} {v:g}" for n, v in vars(limits).items() if np.isfinite(v)]
        return f"no grid point keeps the limits ({', '.join(given)})"
    best = candidates[0]
    if best.holds:
        return ""
    found, window = best.extremes, {"upper": best.target.upper, "lower": best.target.lower}
    beyond = {
        name: max(window[name][0] - found[name][0], found[name][1] - window[name][1])
        for name in window
    }
    worst = max(beyond, key=lambda name: beyond[name])
    spread = (found[worst][1] - found[worst][0]) / 2
    room = (window[worst][1] - window[worst][0]) / 2
    return (
        f"the best worst case leaves the window of the {worst} trip by {show(beyond[worst], 'V')}: "
        f"it spreads ±{show(spread, 'V')}, the window allows ±{show(room, 'V')}"
    )


def suggestions(
    requests: tuple[Request, ...],
    alternatives: tuple[Request, ...],
    best: Candidate | None,
    run: Run,
) -> Iterator[Suggestion]:
    """Try the smallest changes, each by running it.

    Parameters
    ----------
    requests : tuple of Request
        The request of each form that was asked for.
    alternatives : tuple of Request
        The same of other forms.
    best : Candidate or None
        The best candidate, which does not fit.
    run : callable
        Searches one request.

    Yields
    ------
    Suggestion
        Only changes after which a candidate holds.
    """
    if best is None:
        yield from _relaxed_limits(requests, run)
        return
    request = next(r for r in requests if r.template.stage == best.design.stage)
    yield from _first_that_holds(
        ((f"series {name}", request.changed(series=name)) for name in _finer(request)), run
    )
    yield from _first_that_holds(
        (
            (f"tolerance {show(tol, '%')}", request.changed(tol=tol))
            for tol in TIGHTER
            if tol < max(request.tol.values())
        ),
        run,
    )
    yield from _first_that_holds(
        ((f"the form {other.template.stage.title}", other) for other in alternatives), run
    )
    # Rounded up, so that the text itself names a window that holds.
    by = np.ceil(-best.margin * 1e4) / 1e4
    wider = request.changed(target=request.target.widened(by))
    yield from _first_that_holds([(f"windows wider by {show(by, 'V')} at each end", wider)], run)


def _finer(request: Request) -> tuple[str, ...]:
    coarsest = min(FINER.index(s) if s in FINER else -1 for s in request.series.values())
    return FINER[coarsest + 1 :]


def _relaxed_limits(requests: tuple[Request, ...], run: Run) -> Iterator[Suggestion]:
    for request in requests:
        for name, most in vars(request.limits).items():
            if not np.isfinite(most):
                continue
            free = request.changed(limits=replace(request.limits, **{name: np.inf}))
            for candidate in run(free)[:1]:
                point = {n: np.array([candidate.design.values[n]]) for n in request.free}
                needed = float(request.loads(point)[name][0])
                if candidate.holds:
                    text = f"{name.replace('_', ' ')} of {needed:.4g} instead of {most:.4g}"
                    yield Suggestion(text, candidate)


def _first_that_holds(tries: Iterable[tuple[str, Request]], run: Run) -> Iterator[Suggestion]:
    for text, request in tries:
        for candidate in run(request)[:1]:
            if candidate.holds:
                yield Suggestion(text, candidate)
                return

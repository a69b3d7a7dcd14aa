"""What stands out at the trip points, from simple comparisons of what is on the volt axis."""

from __future__ import annotations

import html
import math
from collections.abc import Iterator
from dataclasses import dataclass

from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.figures.ruler import signal_at_pins
from hystkit.numeric.views import Interval, Levels

#: Sign of each kind, so that colour is not alone in telling them apart.
SIGNS = {"warning": "!", "note": "–", "passed": "✓"}


@dataclass(frozen=True)
class Finding:
    """One line on a design.

    Attributes
    ----------
    kind : {"warning", "note", "passed"}
        How much it matters.
    text : str
        Plain text.
    """

    kind: str
    text: str


def findings(design: Design, levels: Levels) -> tuple[Finding, ...]:
    """Compare the trip points with what they have to fit into.

    Parameters
    ----------
    design : Design
        What is judged.
    levels : Levels
        Of this design.

    Returns
    -------
    tuple of Finding
        Warnings first, then notes, then what was found in order.
    """
    if not levels.ok:
        return (Finding("warning", f"no trip points: {levels.message}"),)
    found = [
        *_common_mode(levels),
        *_rails(design, levels),
        *_span(levels),
        *_tolerances(design, levels),
    ]
    return tuple(sorted(found, key=lambda f: list(SIGNS).index(f.kind)))


def as_html(found: tuple[Finding, ...]) -> str:
    """Write findings in one line of HTML.

    Parameters
    ----------
    found : tuple of Finding
        What to show.

    Returns
    -------
    str
        Everything escaped.
    """
    return "".join(
        f'<span class="hystkit-finding hystkit-{f.kind}-line">'
        f'<b aria-hidden="true">{SIGNS[f.kind]}</b> '
        f'<span class="hystkit-kind">{f.kind}: </span>{html.escape(f.text)}</span> '
        for f in found
    )


def _common_mode(levels: Levels) -> Iterator[Finding]:
    if levels.common_mode is None or levels.pins is None:
        yield Finding("note", "common-mode range of the device not stated")
        return
    (low, high), (least, most) = levels.common_mode, levels.pins
    allowed = f"the common-mode range {_range(levels.common_mode)}"
    if least < low:
        yield Finding("warning", f"inputs at {_volts(least)} at a trip, below {allowed}")
    if most > high:
        yield Finding("warning", f"inputs at {_volts(most)} at a trip, above {allowed}")
    if low <= least and most <= high:
        left = show(min(least - low, high - most), "V", 3)
        yield Finding("passed", f"inputs in the common-mode range, {left} left")


def _rails(design: Design, levels: Levels) -> Iterator[Finding]:
    """Find trips beyond the rails; they matter where a pin has to go there with the signal."""
    kind = "warning" if signal_at_pins(levels) else "note"
    beyond = False
    for name, trip in (("upper", levels.upper), ("lower", levels.lower)):
        if trip > levels.v_cc:
            beyond = True
            yield Finding(kind, f"{name} trip {show(trip, 'V')} above V_CC {_volts(levels.v_cc)}")
        elif trip < levels.v_ee:
            rail = "V_EE " + _volts(levels.v_ee) if design.supply.split else "ground"
            beyond = True
            yield Finding(kind, f"{name} trip {show(trip, 'V')} below {rail}")
    if not beyond:
        yield Finding("passed", "trips between the rails")


def _span(levels: Levels) -> Iterator[Finding]:
    span = levels.signal_span
    if span is None or not all(math.isfinite(end) for end in span):
        return
    outside = False
    for name, trip in (("upper", levels.upper), ("lower", levels.lower)):
        if not span[0] <= trip <= span[1]:
            outside = True
            yield Finding(
                "warning",
                f"{name} trip {show(trip, 'V')} outside the signal span {_range(span)}: "
                "the signal never gets there",
            )
    if not outside:
        yield Finding("passed", "trips in the signal span")


def _tolerances(design: Design, levels: Levels) -> Iterator[Finding]:
    upper, lower = levels.upper_interval, levels.lower_interval
    stated = [*design.parts.values(), *design.levels.values()]
    if upper is None or lower is None:
        if design.supply.tol or any(part.tol for part in stated):
            yield Finding("note", "more tolerances than corners can be computed for")
        return
    if not all(math.isfinite(end) for end in (*upper, *lower)):
        yield Finding("warning", "over the tolerances there are values that do not switch")


def _range(interval: Interval) -> str:
    return f"{_volts(interval[0])} to {_volts(interval[1])}"


def _volts(value: float) -> str:
    return show(value, "V")

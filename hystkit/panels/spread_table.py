"""The spread as a table: nominal, exact limits, root sum square, measurand and yield."""

from __future__ import annotations

import math

from hystkit.analyses.spread.measurand import MeasurandSpread
from hystkit.base.quantity import show
from hystkit.circuit.signals import Signal
from hystkit.figures.spread import WindowedSpread
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Interval
from hystkit.numeric.yields import percent
from hystkit.panels.table import Rows

_KINDS = ("upper", "lower", "width", "middle")


def spread_rows(shown: WindowedSpread, trips: TripPoints) -> Rows:
    """Write a spread as rows of text, the first of them the heading.

    Parameters
    ----------
    shown : WindowedSpread
        Limits and windows.
    trips : TripPoints
        Nominal, of the same design.

    Returns
    -------
    list of tuple of str
        A column for the measurand, the signal's tolerances included, stands only with a signal;
        a row for the yield only with a window.
    """
    spread, signal = shown.spread, trips.signal
    sigmas = f"± {spread.plan.sigmas:g} sigma"
    heading = ["", "nominal", "exact limits", sigmas]
    heading += [_column(signal)] if signal is not None else []
    rows: Rows = [tuple(heading)]
    measured = {} if spread.measurand is None else _measured(spread.measurand)
    for kind in _KINDS:
        row = [kind, show(float(getattr(trips, kind)), "V")]
        row += [_interval(spread.extremes[kind], "V"), show(spread.rss[kind], "V", 3)]
        row += [measured.get(kind, "")] if signal is not None else []
        rows.append(tuple(row))
    shares = {"yield": shown.share, "yield with signal": shown.sensed_share}
    for name, share in shares.items():
        if share is None:
            continue
        row = [name, percent(share.value), f"{percent(share.low)} to {percent(share.high)}"]
        row += [f"at {100 * share.confidence:g} %"] + [""] * (signal is not None)
        rows.append(tuple(row))
    return rows


def _column(signal: Signal) -> str:
    return f"{signal.name} / {signal.unit}" if signal.unit else signal.name


def _measured(found: MeasurandSpread) -> dict[str, str]:
    return {kind: _interval(found.extremes[end], "") for kind, end in found.ends.items()}


def _interval(ends: Interval, unit: str) -> str:
    if math.isnan(ends[0]):
        return show(ends[0], unit)
    return f"{show(ends[0], unit)} to {show(ends[1], unit)}"

"""The trip points as a table: volts, their exact interval, and the measurand."""

from __future__ import annotations

import html

from hystkit.base.quantity import show_span
from hystkit.circuit.signals import Signal
from hystkit.circuit.trip_texts import TripTexts
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Levels

Rows = list[tuple[str, ...]]


def trip_rows(levels: Levels, trips: TripPoints) -> Rows:
    """Write the trip points as rows of text, the first of them the heading.

    Parameters
    ----------
    levels : Levels
        Gives the exact intervals.
    trips : TripPoints
        Of the same design, scalar.

    Returns
    -------
    list of tuple of str
        A column for the interval stands only with tolerances, one for the measurand only with a
        signal.
    """
    intervals = {"upper": levels.upper_interval, "lower": levels.lower_interval}
    toleranced = any(intervals.values()) or bool(levels.not_evaluated)
    signal = trips.signal
    heading = ["", "nominal"]
    heading += ["over tolerances"] if toleranced else []
    heading += [_column(signal)] if signal is not None else []
    rows: Rows = [tuple(heading)]
    texts = TripTexts(float(trips.upper), float(trips.lower), signal)
    for name in ("upper", "lower", "width", "middle"):
        row = [name, texts.shown(name)]
        if toleranced:
            found = intervals.get(name)
            missing = levels.not_evaluated if name in intervals else ""
            row.append(show_span(*found, "V") if found else missing)
        if signal is not None:
            row.append(texts.number(name))
        rows.append(tuple(row))
    return rows


def as_html(rows: Rows) -> str:
    """Write rows as an HTML table.

    Parameters
    ----------
    rows : list of tuple of str
        The first one is the heading.

    Returns
    -------
    str
        Everything escaped; takes its colours from the page.
    """
    head, *body = ([html.escape(cell) for cell in row] for row in rows)
    # The corner heads nothing.
    heading = "".join(f'<th scope="col">{cell}</th>' if cell else "<td></td>" for cell in head)
    lines = (
        f'<tr><th scope="row">{row[0]}</th>{"".join(f"<td>{c}</td>" for c in row[1:])}</tr>'
        for row in body
    )
    return f"<table><thead><tr>{heading}</tr></thead><tbody>{''.join(lines)}</tbody></table>"


def as_text(rows: Rows) -> str:
    """Write rows as aligned lines.

    Parameters
    ----------
    rows : list of tuple of str
        The first one is the heading.

    Returns
    -------
    str
        One line a row.
    """
    widths = [max(len(row[n]) for row in rows) for n in range(len(rows[0]))]
    return "\n".join(
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in rows
    )


def _column(signal: Signal) -> str:
    return f"{signal.name} / {signal.unit}" if signal.unit else signal.name

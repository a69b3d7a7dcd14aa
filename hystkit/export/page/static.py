"""The page for places that strip scripts, styles and drawings: pictures, tables and LaTeX."""

from __future__ import annotations

import base64
import html
from typing import TYPE_CHECKING, Any

from hystkit.circuit.design import Design
from hystkit.export.cautions import CAUTIONS
from hystkit.export.page.texts import TRIPS, trip_cells, value_rows
from hystkit.figures.lettering import short_unit
from hystkit.figures.loop import loop as loop_picture
from hystkit.figures.ruler import ruler
from hystkit.figures.schematic import schematic
from hystkit.numeric.levels import levels
from hystkit.numeric.loop import loop
from hystkit.symbolic.law import derive

if TYPE_CHECKING:
    from collections.abc import Iterable

    from hystkit.figures.picture import Picture

_SCALE = 1.5


def static_fragment(design: Design) -> str:
    """Write a design as plain HTML.

    Parameters
    ----------
    design : Design
        What to show.

    Returns
    -------
    str
        One ``section`` of headings, ``img`` with data URIs and alternative text, ``table`` and
        ``pre``; readable on light and on dark pages.
    """
    shown = levels(design)
    cells = trip_cells(shown)
    pictures: tuple[Picture[Any], ...] = (
        ruler(shown, theme="any", width_px=800),
        loop_picture(loop(design), theme="any", width_px=560),
        schematic(design, theme="any", width_px=480),
    )
    latex = derive(design).for_design(design).latex()
    fault = "" if shown.ok else f"<p><strong>{html.escape(shown.message)}</strong></p>"
    pieces = [
        "<section>",
        f"<h2>{html.escape(design.name or design.stage.title)}</h2>",
        f"<p>{html.escape(design.stage.title)}</p>{fault}",
        _image(pictures[0]),
        _trips(design, cells),
        _image(pictures[1]),
        _image(pictures[2]),
        _values(design),
        "<h3>Law, in LaTeX</h3>",
        f'<pre style="white-space:pre-wrap">{html.escape(latex)}</pre>',
        *(f"<p><small>{html.escape(line)}</small></p>" for line in CAUTIONS),
        "</section>",
    ]
    return "\n".join(pieces) + "\n"


def _image(picture: Picture[Any]) -> str:
    data = base64.b64encode(picture.png(_SCALE)).decode()
    size = f'width="{picture.width_px}" height="{picture.height_px}"'
    return (
        f'<p><img src="data:image/png;base64,{data}" {size} '
        f'style="max-width:100%;height:auto" alt="{html.escape(picture.alt)}"></p>'
    )


def _trips(design: Design, cells: dict[str, str]) -> str:
    signal = design.signal
    head = ["trip point", "voltage", "over the tolerances"]
    names = ["volts", "within"]
    if signal is not None:
        unit = short_unit(signal)
        head += [f"{signal.name} / {unit}" if unit else signal.name, "over the tolerances"]
        names += ["measurand", "range"]
    rows = [[trip, *(cells[f"{trip}.{name}"] for name in names)] for trip in TRIPS]
    return _table(head, rows)


def _values(design: Design) -> str:
    rows = [row for row in value_rows(design) if row[1]]
    return _table(["value", "", "tolerance", "what it is"], rows)


def _table(head: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    cells = "".join(f'<th scope="col" align="left">{html.escape(text)}</th>' for text in head)
    lines = []
    for first, *others in rows:
        rest = "".join(f"<td>{html.escape(text)}</td>" for text in others)
        lines.append(f'<tr><th scope="row" align="left">{html.escape(first)}</th>{rest}</tr>')
    return f'<table cellpadding="3">\n<tr>{cells}</tr>\n' + "\n".join(lines) + "\n</table>"

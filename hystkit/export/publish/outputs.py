"""Outputs of cells, changed for readers who have no widgets."""

from __future__ import annotations

from typing import Any

from hystkit.circuit.record import MIME, from_record
from hystkit.export.page.writer import page_fragment

WIDGET = "application/vnd.jupyter.widget-view+json"
_MATHML = "application/mathml-presentation+xml"


def for_viewer(output: Any) -> None:
    """Leave of a panel what every viewer shows.

    Parameters
    ----------
    output : dict
        Output of a cell; changed in place. The widget view is taken out, so that no viewer looks
        for a kernel that is not there; picture, table and formula stay.
    """
    data = output.get("data", {})
    if WIDGET in data and "text/html" in data:
        del data[WIDGET]


def for_page(output: Any) -> int:
    """Put the live page beside what a panel showed.

    Parameters
    ----------
    output : dict
        Output of a cell; changed in place.

    Returns
    -------
    int
        1 for a panel, else 0.
    """
    data = output.get("data", {})
    for_viewer(output)
    if _MATHML in data:
        # The page has no script that sets LaTeX; browsers set MathML by themselves.
        data["text/html"] = data[_MATHML]
    data.pop("text/latex", None)
    if MIME not in data:
        return 0
    live = page_fragment(from_record(data[MIME], "the design of a panel"))
    data["text/html"] = f"{data.get('text/html', '')}\n{live}"
    return 1


def missing_outputs(notebook: Any) -> list[int]:
    """Find panels that left nothing to see without widgets.

    Parameters
    ----------
    notebook : NotebookNode
        Executed.

    Returns
    -------
    list of int
        Numbers of the cells, counted from 1.
    """
    return [
        number
        for number, cell in enumerate(notebook.cells, 1)
        for output in cell.get("outputs", ())
        if WIDGET in output.get("data", {}) and "text/html" not in output["data"]
    ]

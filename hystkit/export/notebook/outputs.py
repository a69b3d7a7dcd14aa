"""Outputs of cells, written for readers who have no widgets."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass, field
from html import escape
from typing import Any

from hystkit.circuit.design import Design
from hystkit.circuit.record import MIME as DESIGN
from hystkit.circuit.record import from_record
from hystkit.export.notebook.formulas import displayed, set_formulas, set_latex
from hystkit.export.notebook.libraries import needed
from hystkit.symbolic.mathml import MIME as MATHML

WIDGET = "application/vnd.jupyter.widget-view+json"
_SCRIPT = "application/javascript"
#: Width of a picture whose lettering a narrow screen would make too small [px].
_LEGIBLE = 640
_PICTURES = ("image/png", "image/jpeg", "image/gif", "image/webp")


def for_viewer(output: Any) -> None:
    """Leave of a panel what every viewer shows.

    Parameters
    ----------
    output : dict
        Output of a cell; changed in place. The widget view is taken out, so that no viewer looks
        for a kernel that is not there; picture, table and formula stay.
    """
    output.get("data", {}).pop(WIDGET, None)


def missing_outputs(notebook: Any) -> list[int]:
    """Find widgets that left nothing to see without a kernel.

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


@dataclass
class OutputWriter:
    """Writes outputs as HTML.

    Attributes
    ----------
    markdown : callable
        Markdown to HTML.
    panels : int
        How many panels were written so far.
    """

    markdown: Callable[[str], str]
    panels: int = field(default=0, init=False)

    def write(self, output: Any) -> str:
        """Write one output.

        Parameters
        ----------
        output : dict
            Output of a cell.

        Returns
        -------
        str
            One element.
        """
        kind = output["output_type"]
        if kind == "stream":
            return _pre(output["text"], "stderr" if output["name"] == "stderr" else "text")
        if kind == "error":
            return _pre("\n".join(output["traceback"]), "stderr")
        data, about = output["data"], output.get("metadata", {})
        if DESIGN in data and "text/html" in data:
            return self._panel(data)
        return self._shown(data, about)

    def _shown(self, data: Any, about: Any) -> str:
        """Write the richest of the forms in which a result was given."""
        if MATHML in data:
            return displayed(_text(data[MATHML]))
        if "text/html" in data:
            return _framed("html", set_formulas(_text(data["text/html"])))
        if "text/markdown" in data:
            return _framed("html", self.markdown(_text(data["text/markdown"])))
        if "image/svg+xml" in data:
            return _picture("image/svg+xml", data, about)
        if "text/latex" in data:
            return _framed("html", set_latex(_text(data["text/latex"])))
        for kind in _PICTURES:
            if kind in data:
                return _picture(kind, data, about)
        if _SCRIPT in data:
            return '<p class="left-out">A script of the notebook is left out here.</p>'
        if "text/plain" in data:
            return _pre(_text(data["text/plain"]), "text")
        return _pre(json.dumps(data, indent=1, ensure_ascii=False), "text")

    def _panel(self, data: Any) -> str:
        """Write what a panel showed, and beside it the live page of its design."""
        from hystkit.export.page.writer import page_fragment  # loads what draws

        design = from_record(data[DESIGN], "the design of a panel")
        still = set_formulas(_text(data["text/html"]), _laws(design), blocks_only=True)
        self.panels += 1
        return (
            f'<div class="panel"><div class="still" tabindex="0">{still}</div>\n'
            '<div class="beside"><p class="caption">Live page of this design</p>'
            f'<div class="frame">{page_fragment(design)}</div></div></div>'
        )


def _laws(design: Design) -> dict[str, str]:
    """Give the law of a design, as panels write it in LaTeX, in MathML."""
    from hystkit.symbolic.law import derive
    from hystkit.symbolic.mathml import formula_mathml

    law = derive(design).for_design(design)
    return {law.latex(): formula_mathml(law.rows)}


def _picture(kind: str, data: Any, about: Any) -> str:
    from base64 import b64encode

    content = _text(data[kind])
    if kind == "image/svg+xml":
        # As an image a drawing cannot run scripts, and its names cannot meet others of the page.
        content = b64encode(content.encode("utf-8")).decode("ascii")
    told = about.get(kind, {}) | {k: v for k, v in about.items() if k in ("alt", "width")}
    alt = str(told.get("alt") or _words(data))
    width = str(told.get("width", ""))
    size = f' width="{width}"' if width.isdecimal() else ""
    size += ' class="wide"' if width.isdecimal() and int(width) > _LEGIBLE else ""
    source = f"data:{kind};base64,{''.join(content.split())}"
    focus = ' tabindex="0"' if "wide" in size else ""
    return f'<div class="picture"{focus}><img alt="{escape(alt)}"{size} src="{source}"></div>'


def _words(data: Any) -> str:
    """Describe a picture by its plain text, which for many is only the name of a class."""
    text = _text(data.get("text/plain", ""))
    return "picture" if text.startswith("<") or not text else text


def _pre(text: str, look: str) -> str:
    shown = needed("nbconvert.filters").ansi2html(text.rstrip("\n"))
    return f'<pre class="{look}" tabindex="0">{shown}</pre>'


def _framed(look: str, content: str) -> str:
    return f'<div class="{look}" tabindex="0">{content}</div>'


def _text(value: Any) -> str:
    """Join what the format may store as lines."""
    return value if isinstance(value, str) else "".join(value)

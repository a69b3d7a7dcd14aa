"""The published notebook as one HTML file that asks for nothing from anywhere."""

from __future__ import annotations

from html import escape
from typing import Any

from hystkit.base.errors import InputError

_STYLE = """
:root { color-scheme: light dark; }
body { margin: 2rem auto; max-width: 76rem; padding: 0 1rem;
  font: 16px/1.5 system-ui, sans-serif; color: CanvasText; background: Canvas; }
pre { overflow-x: auto; font: 13px/1.45 ui-monospace, monospace; margin: 0.4rem 0; }
.jp-CodeCell .highlight, .highlight { border-left: 3px solid #7a7a7a66; padding-left: 0.8rem; }
.jp-InputPrompt, .jp-OutputPrompt, .jp-Collapser, .prompt, .anchor-link { display: none; }
img { max-width: 100%; height: auto; }
table { border-collapse: collapse; margin: 0.4rem 0; }
td, th { padding: 0.15rem 0.8rem 0.15rem 0; text-align: left; }
tr + tr { border-top: 1px solid #7a7a7a55; }
@media print { .highlight { display: none; } }
"""


def document(notebook: Any, title: str) -> str:
    """Write an executed notebook as HTML.

    Parameters
    ----------
    notebook : NotebookNode
        With outputs that need no widgets.
    title : str
        Title of the page.

    Returns
    -------
    str
        One document; no script but those of live pages, no address but those that the notebook's
        own text names.

    Raises
    ------
    InputError
        If nbconvert is not installed.
    """
    try:
        from nbconvert.exporters import HTMLExporter
    except ImportError:
        raise InputError(
            "publishing needs nbconvert, which is not installed.",
            asked="publish a notebook",
            remedy="pip install 'hystkit[lab]'",
        ) from None
    # The basic template gives the cells alone: the others load scripts from elsewhere.
    body, _ = HTMLExporter(template_name="basic").from_notebook_node(notebook)
    return (
        "<!DOCTYPE html>\n"
        f'<html lang="en"><head><meta charset="utf-8"><title>{escape(title)}</title>\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        f"<style>{_STYLE}</style></head>\n<body>\n<main>\n{body}\n</main>\n</body></html>\n"
    )

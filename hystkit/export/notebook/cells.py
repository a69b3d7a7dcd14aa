"""Cells of an executed notebook, written as HTML."""

from __future__ import annotations

from dataclasses import dataclass
from html import escape
from pathlib import Path
from typing import Any

from hystkit.export.notebook.formulas import set_formulas
from hystkit.export.notebook.libraries import needed
from hystkit.export.notebook.outputs import OutputWriter


@dataclass(frozen=True)
class Written:
    """Cells as HTML.

    Attributes
    ----------
    body : str
        One element for each cell that has something to read.
    panels : int
        Number of panels in them.
    """

    body: str
    panels: int


def write_cells(notebook: Any, folder: Path) -> Written:
    """Write the cells of a notebook.

    Parameters
    ----------
    notebook : NotebookNode
        Executed.
    folder : Path
        Where it stands; pictures that its text names are taken from there into the page.

    Returns
    -------
    Written
        HTML.
    """
    panels, pieces = 0, []
    language = notebook.metadata.get("language_info", {}).get("pygments_lexer", "ipython3")
    for cell in notebook.cells:
        text = Markdown(folder, cell.get("attachments", {}))
        if cell.cell_type == "markdown":
            pieces.append(f'<section class="prose">{text.html(cell.source)}</section>')
        elif cell.cell_type == "raw":
            pieces.append(f"<pre>{escape(cell.source)}</pre>" if cell.source.strip() else "")
        else:
            writer = OutputWriter(text.html)
            pieces.append(_code(cell, language, writer))
            panels += writer.panels
    return Written("\n".join(filter(None, pieces)), panels)


@dataclass(frozen=True)
class Markdown:
    """Turns Markdown into HTML.

    Attributes
    ----------
    folder : Path
        Where pictures are looked for.
    attachments : dict
        Pictures of the cell itself.
    """

    folder: Path
    attachments: Any

    def html(self, source: str) -> str:
        """Write Markdown as HTML.

        Parameters
        ----------
        source : str
            With LaTeX between dollars.

        Returns
        -------
        str
            HTML with formulas set.
        """
        library = needed("nbconvert.filters.markdown_mistune")
        renderer = library.IPythonRenderer(
            escape=False,
            attachments=self.attachments,
            embed_images=True,
            path=str(self.folder),
            exclude_anchor_links=False,
        )
        return set_formulas(library.MarkdownWithMath(renderer=renderer).render(source))


def _code(cell: Any, language: str, writer: OutputWriter) -> str:
    if not cell.source.strip() and not cell.outputs:
        return ""
    highlight = needed("nbconvert.filters").Highlight2HTML(pygments_lexer=language)
    shown = highlight(cell.source, metadata=cell.metadata).replace("<pre>", '<pre tabindex="0">', 1)
    outputs = "\n".join(writer.write(output) for output in cell.outputs)
    return (
        f'<section class="run">{shown}\n<div class="outputs">{outputs}</div></section>'
        if outputs
        else f'<section class="run">{shown}</section>'
    )

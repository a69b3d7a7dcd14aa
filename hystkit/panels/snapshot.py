"""What a panel shows, as a plain output that needs neither kernel nor script."""

from __future__ import annotations

import html
from base64 import b64encode
from dataclasses import dataclass
from typing import Any

from hystkit.panels import table
from hystkit.panels.law import displayed


@dataclass(frozen=True)
class Still:
    """One picture of a panel.

    Attributes
    ----------
    png : bytes
        The file.
    alt : str
        What it shows, in words.
    width_px : int
        Its width on the page [px].
    """

    png: bytes
    alt: str
    width_px: int


@dataclass(frozen=True)
class Snapshot:
    """What a panel showed at one moment.

    Attributes
    ----------
    title : str
        What it is.
    stills : tuple of Still
        Its pictures.
    rows : list of tuple of str
        Its table; the first row is the heading.
    latex : str
        Its formula, for math mode.
    remarks : tuple of str
        Its findings.
    """

    title: str
    stills: tuple[Still, ...]
    rows: table.Rows
    latex: str
    remarks: tuple[str, ...]

    def to_html(self) -> str:
        """Write everything as HTML that untrusted viewers keep.

        Returns
        -------
        str
            Pictures with their words, table and formula; everything escaped, no script.
        """
        return "\n".join(
            [
                f"<p><strong>{html.escape(self.title)}</strong></p>",
                *(_image(still) for still in self.stills),
                *(f"<p>{html.escape(remark)}</p>" for remark in self.remarks),
                table.as_html(self.rows) if self.rows else "",
                f"<p>{displayed(self.latex)}</p>" if self.latex else "",
            ]
        )

    def to_text(self) -> str:
        """Write title, findings and table as text.

        Returns
        -------
        str
            Aligned lines.
        """
        lines = [self.title, *self.remarks]
        return "\n".join([*lines, table.as_text(self.rows)] if self.rows else lines)

    def __str__(self) -> str:
        """Return the text."""
        return self.to_text()

    def __repr__(self) -> str:
        """Return the text; the pictures would fill pages."""
        return self.to_text()

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, str]:
        return {"text/plain": self.to_text(), "text/html": self.to_html()}


def _image(still: Still) -> str:
    data = b64encode(still.png).decode("ascii")
    return (
        f'<img alt="{html.escape(still.alt, quote=True)}" width="{still.width_px}" '
        f'style="max-width: 100%; height: auto" src="data:image/png;base64,{data}">'
    )

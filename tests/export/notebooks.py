"""Small notebooks for the tests of publishing, and a look at the text of a page."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import nbformat
from nbformat.v4 import new_code_cell, new_markdown_cell, new_notebook

VERBATIM = re.compile(
    r"<(script|style|pre|code|textarea|svg|head)\b.*?</\1\s*>|<[^>]*>", re.DOTALL | re.IGNORECASE
)


def notebook(path: Path, *cells: str | Any, **metadata: Any) -> Path:
    """Write a notebook: text that begins with "#" becomes prose, other text code."""
    made = [_cell(n, cell) for n, cell in enumerate(cells)]
    nbformat.write(new_notebook(cells=made, metadata=metadata), path)
    return path


def _cell(number: int, cell: str | Any) -> Any:
    if not isinstance(cell, str):
        return cell
    made = new_markdown_cell(cell) if cell.startswith("#") else new_code_cell(cell)
    made["id"] = f"cell-{number}"
    return made


def readable(page: str) -> str:
    """Give the text that a page shows, less code, drawings and what programs printed."""
    return VERBATIM.sub(" ", page)

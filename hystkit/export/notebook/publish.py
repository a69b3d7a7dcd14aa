"""Execute a notebook and write what a reader without kernel and network can use."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from hystkit.base.errors import InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.files import check_free, write_text
from hystkit.export.notebook.cells import write_cells
from hystkit.export.notebook.document import document, without_fetching
from hystkit.export.notebook.execute import PublishError, execute, read
from hystkit.export.notebook.libraries import needed
from hystkit.export.notebook.outputs import for_viewer, missing_outputs


@dataclass(frozen=True)
class Published(Viewed):
    """What was written.

    Attributes
    ----------
    page : Path
        The notebook as one HTML file, each panel with its live page.
    notebook : Path
        The notebook with outputs that viewers without widgets show.
    panels : int
        Number of panels in it.
    left_out : tuple of str
        Addresses of what the notebook shows from elsewhere, such as pictures on a server; the
        page fetches nothing and has a link in their place.
    """

    page: Path
    notebook: Path
    panels: int
    left_out: tuple[str, ...] = ()

    def _fields(self) -> Sequence[Field]:
        return [
            Field("page", str(self.page)),
            Field("notebook", str(self.notebook)),
            Field("panels", str(self.panels)),
            *(Field("left out", address) for address in self.left_out),
        ]


def publish(
    notebook: str | os.PathLike[str],
    out: str | os.PathLike[str] | None = None,
    *,
    timeout: float = 600.0,
    overwrite: bool = False,
) -> Published:
    """Execute a notebook and publish it for readers without kernel and network.

    Parameters
    ----------
    notebook : path
        Notebook to execute, in its own folder; the file itself is left as it is.
    out : path, optional
        Folder for the two files; that of the notebook when left out.
    timeout : float, default 600
        Longest time for one cell [s].
    overwrite : bool, default False
        Whether existing files may be replaced.

    Returns
    -------
    Published
        Where ``NAME.html`` and ``NAME.published.ipynb`` were written.

    Raises
    ------
    InputError
        If the file is missing or is no notebook, the packages for it are not installed, or a
        folder above `out` is a file.
    PublishError
        If a cell fails or takes too long; the cell and its error are named. If a widget would
        leave nothing to see.
    OutputExistsError
        If a file exists and `overwrite` is false.

    Notes
    -----
    A panel shows what it showed at the end of its cell. Its live page runs in the browser alone.
    The notebook runs in the kernel that it names or, where that is not installed, in the Python
    kernel of this environment. What the cells print and show is all that differs from run to run.
    """
    if not 0 < timeout < float("inf"):
        raise InputError(
            "a notebook needs time to run.",
            asked=f"timeout = {timeout}",
            rule="timeout > 0 s, and finite",
            remedy="such as timeout=600",
        )
    source = Path(notebook)
    folder = source.parent if out is None else Path(out)
    page = folder / f"{source.stem}.html"
    copy = folder / f"{source.stem}.published.ipynb"
    for file in (page, copy):
        check_free(file, "another folder, or overwrite=True (--overwrite)", overwrite=overwrite)
    executed = read(source)
    execute(executed, source, timeout)
    missing = missing_outputs(executed)
    if missing:
        raise _nothing_to_see(source, missing)
    written = write_cells(executed, source.parent)
    body, left_out = without_fetching(written.body)
    for cell in executed.cells:
        for output in cell.get("outputs", ()):
            for_viewer(output)
    folder.mkdir(parents=True, exist_ok=True)
    write_text(page, document(body, source.stem), overwrite=overwrite)
    write_text(copy, needed("nbformat").writes(executed) + "\n", overwrite=overwrite)
    return Published(page, copy, written.panels, left_out)


def _nothing_to_see(source: Path, cells: Sequence[int]) -> PublishError:
    return PublishError(
        "a widget leaves nothing that a reader without a kernel could see.",
        asked=f"publish {source}",
        have=f"cell {', '.join(map(str, cells))}",
        rule="a panel leaves pictures and a table beside its widgets; a bare widget leaves nothing",
        remedy="a panel of hystkit, as the last line of its cell",
    )

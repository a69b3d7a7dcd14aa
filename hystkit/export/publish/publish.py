"""Execute a notebook and write what a reader without kernel and network can use."""

from __future__ import annotations

import os
from collections.abc import Sequence
from copy import deepcopy
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from hystkit.base.errors import HystkitError, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.export.files import already_there, write_text
from hystkit.export.publish.document import document
from hystkit.export.publish.outputs import for_page, for_viewer, missing_outputs


class PublishError(HystkitError, RuntimeError):
    """A notebook that cannot be executed."""


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
    """

    page: Path
    notebook: Path
    panels: int

    def _fields(self) -> Sequence[Field]:
        return [
            Field("page", str(self.page)),
            Field("notebook", str(self.notebook)),
            Field("panels", str(self.panels)),
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
        If the file is missing or is no notebook, or the packages for it are not installed.
    PublishError
        If a cell fails; the cell and its error are named.
    OutputExistsError
        If a file exists and `overwrite` is false.

    Notes
    -----
    A panel shows what it showed at the end of its cell. Its live page runs in the browser alone.
    """
    source = Path(notebook)
    folder = source.parent if out is None else Path(out)
    page = folder / f"{source.stem}.html"
    copy = folder / f"{source.stem}.published.ipynb"
    for file in (page, copy):
        if file.exists() and not overwrite:
            raise already_there(file, "another folder (--out), or --overwrite")
    executed = _executed(_read(source), source, timeout)
    missing = missing_outputs(executed)
    if missing:
        raise PublishError(
            "a panel has no output that a reader could see.",
            asked=f"publish {source}",
            have=f"cells {', '.join(map(str, missing))}",
            rule="each panel leaves pictures and a table beside its widgets",
            remedy="a panel of this version of hystkit, as the last line of its cell",
        )
    viewer, shown, panels = deepcopy(executed), deepcopy(executed), 0
    for cell in viewer.cells:
        for output in cell.get("outputs", ()):
            for_viewer(output)
    for cell in shown.cells:
        for output in cell.get("outputs", ()):
            panels += for_page(output)
    folder.mkdir(parents=True, exist_ok=True)
    write_text(page, document(shown, source.stem), overwrite=overwrite)
    write_text(copy, _as_text(viewer), overwrite=overwrite)
    return Published(page, copy, panels)


def _read(source: Path) -> Any:
    nbformat = _needed("nbformat")
    try:
        return nbformat.read(source, as_version=4)
    except OSError as error:
        raise InputError(
            f"{source} cannot be read.",
            asked=f"publish {source}",
            have=error.strerror or str(error),
            remedy="the path of a notebook",
        ) from None
    except Exception as error:  # nbformat has no common error of its own
        raise InputError(
            f"{source} is not a notebook.",
            asked=f"publish {source}",
            have=f"{type(error).__name__}: {str(error).splitlines()[0]}",
            remedy="a notebook of format 4, .ipynb",
        ) from None


def _executed(notebook: Any, source: Path, timeout: float) -> Any:
    client = _needed("nbclient")
    runner = client.NotebookClient(
        notebook,
        timeout=timeout,
        kernel_name=notebook.metadata.get("kernelspec", {}).get("name", "python3"),
        resources={"metadata": {"path": str(source.parent.resolve())}},
        # With widget state stored, viewers would look for widgets and not show the fallback.
        store_widget_state=False,
    )
    try:
        runner.execute()
    except client.exceptions.CellExecutionError as error:
        raise PublishError(
            "a cell of the notebook fails.",
            asked=f"publish {source}",
            have=f"{error.ename}: {error.evalue}",
            remedy="run the notebook and mend the cell",
        ) from None
    except client.exceptions.CellTimeoutError:
        raise PublishError(
            "a cell of the notebook takes too long.",
            asked=f"publish {source}",
            rule=f"at most {timeout:g} s for one cell",
            remedy="a longer --timeout",
        ) from None
    return notebook


def _needed(module: str) -> Any:
    from importlib import import_module

    try:
        found = import_module(module)
        if module == "nbclient":
            import_module("nbclient.exceptions")
        return found
    except ImportError:
        raise InputError(
            f"publishing needs {module}, which is not installed.",
            asked="publish a notebook",
            remedy="pip install 'hystkit[lab]'",
        ) from None


def _as_text(notebook: Any) -> str:
    return str(_needed("nbformat").writes(notebook)) + "\n"

"""Read a notebook and run it, from its first cell to its last, in a kernel of its own."""

from __future__ import annotations

import tempfile
import warnings
from pathlib import Path
from typing import IO, Any

from hystkit.base.errors import Fault, HystkitError, InputError
from hystkit.export.notebook.libraries import needed

#: Used where the kernel that a notebook names is not installed here.
_KERNEL = "python3"


class PublishError(HystkitError, RuntimeError):
    """A notebook that cannot be executed, or would show less than it should."""


def read(source: Path) -> Any:
    """Read a notebook without its outputs.

    Parameters
    ----------
    source : Path
        The file.

    Returns
    -------
    NotebookNode
        Format 4; outputs and widget states of earlier runs are left out.

    Raises
    ------
    InputError
        If the file cannot be read, or is no notebook.
    """
    nbformat = needed("nbformat")
    try:
        text = source.read_text(encoding="utf-8-sig")
    except OSError as error:
        raise _unreadable(source, error.strerror or str(error)) from None
    except UnicodeDecodeError:
        raise _no_notebook(source, "a file that is not text") from None
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # on cells without an id, which get one here
            notebook = nbformat.reads(text, as_version=4)
            nbformat.validate(notebook)
    except Exception as error:  # nbformat has no common error of its own
        raise _no_notebook(source, _first_line(error)) from None
    notebook.metadata.pop("widgets", None)
    for cell in notebook.cells:
        if cell.cell_type == "code":
            cell.outputs, cell.execution_count = [], None
    return notebook


def execute(notebook: Any, source: Path, timeout: float) -> None:
    """Run all cells.

    Parameters
    ----------
    notebook : NotebookNode
        Changed in place: it gets its outputs.
    source : Path
        Where it was read; its folder is where the cells run.
    timeout : float
        Longest time for one cell [s].

    Raises
    ------
    PublishError
        If a cell fails or takes too long, or the kernel ends.
    """
    # The kernel's own remarks belong to nobody, unless it dies.
    with tempfile.TemporaryFile() as log:
        _run(notebook, source, timeout, log)
    for cell in notebook.cells:
        if cell.cell_type == "code":
            cell.outputs = _joined(cell.outputs)


def _run(notebook: Any, source: Path, timeout: float, log: IO[bytes]) -> None:
    reached: list[int] = []
    runner = needed("nbclient").NotebookClient(
        notebook,
        on_cell_execute=lambda cell, cell_index: reached.append(cell_index),
        timeout=timeout,
        kernel_name=_kernel(notebook),
        resources={"metadata": {"path": str(source.parent.resolve())}},
        # With widget state stored, viewers would look for widgets and not show the fallback.
        store_widget_state=False,
        record_timing=False,
    )
    try:
        runner.execute(stdout=log, stderr=log)
    except Exception as error:
        # On an interrupt the runner ends the kernel, and then stumbles over its own cleaning up.
        if getattr(runner, "_async_cleanup_kernel_future", None) is not None:
            raise KeyboardInterrupt from None
        where = ", ".join(filter(None, [source.name, _named(notebook, reached)]))
        fault = _fault(error, where, timeout, log)
        if fault is None:
            raise
        raise PublishError.of(f"the notebook {source}", [fault]) from None


def _fault(error: Exception, where: str, timeout: float, log: IO[bytes]) -> Fault | None:
    """Say what ended the run; None for an error of the runner itself."""
    errors = needed("nbclient.exceptions")
    if isinstance(error, errors.CellExecutionError):
        return Fault(
            "a cell of the notebook fails.",
            asked=where,
            have=f"{error.ename}: {error.evalue}",
            rule="every cell runs",
            remedy="run the notebook and mend the cell",
        )
    if isinstance(error, errors.CellTimeoutError):
        return Fault(
            "a cell of the notebook takes too long.",
            asked=where,
            rule=f"at most {timeout:g} s for one cell",
            remedy="a longer timeout (--timeout)",
        )
    if isinstance(error, errors.DeadKernelError | RuntimeError):
        log.seek(0)
        lines = log.read().decode("utf-8", "replace").strip().splitlines()
        said = [line for line in lines if not line.startswith("[")]  # less its remarks on itself
        return Fault(
            "the kernel of the notebook ended by itself.",
            asked=where,
            have=said[-1] if said else _first_line(error),
            remedy="run the notebook and see which cell ends it",
        )
    return None


def _kernel(notebook: Any) -> str:
    """Give the kernel that the notebook names, or the one of this environment."""
    specs = needed("jupyter_client.kernelspec").KernelSpecManager().find_kernel_specs()
    named = notebook.metadata.get("kernelspec", {})
    name = str(named.get("name", _KERNEL))
    if name in specs:
        return name
    if named.get("language", "python").lower() == "python" and _KERNEL in specs:
        return _KERNEL
    raise PublishError(
        "the kernel of the notebook is not installed.",
        asked=f"kernel {name}",
        have=f"kernels {', '.join(sorted(specs)) or 'none'}",
        remedy="pip install 'hystkit[lab]', or the kernel that the notebook names",
    )


def _named(notebook: Any, reached: list[int]) -> str:
    """Name the cell that was reached last, by its number and the beginning of its text."""
    if not reached:
        return ""
    lines = notebook.cells[reached[-1]].source.splitlines()
    first = next((line.strip() for line in lines if line.strip()), "")
    return f"cell {reached[-1] + 1}: {first[:60]}"


def _joined(outputs: list[Any]) -> list[Any]:
    """Join what a cell printed, which arrives in pieces that differ from run to run."""
    joined: list[Any] = []
    for output in outputs:
        last = joined[-1] if joined else None
        if last and output.output_type == last.output_type == "stream" and output.name == last.name:
            last.text += output.text
        else:
            joined.append(output)
    return joined


def _unreadable(source: Path, why: str) -> InputError:
    return InputError(
        f"{source} cannot be read.",
        asked=f"publish {source}",
        have=why,
        remedy="the path of a notebook",
    )


def _no_notebook(source: Path, why: str) -> InputError:
    return InputError(
        f"{source} is not a notebook.",
        asked=f"publish {source}",
        have=why,
        remedy="a Jupyter notebook, .ipynb",
    )


def _first_line(error: Exception) -> str:
    lines = str(error).strip().splitlines()
    return f"{type(error).__name__}: {lines[0][:100]}" if lines else type(error).__name__

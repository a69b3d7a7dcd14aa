"""Writing files without losing one that is already there."""

from __future__ import annotations

from pathlib import Path

from hystkit.base.errors import OutputExistsError


def write_text(path: Path, text: str, *, overwrite: bool = False) -> Path:
    """Write a text file, whole or not at all.

    Parameters
    ----------
    path : Path
        File to write.
    text : str
        What to write, UTF-8.
    overwrite : bool, default False
        Whether an existing file may be replaced.

    Returns
    -------
    Path
        The file.

    Raises
    ------
    OutputExistsError
        If the file exists and `overwrite` is false.
    """
    if path.exists() and not overwrite:
        raise already_there(path, "another name, or overwrite=True")
    # A crash while writing must not leave half a file in place of a whole one.
    partial = path.with_name(path.name + ".partial")
    partial.write_text(text, encoding="utf-8", newline="\n")
    partial.replace(path)
    return path


def already_there(path: Path, remedy: str) -> OutputExistsError:
    """Give the error for an output that exists.

    Parameters
    ----------
    path : Path
        File or folder that was asked for.
    remedy : str
        What to do about it.

    Returns
    -------
    OutputExistsError
        To be raised.
    """
    return OutputExistsError(
        f"{path} exists already.",
        asked=f"write to {path}",
        rule="nothing is replaced unasked",
        remedy=remedy,
    )

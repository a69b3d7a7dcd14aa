"""Writing files without losing one that is already there."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

from hystkit.base.errors import InputError, OutputExistsError

#: What to do where a file exists already.
ANOTHER_NAME = "another name, or overwrite=True"


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
    InputError
        If it cannot be written: no such folder, a folder in its place, no room.
    """
    try:
        data = text.encode()
    except UnicodeError as error:
        raise _not_writable(path, error) from None
    return write_bytes(path, data, overwrite=overwrite)


def write_bytes(path: Path, data: bytes, *, overwrite: bool = False) -> Path:
    """Write a file, whole or not at all.

    Parameters
    ----------
    path : Path
        File to write.
    data : bytes
        What to write.
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
    InputError
        If it cannot be written: no such folder, a folder in its place, no room.
    """
    if _is(path.is_file) and not overwrite:
        raise already_there(path, ANOTHER_NAME)
    # A crash while writing must not leave half a file in place of a whole one.
    partial = path.with_name(f".{path.name}.{os.getpid()}.partial")
    try:
        partial.write_bytes(data)
        partial.replace(path)
    except OSError as error:
        raise _not_writable(path, error) from None
    finally:
        _removed(partial)
    return path


def check_free(path: Path, remedy: str, *, overwrite: bool = False) -> None:
    """Refuse an output that exists or can never exist, before anything is worked out for it.

    Parameters
    ----------
    path : Path
        File or folder to make; folders above it may be missing yet.
    remedy : str
        What to do where it exists already.
    overwrite : bool, default False
        Whether what exists may be replaced.

    Raises
    ------
    OutputExistsError
        If it exists and `overwrite` is false.
    InputError
        If one of the folders above it is a file.
    """
    if not overwrite and (_is(path.exists) or _is(path.is_symlink)):
        raise already_there(path, remedy)
    above = next((each for each in path.parents if _is(each.exists)), None)
    if above is not None and not _is(above.is_dir):
        raise InputError(
            f"{path} cannot be written.",
            asked=f"write to {path}",
            have=f"{above} is a file",
            remedy="a path through folders only",
        )


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


def _is(test: Callable[[], bool]) -> bool:
    """Ask about a path; one that cannot even be looked up, such as a name too long, is nothing."""
    try:
        return test()
    except OSError:
        return False


def _not_writable(path: Path, error: OSError | UnicodeError) -> InputError:
    have, remedy = str(error), "another path"
    if _is(path.is_dir):
        have, remedy = f"{path} is a folder", "the name of a file in it"
    elif not _is(path.parent.exists):
        have, remedy = f"there is no folder {path.parent}", "make the folder first, or another path"
    elif not _is(path.parent.is_dir):
        have, remedy = f"{path.parent} is a file", "a path through folders only"
    elif isinstance(error, UnicodeError):
        remedy = "text of whole characters only"
    elif error.strerror:
        have = error.strerror
    return InputError(
        f"{path} cannot be written.", asked=f"write to {path}", have=have, remedy=remedy
    )


def _removed(partial: Path) -> None:
    """Remove what is left of a failed attempt."""
    try:
        partial.unlink(missing_ok=True)
    except OSError:  # where nothing could be written, nothing is left
        return

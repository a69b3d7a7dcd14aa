"""The libraries that publishing needs, loaded when they are needed."""

from __future__ import annotations

from importlib import import_module
from typing import Any

from hystkit.base.errors import InputError


def needed(module: str) -> Any:
    """Import a module of the optional dependencies.

    Parameters
    ----------
    module : str
        Its full name.

    Returns
    -------
    module
        The module.

    Raises
    ------
    InputError
        If its library is not installed.
    """
    try:
        return import_module(module)
    except ImportError as error:
        raise InputError(
            f"publishing needs {module.partition('.')[0]}, which cannot be imported.",
            asked="publish a notebook",
            have=str(error),
            remedy="pip install 'hystkit[lab]'",
        ) from None

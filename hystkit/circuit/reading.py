"""How the frozen descriptions of this layer read their numbers: all faults together."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable
from typing import Any

from hystkit.base.errors import Fault, QuantityError

Quantity = float | int | str
_LONGEST = 60


def collect(faults: list[Fault], reader: Callable[[], float]) -> float:
    """Read a number; what cannot be read becomes one more fault.

    Parameters
    ----------
    faults : list of Fault
        Where a fault is added.
    reader : callable
        Gives the number or raises a `QuantityError`.

    Returns
    -------
    float
        The number, NaN where it could not be read.
    """
    try:
        return reader()
    except QuantityError as error:
        faults.extend(error.faults)
        return math.nan


def members(value: object) -> tuple[Any, ...]:
    """Take a collection of numbers apart.

    Parameters
    ----------
    value : object
        A list, a tuple, an array.

    Returns
    -------
    tuple
        Its members; empty for text and for whatever holds none.
    """
    if isinstance(value, str) or not isinstance(value, Iterable):
        return ()
    return tuple(value)


def is_kind(value: object, kind: Any) -> bool:
    """Tell whether an argument is of the kind that its annotation promises.

    Parameters
    ----------
    value : object
        As given, perhaps by code that no type checker has seen.
    kind : type or union
        What is taken.

    Returns
    -------
    bool
        As ``isinstance``.
    """
    return isinstance(value, kind)


def wrong_kind(name: str, value: object, wanted: str, remedy: str) -> Fault:
    """Give the fault of an argument that is of another kind than the one that is taken.

    Parameters
    ----------
    name : str
        The argument.
    value : object
        What was given.
    wanted : str
        What is taken, such as "a Device".
    remedy : str
        What to write.

    Returns
    -------
    Fault
        To be reported.
    """
    shown = repr(value)
    have = f"{shown if len(shown) <= _LONGEST else shown[: _LONGEST - 3] + '...'}"
    return Fault(
        f"{name} is not {wanted}.",
        asked=f"{name} as {wanted}",
        have=f"{have} ({type(value).__name__})",
        remedy=remedy,
    )


def set_frozen(target: object, name: str, value: Any) -> None:
    """Set a field of a frozen dataclass while it is built.

    Parameters
    ----------
    target : object
        Under construction.
    name : str
        Field.
    value : object
        Its final value.
    """
    object.__setattr__(target, name, value)

"""How these analyses read what they are asked: numbers, text and arrays, all faults together."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read, show
from hystkit.circuit.reading import Quantity, collect, is_kind, wrong_kind

Floats = NDArray[np.float64]
#: What is accepted for a value of which there may be many.
Values = Quantity | Any


def read_value(faults: list[Fault], name: str, value: object, unit: str) -> Floats:
    """Read a number, text or an array of numbers.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong is added.
    name : str
        The argument.
    value : float, str or array_like
        As given.
    unit : str
        Its unit.

    Returns
    -------
    ndarray
        Of the shape given; a single number is finite. An array may hold anything: its elements are
        judged one by one.
    """
    if isinstance(value, str) or np.ndim(value) == 0:  # type: ignore[arg-type]
        single: Any = value.item() if isinstance(value, np.ndarray) else value
        return np.asarray(collect(faults, partial(read, single, unit=unit, name=name)))
    try:
        return np.asarray(value, dtype=np.float64)
    except (TypeError, ValueError):
        faults.append(wrong_kind(name, value, f"a number or an array of numbers [{unit}]",
                                 f"{name} in {unit}"))  # fmt: skip
        return np.asarray(np.nan)


def read_positive(
    faults: list[Fault], name: str, value: object, unit: str, *, zero: bool = False
) -> Floats:
    """Read what has to be above zero; in an array, elements that are not become NaN.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong is added.
    name : str
        The argument.
    value : float, str or array_like
        As given.
    unit : str
        Its unit.
    zero : bool, default False
        Whether zero is taken as well.

    Returns
    -------
    ndarray
        Of the shape given.
    """
    found = read_value(faults, name, value, unit)
    good = (found >= 0 if zero else found > 0) & np.isfinite(found)
    if found.ndim == 0:
        # What could not be read is NaN here, and a fault already.
        if not good and not np.isnan(found):
            faults.append(
                Fault(
                    f"{name} is {'negative' if zero else 'not positive'}.",
                    asked=f"{name} = {show(float(found), unit)}",
                    rule=f"{name} {'>=' if zero else '>'} 0",
                    remedy=f"its magnitude, in {unit}",
                )
            )
        return found
    return np.where(good, found, np.nan)


def check_noise(faults: list[Fault], noise: object) -> None:
    """Report what is no description of noise.

    Parameters
    ----------
    faults : list of Fault
        Where it is added.
    noise : object
        As given.
    """
    from hystkit.analyses.noise.model import Noise  # it reads its numbers with this module

    if not is_kind(noise, Noise):
        faults.append(
            wrong_kind("noise", noise, "a Noise", 'hk.Noise.brick_wall(rms="1m", bandwidth="1k")')
        )


def broadcast(subject: str, faults: list[Fault], given: Mapping[str, Floats]) -> list[Floats]:
    """Bring arrays to one shape, or report everything that is wrong.

    Parameters
    ----------
    subject : str
        What is being read, for the error.
    faults : list of Fault
        Found so far.
    given : mapping of str to ndarray
        The arrays by name.

    Returns
    -------
    list of ndarray
        All of one shape.

    Raises
    ------
    InputError
        With all faults.
    """
    try:
        found = np.broadcast_arrays(*given.values())
    except ValueError:
        found = ()
        faults.append(
            Fault(
                "these arrays do not fit each other.",
                have=", ".join(f"{name} {array.shape}" for name, array in given.items()),
                rule="shapes broadcast",
                remedy="one shape, or single numbers",
            )
        )
    if faults:
        raise InputError.of(subject, faults)
    return [np.asarray(array, dtype=np.float64) for array in found]


def plain(array: Any) -> Any:
    """Give a number for an array without axes.

    Parameters
    ----------
    array : ndarray
        Any.

    Returns
    -------
    float, int, bool or ndarray
        As Python's own number where there is one element only.
    """
    return array.item() if np.ndim(array) == 0 else array

"""How analyses read what may be a number, text or an array of either: all faults together."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import Fault, QuantityError
from hystkit.base.quantity import read_own, show
from hystkit.circuit.reading import Quantity, wrong_kind

Floats = NDArray[np.float64]
#: What is accepted for a value of which there may be many.
Values = Quantity | Any


def read_array(
    faults: list[Fault], name: str, given: object, unit: str = "", *, finite: bool = True
) -> Floats:
    """Read a number, text, or an array of either.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong is added.
    name : str
        The argument.
    given : float, str or array_like
        As given.
    unit : str, optional
        Its unit, in which a percent counts as 1.
    finite : bool, default True
        Whether a single number has to be finite. In an array any number may stand: its elements
        are judged one by one, by those who use them.

    Returns
    -------
    ndarray
        Of the shape given; NaN without axes where that is a fault.
    """
    array = _as_array(given)
    if array.dtype.kind in "iuf" and (array.ndim or not finite):
        return array.astype(np.float64)
    try:
        if array.ndim == 0:
            return np.asarray(read_own(array.item(), unit=unit, name=name))
        if array.dtype.kind == "U":
            texts = [read_own(str(text), unit=unit, name=name) for text in array.ravel()]
            return np.array(texts, dtype=np.float64).reshape(array.shape)
    except QuantityError as error:
        faults.extend(error.faults)
        return np.asarray(np.nan)
    wanted = "a number or an array of numbers" + (f" [{unit}]" if unit else "")
    remedy = f"{name} in {unit}" if unit else "numbers, or text such as 4k7"
    faults.append(wrong_kind(name, given, wanted, remedy))
    return np.asarray(np.nan)


def read_positives(
    faults: list[Fault], name: str, given: object, unit: str, *, zero: bool = False
) -> Floats:
    """Read what has to be above zero; in an array, elements that are not become NaN.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong is added.
    name : str
        The argument.
    given : float, str or array_like
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
    found = read_array(faults, name, given, unit)
    good = (found >= 0 if zero else found > 0) & np.isfinite(found)
    if found.ndim:
        return np.where(good, found, np.nan)
    # What could not be read is NaN here, and a fault already.
    if not good and not np.isnan(found):
        faults.append(
            Fault(
                f"{name} is {'negative' if zero else 'not positive'}.",
                asked=f"{name} = {show(float(found), unit)}",
                rule=f"{name} {'>=' if zero else '>'} 0",
                remedy=f"its magnitude, in {unit}" if unit else "its magnitude",
            )
        )
    return found


def together(faults: list[Fault], given: Mapping[str, Any]) -> tuple[int, ...]:
    """Return the shape to which arrays broadcast; one more fault where they do not.

    Parameters
    ----------
    faults : list of Fault
        Where a fault is added.
    given : mapping of str to float or ndarray
        By name.

    Returns
    -------
    tuple of int
        () where they do not fit.
    """
    shapes = {name: np.shape(value) for name, value in given.items() if np.ndim(value)}
    try:
        return np.broadcast_shapes(*shapes.values())
    except ValueError:
        faults.append(
            Fault(
                "these arrays do not broadcast.",
                have=", ".join(f"{name} of shape {shape}" for name, shape in shapes.items()),
                rule="shapes are equal, or 1, axis by axis from the last",
                remedy="arrays of one length, or an axis of its own for each: x[:, None]",
            )
        )
        return ()


def _as_array(given: object) -> NDArray[Any]:
    """Take something for an array; whatever numpy makes none of stays one object."""
    try:
        return np.asarray(given)
    except ValueError:  # rows of unequal length
        return np.asarray([None])

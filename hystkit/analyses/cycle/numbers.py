"""How the cycle analyses read numbers: text, single ones or arrays, all faults together."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import Fault, QuantityError
from hystkit.base.quantity import read
from hystkit.circuit.reading import wrong_kind

Array = NDArray[np.float64]
Numbers = float | Array
Given = float | int | str | Sequence[Any] | NDArray[Any]

_SIGNS = {"> 0": np.greater, ">= 0": np.greater_equal}


def read_numbers(
    faults: list[Fault], name: str, given: Any, unit: str = "", rule: str = ""
) -> Numbers:
    """Read a number or an array of numbers; what cannot be read becomes one more fault.

    Parameters
    ----------
    faults : list of Fault
        Where a fault is added.
    name : str
        What the numbers are.
    given : float, str or array_like
        A number, text such as ``"30 s"``, or an array of either.
    unit : str, optional
        The unit expected.
    rule : str, optional
        ``"> 0"`` or ``">= 0"``; any finite number is taken without one, and with ``"or NaN"`` also
        what stands for no number in an array.

    Returns
    -------
    float or ndarray
        Read-only where it is an array; NaN where nothing could be read.
    """
    array = _read(faults, name, given, unit)
    if array is None:
        return float("nan")
    allowed = np.isfinite(array)
    if rule in _SIGNS:
        allowed &= _SIGNS[rule](array, 0)
    elif rule:
        allowed |= np.isnan(array)
    if not allowed.all():
        faults.append(
            Fault(
                f"{name} is outside its range.",
                asked=f"{name} = {array[~allowed][0]:g}",
                rule=f"finite, {name} {rule}" if rule in _SIGNS else "finite",
                remedy=f"a finite number {rule if rule in _SIGNS else ''}".rstrip(),
            )
        )
    array.setflags(write=False)
    return array if array.ndim else float(array)


def together(faults: list[Fault], numbers: dict[str, Any]) -> tuple[int, ...]:
    """Return the shape to which numbers broadcast; one more fault where they do not.

    Parameters
    ----------
    faults : list of Fault
        Where a fault is added.
    numbers : dict of str to float or ndarray
        By name.

    Returns
    -------
    tuple of int
        () where they do not fit.
    """
    try:
        return np.broadcast_shapes(*(np.shape(value) for value in numbers.values()))
    except ValueError:
        shapes = ", ".join(f"{name} {np.shape(v)}" for name, v in numbers.items() if np.ndim(v))
        faults.append(
            Fault(
                "arrays do not fit together.",
                have=shapes,
                rule="shapes broadcast",
                remedy="arrays of one shape, or single numbers",
            )
        )
        return ()


def read_dead_time(faults: list[Fault], given: Any) -> tuple[Numbers, Numbers]:
    """Read a dead time, or a pair of them for switching on and off.

    Parameters
    ----------
    faults : list of Fault
        Where faults are added.
    given : float, str, array_like, or tuple of two of these
        As given; only a tuple is a pair.

    Returns
    -------
    on, off : float or ndarray
        Both dead times [s].
    """
    if not isinstance(given, tuple):
        one = read_numbers(faults, "dead_time", given, "s", ">= 0")
        return one, one
    if len(given) != 2:
        wanted = "one number or a pair (on, off)"
        faults.append(wrong_kind("dead_time", given, wanted, "dead_time=30, or (30, 10)"))
        return float("nan"), float("nan")
    on, off = (
        read_numbers(faults, f"dead_time on switching {state}", one, "s", ">= 0")
        for one, state in zip(given, ("on", "off"), strict=True)
    )
    return on, off


def _read(faults: list[Fault], name: str, given: Any, unit: str) -> Array | None:
    array = np.asarray(given) if _is_regular(given) else np.asarray(None)
    if array.dtype.kind in "iuf" and array.size:
        return array.astype(float)
    entries = array.ravel() if array.dtype.kind in "UO" and array.size else [given]
    try:
        read_entries = [read(_plain(entry), unit=unit, name=name) for entry in entries]
    except QuantityError as error:
        faults.extend(error.faults)
        return None
    return np.array(read_entries, dtype=float).reshape(array.shape)


def _plain(entry: Any) -> Any:
    return str(entry) if isinstance(entry, np.str_) else entry


def _is_regular(given: Any) -> bool:
    """Whether numpy takes this for an array; rows of unequal length are none."""
    try:
        np.asarray(given)
    except ValueError:
        return False
    return True

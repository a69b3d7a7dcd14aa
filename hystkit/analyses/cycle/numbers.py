"""How the cycle analyses read numbers: text, single ones or arrays, all faults together."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.base.errors import Fault
from hystkit.circuit.arrays import read_array
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
    known = len(faults)
    array = read_array(faults, name, given, unit, finite=False)
    if len(faults) > known:
        return float("nan")
    if not array.size:
        faults.append(wrong_kind(name, given, "a number or an array of numbers", "one at least"))
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

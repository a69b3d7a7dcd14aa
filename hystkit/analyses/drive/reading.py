"""How switches and loads read what they are given: what is wrong becomes a fault."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from hystkit.base.errors import Fault
from hystkit.base.quantity import read
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, collect, set_frozen, wrong_kind
from hystkit.circuit.signals.read import read_positive

PartLike = Part | Quantity


def fill_positive(
    faults: list[Fault], target: object, given: Mapping[str, tuple[Any, str]]
) -> None:
    """Read numbers above zero into the fields of a frozen description.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong is added.
    target : object
        Under construction.
    given : mapping of str to pair
        Field to value and unit; a value of None stays None: not stated.
    """
    for name, (value, unit) in given.items():
        number = None if value is None else read_positive(faults, name, value, unit)
        set_frozen(target, name, number)


def read_part(faults: list[Fault], name: str, given: PartLike, unit: str) -> Part:
    """Read a value above zero that may carry a tolerance.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : Part, float or str
        As given.
    unit : {"V", "Ω"}
        Unit of a bare value.

    Returns
    -------
    Part
        Of 0 where it could not be read.
    """
    if isinstance(given, Part) and given.unit not in ("", unit):
        faults.append(
            wrong_kind(name, given, f"a value in {unit}", f'{name}=Part("{_EXAMPLES[unit]}")')
        )
    value = given.value if isinstance(given, Part) else given
    number = read_positive(faults, name, value, unit)
    return given if isinstance(given, Part) else Part(0.0 if math.isnan(number) else number)


def read_name(faults: list[Fault], name: object) -> str:
    """Read what a description is called in reports.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : object
        As given.

    Returns
    -------
    str
        Empty where it is no text.
    """
    if isinstance(name, str):
        return name
    faults.append(wrong_kind("name", name, "text", f"name={str(name)!r}"))
    return ""


def read_range(
    faults: list[Fault], name: str, given: Quantity, low: float, high: float, remedy: str
) -> float:
    """Read a plain number between two limits.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : float or str
        As given.
    low, high : float
        The number is above `low`, and `high` at most.
    remedy : str
        What to write.

    Returns
    -------
    float
        NaN where it could not be read.
    """
    number = collect(faults, lambda: read(given, name=name))
    # What could not be read is NaN here, and a fault already.
    if number <= low or number > high:
        faults.append(
            Fault(
                f"{name} is outside its range.",
                asked=f"{name} = {number:g}",
                rule=f"{low:g} < {name} <= {high:g}",
                remedy=remedy,
            )
        )
    return number


def ends(part: Part) -> tuple[float, float]:
    """Give the lowest and the highest value of a part above zero.

    Parameters
    ----------
    part : Part
        With its tolerance.

    Returns
    -------
    tuple of float
        In the unit of the part.
    """
    return part.value * (1 - part.tol), part.value * (1 + part.tol)


_EXAMPLES = {"V": "12 V", "Ω": "360 Ω"}

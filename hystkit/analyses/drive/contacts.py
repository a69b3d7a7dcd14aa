"""How long the contacts of a relay last."""

from __future__ import annotations

from typing import Any

import numpy as np

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.reading import collect, is_kind

#: Hours in a year of 365 days [h].
HOURS_PER_YEAR = 8760.0


def contact_life(operations: Any, starts_per_hour: Any) -> Any:
    """Years after which contacts have made their rated number of operations.

    Parameters
    ----------
    operations : float, str or array_like
        Operations that the datasheet rates the contacts for at this load, voltage and kind of
        load [1]. The mechanical life is far longer and does not count.
    starts_per_hour : float, str or array_like
        Switching cycles an hour, all year round [1/h].

    Returns
    -------
    float or ndarray
        Years, of the broadcast shape; infinite without starts, NaN where one of the two is
        negative.

    Raises
    ------
    InputError
        Naming every one of the two that is not a number or an array of numbers.

    Notes
    -----
    Operations over starts in a year of 8760 h. Motors, lamps and transformers draw many times
    their rated current when they start; without a rating for such a load the life is unknown.

    Examples
    --------
    >>> print(f"{contact_life(1e5, 1.43):.1f} years")
    8.0 years
    """
    faults: list[Fault] = []
    count = _numbers(faults, "operations", operations)
    starts = _numbers(faults, "starts_per_hour", starts_per_hour)
    if faults:
        raise InputError.of("this contact life", faults)
    with np.errstate(all="ignore"):
        years = count / (HOURS_PER_YEAR * starts)
    return np.where((count >= 0) & (starts >= 0), years, np.nan)[()]


def _numbers(faults: list[Fault], name: str, given: Any) -> Any:
    if is_kind(given, str):
        return np.float64(collect(faults, lambda: read(given, name=name)))
    try:
        if given is None or is_kind(given, bool):  # numpy would take them for NaN and 1
            raise TypeError
        return np.asarray(given, dtype=float)
    except (TypeError, ValueError):
        faults.append(
            Fault(
                f"{name} is not a number.",
                have=repr(given),
                remedy="a number such as 1e5, or an array of numbers",
            )
        )
        return np.nan

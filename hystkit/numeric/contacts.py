"""How long the contacts of a relay last."""

from __future__ import annotations

from typing import Any

import numpy as np

from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import read_array, read_positives, together

#: Hours in a year of 365 days [h].
HOURS_PER_YEAR = 8760.0


def contact_life(operations: Any, starts_per_hour: Any) -> Any:
    """Years after which contacts have made their rated number of operations.

    Parameters
    ----------
    operations : float, str or array_like
        Operations that the datasheet rates the contacts for at this load, voltage and kind of
        load [1], > 0. The mechanical life is far longer and does not count.
    starts_per_hour : float, str or array_like
        Switching cycles an hour, all year round [1/h].

    Returns
    -------
    float or ndarray
        Years, of the broadcast shape; infinite without starts, NaN where an element cannot be
        used.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

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
    given = {
        "operations": read_positives(faults, "operations", operations, ""),
        # A cycle that does not start has NaN here, and no life.
        "starts_per_hour": read_array(faults, "starts_per_hour", starts_per_hour, finite=False),
    }
    together(faults, given)
    if faults:
        raise InputError.of("this contact life", faults)
    count, starts = given.values()
    with np.errstate(all="ignore"):
        return np.where(starts >= 0, count / (HOURS_PER_YEAR * starts), np.nan)[()]

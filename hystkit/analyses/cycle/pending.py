"""Commands on their way: each takes effect after its time, in the order of their arrival."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


class Pending:
    """Changes of state that have been commanded, and have not yet arrived, of m elements.

    States alternate, so that times alone describe them. There may be any number at a time: a dead
    time longer than a phase holds several.

    Parameters
    ----------
    count : int
        Number m of elements.
    """

    def __init__(self, count: int) -> None:
        self._times = np.full((1, count), np.inf)

    @property
    def next(self) -> Array:
        """When the next change arrives, shape (m,) [s]; infinite where none is on its way."""
        return np.asarray(self._times[0])

    def push(self, which: Mask, when: Array) -> None:
        """Send a change on its way.

        A later command that would arrive first, switching off being quicker than switching on,
        makes the earlier one void: that never arrives.

        Parameters
        ----------
        which : ndarray of bool, shape (m,)
            Elements whose state was commanded to change.
        when : ndarray, shape (m,)
            When it arrives [s].
        """
        if not which.any():
            return
        void = which & (self._times >= when) & (self._times < np.inf)
        self._times[void] = np.inf
        # Where an odd number is void, what is left ends in the state that is commanded now.
        index = np.flatnonzero(which & (void.sum(axis=0) % 2 == 0))
        place = (self._times[:, index] < np.inf).sum(axis=0)
        if place.max(initial=0) == len(self._times):
            self._times = np.vstack([self._times, np.full_like(self._times, np.inf)])
        self._times[place, index] = when[index]

    def pop(self, now: Array) -> Mask:
        """Take out the changes that have arrived.

        Parameters
        ----------
        now : ndarray, shape (m,)
            Time of each element [s].

        Returns
        -------
        ndarray of bool, shape (m,)
            Where the state changes.
        """
        arrived = self._times[0] <= now
        if arrived.any():
            later = np.vstack([self._times[1:], np.full_like(self._times[:1], np.inf)])
            self._times = np.where(arrived, later, self._times)
        return np.asarray(arrived)

"""A steady on-off cycle: the result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.analyses.cycle.numbers import Given
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.base.fields import Field, Viewed
from hystkit.numeric.contacts import contact_life
from hystkit.numeric.measurand import shown_span, span_of

_HOUR = 3600.0


@dataclass(frozen=True, eq=False)
class Cycle(Viewed):
    """The steady cycle of a plant between two trips, one element for each plant.

    Attributes
    ----------
    on_time, off_time : float or ndarray
        From the command on to the command off, and back [s]; NaN where it does not cycle, as in
        all that follows.
    low, high : float or ndarray
        Lowest and highest process value, beyond the trips by dead time and lags [unit].
    sensed_low, sensed_high : float or ndarray
        Lowest and highest sensed value [unit].
    mean : float or ndarray
        Mean process value over a period [unit].
    rate_at_on, rate_at_off : float or ndarray
        Rate of the sensed value at the command on and at the command off [unit/s].
    status : int or ndarray of int8
        A `CycleStatus` code for each element, 0 where it cycles.
    heating : bool or ndarray of bool
        Whether the load is switched on below and off above.
    unit : str
        Of the process value.
    name : str
        Of the plant.
    """

    on_time: Any
    off_time: Any
    low: Any
    high: Any
    sensed_low: Any
    sensed_high: Any
    mean: Any
    rate_at_on: Any
    rate_at_off: Any
    status: Any
    heating: Any
    unit: str = ""
    name: str = ""

    @property
    def ok(self) -> Any:
        """Whether each element cycles."""
        return self.status == CycleStatus.CYCLES

    @property
    def period(self) -> Any:
        """From one command on to the next [s]."""
        return self.on_time + self.off_time

    @property
    def duty(self) -> Any:
        """Share of the time that the load is commanded on [1]."""
        return self.on_time / self.period

    @property
    def starts_per_hour(self) -> Any:
        """How often the load is switched on [1/h]."""
        return _HOUR / self.period

    @property
    def message(self) -> Any:
        """What becomes of each element; an array of text where there are several."""
        if np.ndim(self.status) == 0:
            return CycleStatus(int(self.status)).message
        messages = np.array([status.message for status in CycleStatus])
        return messages[self.status]

    def contact_life(self, operations: Given) -> Any:
        """Return how long a contact lasts.

        Parameters
        ----------
        operations : float, str or array_like
            Operations that it is rated for at its load [1], > 0; one is a start with its stop.

        Returns
        -------
        float or ndarray
            Years of 8760 h; NaN where there is no cycle.

        Raises
        ------
        InputError
            If `operations` cannot be used.

        Notes
        -----
        A rating holds for its own load and temperature: motors, lamps and coils wear a contact
        faster than a resistance does.

        Examples
        --------
        >>> from hystkit.analyses.cycle import FirstOrder, steady_cycle
        >>> cycle = steady_cycle(FirstOrder(600, 40, 10), on_at=19.5, off_at=20.5)
        >>> print(f"{cycle.contact_life(100e3):.2f} years")
        0.29 years
        """
        return contact_life(operations, self.starts_per_hour)

    @property
    def _title(self) -> str:
        return f"Steady cycle of {self.name}" if self.name else "Steady cycle"

    def _fields(self) -> Sequence[Field]:
        rows = [Field("behaviour", self._summary())]
        if not np.any(self.ok):
            return rows
        values = (
            ("on time", self.on_time, "s", "t_{\\mathrm{on}}"),
            ("off time", self.off_time, "s", "t_{\\mathrm{off}}"),
            ("period", self.period, "s", "T"),
            ("duty", self.duty, "%", ""),
            ("starts per hour", self.starts_per_hour, "1/h", ""),
        )
        rows += [Field(label, span_of(v), unit, latex=latex) for label, v, unit, latex in values]
        levels = {
            "lowest": self.low,
            "highest": self.high,
            "mean": self.mean,
            "lowest sensed": self.sensed_low,
            "highest sensed": self.sensed_high,
        }
        return rows + [Field(label, shown_span(v, self.unit)) for label, v in levels.items()]

    def _summary(self) -> str:
        if np.ndim(self.status) == 0:
            return str(self.message)
        codes, counts = np.unique(self.status, return_counts=True)
        parts = zip(codes, counts, strict=True)
        return "; ".join(f"{n} {CycleStatus(int(code)).message}" for code, n in parts)

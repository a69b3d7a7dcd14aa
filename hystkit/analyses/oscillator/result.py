"""What a stage does with a timing resistor and a capacitor: the result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.analyses.oscillator.frequency import FrequencySpread
from hystkit.analyses.oscillator.spread import frequency_spread
from hystkit.analyses.oscillator.swing import Oscillates
from hystkit.base.errors import InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.numeric.measurand import span_of
from hystkit.numeric.views import Interval

#: The output states in which the capacitor settles short of the trip.
_STUCK = {
    Oscillates.STAYS_HIGH: ("high",),
    Oscillates.STAYS_LOW: ("low",),
    Oscillates.STAYS: ("high", "low"),
}


@dataclass(frozen=True)
class Oscillation(Viewed):
    """What a stage does with a timing resistor and a capacitor.

    Floats where all values are scalars, else arrays of the broadcast shape; NaN where it does not
    oscillate.

    Attributes
    ----------
    design : Design
        The circuit with the timing resistor as one of its parts; its signal is the capacitor's
        voltage.
    capacitor : Part
        Its value [F], tolerance and temperature coefficient.
    upper, lower : float or ndarray
        Trip points of the stage as the timing resistor loads it [V].
    peak, valley : float or ndarray
        Highest and lowest voltage of the capacitor, delay included [V].
    high_time, low_time : float or ndarray
        How long the output is high, and low, in each period [s].
    status : int or ndarray of int8
        An `Oscillates` code for each element, 0 where it oscillates.
    settles_high, settles_low : float or ndarray
        Where the capacitor would settle with the output high, and low [V].
    stated : bool
        Whether all values are those of the design and the capacitor, none overridden.
    """

    design: Design
    capacitor: Part
    upper: Any
    lower: Any
    peak: Any
    valley: Any
    high_time: Any
    low_time: Any
    status: Any
    settles_high: Any
    settles_low: Any
    stated: bool = True

    @property
    def ok(self) -> Any:
        """Whether each element oscillates."""
        return self.status == Oscillates.OK

    @property
    def period(self) -> Any:
        """Duration of one cycle [s]."""
        return self.high_time + self.low_time

    @property
    def frequency(self) -> Any:
        """Cycles per second [Hz]."""
        return 1 / self.period

    @property
    def duty(self) -> Any:
        """Share of the period in which the output is high [1]."""
        return self.high_time / self.period

    @property
    def message(self) -> str:
        """What happens; of arrays, what is wrong with the first element that fails."""
        failed = np.flatnonzero(self.status)
        if failed.size == 0:
            return Oscillates.OK.message
        first = failed[0]
        status = Oscillates(int(np.ravel(self.status)[first]))
        stuck = [self._stuck(state, int(first)) for state in _STUCK.get(status, ())]
        return ", ".join([status.message, *stuck])

    def _stuck(self, state: str, place: int) -> str:
        """Tell where the capacitor settles, and which trip it does not reach."""
        trip = "upper" if (state == "high") == (self.design.stage.sense == "inverting") else "lower"
        settled = getattr(self, f"settles_{state}")
        at, short = (
            float(np.broadcast_to(volts, np.shape(self.status)).flat[place])
            for volts in (settled, getattr(self, trip))
        )
        at = round(at, 9)  # what is left of zero by rounding
        return f"{state} at {show(at, 'V')} with the {trip} trip at {show(short, 'V')}"

    def spread(
        self,
        temperature: Interval | None = None,
        *,
        samples: int = 65536,
        seed: int = 0,
        distribution: str = "normal",
        sigmas: float = 3.0,
    ) -> FrequencySpread:
        """Evaluate how far period, frequency and duty spread.

        Parameters
        ----------
        temperature : pair of float, optional
            Range in service [°C]; values and tolerances hold at 25 °C. Without it nothing drifts.
        samples : int, default 65536
            Number of Monte Carlo samples.
        seed : int, default 0
            The same seed gives the same samples.
        distribution : {"normal", "uniform", "binned"}, default "normal"
            Of each quantity over its range, as for `hystkit.spread`.
        sigmas : float, default 3
            Standard deviations in half a range, for the normal distribution.

        Returns
        -------
        FrequencySpread
            Over the tolerances of the design, of the timing resistor and of the capacitor.

        Raises
        ------
        InputError
            If an argument cannot be used, or this is an array of oscillations.
        DesignError
            If drift takes a part to zero, or there are too many uncertain quantities.
        """
        if not self.stated:
            raise InputError(
                "only an oscillation with stated values has a spread.",
                asked=f"the spread of {np.size(self.status)} elements, or of overridden values",
                remedy="hk.oscillate(design, r, c) with one r and one c",
            )
        plan = (samples, seed, distribution, sigmas)
        return frequency_spread(self.design, self.capacitor, temperature, *plan)

    @property
    def _title(self) -> str:
        return f"Oscillation of {self.design.name or 'the stage'}"

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field("period", span_of(self.period), "s"),
            Field("frequency", span_of(self.frequency), "Hz"),
            Field("output high", span_of(self.high_time), "s"),
            Field("output low", span_of(self.low_time), "s"),
            Field("duty", span_of(self.duty), "%", "share with the output high"),
            Field("upper", span_of(self.upper), "V", "as the timing resistor loads the output"),
            Field("lower", span_of(self.lower), "V"),
        ]
        if not np.all(self.ok):
            failed = f"{np.count_nonzero(self.status)} of {np.size(self.status)} do not"
            rows.insert(0, Field("oscillates", failed if np.ndim(self.status) else "no"))
            rows.append(Field("what it does", self.message))
        return rows

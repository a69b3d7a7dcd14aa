"""Platinum resistance thermometers after IEC 60751."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, SignalError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.reading import Quantity
from hystkit.circuit.signals.base import Limits, fill
from hystkit.circuit.signals.inverse import inverse
from hystkit.circuit.signals.read import read_positive

#: Coefficients of IEC 60751.
A, B, C = 3.9083e-3, -5.775e-7, -4.183e-12
#: Tolerance in °C: first + second * |t|, by class of IEC 60751.
CLASSES = {"AA": (0.1, 0.0017), "A": (0.15, 0.002), "B": (0.3, 0.005), "C": (0.6, 0.01)}
RANGE = (-200.0, 850.0)


@dataclass(frozen=True)
class Rtd:
    r"""A platinum resistance thermometer.

    .. math:: R = R_0 (1 + A t + B t^2 + C (t - 100\,°C)\, t^3)

    with C only below 0 °C.

    Parameters
    ----------
    r0 : float or str, default 100
        Resistance at 0 °C [Ohm].
    tolerance_class : {"AA", "A", "B", "C"}, optional
        Tolerance class of IEC 60751; exact when left out.

    Notes
    -----
    Holds from -200 to 850 °C. The valid range of a tolerance class is narrower and depends on the
    construction: see the standard. Class C is quoted from memory.

    References
    ----------
    IEC 60751, Industrial platinum resistance thermometers and platinum temperature sensors.

    Examples
    --------
    >>> round(float(Rtd().resistance(100.0)), 2)
    138.51
    """

    r0: float = 100.0
    tolerance_class: str | None = None

    def __init__(self, r0: Quantity = 100.0, tolerance_class: str | None = None) -> None:
        faults: list[Fault] = []
        ohms = read_positive(faults, "r0", r0, "Ω")
        if tolerance_class is not None and tolerance_class not in CLASSES:
            faults.append(unknown_name_fault("tolerance class", tolerance_class, CLASSES))
        if faults:
            raise SignalError.of("this thermometer", faults)
        fill(self, (ohms, tolerance_class))

    @property
    def parameters(self) -> dict[str, Limits]:
        """Position within the tolerance class: -1 reads coldest, 1 hottest."""
        end = 0.0 if self.tolerance_class is None else 1.0
        return {"class_position": Limits(-end, 0.0, end)}

    def resistance(self, celsius: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Resistance at a temperature.

        Parameters
        ----------
        celsius : float or ndarray
            Temperature [°C].
        values : mapping, optional
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            [Ohm]; NaN outside the range of the standard.
        """
        true = np.asarray(celsius, dtype=float)
        first, second = CLASSES.get(self.tolerance_class or "", (0.0, 0.0))
        position = (values or {}).get("class_position", 0.0)
        t = true + position * (first + second * np.abs(true))
        cold = np.where(t < 0, C * (t - 100) * t**3, 0.0)
        known = (true >= RANGE[0]) & (true <= RANGE[1])
        return np.where(known, self.r0 * (1 + A * t + B * t**2 + cold), np.nan)[()]

    def quantity(self, ohms: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Temperature for a resistance.

        Parameters
        ----------
        ohms : float or ndarray
            [Ohm].
        values : mapping, optional
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            [°C]; NaN outside the range of the standard.
        """
        shape = np.broadcast_shapes(np.shape(ohms), *(np.shape(v) for v in (values or {}).values()))
        return inverse(lambda t: self.resistance(t, values), np.broadcast_to(ohms, shape), RANGE)

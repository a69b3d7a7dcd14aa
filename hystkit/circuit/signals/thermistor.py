"""NTC thermistors: resistance over temperature by B value, by three coefficients or by a table."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, SignalError
from hystkit.base.quantity import parse_percent, read
from hystkit.circuit.reading import Quantity
from hystkit.circuit.signals.base import Limits

ZERO_CELSIUS = 273.15
T_25 = 25.0 + ZERO_CELSIUS


@dataclass(frozen=True)
class Ntc:
    r"""An NTC thermistor by its resistance at 25 °C and its B value.

    .. math:: R = R_{25} \, e^{B (1/T - 1/298.15\,\mathrm{K})}

    Parameters
    ----------
    r25 : float or str
        Resistance at 25 °C [Ohm].
    b : float
        B value [K].
    r25_tol, b_tol : float or str, default 0
        Relative tolerances.

    Notes
    -----
    One B value describes a part well near the two temperatures that it was measured at; over
    0 to 100 °C expect errors of the order of 1 K. Three coefficients or a table do better.

    Examples
    --------
    >>> round(float(Ntc("10k", 3950).resistance(50.0)))
    3588
    """

    r25: float
    b: float
    r25_tol: float = 0.0
    b_tol: float = 0.0

    def __init__(
        self, r25: Quantity, b: float, r25_tol: Quantity = 0.0, b_tol: Quantity = 0.0
    ) -> None:
        object.__setattr__(self, "r25", read(r25, unit="Ω", name="r25"))
        object.__setattr__(self, "b", read(b, name="b"))
        object.__setattr__(self, "r25_tol", parse_percent(r25_tol))
        object.__setattr__(self, "b_tol", parse_percent(b_tol))
        if not (self.r25 > 0 and self.b > 0):
            fault = Fault(
                "an NTC has a positive resistance and a positive B value.",
                asked=f"r25 = {self.r25:g} Ω, b = {self.b:g} K",
                remedy="the values of its datasheet, such as 10k and 3950",
            )
            raise SignalError.of("this thermistor", [fault])

    @property
    def parameters(self) -> dict[str, Limits]:
        """R_25 [Ohm] and B [K] with their limits."""
        return {
            "R_25": Limits.around(self.r25, self.r25_tol),
            "B": Limits.around(self.b, self.b_tol),
        }

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
            [Ohm].
        """
        r25, b = self._values(values)
        return r25 * np.exp(b * (1 / (np.asarray(celsius) + ZERO_CELSIUS) - 1 / T_25))

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
            [°C].
        """
        r25, b = self._values(values)
        with np.errstate(divide="ignore", invalid="ignore"):
            return 1 / (np.log(np.asarray(ohms) / r25) / b + 1 / T_25) - ZERO_CELSIUS

    def _values(self, values: Mapping[str, Any] | None) -> tuple[Any, Any]:
        given = values or {}
        return given.get("R_25", self.r25), given.get("B", self.b)


@dataclass(frozen=True)
class NtcCoefficients:
    r"""An NTC thermistor by the three coefficients of Steinhart and Hart.

    .. math:: 1/T = a + b \ln R + c (\ln R)^3

    Parameters
    ----------
    a, b, c : float
        Coefficients for R in Ohm and T in K.
    tol : float or str, default 0
        Relative tolerance of the resistance.

    References
    ----------
    J. S. Steinhart, S. R. Hart, Deep-Sea Research 15 (1968), 497-503.
    """

    a: float
    b: float
    c: float
    tol: float = 0.0

    def __post_init__(self) -> None:
        object.__setattr__(self, "tol", parse_percent(self.tol))
        if not (self.b > 0 and self.c > 0):
            fault = Fault(
                "these coefficients do not describe an NTC.",
                asked=f"a = {self.a:g}, b = {self.b:g}, c = {self.c:g}",
                rule="b > 0 and c > 0",
                remedy="the three coefficients of the datasheet, R in Ohm and T in kelvin",
            )
            raise SignalError.of("this thermistor", [fault])

    @property
    def parameters(self) -> dict[str, Limits]:
        """Factor on the resistance, with its limits."""
        return {"R_factor": Limits.around(1.0, self.tol)}

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
            [Ohm].
        """
        factor = (values or {}).get("R_factor", 1.0)
        # The cubic in ln R has one real root, by Cardano.
        y = (self.a - 1 / (np.asarray(celsius) + ZERO_CELSIUS)) / self.c
        x = np.sqrt((self.b / (3 * self.c)) ** 3 + y**2 / 4)
        return factor * np.exp(np.cbrt(x - y / 2) - np.cbrt(x + y / 2))

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
            [°C].
        """
        factor = (values or {}).get("R_factor", 1.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            log = np.log(np.asarray(ohms) / factor)
            return 1 / (self.a + self.b * log + self.c * log**3) - ZERO_CELSIUS


@dataclass(frozen=True)
class ResistanceTable:
    """A resistive sensor by a measured or published table, between its first and last entry.

    Parameters
    ----------
    quantities : sequence of float
        In rising order, three at least.
    ohms : sequence of float
        Resistances, all rising or all falling [Ohm].
    tol : float or str, default 0
        Relative tolerance of the resistance.

    Notes
    -----
    Monotone cubic interpolation (PCHIP) of the logarithm of the resistance.
    """

    quantities: tuple[float, ...]
    ohms: tuple[float, ...]
    tol: float = 0.0

    def __init__(
        self, quantities: Sequence[float], ohms: Sequence[float], tol: Quantity = 0.0
    ) -> None:
        object.__setattr__(self, "quantities", tuple(map(float, quantities)))
        object.__setattr__(self, "ohms", tuple(map(float, ohms)))
        object.__setattr__(self, "tol", parse_percent(tol))
        steps = np.diff(self.ohms)
        ordered = len(self.quantities) == len(self.ohms) >= 3 and bool(
            np.all(np.diff(self.quantities) > 0) and (np.all(steps > 0) or np.all(steps < 0))
        )
        if not ordered or min(self.ohms) <= 0:
            fault = Fault(
                "this is not the table of a resistive sensor.",
                have=f"{len(self.quantities)} quantities, {len(self.ohms)} resistances",
                rule="three pairs at least, quantities rising, resistances positive and all rising"
                " or all falling",
                remedy="sort the pairs by the quantity and leave doubles out",
            )
            raise SignalError.of("this table", [fault])

    @property
    def parameters(self) -> dict[str, Limits]:
        """Factor on the resistance, with its limits."""
        return {"R_factor": Limits.around(1.0, self.tol)}

    def resistance(self, quantity: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Resistance at a quantity.

        Parameters
        ----------
        quantity : float or ndarray
            In the unit of the table.
        values : mapping, optional
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            [Ohm]; NaN outside the table.
        """
        return (values or {}).get("R_factor", 1.0) * np.exp(self._curve(quantity))

    def quantity(self, ohms: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Give the quantity for a resistance.

        Parameters
        ----------
        ohms : float or ndarray
            [Ohm].
        values : mapping, optional
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            In the unit of the table; NaN outside it.
        """
        from hystkit.circuit.signals.inverse import inverse  # it is the general one

        factor = (values or {}).get("R_factor", 1.0)
        ends = (self.quantities[0], self.quantities[-1])
        return inverse(lambda q: np.exp(self._curve(q)), np.asarray(ohms) / factor, ends)

    @cached_property
    def _curve(self) -> Any:
        from scipy.interpolate import PchipInterpolator  # slow to import, rarely needed

        return PchipInterpolator(self.quantities, np.log(self.ohms), extrapolate=False)

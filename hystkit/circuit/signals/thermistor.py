"""NTC thermistors: resistance over temperature by B value, by three coefficients or by a table."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property, partial
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, SignalError
from hystkit.base.quantity import read
from hystkit.circuit.reading import Quantity, collect
from hystkit.circuit.signals.base import Limits, fill
from hystkit.circuit.signals.read import is_table, read_numbers, read_positive, read_share

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
        self, r25: Quantity, b: Quantity, r25_tol: Quantity = 0.0, b_tol: Quantity = 0.0
    ) -> None:
        faults: list[Fault] = []
        ohms, kelvin = (
            read_positive(faults, "r25", r25, "Ω"),
            read_positive(faults, "b", b, ""),
        )
        tols = read_share(faults, "r25_tol", r25_tol), read_share(faults, "b_tol", b_tol)
        if faults:
            raise SignalError.of("this thermistor", faults)
        fill(self, (ohms, kelvin, *tols))

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
            [Ohm]; NaN below absolute zero.
        """
        r25, b = self._values(values)
        return r25 * np.exp(b * (1 / _kelvin(celsius) - 1 / T_25))

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
            return _celsius(np.log(np.asarray(ohms) / r25) / b + 1 / T_25)

    def _values(self, values: Mapping[str, Any] | None) -> tuple[Any, Any]:
        given = values or {}
        return given.get("R_25", self.r25), given.get("B", self.b)


def _kelvin(celsius: Any) -> Any:
    """Absolute temperature; NaN where there is none."""
    kelvin = np.asarray(celsius) + ZERO_CELSIUS
    return np.where(kelvin > 0, kelvin, np.nan)[()]


def _celsius(inverse_kelvin: Any) -> Any:
    """Temperature for 1/T; NaN where no temperature is so hot."""
    return np.where(inverse_kelvin > 0, 1 / inverse_kelvin - ZERO_CELSIUS, np.nan)[()]


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

    def __init__(self, a: Quantity, b: Quantity, c: Quantity, tol: Quantity = 0.0) -> None:
        faults: list[Fault] = []
        given = {"a": a, "b": b, "c": c}
        found = {name: collect(faults, partial(read, v, name=name)) for name, v in given.items()}
        if found["b"] <= 0 or found["c"] <= 0:
            faults.append(
                Fault(
                    "these coefficients do not describe an NTC.",
                    asked=", ".join(f"{name} = {value!r}" for name, value in given.items()),
                    rule="b > 0 and c > 0",
                    remedy="the three coefficients of the datasheet, R in Ohm and T in kelvin",
                )
            )
        share = read_share(faults, "tol", tol)
        if faults:
            raise SignalError.of("this thermistor", faults)
        fill(self, (*found.values(), share))

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
        y = (self.a - 1 / _kelvin(celsius)) / self.c
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
            return _celsius(self.a + self.b * log + self.c * log**3)


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
        self, quantities: Iterable[Quantity], ohms: Iterable[Quantity], tol: Quantity = 0.0
    ) -> None:
        faults: list[Fault] = []
        known = read_numbers(faults, "quantities", quantities)
        resistances = read_numbers(faults, "ohms", ohms, "Ω")
        if not (faults or (is_table(known, resistances, fewest=3) and min(resistances) > 0)):
            faults.append(
                Fault(
                    "this is not the table of a resistive sensor.",
                    have=f"{len(known)} quantities, {len(resistances)} resistances",
                    rule="three pairs at least, quantities rising, resistances positive and all"
                    " rising or all falling",
                    remedy="sort the pairs by the quantity and leave doubles out",
                )
            )
        share = read_share(faults, "tol", tol)
        if faults:
            raise SignalError.of("this table", faults)
        fill(self, (known, resistances, share))

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

"""What every signal description offers: a quantity in its own unit <-> volts, with its limits."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Mapping
from dataclasses import fields, replace
from typing import Any, NamedTuple, Self

from hystkit.base.errors import SignalError
from hystkit.base.nearest import unknown_name_fault


class Limits(NamedTuple):
    """Lowest, typical and highest value of one parameter of a signal."""

    low: float
    nominal: float
    high: float

    @classmethod
    def around(cls, value: float, tol: float) -> Limits:
        """Take a relative tolerance on both sides of a value.

        Parameters
        ----------
        value : float
            Typical value.
        tol : float
            Relative tolerance, >= 0.

        Returns
        -------
        Limits
            The lower end first, also for a negative value.
        """
        low, high = sorted((value * (1 - tol), value * (1 + tol)))
        return cls(low, value, high)


class Signal(ABC):
    """A measured quantity as a voltage at the signal source.

    Subclasses are frozen dataclasses. Voltage and quantity depend on each other monotonically over
    `span`. Every method takes `values`: other values of parameters than the typical ones, numbers
    or arrays that broadcast with the first argument; ratiometric signals know V_CC among them.

    Attributes
    ----------
    span : tuple of float
        Lowest and highest quantity that occurs, in `unit`.
    unit, name : str
        Unit and name of the quantity.
    """

    span: tuple[float, float]
    unit: str
    name: str

    @abstractmethod
    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        """Voltage for a quantity, from the values of all parameters."""

    @abstractmethod
    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        """Give the quantity for a voltage, from the values of all parameters."""

    @property
    def parameters(self) -> dict[str, Limits]:
        """Parameters with their limits, by name."""
        return {}

    @property
    def ratiometric(self) -> bool:
        """Whether the voltage is a share of V_CC."""
        return False

    def at(self, v_cc: float) -> Self:
        """Give the signal as it is at a supply voltage; itself where that plays no part.

        Parameters
        ----------
        v_cc : float
            Positive rail [V].

        Returns
        -------
        Signal
            Typical V_CC filled in.
        """
        return replace(self, v_cc=v_cc) if self.ratiometric else self  # type: ignore[type-var]

    def volts(self, quantity: Any, **values: Any) -> Any:
        """Convert a quantity to volts.

        Parameters
        ----------
        quantity : float or ndarray
            In `unit`.
        **values : float or ndarray
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            Open-circuit voltage at the signal source [V].
        """
        return self._volts(quantity, self._filled(values))

    def quantity(self, volts: Any, **values: Any) -> Any:
        """Convert volts to the quantity.

        Parameters
        ----------
        volts : float or ndarray
            Open-circuit voltage at the signal source [V].
        **values : float or ndarray
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            In `unit`; NaN where no quantity gives this voltage.
        """
        return self._quantity(volts, self._filled(values))

    def source_resistance(self, quantity: Any, **values: Any) -> Any:
        """Resistance of the signal source.

        Parameters
        ----------
        quantity : float or ndarray
            In `unit`.
        **values : float or ndarray
            Parameters that differ from their typical values.

        Returns
        -------
        float or ndarray
            [Ohm]; 0 for a source that is not loaded by the stage.
        """
        return self._source_resistance(quantity, self._filled(values))

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return 0.0 * quantity

    @property
    def on_open(self) -> float | None:
        """Voltage when the sensor or its line is open [V]; None where it is not known."""
        return None

    @property
    def on_short(self) -> float | None:
        """Voltage when the sensor or its line is shorted [V]; None where it is not known."""
        return None

    @property
    def decreasing(self) -> bool:
        """Whether the voltage falls as the quantity rises."""
        low, high = (float(self.volts(end)) for end in self.span)
        return high < low

    def _typical(self) -> dict[str, Any]:
        """Typical value of every parameter, and V_CC where the signal knows it."""
        typical: dict[str, Any] = {name: p.nominal for name, p in self.parameters.items()}
        if self.ratiometric:
            typical["V_CC"] = getattr(self, "v_cc", None)
        return typical

    def _filled(self, values: Mapping[str, Any]) -> dict[str, Any]:
        typical = self._typical()
        unknown = [name for name in values if name not in typical]
        if unknown:
            faults = [unknown_name_fault("parameter of this signal", n, typical) for n in unknown]
            raise SignalError.of("this signal", faults)
        filled = {**typical, **values}
        if "V_CC" in filled and filled["V_CC"] is None:
            raise SignalError(
                "a ratiometric signal needs to know V_CC.",
                asked=f"{self.name} in volts",
                rule="its voltage is a share of V_CC",
                remedy="signal.at(5.0), or volts(..., V_CC=5.0)",
            )
        return filled


def fill(target: Any, given: tuple[Any, ...]) -> None:
    """Set all fields of a frozen dataclass while it is built.

    Parameters
    ----------
    target : dataclass
        Under construction.
    given : tuple
        Values of its fields, in their order.
    """
    for field, value in zip(fields(target), given, strict=True):
        object.__setattr__(target, field.name, value)

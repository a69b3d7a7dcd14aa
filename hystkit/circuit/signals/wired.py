"""How a sensor becomes a voltage: resistive sensors in a divider or driven, loops, dividers."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np

from hystkit.base.errors import Fault, SignalError
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity
from hystkit.circuit.signals.base import Limits, Signal, fill
from hystkit.circuit.signals.read import (
    read_excitation,
    read_positive,
    read_resistor,
    read_share,
    read_span,
    sensor_faults,
)


class Resistive(Protocol):
    """A resistive sensor."""

    @property
    def parameters(self) -> dict[str, Limits]:
        """Parameters with their limits."""

    def resistance(self, quantity: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Resistance at a quantity [Ohm]."""

    def quantity(self, ohms: Any, values: Mapping[str, Any] | None = None) -> Any:
        """Give the quantity for a resistance [Ohm]."""


@dataclass(frozen=True)
class SensorDivider(Signal):
    """A resistive sensor and a fixed resistor in a divider.

    Parameters
    ----------
    sensor : Ntc, NtcCoefficients, Rtd or ResistanceTable
        The sensor.
    other : Part, float or str
        The fixed resistor [Ohm].
    sensor_at : {"bottom", "top"}, default "bottom"
        Which arm of the divider the sensor is.
    excitation : Part, float, str or None
        Voltage across the divider [V]; V_CC, shared with the stage, when left out.
    span : pair of float
        Lowest and highest quantity that occurs.
    unit, name : str
        Of the quantity.
    v_cc : float, optional
        Supply that the divider is a share of [V]; a design fills it in.

    Raises
    ------
    SignalError
        Naming everything that cannot be used.
    """

    sensor: Resistive
    other: Part
    sensor_at: str = "bottom"
    excitation: Part | None = None
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = "°C"
    name: str = "temperature"
    v_cc: float | None = None

    def __init__(
        self,
        sensor: Resistive,
        other: Part | Quantity,
        sensor_at: str = "bottom",
        excitation: Part | Quantity | None = None,
        *,
        span: Iterable[Quantity],
        unit: str = "°C",
        name: str = "temperature",
        v_cc: float | None = None,
    ) -> None:
        faults: list[Fault] = []
        ends = read_span(faults, span)
        faults = faults or sensor_faults(sensor, ends, unit)
        fixed = read_resistor(faults, "other", other)
        source = read_excitation(faults, excitation)
        if sensor_at not in ("bottom", "top"):
            faults.append(
                Fault(
                    "the sensor is in neither arm of the divider.",
                    asked=f"sensor_at = {sensor_at!r}",
                    have="bottom, top",
                    remedy="one of these",
                )
            )
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (sensor, fixed, sensor_at, source, ends, unit, name, v_cc))

    @property
    def ratiometric(self) -> bool:
        """Whether the divider is fed from V_CC."""
        return self.excitation is None

    @property
    def parameters(self) -> dict[str, Limits]:
        """Those of the sensor, the fixed resistor R_X [Ohm] and the excitation V_X [V]."""
        fixed = {"R_X": Limits.around(self.other.value, self.other.tol)}
        if self.excitation is not None:
            fixed["V_X"] = Limits.around(self.excitation.value, self.excitation.tol)
        return {**self.sensor.parameters, **fixed}

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        sensor, fixed = self.sensor.resistance(quantity, values), values["R_X"]
        bottom = sensor if self.sensor_at == "bottom" else fixed
        return self._across(values) * bottom / (sensor + fixed)

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        share = np.asarray(volts) / self._across(values)
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio = share / (1 - share) if self.sensor_at == "bottom" else (1 - share) / share
            ohms = np.where(ratio > 0, values["R_X"] * ratio, np.nan)
            return self.sensor.quantity(ohms, values)

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        sensor, fixed = self.sensor.resistance(quantity, values), values["R_X"]
        return sensor * fixed / (sensor + fixed)

    def _across(self, values: Mapping[str, Any]) -> Any:
        return values["V_CC"] if self.ratiometric else values["V_X"]

    @property
    def on_open(self) -> float:
        """Voltage with the sensor open [V]."""
        return float(self._across(self._filled({}))) if self.sensor_at == "bottom" else 0.0

    @property
    def on_short(self) -> float:
        """Voltage with the sensor shorted [V]."""
        return 0.0 if self.sensor_at == "bottom" else float(self._across(self._filled({})))


@dataclass(frozen=True)
class DrivenSensor(Signal):
    """A resistive sensor that carries the current of a source.

    Parameters
    ----------
    sensor : Ntc, NtcCoefficients, Rtd or ResistanceTable
        The sensor.
    current : float or str
        Current of the source [A].
    current_tol : float or str, default 0
        Its relative tolerance.
    compliance : float or str, optional
        Voltage that the source reaches with the sensor open [V].
    span : pair of float
        Lowest and highest quantity that occurs.
    unit, name : str
        Of the quantity.

    Notes
    -----
    The source resistance of the signal is that of the sensor itself. The current heats the sensor:
    keep to the datasheet's figure.
    """

    sensor: Resistive
    current: float
    current_tol: float = 0.0
    compliance: float | None = None
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = "°C"
    name: str = "temperature"

    def __init__(
        self,
        sensor: Resistive,
        current: Quantity,
        current_tol: Quantity = 0.0,
        compliance: Quantity | None = None,
        *,
        span: Iterable[Quantity],
        unit: str = "°C",
        name: str = "temperature",
    ) -> None:
        faults: list[Fault] = []
        ends = read_span(faults, span)
        faults = faults or sensor_faults(sensor, ends, unit)
        amperes = read_positive(faults, "current", current, "A")
        tol = read_share(faults, "current_tol", current_tol)
        limit = None
        if compliance is not None:
            limit = read_positive(faults, "compliance", compliance, "V")
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (sensor, amperes, tol, limit, ends, unit, name))

    @property
    def parameters(self) -> dict[str, Limits]:
        """Those of the sensor and the current I_X [A]."""
        return {**self.sensor.parameters, "I_X": Limits.around(self.current, self.current_tol)}

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return values["I_X"] * self.sensor.resistance(quantity, values)

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        return self.sensor.quantity(np.asarray(volts) / values["I_X"], values)

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return self.sensor.resistance(quantity, values)

    @property
    def on_open(self) -> float | None:
        """Voltage with the sensor open [V]."""
        return self.compliance

    @property
    def on_short(self) -> float:
        """Voltage with the sensor shorted [V]."""
        return 0.0

"""Signals that are a straight line over the quantity: sensors, loops, attenuators, wipers."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from hystkit.base.errors import Fault, SignalError
from hystkit.base.quantity import read
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, collect
from hystkit.circuit.signals.base import Limits, Signal, fill
from hystkit.circuit.signals.read import (
    read_excitation,
    read_positive,
    read_resistor,
    read_share,
    read_span,
)


@dataclass(frozen=True)
class Linear(Signal):
    r"""A sensor whose voltage is a straight line over the measured quantity.

    .. math:: V = V_0 + s \, x

    Parameters
    ----------
    per_unit : float or str
        Slope s [V per unit of the quantity]; not zero, negative for a falling sensor.
    at_zero : float or str, default 0
        Voltage V_0 at quantity zero [V].
    span : pair of float
        Lowest and highest quantity that occurs, in `unit`.
    unit : str, default ""
        Unit of the quantity, such as "m" or "°C".
    name : str, default "signal"
        Name of the quantity.
    slope_tol : float or str, default 0
        Relative tolerance of the slope.
    zero_error : float or str, default 0
        Magnitude of the error at quantity zero [V].

    Raises
    ------
    SignalError
        If the slope is zero or the span is not an interval.

    Examples
    --------
    A pressure transmitter with 0.6 V at an empty tank and 1.2 V more for each metre:

    >>> level = Linear(per_unit=1.2, at_zero=0.6, span=(0, 2), unit="m", name="level")
    >>> level.volts(1.5), round(level.quantity(1.56), 3)
    (2.4, 0.8)
    """

    per_unit: float
    at_zero: float = 0.0
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = ""
    name: str = "signal"
    slope_tol: float = 0.0
    zero_error: float = 0.0

    def __init__(
        self,
        per_unit: Quantity,
        at_zero: Quantity = 0.0,
        *,
        span: Iterable[Quantity],
        unit: str = "",
        name: str = "signal",
        slope_tol: Quantity = 0.0,
        zero_error: Quantity = 0.0,
    ) -> None:
        faults: list[Fault] = []
        slope = collect(faults, lambda: read(per_unit, name="per_unit"))
        offset = collect(faults, lambda: read(at_zero, unit="V", name="at_zero"))
        ends = read_span(faults, span)
        error = collect(faults, lambda: read(zero_error, unit="V", name="zero_error"))
        share = read_share(faults, "slope_tol", slope_tol)
        if slope == 0:
            faults.append(
                Fault(
                    "a slope of zero cannot be read back.",
                    asked=f"per_unit = {slope:g} V per unit",
                    rule="the voltage changes with the quantity",
                    remedy="the sensor's sensitivity, negative if its voltage falls",
                )
            )
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (slope, offset, ends, unit, name, share, abs(error)))

    @property
    def parameters(self) -> dict[str, Limits]:
        """Slope [V per unit] and voltage at zero [V], with their limits."""
        return {
            "slope": Limits.around(self.per_unit, self.slope_tol),
            "zero": Limits(
                self.at_zero - self.zero_error, self.at_zero, self.at_zero + self.zero_error
            ),
        }

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return values["zero"] + values["slope"] * quantity

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        return (volts - values["zero"]) / values["slope"]


@dataclass(frozen=True)
class CurrentLoop(Signal):
    """A 4-20 mA transmitter in a burden resistor.

    Parameters
    ----------
    burden : Part, float or str
        Burden resistor [Ohm].
    span : pair of float
        Quantity at 4 mA and at 20 mA, the lower one first.
    unit, name : str
        Of the quantity.
    error : float or str, default 0
        Magnitude of the transmitter's error, relative to its span.
    loop_limit : float or str, optional
        Current that the loop supply allows when the transmitter is shorted [A].

    Notes
    -----
    Below 3.6 mA or above 21 mA the transmitter signals a fault (NAMUR NE 43).

    Examples
    --------
    >>> level = CurrentLoop(150, span=(0, 2), unit="m", name="level")
    >>> round(float(level.volts(1.0)), 3)
    1.8
    """

    burden: Part
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = ""
    name: str = "signal"
    error: float = 0.0
    loop_limit: float | None = None

    def __init__(
        self,
        burden: Part | Quantity,
        *,
        span: Iterable[Quantity],
        unit: str = "",
        name: str = "signal",
        error: Quantity = 0.0,
        loop_limit: Quantity | None = None,
    ) -> None:
        faults: list[Fault] = []
        resistor = read_resistor(faults, "burden", burden)
        ends = read_span(faults, span)
        share = read_share(faults, "error", error)
        limit = None
        if loop_limit is not None:
            limit = read_positive(faults, "loop_limit", loop_limit, "A")
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (resistor, ends, unit, name, share, limit))

    @property
    def parameters(self) -> dict[str, Limits]:
        """Burden R_X [Ohm] and the transmitter's relative error, with their limits."""
        return {
            "R_X": Limits.around(self.burden.value, self.burden.tol),
            "loop_error": Limits(-self.error, 0.0, self.error),
        }

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        low, high = self.span
        share = (quantity - low) / (high - low) + values["loop_error"]
        return values["R_X"] * (4e-3 + 16e-3 * share)

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        low, high = self.span
        share = (volts / values["R_X"] - 4e-3) / 16e-3 - values["loop_error"]
        return low + (high - low) * share

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return values["R_X"] + 0.0 * quantity

    @property
    def on_open(self) -> float:
        """Voltage with the loop open [V]."""
        return 0.0

    @property
    def on_short(self) -> float | None:
        """Voltage with the transmitter shorted [V]; None where the loop's limit is not stated."""
        return None if self.loop_limit is None else self.burden.value * self.loop_limit


@dataclass(frozen=True)
class Attenuator(Signal):
    """A voltage, such as that of a battery, behind a resistive divider.

    Parameters
    ----------
    top, bottom : Part, float or str
        Resistors of the divider [Ohm].
    span : pair of float
        Lowest and highest voltage that occurs ahead of the divider [V].
    unit, name : str
        Of the voltage.
    """

    top: Part
    bottom: Part
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = "V"
    name: str = "voltage"

    def __init__(
        self,
        top: Part | Quantity,
        bottom: Part | Quantity,
        *,
        span: Iterable[Quantity],
        unit: str = "V",
        name: str = "voltage",
    ) -> None:
        faults: list[Fault] = []
        arms = [read_resistor(faults, "top", top), read_resistor(faults, "bottom", bottom)]
        ends = read_span(faults, span)
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (*arms, ends, unit, name))

    @property
    def parameters(self) -> dict[str, Limits]:
        """Both resistors R_XT and R_XB [Ohm], with their limits."""
        return {
            "R_XT": Limits.around(self.top.value, self.top.tol),
            "R_XB": Limits.around(self.bottom.value, self.bottom.tol),
        }

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return quantity * values["R_XB"] / (values["R_XT"] + values["R_XB"])

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        return volts * (values["R_XT"] + values["R_XB"]) / values["R_XB"]

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        both = values["R_XT"] * values["R_XB"] / (values["R_XT"] + values["R_XB"])
        return both + 0.0 * quantity

    @property
    def on_open(self) -> float:
        """Voltage with the line open [V]."""
        return 0.0

    @property
    def on_short(self) -> float:
        """Voltage with the line shorted to ground [V]."""
        return 0.0


@dataclass(frozen=True)
class Potentiometer(Signal):
    """A position read from the wiper of a potentiometer.

    Parameters
    ----------
    total : Part, float or str
        Resistance of the track [Ohm].
    span : pair of float
        Positions at the low and at the high end of the track.
    excitation : Part, float, str or None
        Voltage across the track [V]; V_CC, shared with the stage, when left out.
    unit, name : str
        Of the position.
    linearity : float or str, default 0
        Magnitude of the linearity error, relative to the track.
    v_cc : float, optional
        Supply that the track is a share of [V]; a design fills it in.

    Notes
    -----
    The source resistance is that of both parts of the track in parallel: a quarter of the total
    in the middle, none at the ends.
    """

    total: Part
    excitation: Part | None = None
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = ""
    name: str = "position"
    linearity: float = 0.0
    v_cc: float | None = None

    def __init__(
        self,
        total: Part | Quantity,
        excitation: Part | Quantity | None = None,
        *,
        span: Iterable[Quantity],
        unit: str = "",
        name: str = "position",
        linearity: Quantity = 0.0,
        v_cc: float | None = None,
    ) -> None:
        faults: list[Fault] = []
        track = read_resistor(faults, "total", total)
        source = read_excitation(faults, excitation)
        ends = read_span(faults, span)
        share = read_share(faults, "linearity", linearity)
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (track, source, ends, unit, name, share, v_cc))

    @property
    def ratiometric(self) -> bool:
        """Whether the track is fed from V_CC."""
        return self.excitation is None

    @property
    def parameters(self) -> dict[str, Limits]:
        """Track R_X [Ohm], linearity error, and excitation V_X [V] where it has its own."""
        found = {
            "R_X": Limits.around(self.total.value, self.total.tol),
            "track_error": Limits(-self.linearity, 0.0, self.linearity),
        }
        if self.excitation is not None:
            found["V_X"] = Limits.around(self.excitation.value, self.excitation.tol)
        return found

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return self._across(values) * (self._share(quantity) + values["track_error"])

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        low, high = self.span
        return low + (high - low) * (volts / self._across(values) - values["track_error"])

    def _source_resistance(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        share = self._share(quantity)
        return values["R_X"] * share * (1 - share)

    def _share(self, quantity: Any) -> Any:
        low, high = self.span
        return (quantity - low) / (high - low)

    def _across(self, values: Mapping[str, Any]) -> Any:
        return values["V_CC"] if self.ratiometric else values["V_X"]

    @property
    def on_short(self) -> float:
        """Voltage with the wiper shorted to ground [V]."""
        return 0.0

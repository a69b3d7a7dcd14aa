"""From the measured quantity to volts and back."""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import partial
from typing import TYPE_CHECKING, Any, Protocol, runtime_checkable

from hystkit.base.errors import Fault, SignalError
from hystkit.base.quantity import read
from hystkit.circuit.reading import collect, members

if TYPE_CHECKING:
    from collections.abc import Sequence

    from hystkit.circuit.reading import Quantity


@runtime_checkable
class Signal(Protocol):
    """What every signal description offers: a quantity in its own unit <-> volts."""

    @property
    def unit(self) -> str:
        """Unit of the quantity."""

    @property
    def name(self) -> str:
        """Name of the quantity."""

    @property
    def span(self) -> tuple[float, float]:
        """Lowest and highest quantity that occurs, in `unit`."""

    @property
    def decreasing(self) -> bool:
        """Whether the voltage falls as the quantity rises."""

    def volts(self, quantity: Any) -> Any:
        """Voltage at the signal source [V] for a quantity in `unit`."""

    def quantity(self, volts: Any) -> Any:
        """Give the quantity in `unit` for a voltage [V]."""


@dataclass(frozen=True)
class Linear:
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

    Raises
    ------
    SignalError
        If the slope is zero or the span is not an interval.

    Examples
    --------
    A 4-20 mA transmitter over 2 m of water, read across 150 Ohm:

    >>> level = Linear(per_unit=1.2, at_zero=0.6, span=(0, 2), unit="m", name="level")
    >>> level.volts(1.5), round(level.quantity(1.56), 3)
    (2.4, 0.8)
    """

    per_unit: float
    at_zero: float = 0.0
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = ""
    name: str = "signal"

    def __init__(
        self,
        per_unit: Quantity,
        at_zero: Quantity = 0.0,
        *,
        span: Sequence[float],
        unit: str = "",
        name: str = "signal",
    ) -> None:
        faults: list[Fault] = []
        slope = collect(faults, lambda: read(per_unit, name="per_unit"))
        offset = collect(faults, lambda: read(at_zero, unit="V", name="at_zero"))
        ends = tuple(collect(faults, partial(read, end, name="span")) for end in members(span))
        faults += _linear_faults(slope, ends, span)
        if faults:
            raise SignalError.of("this signal", faults)
        for field, value in zip(fields(self), (slope, offset, ends, unit, name), strict=True):
            object.__setattr__(self, field.name, value)

    @property
    def decreasing(self) -> bool:
        """Whether the voltage falls as the quantity rises."""
        return self.per_unit < 0

    def volts(self, quantity: Any) -> Any:
        """Convert a quantity to volts.

        Parameters
        ----------
        quantity : float or ndarray
            In `unit`.

        Returns
        -------
        float or ndarray
            Voltage at the signal source [V], shape of `quantity`.
        """
        return self.at_zero + self.per_unit * quantity

    def quantity(self, volts: Any) -> Any:
        """Convert volts to the quantity.

        Parameters
        ----------
        volts : float or ndarray
            Voltage at the signal source [V].

        Returns
        -------
        float or ndarray
            In `unit`, shape of `volts`.
        """
        return (volts - self.at_zero) / self.per_unit


def _linear_faults(per_unit: float, span: tuple[float, ...], given: object) -> list[Fault]:
    # What could not be read is NaN here, and a fault already.
    faults = []
    if per_unit == 0:
        faults.append(
            Fault(
                "a slope of zero cannot be read back.",
                asked=f"per_unit = {per_unit:g} V per unit",
                rule="the voltage changes with the quantity",
                remedy="the sensor's sensitivity, negative if its voltage falls",
            )
        )
    if len(span) != 2 or span[0] >= span[1]:
        faults.append(
            Fault(
                "the span of a signal is not an interval.",
                asked=f"span = {given!r}",
                rule="two numbers, the lower one first",
                remedy="the range that occurs in service, such as (0, 2)",
            )
        )
    return faults

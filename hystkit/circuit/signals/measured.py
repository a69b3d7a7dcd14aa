"""Signals given by measured pairs, or by any two functions."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, SignalError
from hystkit.base.quantity import read
from hystkit.circuit.reading import Quantity, collect
from hystkit.circuit.signals.base import Limits, Signal, fill
from hystkit.circuit.signals.inverse import inverse
from hystkit.circuit.signals.read import is_table, read_numbers, read_span


@dataclass(frozen=True)
class MeasuredTable(Signal):
    """A signal by measured pairs, between the first and the last of them.

    Parameters
    ----------
    quantities : sequence of float
        In rising order, two at least.
    voltages : sequence of float
        All rising or all falling [V].
    unit, name : str
        Of the quantity.
    error : float or str, default 0
        Magnitude of the error of the voltages [V].

    Notes
    -----
    Monotone cubic interpolation (PCHIP).
    """

    quantities: tuple[float, ...]
    voltages: tuple[float, ...]
    unit: str = ""
    name: str = "signal"
    error: float = 0.0

    def __init__(
        self,
        quantities: Iterable[Quantity],
        voltages: Iterable[Quantity],
        *,
        unit: str = "",
        name: str = "signal",
        error: Quantity = 0.0,
    ) -> None:
        faults: list[Fault] = []
        known = read_numbers(faults, "quantities", quantities)
        volts = read_numbers(faults, "voltages", voltages, "V")
        if not (faults or is_table(known, volts, fewest=2)):
            faults.append(
                Fault(
                    "this table cannot be read both ways.",
                    have=f"{len(known)} quantities, {len(volts)} voltages",
                    rule="two pairs at least, quantities rising, voltages all rising or all"
                    " falling",
                    remedy="sort the pairs by the quantity and leave doubles out",
                )
            )
        size = abs(collect(faults, lambda: read(error, unit="V", name="error")))
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (known, volts, unit, name, size))

    @property
    def span(self) -> tuple[float, float]:  # type: ignore[override]
        """First and last quantity of the table."""
        return (self.quantities[0], self.quantities[-1])

    @property
    def parameters(self) -> dict[str, Limits]:
        """Error of the voltages [V], with its limits."""
        return {"table_error": Limits(-self.error, 0.0, self.error)}

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return self._curve(quantity) + values["table_error"]

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        wanted = np.asarray(volts) - values["table_error"]
        return inverse(self._curve, wanted, self.span)

    @cached_property
    def _curve(self) -> Any:
        from scipy.interpolate import PchipInterpolator  # slow to import, rarely needed

        return PchipInterpolator(self.quantities, self.voltages, extrapolate=False)


@dataclass(frozen=True)
class Function(Signal):
    """A signal by any monotone function of the quantity.

    Parameters
    ----------
    to_volts : callable
        Quantity to volts; takes and gives arrays.
    to_quantity : callable, optional
        Volts to quantity; found from `to_volts` over the span when left out.
    span : pair of float
        Lowest and highest quantity that occurs.
    unit, name : str
        Of the quantity.

    Raises
    ------
    SignalError
        If the function is not monotone on the span, or the two do not belong together.

    Notes
    -----
    Checked at 257 points of the span. Cannot be saved: a record holds no code.
    """

    to_volts: Callable[[Any], Any]
    to_quantity: Callable[[Any], Any] | None = None
    span: tuple[float, float] = (0.0, 1.0)
    unit: str = ""
    name: str = "signal"

    def __init__(
        self,
        to_volts: Callable[[Any], Any],
        to_quantity: Callable[[Any], Any] | None = None,
        *,
        span: Iterable[Quantity],
        unit: str = "",
        name: str = "signal",
    ) -> None:
        faults: list[Fault] = []
        ends = read_span(faults, span)
        faults = faults or _function_faults(to_volts, to_quantity, ends)
        if faults:
            raise SignalError.of("this signal", faults)
        fill(self, (to_volts, to_quantity, ends, unit, name))

    def _volts(self, quantity: Any, values: Mapping[str, Any]) -> Any:
        return self.to_volts(quantity)

    def _quantity(self, volts: Any, values: Mapping[str, Any]) -> Any:
        if self.to_quantity is not None:
            return self.to_quantity(volts)
        return inverse(self.to_volts, np.asarray(volts), self.span)


def _function_faults(
    to_volts: Callable[[Any], Any],
    to_quantity: Callable[[Any], Any] | None,
    ends: tuple[float, ...],
) -> list[Fault]:
    points = np.linspace(ends[0], ends[1], 257)
    try:
        volts = np.asarray(to_volts(points), dtype=float)
        back = points if to_quantity is None else np.asarray(to_quantity(volts), dtype=float)
    except (TypeError, ValueError, ArithmeticError) as error:
        return [
            Fault(
                "this function cannot be evaluated over the span.",
                asked=f"{ends[0]:g} to {ends[1]:g}, as one array",
                have=f"{type(error).__name__}: {error}",
                remedy="a function of arrays, such as lambda q: 0.1 * q",
            )
        ]
    if volts.shape != points.shape or not is_table(points, volts, fewest=2):
        return [
            Fault(
                "this function cannot be read back.",
                asked=f"monotone from {ends[0]:g} to {ends[1]:g}",
                rule="one voltage for each quantity, all rising or all falling; arrays in, arrays"
                " out",
                remedy="a narrower span, or a function of arrays",
            )
        ]
    off = np.abs(back - points) if back.shape == points.shape else np.inf
    worst = float(np.max(off)) / (ends[1] - ends[0])
    if not worst < 1e-6:
        return [
            Fault(
                "to_quantity does not undo to_volts.",
                have=f"off by {100 * worst:.3g} % of the span",
                rule="to_quantity(to_volts(q)) = q",
                remedy="leave to_quantity out: it is found from to_volts",
            )
        ]
    return []

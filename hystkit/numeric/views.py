"""What the figures, panels and pages show of a design: plain numbers, already evaluated."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from hystkit.circuit.signals import Signal

Interval = tuple[float, float]


@dataclass(frozen=True)
class Levels:
    """Everything of a design that stands on its volt axis.

    All voltages in [V], as plain floats; trips are NaN where `ok` is False.

    Attributes
    ----------
    v_ee, v_cc : float
        Supply rails.
    upper, lower, width, middle : float
        Trip points at the signal source, their difference and their mean.
    upper_interval, lower_interval : tuple of float or None
        Exact lowest and highest trip over the stated tolerances; None without tolerances, and
        where `not_evaluated` tells why.
    output_high, output_low : float
        Output node voltage in each state, at the trip that leaves that state.
    reference : float or None
        Reference voltage, None where the reference is a divider or ground.
    common_mode : tuple of float or None
        Common-mode input range of the device, None where it is not stated.
    pins : tuple of float or None
        Lowest and highest voltage of both input pins, at both trips: what has to stay within
        `common_mode`. Over the tolerances where a pin is the signal itself. None without trips.
    signal_at_pin : bool
        Whether an input pin is the signal itself, wired or through one resistor only, so that
        the trips have to lie in the common-mode range.
    signal_span : tuple of float or None
        Lowest and highest signal voltage, None without a signal description.
    signal : Signal or None
        Quantity <-> volts, for the axis in the measurand.
    ok : bool
        Whether the stage switches with these values.
    message : str
        What is wrong when it does not.
    not_evaluated : str
        Why there are no intervals although tolerances are stated; empty otherwise.
    """

    v_ee: float
    v_cc: float
    upper: float
    lower: float
    width: float
    middle: float
    output_high: float
    output_low: float
    upper_interval: Interval | None = None
    lower_interval: Interval | None = None
    reference: float | None = None
    common_mode: Interval | None = None
    pins: Interval | None = None
    signal_at_pin: bool = False
    signal_span: Interval | None = None
    signal: Signal | None = None
    ok: bool = True
    message: str = ""
    not_evaluated: str = ""


@dataclass(frozen=True, eq=False)
class Loop:
    """The switching loop: output against signal, both paths.

    Attributes
    ----------
    axis : tuple of float
        Signal range shown [V].
    rising, falling : tuple of ndarray
        Polyline (signal [V], output [V]) of the path taken as the signal rises, as it falls;
        each in the order in which it is run through.
    levels : Levels
        Trips and output levels of the same design.
    """

    axis: Interval
    rising: tuple[NDArray[np.float64], NDArray[np.float64]]
    falling: tuple[NDArray[np.float64], NDArray[np.float64]]
    levels: Levels


@dataclass(frozen=True, eq=False)
class Response:
    """Signal and output against time.

    Attributes
    ----------
    time, signal, output : ndarray, shape (n,)
        [s], [V], [V].
    switches : ndarray, shape (k,)
        Times at which the output changes state [s].
    levels : Levels
        Trips and output levels of the same design.
    """

    time: NDArray[np.float64]
    signal: NDArray[np.float64]
    output: NDArray[np.float64]
    switches: NDArray[np.float64]
    levels: Levels

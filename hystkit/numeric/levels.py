"""Everything of a design that stands on its volt axis."""

from __future__ import annotations

import math

from hystkit.circuit.design import Design
from hystkit.circuit.netlist import netlist
from hystkit.numeric.compile import kernel
from hystkit.numeric.extremes import not_evaluated, trip_intervals
from hystkit.numeric.operating import fixed_voltage
from hystkit.numeric.status import Status
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Interval, Levels


def levels(design: Design) -> Levels:
    """Evaluate everything that stands on the volt axis of a design.

    Parameters
    ----------
    design : Design
        With scalar values, as all designs.

    Returns
    -------
    Levels
        Trips with their exact intervals, rails, output levels, reference, common-mode range and
        signal span [V].

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> round(levels(header_tank()).upper, 3)
    2.286
    """
    trips = trip_points(design)
    upper_interval, lower_interval = trip_intervals(design) or (None, None)
    at = _at_trips(design, trips)
    at_pin = netlist(design.elements).signal_at_pin
    status = Status(int(trips.status))
    return Levels(
        v_ee=design.supply.low_rail,
        v_cc=design.supply.v_cc,
        upper=float(trips.upper),
        lower=float(trips.lower),
        width=float(trips.width),
        middle=float(trips.middle),
        output_high=at["high"]["out"],
        output_low=at["low"]["out"],
        upper_interval=upper_interval,
        lower_interval=lower_interval,
        reference=design.values.get("V_REF"),
        common_mode=_common_mode(design),
        pins=_pins(at, at_pin, upper_interval, lower_interval),
        signal_at_pin=at_pin,
        signal_span=_signal_span(design),
        signal=design.signal,
        ok=status is Status.OK,
        message=status.message,
        not_evaluated=not_evaluated(design),
    )


def _at_trips(design: Design, trips: TripPoints) -> dict[str, dict[str, float]]:
    """Voltages of output and input pins in each state, at the trip that leaves it."""
    compiled = kernel(design.stage)
    at = {compiled.law.upper_state: trips.upper, compiled.law.lower_state: trips.lower}
    merged = netlist(design.elements).merged
    found = {}
    for state, trip in at.items():
        free = compiled.voltages(state, design.values, trip)
        found[state] = {
            node: float(free[merged[node]])
            if merged[node] in free
            else float(fixed_voltage(merged[node], design.values, trip))
            for node in ("out", "plus", "minus")
        }
    return found


def _pins(
    at: dict[str, dict[str, float]], at_pin: bool, *intervals: Interval | None
) -> Interval | None:
    voltages = [nodes[pin] for nodes in at.values() for pin in ("plus", "minus")]
    if at_pin:
        voltages += [end for interval in intervals if interval for end in interval]
    return (min(voltages), max(voltages)) if all(map(math.isfinite, voltages)) else None


def _common_mode(design: Design) -> Interval | None:
    device = design.device
    if device.common_mode_low is None or device.common_mode_high is None:
        return None
    return (
        design.supply.low_rail + device.common_mode_low,
        design.supply.v_cc - device.common_mode_high,
    )


def _signal_span(design: Design) -> Interval | None:
    if design.signal is None:
        return None
    ends = sorted(float(design.signal.volts(end)) for end in design.signal.span)
    low, high = (end if math.isfinite(end) else math.nan for end in ends)
    return low, high

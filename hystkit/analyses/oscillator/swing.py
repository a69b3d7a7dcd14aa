"""How the capacitor's voltage swings between the trips: exact times, from the circuit alone."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntEnum
from typing import Any

import numpy as np

from hystkit.circuit.design import Design
from hystkit.circuit.elements import Resistor
from hystkit.circuit.netlist import netlist
from hystkit.circuit.stage import Stage
from hystkit.numeric.compile import kernel
from hystkit.numeric.operating import operating_point

#: What the timing resistor is called, unless the circuit has a part of that name.
TIMING_RESISTOR = "R_X"
#: Where the capacitor sits, and the timing resistor ends.
_NODE = "signal"


class Oscillates(IntEnum):
    """What became of one element of an oscillation."""

    OK = 0
    NO_TRIPS = 1
    STAYS_HIGH = 2
    STAYS_LOW = 3
    STAYS = 4
    NOT_POSITIVE = 5

    @property
    def message(self) -> str:
        """One line that says what happens."""
        return _MESSAGES[self]


_MESSAGES = {
    Oscillates.OK: "oscillates",
    Oscillates.NO_TRIPS: "the loaded stage has no trip points",
    Oscillates.STAYS_HIGH: "the output stays high: the capacitor settles short of the trip",
    Oscillates.STAYS_LOW: "the output stays low: the capacitor settles short of the trip",
    Oscillates.STAYS: "the output stays as it is: in both states the capacitor settles short",
    Oscillates.NOT_POSITIVE: "the capacitance is not positive",
}


@dataclass(frozen=True)
class Charge:
    """The way of the capacitor in one output state, without delay: from one trip to the other.

    Attributes
    ----------
    first, last : float or ndarray
        Current into the capacitor at the trip that it comes from, and at the one it goes to [A].
    resistance : float or ndarray
        What it charges through [Ohm].
    stop : float or ndarray
        The trip that it goes to [V].
    """

    first: Any
    last: Any
    resistance: Any
    stop: Any

    @property
    def settles_at(self) -> Any:
        """Voltage at which no current is left [V]."""
        return self.stop + self.last * self.resistance


@dataclass(frozen=True)
class Swing:
    """Both ways of the capacitor's voltage.

    Attributes
    ----------
    up, down : Charge
        With the output in the state that the upper trip leaves, and in the other one.
    peak, valley : float or ndarray
        Ends of the swing [V], beyond the trips by what the device's delay lets pass.
    up_time, down_time : float or ndarray
        How long the output is in either state [s].
    """

    up: Charge
    down: Charge
    peak: Any
    valley: Any
    up_time: Any
    down_time: Any


def with_timing_resistor(design: Design, resistor: Any) -> tuple[Design, str]:
    """Give the stage with a resistor from its output to its signal node, as a circuit of its own.

    Parameters
    ----------
    design : Design
        Any stage.
    resistor : Part
        The resistor [Ohm].

    Returns
    -------
    tuple of Design and str
        The circuit, whose signal is the capacitor's voltage, and the name of the resistor.
    """
    name = TIMING_RESISTOR
    while name in design.parts:
        name += "X"
    stage = Stage.custom(
        (*design.elements, Resistor(name, "out", _NODE)),
        supply=design.stage.supply,
        output=design.stage.output,
        # The signal now reaches the plus input through the output too.
        sense=design.stage.sense,
        name=f"oscillator: {design.stage.title}",
    )
    timed = Design(
        stage,
        {**design.parts, name: resistor},
        supply=design.supply,
        device=design.device,
        levels=design.levels,
        name=design.name,
    )
    return timed, name


def capacitor_current(stage: Stage, state: str, values: Mapping[str, Any], signal: Any) -> Any:
    """Give the current that the circuit drives into its signal node.

    Parameters
    ----------
    stage : Stage
        With the timing resistor.
    state : {"high", "low"}
        Output state.
    values : mapping of str to float or ndarray
        Every symbol of the full law; arrays broadcast.
    signal : float or ndarray
        Voltage of the node [V].

    Returns
    -------
    float or ndarray
        [A], less what an input pin takes that is wired to the node.
    """
    net = netlist(stage.elements)
    found = operating_point(stage, state, values, signal)
    total: Any = 0.0
    for resistor in net.at(_NODE):
        inwards = -1.0 if resistor.node_a == _NODE else 1.0
        total = total + inwards * found.currents[resistor.name]
    for pin, bias in (("plus", "I_BP"), ("minus", "I_BN")):
        if net.merged[pin] == _NODE:
            total = total - values[bias]
    return total


def swing(
    stage: Stage, values: Mapping[str, Any], trips: tuple[Any, Any], capacitance: Any, delay: Any
) -> Swing:
    r"""Give the swing of the capacitor's voltage and the time of either way.

    .. math::
        t = R C \, \ln \frac{i(V_{start})}{i(V_{stop})} + t_d

    Parameters
    ----------
    stage : Stage
        With the timing resistor.
    values : mapping of str to float or ndarray
        Every symbol of the full law; arrays broadcast.
    trips : tuple of two float or ndarray
        Upper and lower trip point of this stage [V].
    capacitance : float or ndarray
        From the signal node to ground [F].
    delay : float
        Of the device [s].

    Returns
    -------
    Swing
        NaN in the times, or infinite, where a trip is not reached.

    Notes
    -----
    Exact: in one output state the current is affine in the voltage, so that two evaluations give
    its whole course. During the delay the exponential runs on past the trip.
    """
    upper, lower = trips
    law = kernel(stage).law
    with np.errstate(all="ignore"):
        up = _charge(stage, law.upper_state, values, lower, upper)
        down = _charge(stage, law.lower_state, values, upper, lower)
        peak, valley = (_overshoot(way, capacitance, delay) for way in (up, down))
        up_time = _time(up, capacitance, lower - valley) + delay
        down_time = _time(down, capacitance, upper - peak) + delay
    return Swing(up, down, peak, valley, up_time, down_time)


def oscillates(stage: Stage, found: Swing, possible: Any) -> Any:
    """Judge every element.

    Parameters
    ----------
    stage : Stage
        With the timing resistor.
    found : Swing
        Of its capacitor.
    possible : bool or ndarray of bool
        Whether the stage has trip points.

    Returns
    -------
    ndarray of int8
        An `Oscillates` code for each element.
    """
    leaves_first = np.greater(found.up.last, 0)
    leaves_second = np.less(found.down.last, 0)
    high_first = kernel(stage).law.upper_state == "high"
    stays = (Oscillates.STAYS_HIGH, Oscillates.STAYS_LOW)
    first, second = stays if high_first else stays[::-1]
    code = np.where(leaves_first, np.where(leaves_second, Oscillates.OK, second), first)
    code = np.where(leaves_first | leaves_second, code, Oscillates.STAYS)
    return np.where(possible, code, Oscillates.NO_TRIPS).astype(np.int8)


def _charge(stage: Stage, state: str, values: Mapping[str, Any], start: Any, stop: Any) -> Charge:
    first, last = (capacitor_current(stage, state, values, volts) for volts in (start, stop))
    return Charge(first, last, (stop - start) / (first - last), stop)


def _overshoot(way: Charge, capacitance: Any, delay: Any) -> Any:
    """Voltage at the end of the delay [V]."""
    return way.stop - way.last * way.resistance * np.expm1(-delay / (way.resistance * capacitance))


def _time(way: Charge, capacitance: Any, before: Any) -> Any:
    """Time to the trip, having started `before` volts ahead of the other one [s]."""
    start = way.first + before / way.resistance
    return way.resistance * capacitance * np.log(start / way.last)

"""A load at the output, as the stage sees it: R_L to V_L, in the state in which it conducts."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.base.errors import DesignError, InputError
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.elements import Resistor
from hystkit.circuit.parts import Part
from hystkit.circuit.stage import Stage
from hystkit.numeric.compile import kernel
from hystkit.numeric.operating import OperatingPoint, operating_point
from hystkit.numeric.status import status_of
from hystkit.numeric.tolerances import toleranced
from hystkit.numeric.trips import TripPoints, overridden, trip_points
from hystkit.numeric.views import Interval

#: More uncertain quantities than this have too many combinations of ends.
MAX_UNCERTAIN = 16
STATES = ("high", "low")


@dataclass(frozen=True)
class Port:
    """What hangs at the output.

    Attributes
    ----------
    resistance : Part
        R_L, between the output and the junction or ground [Ohm].
    junction : Part or None
        Voltage of a junction behind it while it conducts [V]; None for a plain resistor to ground.
    below_supply : bool
        Whether the junction hangs at V_CC, and conducts while the output is low.
    shunt : float
        Conductance across the junction, which takes its share of the current [S].
    """

    resistance: Part
    junction: Part | None = None
    below_supply: bool = False
    shunt: float = 0.0

    @property
    def state(self) -> str:
        """Output state in which the load gets its current."""
        return "low" if self.below_supply else "high"

    def reaching(self, values: Mapping[str, Any], point: OperatingPoint) -> Any:
        """Give the current that reaches the junction, or the plain load.

        Parameters
        ----------
        values : mapping of str to float or ndarray
            Every symbol of the full law.
        point : OperatingPoint
            That they lead to.

        Returns
        -------
        float or ndarray
            [A]; 0 or less where the junction blocks.
        """
        sign = -1 if self.below_supply else 1
        return sign * point.currents.get("R_L", 0.0) - self.shunt * values.get("V_L", 0.0)

    def level(self, v_cc: Any, junction: Any) -> Any:
        """Give V_L.

        Parameters
        ----------
        v_cc : float or ndarray
            Supply [V].
        junction : float or ndarray
            Voltage of the junction [V].

        Returns
        -------
        float or ndarray
            [V].
        """
        return v_cc - junction if self.below_supply else junction


@dataclass(frozen=True)
class Loaded:
    """A design with a load at its output.

    Attributes
    ----------
    given : Design
        Without the load.
    port : Port or None
        The load; None where it draws no current.

    Notes
    -----
    R_L and V_L form a linear circuit, in which a junction would conduct both ways. So each state
    is taken from the design with the load only where the junction conducts there, and else from
    that without it: exact for a junction of constant voltage. A resistor across the junction
    loads the stage a little even then, which is left out.
    """

    given: Design
    port: Port | None

    @property
    def state(self) -> str:
        """Output state in which the load gets its current."""
        return "high" if self.port is None else self.port.state

    def with_resistance(self, ohms: float) -> Loaded:
        """Give the same load behind another resistor.

        Parameters
        ----------
        ohms : float
            Its value [Ohm]; the tolerance stays.

        Returns
        -------
        Loaded
            The changed copy.
        """
        if self.port is None:
            return self
        resistance = self.port.resistance.with_value(ohms)
        return replace(self, port=replace(self.port, resistance=resistance))

    @cached_property
    def fitted(self) -> Design:
        """The design with R_L and V_L.

        Raises
        ------
        InputError
            If there is a load already.
        """
        return self.given if self.port is None else _fitted(self.given, self.port)

    def in_state(self, state: str) -> Design:
        """Give the design that holds in one output state.

        Parameters
        ----------
        state : {"high", "low"}
            Output state.

        Returns
        -------
        Design
            With the load, or without where its junction blocks.
        """
        return self.fitted if self._conducts[state] else self.given

    def point(self, state: str) -> OperatingPoint:
        """Evaluate one state with the stated values.

        Parameters
        ----------
        state : {"high", "low"}
            Output state.

        Returns
        -------
        OperatingPoint
            At the trip that leaves the state.
        """
        design = self.in_state(state)
        return at_trip(design.stage, state, design.values)

    @cached_property
    def trips(self) -> TripPoints:
        """Trip points, each with what the load does in the state that it leaves."""
        trips = {}
        for state in STATES:
            design = self.in_state(state)
            compiled = kernel(design.stage)
            kind = "upper" if compiled.law.upper_state == state else "lower"
            pair = dict(zip(("upper", "lower"), compiled.trips(design.values), strict=True))
            trips[kind] = pair[kind]
        upper, lower = trips["upper"], trips["lower"]
        values = self.fitted.values
        status = status_of(values, self.fitted.stage.parts, upper, lower)
        upper, lower = (np.where(status == 0, trip, np.nan)[()] for trip in (upper, lower))
        return replace(
            trip_points(self.fitted),
            upper=upper,
            lower=lower,
            width=upper - lower,
            middle=(upper + lower) / 2,
            status=status[()],
        )

    def corners(self, state: str) -> tuple[dict[str, Any], OperatingPoint]:
        """Evaluate one state in all corners of the tolerances.

        Parameters
        ----------
        state : {"high", "low"}
            Output state.

        Returns
        -------
        tuple of dict and OperatingPoint
            Values of all symbols, and what follows from them, at the trip that leaves the state.

        Raises
        ------
        DesignError
            If more than `MAX_UNCERTAIN` quantities are uncertain.

        Notes
        -----
        At a trip every voltage and current is a quotient of two determinants, each affine in the
        value of every single resistor, and affine in the voltages: its extremes lie in corners.
        """
        if state not in self._corners:
            design = self.in_state(state)
            values = _corner_values(design, self.port)
            self._corners[state] = (values, at_trip(design.stage, state, values))
        return self._corners[state]

    @cached_property
    def _corners(self) -> dict[str, tuple[dict[str, Any], OperatingPoint]]:
        """What has been evaluated already."""
        return {}

    @property
    def current(self) -> float:
        """Current that reaches the load [A]."""
        if self.port is None:
            return 0.0
        return float(self.port.reaching(self.in_state(self.state).values, self.point(self.state)))

    @cached_property
    def current_range(self) -> Interval:
        """Lowest and highest current that reaches the load over all tolerances [A]."""
        if self.port is None:
            return 0.0, 0.0
        current = np.asarray(self.port.reaching(*self.corners(self.state)), dtype=float)
        return float(current.min()), float(current.max())

    @cached_property
    def _conducts(self) -> dict[str, bool]:
        if self.port is None or self.port.junction is None:
            return dict.fromkeys(STATES, True)
        values = self.fitted.values
        found = {s: at_trip(self.fitted.stage, s, values) for s in STATES}
        return {s: bool(self.port.reaching(values, point) > 0) for s, point in found.items()}


def at_trip(stage: Stage, state: str, values: dict[str, Any]) -> OperatingPoint:
    """Evaluate an output state at the trip that leaves it, its end of the signal range.

    Parameters
    ----------
    stage : Stage
        The circuit.
    state : {"high", "low"}
        Output state.
    values : dict of str to float or ndarray
        Every symbol of the full law; arrays broadcast.

    Returns
    -------
    OperatingPoint
        Farther into the state the signal, where it acts on the output at all, moves it away from
        the other level.
    """
    compiled = kernel(stage)
    upper, lower = compiled.trips(values)
    signal = upper if compiled.law.upper_state == state else lower
    return operating_point(stage, state, values, signal)


def _fitted(design: Design, port: Port) -> Design:
    stage = design.stage
    if "R_L" in design.parts or "load" in stage.sources:
        held = f"R_L = {show(design.parts['R_L'].value, 'Ω')}" if "R_L" in design.parts else "load"
        raise InputError(
            "the output of this design has a load already.",
            asked="a drive, which stands in the design as R_L to V_L",
            have=held,
            remedy="design.with_parts(R_L=None)",
        )
    if stage.is_custom:
        wiring = (*stage.wiring, Resistor("R_L", "out", "load"))
        stage = Stage.custom(
            wiring, supply=stage.supply, output=stage.output, sense=stage.sense, name=stage.name
        )
    junction = Part(0.0) if port.junction is None else port.junction
    level = junction
    if port.below_supply:
        # A tolerance of V_L as a whole would be that of the supply and the junction mixed.
        level = Part(port.level(design.supply.v_cc, junction.value))
    return Design(
        stage,
        {**design.parts, "R_L": port.resistance},
        supply=design.supply,
        device=design.device,
        levels={**design.levels, "V_L": level},
        signal=design.signal,
        name=design.name,
    )


def _corner_values(design: Design, port: Port | None) -> dict[str, Any]:
    """Values of all symbols in all corners of the tolerances of a design and its load."""
    box = toleranced(design)
    box.pop("V_L", None)
    junction = None if port is None else port.junction
    if junction is not None and "R_L" in design.parts:
        box["junction"] = (junction.value * (1 - junction.tol), junction.value * (1 + junction.tol))
    if len(box) > MAX_UNCERTAIN:
        raise DesignError(
            "this design has too many uncertain quantities for the exact range of its drive.",
            asked="the least drive over all tolerances",
            have=f"{len(box)} quantities with a tolerance: {', '.join(box)}",
            rule=f"at most {MAX_UNCERTAIN}, of which all combinations of ends are evaluated",
            remedy="no tolerance on those that matter least",
        )
    high = (np.arange(1 << len(box)) >> np.arange(len(box))[:, None] & 1).astype(bool)
    given = {
        name: np.where(ends, box[name][1], box[name][0])
        for name, ends in zip(box, high, strict=True)
    }
    volts = given.pop("junction", None)
    values = overridden(design, given)
    if port is not None and volts is not None:
        values["V_L"] = port.level(values["V_CC"], volts)
    return values

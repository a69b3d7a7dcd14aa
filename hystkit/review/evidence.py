"""What the checks look at: evaluated once for a design, and only when a check asks for it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.steady import steady_cycle
from hystkit.analyses.load_step.result import LoadStep
from hystkit.base.errors import DesignError
from hystkit.circuit.design import Design
from hystkit.circuit.netlist import netlist
from hystkit.numeric.compile import kernel
from hystkit.numeric.levels import levels
from hystkit.numeric.operating import (
    OperatingPoint,
    feedback_factor,
    input_resistance,
    operating_point,
)
from hystkit.numeric.source import trips_at_source
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Levels
from hystkit.review.axis import Axis
from hystkit.review.service import NOTHING_DECLARED, Service, at

STATES = ("high", "low")


@dataclass(frozen=True)
class Evidence:
    """A design and everything that its checks need.

    Attributes
    ----------
    design : Design
        What is reviewed.
    load : {"high", "low"}
        Output state in which the load is on.
    safe : {"on", "off"} or None
        Declared safe state of the load.
    start : {"high", "low"} or None
        Output state that the stage is made to start in; None where nothing is provided.
    service : Service
        What is declared about service.
    """

    design: Design
    load: str = "high"
    safe: str | None = None
    start: str | None = None
    service: Service = NOTHING_DECLARED

    @cached_property
    def levels(self) -> Levels:
        """Everything on the volt axis."""
        return levels(self.design)

    @cached_property
    def at_source(self) -> TripPoints:
        """Both trips with the source resistance that the signal has at each of them."""
        return trips_at_source(self.design)

    def source_ohms(self) -> tuple[float, float]:
        """Resistance of the signal's source at the upper and at the lower trip [Ohm].

        Within the signal's span; at the nearer end of it where a trip lies outside.
        """
        signal = self.design.signal
        assert signal is not None
        trips = (self.at_source.upper, self.at_source.lower)
        places = (np.clip(signal.quantity(trip), *signal.span) for trip in trips)
        upper, lower = (float(signal.source_resistance(place)) for place in places)
        return upper, lower

    @cached_property
    def axis(self) -> Axis | None:
        """The band in the unit of the signal; None where the signal does not reach it."""
        try:
            return Axis.of(self.design, self.load)
        except DesignError:
            return None

    @cached_property
    def cycle(self) -> Cycle | None:
        """Steady cycle of the declared plant between the trips; None without either."""
        plant, axis = self.service.plant, self.axis
        if plant is None or axis is None:
            return None
        return steady_cycle(plant, *axis.edges(axis.width))

    @cached_property
    def load_step(self) -> LoadStep | None:
        """The declared load at this design; None without one."""
        return None if self.service.load_step is None else at(self.service.load_step, self.design)

    @property
    def slope(self) -> float:
        """Slope of the signal at the trips [V/s]: as declared, or of the cycle; NaN unknown."""
        if self.service.slope is not None:
            return self.service.slope
        if self.cycle is None or self.axis is None:
            return math.nan
        return float(self.axis.passage(self.cycle, self.axis.width))

    @property
    def width(self) -> float:
        """Nominal width [V]."""
        return self.levels.width

    @cached_property
    def trip_of(self) -> dict[str, float]:
        """Output state to the trip that leaves it [V]."""
        law = kernel(self.design.stage).law
        return {law.upper_state: self.levels.upper, law.lower_state: self.levels.lower}

    @property
    def state_above(self) -> str:
        """Output state with the signal above the band."""
        return "low" if self.design.stage.sense == "inverting" else "high"

    def state_at(self, volts: float) -> str | None:
        """Output state for a signal that stays; None inside the band, where both are possible.

        Parameters
        ----------
        volts : float
            Signal voltage [V].

        Returns
        -------
        str or None
            "high", "low" or None.
        """
        if volts >= self.levels.upper:
            return self.state_above
        if volts <= self.levels.lower:
            return "high" if self.state_above == "low" else "low"
        return None

    @cached_property
    def signal_ends(self) -> tuple[float, ...]:
        """Signal voltages that occur [V]: both trips and, where known, both ends of the span."""
        span = filter(math.isfinite, self.levels.signal_span or ())
        return (self.levels.lower, self.levels.upper, *span)

    @cached_property
    def points(self) -> tuple[OperatingPoint, ...]:
        """Operating points of both states at every signal voltage at which they can last."""
        stage, values = self.design.stage, self.design.values
        return tuple(
            operating_point(stage, state, values, volts)
            for state in STATES
            for volts in self.signal_ends
            if self.state_at(volts) in (state, None) or volts == self.trip_of[state]
        )

    def pin_voltages(self) -> list[float]:
        """Voltages of both input pins at every operating point [V]."""
        merged = netlist(self.design.elements).merged
        return [float(p.voltages[merged[pin]]) for p in self.points for pin in ("plus", "minus")]

    def input_resistances(self) -> dict[str, float]:
        """Largest resistance that each pin sees [Ohm]."""
        stage, values = self.design.stage, self.design.values
        return {
            pin: max(float(input_resistance(stage, pin, state, values)) for state in STATES)
            for pin in ("plus", "minus")
        }

    def moves(self, start: Mapping[str, float], **changes: Any) -> float:
        """Largest move of a trip from one set of values to others [V].

        Parameters
        ----------
        start : mapping of str to float
            Overrides as for `trip_points`, where the moves are counted from.
        **changes : float or ndarray
            Overrides to go to; as arrays, several sets of them.

        Returns
        -------
        float
            [V] at the nominal supply; NaN where a changed design does not switch.

        Notes
        -----
        A ratiometric signal moves with V_CC as well: what counts is the trip's share of it.
        """
        first, then = (trip_points(self.design, **values) for values in (start, changes))
        scale: Any = 1.0
        if self.design.signal is not None and self.design.signal.ratiometric:
            scale = self.design.supply.v_cc / then.v_cc
        pairs = ((first.upper, then.upper), (first.lower, then.lower))
        return float(np.max([np.abs(end * scale - begin) for begin, end in pairs]))

    def feedback(self) -> float:
        """Smallest share of the output's move that arrives between the inputs."""
        return min(
            float(feedback_factor(self.design.stage, state, self.design.values)) for state in STATES
        )

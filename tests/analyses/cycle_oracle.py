"""A second way to run a control: differential equations solved numerically, commands in a queue.

It shares nothing with the package. The plants are written here as equations of their own, solved
by `scipy.integrate.solve_ivp`, which also finds the trips; commands that are under way carry the
state that they set, where the package holds only times.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from scipy.integrate import solve_ivp

Equation = Callable[[np.ndarray, bool, float], list[float]]


def first_order(tau: float, on_level: float, off_level: float) -> Equation:
    def slope(x: np.ndarray, load: bool, disturbance: float) -> list[float]:
        return [((on_level if load else off_level) + disturbance - x[0]) / tau]

    return slope


def two_lag(tau: float, sensor_tau: float, on_level: float, off_level: float) -> Equation:
    body = first_order(tau, on_level, off_level)

    def slope(x: np.ndarray, load: bool, disturbance: float) -> list[float]:
        return [*body(x, load, disturbance), (x[0] - x[1]) / sensor_tau]

    return slope


def integrating(rate_on: float, rate_off: float) -> Equation:
    def slope(x: np.ndarray, load: bool, disturbance: float) -> list[float]:
        return [(rate_on if load else rate_off) + disturbance]

    return slope


def linear(a: Any, b: Any, on: float = 1.0, off: float = 0.0) -> Equation:
    def slope(x: np.ndarray, load: bool, disturbance: float) -> list[float]:
        return list(np.dot(a, x) + np.multiply(b, (on if load else off) + disturbance))

    return slope


@dataclass
class Oracle:
    """One control, followed with a general solver."""

    slope: Equation
    sensed: Sequence[float]
    state: Sequence[float]
    on_at: float
    off_at: float
    until: float
    dead_on: float = 0.0
    dead_off: float = 0.0
    min_on: float = 0.0
    min_off: float = 0.0
    delay: float = 0.0
    input_rc: float = 0.0
    disturbances: Sequence[tuple[float, float]] = ()
    max_step: float = np.inf
    rtol: float = 1e-10
    commands: list[tuple[float, bool]] = field(default_factory=list)
    loads: list[tuple[float, bool]] = field(default_factory=list)

    def run(self) -> Oracle:
        n = len(self.state)
        x = np.array([*self.state, np.dot(self.sensed, self.state)], dtype=float)
        now, tripped, output, command, load, disturbance = 0.0, False, False, False, False, 0.0
        free_at = -np.inf
        outputs: list[tuple[float, bool]] = []
        arrivals: list[tuple[float, bool]] = []
        steps = list(self.disturbances)

        def seen(x: np.ndarray) -> float:
            return float(x[n] if self.input_rc else np.dot(self.sensed, x[:n]))

        def over(x: np.ndarray) -> float:
            """How far the sensed value is past the trip that comes next."""
            upward = (self.off_at > self.on_at) == tripped
            return (seen(x) - (self.off_at if tripped else self.on_at)) * (1 if upward else -1)

        def equations(t: float, x: np.ndarray) -> list[float]:
            filtered = (np.dot(self.sensed, x[:n]) - x[n]) / self.input_rc if self.input_rc else 0.0
            return [*self.slope(x[:n], load, disturbance), filtered]

        def event(t: float, x: np.ndarray) -> float:
            return over(x)

        event.terminal, event.direction = True, 1  # type: ignore[attr-defined]
        while True:
            if over(x) >= 0:
                tripped = not tripped
                outputs.append((now + self.delay, tripped))
            while outputs and outputs[0][0] <= now:
                output = outputs.pop(0)[1]
            if output != command and now >= free_at:
                command = output
                self.commands.append((now, command))
                free_at = now + (self.min_on if command else self.min_off)
                arrival = now + (self.dead_on if command else self.dead_off)
                # What would arrive later was commanded earlier, and counts no more.
                arrivals = [one for one in arrivals if one[0] < arrival] + [(arrival, command)]
            while arrivals and arrivals[0][0] <= now:
                before, load = load, arrivals.pop(0)[1]
                if load != before:
                    self.loads.append((now, load))
            while steps and steps[0][0] <= now:
                disturbance += steps.pop(0)[1]
            if now >= self.until:
                self.final = x[:n]
                return self
            due = [self.until, *(one[0] for one in outputs[:1] + arrivals[:1] + steps[:1])]
            end = min([*due, free_at] if output != command else due)
            found = solve_ivp(
                equations,
                (now, end),
                x,
                method="DOP853",
                rtol=self.rtol,
                atol=self.rtol * 1e-2,
                events=event,
                max_step=self.max_step,
            )
            hit = bool(found.t_events[0].size)
            now = float(found.t_events[0][0]) if hit else end
            x = found.y_events[0][0] if hit else found.y[:, -1]
            if hit:
                # The solver stops beside the trip, by its tolerance; here it is on it.
                tripped = not tripped
                outputs.append((now + self.delay, tripped))

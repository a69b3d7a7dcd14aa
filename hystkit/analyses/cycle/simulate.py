"""Run an on-off control from any start: what happens until when, from event to event."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from hystkit.analyses.cycle.follow import follow
from hystkit.analyses.cycle.numbers import Given
from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.cycle.request import read_request
from hystkit.analyses.cycle.run import Run


def simulate(
    plant: Plant,
    on_at: Given,
    off_at: Given,
    *,
    start: Given | None = None,
    until: Given,
    min_on: Given = 0.0,
    min_off: Given = 0.0,
    disturbances: Sequence[tuple[Given, Given]] = (),
    delay: Given = 0.0,
    input_rc: Given = 0.0,
    start_on: Any = False,
    state: Any = None,
) -> Run:
    """Run plants under on-off control from event to event, in closed form between events.

    Parameters
    ----------
    plant : Plant
        `FirstOrder`, `TwoLag`, `Integrating` or `StateSpace`; one, or an array of them.
    on_at, off_at : float, str or array_like
        Sensed values at which the load is switched on and off [unit]. The load is to heat where
        `off_at` is above `on_at`, to cool where it is below.
    start : float, str or array_like, optional
        Process value at time 0, from which plant and sensor are at rest [unit]. Either this or
        `state`.
    until : float, str or array_like
        Time at which to stop [s], > 0.
    min_on, min_off : float, str or array_like, default 0
        Least time between two commands: a command that comes earlier is held back [s], >= 0.
    disturbances : sequence of pairs, optional
        Time [s] and size of each step of the disturbance, in order of time; sizes add up. A size
        shifts the levels at which a lag settles [unit], or adds to the rates of an integrating
        plant [unit/s].
    delay : float, str or array_like, default 0
        Propagation delay of the stage, from the trip to its output [s], >= 0.
    input_rc : float, str or array_like, default 0
        Time constant of a low-pass filter between sensor and stage [s], >= 0.
    start_on : bool or array_like of bool, default False
        Whether the load is on at time 0, since long.
    state : array_like, optional
        All states of the plant at time 0, shape (..., n), instead of `start`.

    Returns
    -------
    Run
        Events with times and states, phases, extremes; samples at any times. All numbers
        broadcast to one shape, and all elements are followed at once.

    Raises
    ------
    InputError
        Naming everything that cannot be used; also if both trips of a single run are one. In an
        array, such an element is NaN with its status.

    Notes
    -----
    The trip acts on the sensed value behind the filter; the output follows after `delay`; the
    command to the load follows the output as the minimum times allow; the load acts after the
    dead time of the plant, in which any number of commands may be under way. Where dead times
    differ, a command that overtakes an earlier one makes it void.

    A run is what a plant does by itself: it protects nothing. Where heat, pressure or a level can
    hurt someone, an independent limiter is needed; local codes and licensed practice come first.

    No crossing is missed, however short: `hystkit.analyses.cycle.crossings.first_reach`. Times of
    events are exact to rounding, amplified by how slowly the signal crosses.

    Examples
    --------
    >>> from hystkit.analyses.cycle import TwoLag
    >>> heater = TwoLag(tau=1800, sensor_tau=120, on_level=110, off_level=20, dead_time=30)
    >>> run = simulate(heater, on_at=58, off_at=62, start=20, until=10800)
    >>> print(f"{run.on_times[-1]:.1f} s on, {run.off_times[-1]:.1f} s off")
    386.6 s on, 477.0 s off
    >>> print(f"{run.low:.1f} to {run.high:.1f}")
    55.0 to 65.6
    """
    request = read_request(
        plant,
        {"on_at": on_at, "off_at": off_at, "start": start},
        {
            "until": until,
            "min_on": min_on,
            "min_off": min_off,
            "delay": delay,
            "input_rc": input_rc,
        },
        disturbances,
        start_on,
        state,
    )
    return Run(
        plant=plant,
        on_at=request.numbers["on_at"],
        off_at=request.numbers["off_at"],
        until=request.numbers["until"],
        shape=request.shape,
        tracks=tuple((index, follow(task)) for index, task in request.tasks()),
        refused=request.outcome,
    )

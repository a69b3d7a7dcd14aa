"""The question that all solvers answer, laid out flat and turned so that the load drives up."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Dynamics, apply

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Question:
    """Plants and trips, one element each: on at `low`, off at `high`.

    A load that cools is turned into one that heats by the sign of both values, so that each
    solver knows one direction only.

    Attributes
    ----------
    dynamics : Dynamics
        Plants of shape (N,).
    low, high : ndarray
        Trips, low <= high, shape (N,).
    min_on, min_off : ndarray
        Minimum times between commands, shape (N,) [s].
    """

    dynamics: Dynamics
    low: Array
    high: Array
    min_on: Array
    min_off: Array

    @classmethod
    def turned(
        cls, dynamics: Dynamics, trips: tuple[Array, Array], times: tuple[Array, Array], sign: Array
    ) -> Question:
        """Lay out the question for trips as they were given.

        Parameters
        ----------
        dynamics : Dynamics
            Plants of shape (N,).
        trips : pair of ndarray
            On and off trip as given, shape (N,).
        times : pair of ndarray
            Minimum on and off time, shape (N,) [s].
        sign : ndarray
            1 where the load heats, -1 where it cools, shape (N,).
        """
        flip = sign[:, None]
        dynamics = replace(dynamics, sensed=flip * dynamics.sensed, process=flip * dynamics.process)
        return cls(dynamics, sign * trips[0], sign * trips[1], *times)

    def taken(self, index: Any) -> Question:
        """Give some of the elements.

        Parameters
        ----------
        index : index of one axis
            As numpy takes it.
        """
        arrays = {f.name: getattr(self, f.name) for f in fields(self) if f.name != "dynamics"}
        return Question(
            dynamics=self.dynamics.taken(index), **{k: v[index] for k, v in arrays.items()}
        )

    @property
    def held_rise(self) -> Array:
        """Time from acting on to a command off that the minimum on time holds back [s]."""
        return self.min_on - self.dynamics.dead_on

    @property
    def held_fall(self) -> Array:
        """Time from acting off to a command on that the minimum off time holds back [s]."""
        return self.min_off - self.dynamics.dead_off


@dataclass(frozen=True, eq=False)
class Orbit:
    """One turn of a steady cycle, from a command on to the next one.

    Attributes
    ----------
    start : ndarray
        State at the command on, shape (N, n).
    rise : ndarray
        Time from the load acting on to the command off, shape (N,) [s].
    fall : ndarray
        Time from the load acting off to the command on, shape (N,) [s].
    """

    start: Array
    rise: Array
    fall: Array

    @classmethod
    def blank(cls, count: int, order: int) -> Orbit:
        """Give an orbit that is not known yet, all NaN.

        Parameters
        ----------
        count, order : int
            Number of elements, and of states.
        """
        return cls(np.full((count, order), np.nan), np.full(count, np.nan), np.full(count, np.nan))

    def put(self, index: Any, other: Orbit) -> None:
        """Fill in some of the elements.

        Parameters
        ----------
        index : index of one axis
            Where `other` belongs.
        other : Orbit
            As many elements.
        """
        self.start[index], self.rise[index], self.fall[index] = other.start, other.rise, other.fall

    def taken(self, index: Any) -> Orbit:
        """Give some of the elements.

        Parameters
        ----------
        index : index of one axis
            As numpy takes it.
        """
        return Orbit(self.start[index], self.rise[index], self.fall[index])


@dataclass(frozen=True, eq=False)
class Turn:
    """One turn of the cycle: the states at which it changes, and how they follow each other.

    Attributes
    ----------
    acts_on, off, acts_off, on : ndarray
        States when the load acts on, at the command off, when the load acts off, and at the next
        command on, shape (N, n).
    to_off : ndarray
        Derivative of `off` by the start, shape (N, n, n).
    to_on : ndarray
        Derivative of `on` by `off`, shape (N, n, n).
    """

    acts_on: Array
    off: Array
    acts_off: Array
    on: Array
    to_off: Array
    to_on: Array


def turn(dynamics: Dynamics, orbit: Orbit) -> Turn:
    """Follow one turn.

    Parameters
    ----------
    dynamics : Dynamics
        Plants.
    orbit : Orbit
        Where it starts, and its times.
    """
    legs = (
        (False, dynamics.dead_on),
        (True, orbit.rise),
        (True, dynamics.dead_off),
        (False, orbit.fall),
    )
    states, transitions = [orbit.start], []
    for on, time in legs:
        transition, response = dynamics.flow(time)
        states.append(apply(transition, states[-1]) + apply(response, dynamics.forcing(on)))
        transitions.append(transition)
    _, acts_on, off, acts_off, on_again = states
    to_off, to_on = transitions[1] @ transitions[0], transitions[3] @ transitions[2]
    return Turn(acts_on, off, acts_off, on_again, to_off, to_on)


def closed(dynamics: Dynamics, rise: Array, fall: Array) -> Orbit:
    """Give the orbit of given times: the state that returns to itself.

    Parameters
    ----------
    dynamics : Dynamics
        Stable plants.
    rise, fall : ndarray
        Times as in `Orbit` [s].
    """
    n = dynamics.order
    on_time, off_time = rise + dynamics.dead_off, fall + dynamics.dead_on
    (risen, driven), (fallen, faded) = dynamics.flow(on_time), dynamics.flow(off_time)
    # From acting on to acting on, x -> M x + w.
    once = apply(fallen, apply(driven, dynamics.on)) + apply(faded, dynamics.off)
    back = np.eye(n) - fallen @ risen
    acts_on = np.asarray(np.linalg.solve(back, once[..., None])[..., 0], dtype=float)
    acts_off = dynamics.advance(acts_on, True, on_time)
    return Orbit(dynamics.advance(acts_off, False, fall), rise, fall)

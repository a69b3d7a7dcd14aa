"""Signal, load and stage together, from event to event."""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import partial
from numbers import Integral
from typing import Any

import numpy as np

from hystkit.analyses.load_step.crossing import first_crossing
from hystkit.analyses.load_step.hunting import Hunting, Leg, Scene, decay
from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.reading import Quantity, collect

# How many times slower than delay and relaxation the signal passes what the margin lacks.
_SLOWNESS = 20.0


def simulated(
    scene: Scene, slope: Quantity | None, relaxation_time: Quantity, delay: Quantity, most: int
) -> Hunting:
    """Simulate a scene.

    Parameters
    ----------
    scene : Scene
        What is simulated.
    slope : float, str or None
        Of the signal [V/s]; slow enough for hunting to show where it is None.
    relaxation_time, delay : float or str
        Time constant of the relaxation, and from a change of the output to that of the load [s].
    most : int
        Changes of the output after which it ends.

    Returns
    -------
    Hunting
        From the load off, past both trips, and back.

    Raises
    ------
    InputError
        Naming every argument that cannot be used.
    """
    rate, tau, wait = _checked(slope, relaxation_time, delay, most)
    run = _Run(scene, rate or _slow(scene, tau, wait), tau, wait, int(most))
    return run.result()


def _slow(scene: Scene, tau: float, wait: float) -> float:
    """Slope at which the relaxation is over before the signal has passed what the margin lacks."""
    width = abs(scene.trips[0][0] - scene.trips[0][1])
    lack = min(abs(scene.margin), width) or width / 1000
    times = 1 + math.log1p(4 * abs(float(scene.effect.relaxation)) / lack)
    return lack / (_SLOWNESS * (wait + tau * times))


class _Run:
    """The simulation under way."""

    def __init__(self, scene: Scene, rate: float, tau: float, wait: float, most: int) -> None:
        self.scene, self.rate, self.tau, self.wait, self.most = scene, rate, tau, wait, most
        self.legs = [Leg(0.0, scene.ends[0], scene.direction * rate, 0.0, False, False)]
        self.changes: list[tuple[float, bool]] = []
        self.following: list[tuple[float, bool]] = []  # when the load changes, and to what

    def result(self) -> Hunting:
        """Run there and back."""
        near, far = self.scene.ends
        turned = abs(far - near) / self.rate
        complete = self._until(turned) and self._turn() and self._until(2 * turned)
        last = self.legs[-1].start
        times, states = zip(*self.changes, strict=True) if self.changes else ((), ())
        return Hunting(
            scene=self.scene,
            times=np.array(times, dtype=float),
            states=np.array(states, dtype=bool),
            turned_at=turned,
            ended_at=2 * turned if complete else last,
            complete=complete,
            slope=self.scene.direction * self.rate,
            relaxation_time=self.tau,
            legs=tuple(self.legs),
        )

    def _until(self, end: float) -> bool:
        """Go on to an instant; whether it was reached."""
        while len(self.changes) < self.most:
            leg = self.legs[-1]
            follows, load = self.following[0] if self.following else (math.inf, leg.load)
            stop = min(end, follows)
            crossing = self._crossing(leg, stop - leg.start)
            if crossing is not None:
                self._go(leg.start + crossing, on=not leg.on)
                self.changes.append((self.legs[-1].start, not leg.on))
                self.following.append((self.legs[-1].start + self.wait, not leg.on))
            elif follows <= end:
                self.following.pop(0)
                self._go(follows, load=load)
            else:
                self._go(end)
                return True
        return False

    def _turn(self) -> bool:
        leg = self.legs.pop()
        self.legs.append(Leg(leg.start, leg.signal, -leg.slope, leg.creep, leg.on, leg.load))
        return True

    def _go(self, time: float, *, on: bool | None = None, load: bool | None = None) -> None:
        """Begin another leg."""
        leg = self.legs[-1]
        since = time - leg.start
        creep = leg.load + (leg.creep - leg.load) * float(decay(since, self.tau))
        states = (leg.on if on is None else on, leg.load if load is None else load)
        self.legs.append(Leg(time, leg.signal + leg.slope * since, leg.slope, creep, *states))

    def _crossing(self, leg: Leg, horizon: float) -> float | None:
        """Time until the signal meets the trip that the stage waits for; None if later."""
        effect, trip = self.scene.effect, self.scene.trips[leg.load][leg.on]
        # Positive once the stage switches.
        way = -self.scene.direction if leg.on else self.scene.direction
        settled = effect.seen(leg.signal, float(leg.load), leg.load)
        gain = effect.gain if leg.load else 1.0
        creeping = way * effect.relaxation * (leg.creep - leg.load)
        return first_crossing(
            float(way * (settled - trip)),
            float(way * gain * leg.slope),
            float(creeping),
            self.tau,
            horizon,
        )


def _checked(slope: Any, relaxation_time: Any, delay: Any, most: Any) -> tuple[float, float, float]:
    faults: list[Fault] = []
    given = {
        "slope": (slope, "V/s"),
        "relaxation_time": (relaxation_time, "s"),
        "delay": (delay, "s"),
    }
    rate, tau, wait = (
        0.0 if value is None else collect(faults, partial(read, value, unit=unit, name=name))
        for name, (value, unit) in given.items()
    )
    faults += _range_faults(slope, rate, tau, wait, most)
    if faults:
        raise InputError.of("this simulation", faults)
    return rate, tau, wait


def _range_faults(slope: Any, rate: float, tau: float, wait: float, most: Any) -> Iterator[Fault]:
    """Find what is out of range; what could not be read is NaN here, and a fault already."""
    ranges = (
        ("slope", rate <= 0 and slope is not None, "slope > 0; the direction follows the load"),
        ("relaxation_time", tau < 0, "relaxation_time >= 0"),
        ("delay", wait <= 0, "delay > 0: without one, hunting would have no end"),
    )
    for name, wrong, rule in ranges:
        if wrong:
            yield Fault(f"{name} is out of range.", rule=rule, remedy=f"{name}=0.01")
    if isinstance(most, bool) or not isinstance(most, Integral) or int(most) < 2:
        yield Fault(
            "most is not a whole number of at least 2.", asked=f"most={most!r}", remedy="most=2000"
        )

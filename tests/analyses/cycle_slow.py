"""A steady cycle by brute force: fixed small steps, looking at the sensed value after each."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Relay:
    """x' = a x + f, sensed by a row, switched with hysteresis; heating or cooling by the trips."""

    a: Array
    on: Array
    off: Array
    sensed: Array
    on_at: float
    off_at: float
    dead: tuple[float, float] = (0.0, 0.0)
    least: tuple[float, float] = (0.0, 0.0)

    def beyond(self, x: Array, on: bool) -> bool:
        """Whether the sensed value is beyond the trip that ends this state."""
        sign = 1.0 if (self.off_at > self.on_at) == on else -1.0
        return bool(sign * (self.sensed @ x - (self.off_at if on else self.on_at)) >= 0)


@dataclass(frozen=True)
class Seen:
    """The last full cycle."""

    on_time: float
    off_time: float
    sensed_low: float
    sensed_high: float


def stepped(relay: Relay, start: Array, step: float, count: int) -> Seen:
    """Run from a state with the load off; each command acts its dead time later."""
    n = len(start)
    moves = {}
    for on, forcing in ((True, relay.on), (False, relay.off)):
        extended = np.zeros((n + 1, n + 1))
        extended[:n, :n], extended[:n, n] = relay.a, forcing
        moves[on] = expm(extended * step)
    x, load, command, since = np.append(start, 1.0), False, False, -count
    waiting: deque[tuple[int, bool]] = deque()
    commands: list[tuple[int, bool]] = []
    dead = [round(time / step) for time in relay.dead]
    least = [round(time / step) for time in relay.least]
    sensed = np.empty(count)
    for k in range(count):
        while waiting and waiting[0][0] <= k:
            load = waiting.popleft()[1]
        sensed[k] = relay.sensed @ x[:n]
        if k - since >= least[not command] and relay.beyond(x[:n], command):
            command, since = not command, k
            commands.append((k, command))
            waiting.append((k + dead[not command], command))
        x = moves[load] @ x
    first, last = [k for k, on in commands if on][-2:]
    ends = next(k for k, on in commands if not on and k > first)
    part = sensed[first:last]
    return Seen((ends - first) * step, (last - ends) * step, part.min(), part.max())

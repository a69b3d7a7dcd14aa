"""Cycles of a thousand plants, against a general solver for differential equations with events."""

from __future__ import annotations

from collections.abc import Iterator
from time import process_time
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

import hystkit as hk
from tests.benchmarks.measure import Comparison, alternating

Array = NDArray[np.float64]

SETS = 1_000
#: So many sets are solved the general way, and their time is scaled up.
SOLVED = 6
CYCLES = 6
ON_AT, OFF_AT = 58.0, 62.0
ON_LEVEL, OFF_LEVEL = 110.0, 20.0
RTOL = 1e-10
#: Relative change of the period from one cycle to the next at which a cycle is steady.
STEADY = 1e-7


def comparisons() -> list[Comparison]:
    return [compared("simulate", run), compared("steady_cycle", steady), panel()]


def drawn(turn: int) -> dict[str, Array]:
    """Lags and dead time of heaters that change from round to round [s]."""
    rng = np.random.default_rng(turn)
    return {
        "tau": rng.uniform(1200, 2400, SETS),
        "sensor_tau": rng.uniform(90, 180, SETS),
        "dead_time": rng.uniform(10, 60, SETS),
    }


def plants(drawn: dict[str, Any]) -> hk.TwoLag:
    return hk.TwoLag(on_level=ON_LEVEL, off_level=OFF_LEVEL, **drawn)


def run(drawn: dict[str, Array]) -> Array:
    """Length of the sixth cycle from cold, by hystkit [s]."""
    # The slowest takes 1200 s a cycle, and 2100 s to warm up.
    found = hk.simulate(plants(drawn), ON_AT, OFF_AT, start=OFF_LEVEL, until=9600.0)
    return np.asarray(np.diff(found.starts)[:, CYCLES - 1])


def steady(drawn: dict[str, Array]) -> Array:
    """Length of the steady cycle, by hystkit [s]."""
    return np.asarray(hk.steady_cycle(plants(drawn), ON_AT, OFF_AT).period)


def compared(name: str, work: Any) -> Comparison:
    """Time for all sets, beside that of the general solver, with which it has to agree."""
    (time,) = alternating(lambda turn: work(drawn(turn)), rounds=5)
    found, sets = work(drawn(0)), drawn(0)
    start = process_time()
    for place in range(SOLVED):
        one = {key: float(values[place]) for key, values in sets.items()}
        expected = solved(**one, until_steady=work is steady)
        assert abs(found[place] - expected) < 1e-7 * expected, (name, place, expected)
    reference = (process_time() - start) * SETS / SOLVED
    cycles = "to the steady cycle" if work is steady else f"{CYCLES} cycles"
    subject = f"{name}, {SETS:,} sets of two lags, {cycles}"
    return Comparison(
        subject, time, f"solve_ivp, from {SOLVED} sets", reference, limit=None, at_least=100.0
    )


def solved(tau: float, sensor_tau: float, dead_time: float, *, until_steady: bool) -> float:
    """Length of a cycle by `solve_ivp` with events [s]: the sixth one, or the first steady one."""
    before = starts = 0.0
    for number, start in enumerate(starting(tau, sensor_tau, dead_time)):
        period, starts = start - starts, start
        if until_steady and number > 1 and abs(period - before) < STEADY * period:
            return period
        if not until_steady and number == CYCLES:
            return period
        before = period
    raise AssertionError("the solver stopped")


def starting(tau: float, sensor_tau: float, dead_time: float) -> Iterator[float]:
    """Times at which the load is commanded on, without end [s]."""
    level = OFF_LEVEL

    def slope(t: float, x: Array) -> tuple[float, float]:
        return (level - x[0]) / tau, (x[0] - x[1]) / sensor_tau

    def trips(trip: float, direction: int) -> Any:
        def event(t: float, x: Array) -> float:
            return float(x[1]) - trip

        event.terminal, event.direction = True, direction  # type: ignore[attr-defined]
        return event

    now, x = 0.0, np.array([OFF_LEVEL, OFF_LEVEL])
    heating = True
    while True:
        if heating:
            yield now
        for span, event in (
            (dead_time, None),
            (20 * tau, trips(OFF_AT, 1) if heating else trips(ON_AT, -1)),
        ):
            found = solve_ivp(slope, (now, now + span), x, method="DOP853", rtol=RTOL,
                              atol=RTOL, events=event)  # fmt: skip
            now, x = float(found.t[-1]), found.y[:, -1]
            level = ON_LEVEL if heating else OFF_LEVEL
        heating = not heating


def panel() -> Comparison:
    """One plant over six cycles with its waveform, as a panel asks for it at each move."""

    def move(turn: int) -> None:
        heater = hk.TwoLag(1800.0 + turn, 120.0, ON_LEVEL, OFF_LEVEL, dead_time=30.0)
        hk.simulate(heater, ON_AT, OFF_AT, start=OFF_LEVEL, until=6000.0).sampled(1500)

    def general(turn: int) -> None:
        solved(1800.0 + turn, 120.0, 30.0, until_steady=False)

    time, reference = alternating(move, general)
    return Comparison("simulate, one set, with 1,500 samples", time, "solve_ivp, without samples",
                      reference, limit=0.007)  # fmt: skip

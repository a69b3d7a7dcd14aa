"""A switch over a long record against a loop, and chatter by formula against a simulation."""

from __future__ import annotations

from functools import partial
from time import process_time
from typing import Any

import numpy as np

import hystkit as hk
from tests.benchmarks.measure import Comparison, alternating

SAMPLES = 10_000_000
# The loop is measured on fewer, and its time scaled up.
LOOPED = 500_000
# A panel asks for as many widths at each move of a slider.
WIDTHS = np.linspace(1, 6, 100)
NOISE = hk.Noise.two_pole(rms=1.0, f1=0.5, f2=2.0)
# Crossings of the mean while the ramp rises by the rms, and samples for each of them.
CROSSINGS, PER_CROSSING = 30.0, 50.0
PASSAGES = 400


def comparisons() -> list[Comparison]:
    samples = np.random.default_rng(0).standard_normal(SAMPLES)
    short = samples[:LOOPED].tolist()
    assert looped(short, 0) == hk.simulate_switch(samples[:LOOPED], 1.0, -1.0, False).tolist()
    fast, slow = alternating(
        lambda turn: hk.simulate_switch(samples, 1.0, -1.0), partial(looped, short), rounds=3
    )
    formula, = alternating(lambda turn: formulas(turn))  # fmt: skip
    width, = alternating(
        lambda turn: hk.width_for(probability=1e-3, noise=NOISE, slope=1e-2 * (1 + turn))
    )  # fmt: skip
    start = process_time()
    counted = simulated()
    simulation = process_time() - start
    found = hk.chatter(WIDTHS[::33], NOISE, 1 / CROSSINGS).extra_cycles
    assert np.all((found > counted / 1.3) & (found < 2.5 * counted)), (found, counted)
    return [
        Comparison(f"switch over {SAMPLES:,} samples", fast, "a loop over the samples, scaled up",
                   slow * SAMPLES / LOOPED, limit=0.5, at_least=4.0),
        Comparison("chatter at 100 widths", formula, f"simulation of {PASSAGES} passages at 4",
                   simulation, limit=0.010),
        Comparison("width for a probability", width, f"simulation of {PASSAGES} passages at 4",
                   simulation),
    ]  # fmt: skip


def formulas(turn: int) -> Any:
    """What a move of a slider asks for."""
    return hk.chatter(WIDTHS, NOISE, (1 + 0.01 * turn) / CROSSINGS)


def looped(samples: list[float], turn: int) -> list[bool]:
    """The same switch as a person would write it."""
    state, found = False, []
    for sample in samples:
        if sample > 1.0:
            state = True
        elif sample < -1.0:
            state = False
        found.append(state)
    return found


def simulated() -> Any:
    """Extra cycles at four widths, counted in one record that is cut into passages."""
    mean = np.arange(-5.2, 5.2, 1 / (CROSSINGS * PER_CROSSING))
    record = NOISE.generate(PASSAGES * mean.size / PER_CROSSING, PER_CROSSING, seed=0)
    signal = mean + record.reshape(PASSAGES, mean.size)
    counted = []
    for width in WIDTHS[::33]:
        high = hk.simulate_switch(signal, 0.0, -width, start=False)
        rises = np.count_nonzero(high[:, 1:] & ~high[:, :-1], axis=1)
        counted.append(np.maximum(rises - 1, 0).mean())
    return np.array(counted)

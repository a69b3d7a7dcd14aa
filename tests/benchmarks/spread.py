"""Exact extremes, and a million samples against a batched linear solve of the same circuits."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

import hystkit as hk
from hystkit.numeric.sampling import Plan, blocks
from tests.benchmarks.measure import Comparison, alternating, in_fresh_process

SAMPLES = 1_000_000
PEAK = 300e6  # bytes

# What a process holds at its peak, with the sampled result still in hand. The kernel's high-water
# mark starts anew with a program; that of getrusage remembers the process it was started from.
MEMORY = f"""
import re
from pathlib import Path
from tests.benchmarks.spread import design
import hystkit as hk
found = hk.spread(design(), samples={SAMPLES}).samples
assert found["upper"].size == {SAMPLES}
status = Path("/proc/self/status").read_text()
elapsed = int(re.search(r"VmHWM:\\s+(\\d+) kB", status)[1]) * 1024
"""


@dataclass(frozen=True)
class Memory:
    """What a process held at its peak, and the limit that was promised [bytes]."""

    subject: str
    peak: float
    limit: float

    @property
    def passed(self) -> bool:
        return self.peak < self.limit

    def __str__(self) -> str:
        verdict = "pass" if self.passed else "FAIL"
        peak, limit = (f"{held / 1e6:.0f} MB" for held in (self.peak, self.limit))
        return f"{verdict}  {self.subject:<44} {peak:>9}   < {limit}"


def design() -> hk.Design:
    """An over-temperature cut-out with twelve uncertain quantities."""
    parts = {"R_T": "34k", "R_B": "20k", "R_F": "47k", "R_S": "1k", "R_PU": "2k2", "R_L": "100k"}
    return hk.Design(
        hk.Stage("inverting", reference="divider", output="open-collector"),
        {name: hk.Part(value, tol="1 %", tempco=50e-6) for name, value in parts.items()},
        supply=hk.Supply(5.0, tol="5 %"),
        device=hk.Device(
            drop_low=0.15,
            offset=1e-3,
            leakage=1e-7,
            bias_plus=5e-8,
            bias_minus=5e-8,
            limits={
                "drop_low": (0.05, 0.3),
                "offset": (-5e-3, 5e-3),
                "leakage": (0, 1e-6),
                "bias_plus": (0, 2.5e-7),
                "bias_minus": (0, 2.5e-7),
            },
        ),
    )


def with_signal() -> hk.Design:
    """The cut-out on a thermistor with three tolerances of its own, which shares the supply."""
    sensor = hk.signals.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    other = hk.Part("10k", tol="1 %", tempco=50e-6)
    return design().with_signal(hk.signals.SensorDivider(sensor, other, span=(-20, 90)))


def comparisons() -> list[Comparison | Memory]:
    cut_out = design()
    assert len(hk.spread(cut_out).box.quantities) == 12
    exact, corners = alternating(
        lambda turn: hk.spread(cut_out).extremes, lambda turn: every_corner(cut_out), rounds=7
    )
    sampled, solved = alternating(
        lambda turn: hk.spread(cut_out, samples=SAMPLES, seed=turn).samples,
        lambda turn: solve(cut_out, Plan(SAMPLES, turn, "normal", 3.0)),
        rounds=3,
    )
    sensed = with_signal()
    assert len(hk.spread(sensed).measurand.box.quantities) == 15
    read, sweep = alternating(
        lambda turn: hk.spread(sensed).measurand.extremes,
        lambda turn: hk.spread(sensed, samples=100_000, seed=turn).measurand.samples,
        rounds=5,
    )
    return [
        Comparison("exact extremes of 12 quantities, all four", exact,
                   "all 4096 corners", corners, limit=0.050),
        Comparison("extremes in the measurand, 15 quantities", read,
                   "100,000 samples, which find less", sweep, limit=0.100),
        Comparison("1,000,000 samples of 12 quantities", sampled,
                   "batched numpy.linalg.solve, same points", solved, at_least=5.0),
        Memory("... its process at the peak", in_fresh_process(MEMORY, repeat=1), PEAK),
    ]  # fmt: skip


def every_corner(cut_out: hk.Design) -> Any:
    """Trip points in every corner of the box."""
    box = hk.spread(cut_out).box.intervals
    grid = np.meshgrid(*box.values(), indexing="ij")
    return hk.trip_points(cut_out, **{n: g.ravel() for n, g in zip(box, grid, strict=True)})


def solve(cut_out: hk.Design, plan: Plan) -> NDArray[np.float64]:
    """Both trip points [V] of every sample, from its node equations; shape (2, samples)."""
    found = np.empty((2, plan.count))
    for start, values in blocks(hk.spread(cut_out).box, plan):
        stop = min(start + len(values["R_T"]), plan.count)
        known = {**cut_out.values, "drop_low": 0.0}
        known |= {name: row[: stop - start] for name, row in values.items()}
        for row, state in enumerate(("high", "low")):
            matrix, right = node_equations(known, state, stop - start)
            found[row, start:stop] = np.linalg.solve(matrix, right[..., None])[:, 3, 0]
    return found


def node_equations(
    v: Mapping[str, Any], state: str, count: int
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Currents into plus, minus and out, and the switching condition.

    Unknown are the voltages of plus, minus and out, and that of the signal.
    """
    t, b, f, s, u, load = (1 / v[name] for name in ("R_T", "R_B", "R_F", "R_S", "R_PU", "R_L"))
    matrix, right = np.zeros((count, 4, 4)), np.zeros((count, 4))
    matrix[:, 0, 0], matrix[:, 0, 2] = t + b + f, -f
    right[:, 0] = t * v["V_CC"] - v["bias_plus"]
    matrix[:, 1, 1], matrix[:, 1, 3] = s, -s
    right[:, 1] = -v["bias_minus"]
    if state == "high":
        matrix[:, 2, 0], matrix[:, 2, 2] = -f, f + u + load
        right[:, 2] = u * v["V_CC"] - v["leakage"]
    else:
        matrix[:, 2, 2] = 1
        right[:, 2] = v["drop_low"]
    matrix[:, 3, 0], matrix[:, 3, 1] = 1, -1
    right[:, 3] = v["offset"]
    return matrix, right

"""Measure two things in one run and set them side by side.

Times are processor times of one process, so that other work on the machine does not count. All
that is measured here runs on one thread, so on an idle machine they are what a clock shows.
"""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from dataclasses import dataclass
from statistics import median
from time import process_time

import numpy as np

from tests.project.source import ROOT

#: Time of the work of `slowness` on the machine that the limits were set on [s].
REFERENCE = 0.0072


@dataclass(frozen=True)
class Comparison:
    """Two times of one run and the limit that was promised.

    `limit` bounds `time` [s] on a machine like that of `REFERENCE`, `slower` times that on one that
    is so many times slower; `at_least` bounds `reference / time`. None: nothing was promised.
    """

    subject: str
    time: float
    reference_subject: str
    reference: float
    limit: float | None = None
    at_least: float | None = None
    slower: float = 1.0

    @property
    def ratio(self) -> float:
        return self.reference / self.time

    @property
    def passed(self) -> bool:
        in_time = self.limit is None or self.time < self.limit * self.slower
        return in_time and (self.at_least is None or self.ratio >= self.at_least)

    def __str__(self) -> str:
        promised = []
        if self.limit is not None:
            promised.append(f"< {shown(self.limit)}")
        if self.at_least is not None:
            promised.append(f">= {self.at_least:g} times faster")
        verdict = ("pass" if self.passed else "FAIL") if promised else "    "
        return (
            f"{verdict}  {self.subject:<44} {shown(self.time):>9}"
            f"   {self.reference_subject:<36} {shown(self.reference):>9}"
            f"   ratio {self.ratio:>7.1f}   {', '.join(promised)}"
        ).rstrip()


def shown(seconds: float) -> str:
    """A time with three figures, in seconds or milliseconds."""
    return f"{seconds:.2f} s" if seconds >= 1 else f"{seconds * 1e3:.1f} ms"


def slowness() -> float:
    """How many times slower than that of `REFERENCE` this machine is; 1 for a faster one.

    By a fixed piece of work of the kind that a slider move is: Python, and numpy on small arrays.
    """
    # No linear algebra: the threads of its library would count as well.
    vector = np.linspace(0.0, 1.0, 100)

    def work(_: int) -> None:
        total = 0.0
        for turn in range(50_000):
            total += turn % 7
        for _ in range(2_000):
            np.where(vector > 0.5, np.exp(-vector), np.sqrt(vector)).sum()

    # A processor that was idle takes a moment to come up to speed.
    found = min(alternating(work, rounds=9)[0] for _ in range(3))
    return max(1.0, found / REFERENCE)


def in_fresh_process(code: str, *, repeat: int = 5) -> float:
    """Median of the time [s] that `code` reports, run in `repeat` fresh interpreters.

    The code sets ``elapsed`` from ``process_time``. One run goes before, so that byte code and
    disk are warm.
    """
    program = f"from time import process_time\n{code}\nprint(elapsed)"
    command = [sys.executable, "-c", program]
    times = []
    for _ in range(repeat + 1):
        done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
        if done.returncode:
            raise RuntimeError(f"the measured program failed:\n{done.stderr}")
        times.append(float(done.stdout.split()[-1]))
    return median(times[1:])


def alternating(*calls: Callable[[int], object], rounds: int = 15) -> tuple[float, ...]:
    """Median time [s] of each call, taken in turns so that all see the same machine.

    Each call is given the number of its round, so that it has something new to do.
    """
    times: list[list[float]] = [[] for _ in calls]
    for turn in range(rounds + 1):
        for work, found in zip(calls, times, strict=True):
            start = process_time()
            work(turn)
            found.append(process_time() - start)
    return tuple(median(found[1:]) for found in times)

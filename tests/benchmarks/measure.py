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

from tests.project.source import ROOT


@dataclass(frozen=True)
class Comparison:
    """Two times of one run and the limit that was promised.

    `limit` bounds `time` [s]; `at_least` bounds `reference / time`. None: nothing was promised.
    """

    subject: str
    time: float
    reference_subject: str
    reference: float
    limit: float | None = None
    at_least: float | None = None

    @property
    def ratio(self) -> float:
        return self.reference / self.time

    @property
    def passed(self) -> bool:
        in_time = self.limit is None or self.time < self.limit
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

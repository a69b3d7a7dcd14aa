"""Run every benchmark, print them side by side, fail where a promise is missed."""

from __future__ import annotations

import os
import platform
import sys
from dataclasses import replace

from tests.benchmarks import (
    cycle,
    cycle_panel,
    forms,
    imports,
    noise,
    noise_panel,
    sizing,
    slider,
    spread,
    window_panel,
)
from tests.benchmarks.measure import Comparison, slowness


def main() -> int:
    machine = f"Python {platform.python_version()}, {os.cpu_count()} cores"
    slower = slowness()
    print(f"{machine}; processor times, medians of one run")
    print(f"limits in time are taken times {slower:.2f}, by which this machine is slower\n")
    missed = 0
    panels = (noise_panel, cycle_panel, window_panel)
    for benchmark in (imports, forms, slider, spread, sizing, cycle, noise, *panels):
        for found in benchmark.comparisons():
            comparison = replace(found, slower=slower) if isinstance(found, Comparison) else found
            print(comparison, flush=True)
            missed += not comparison.passed
    if missed:
        print(f"\n{missed} promised time(s) missed", file=sys.stderr)
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main())

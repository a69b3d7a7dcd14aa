"""How long the formulas of all built-in forms take, cold."""

from __future__ import annotations

from tests.benchmarks.measure import Comparison, in_fresh_process

DERIVE = """
import sympy
import hystkit as hk
start = perf_counter()
laws = [hk.derive(stage) for stage in hk.Stage.all()]
shown = [(law.upper, law.lower, law.width, law.middle, law.ideal) for law in laws]
elapsed = perf_counter() - start
assert len(laws) == 20, len(laws)
"""

# One 6 x 6 system with symbolic entries, by the solver a first draft would use.
ONE_SYSTEM = """
import sympy
start = perf_counter()
entries = sympy.symbols("g0:21", positive=True)
matrix = sympy.Matrix(6, 6, lambda i, j: entries[min(i, j) + max(i, j) * (max(i, j) + 1) // 2])
matrix.LUsolve(sympy.Matrix(sympy.symbols("i0:6")))
elapsed = perf_counter() - start
"""


def comparisons() -> list[Comparison]:
    return [
        Comparison(
            "20 forms derived cold, sympy loaded",
            in_fresh_process(DERIVE, repeat=3),
            "one 6 x 6 symbolic system by LU",
            in_fresh_process(ONE_SYSTEM, repeat=3),
            limit=2.0,
        )
    ]

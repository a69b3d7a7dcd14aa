"""How long the formulas of all built-in forms take, cold."""

from __future__ import annotations

from tests.benchmarks.measure import Comparison, in_fresh_process

DERIVE = """
import sympy
import hystkit as hk
start = process_time()
laws = [hk.derive(stage) for stage in hk.Stage.all()]
shown = [(law.upper, law.lower, law.width, law.middle, law.ideal) for law in laws]
elapsed = process_time() - start
assert len(laws) == 20, len(laws)
"""

# The inverting form with a divider, solved by the matrix method that is nearest to hand.
ONE_BY_LU = """
import sympy
T, B, F, S, Z, E, CC, EE, IP, IN, OS = sympy.symbols("T B F S Z E CC EE IP IN OS")
plus, minus, out, signal = unknowns = sympy.symbols("plus minus out signal")
equations = [
    (plus - CC) / T + (plus - EE) / B + (plus - out) / F + IP,
    (out - plus) / F + (out - E) / Z,
    (minus - signal) / S + IN,
    plus - minus - OS,
]
start = process_time()
matrix, right = sympy.linear_eq_to_matrix(equations, unknowns)
solved = [sympy.factor(one) for one in matrix.LUsolve(right)]
elapsed = process_time() - start
"""


def comparisons() -> list[Comparison]:
    return [
        Comparison(
            "20 forms derived cold, sympy loaded",
            in_fresh_process(DERIVE, repeat=3),
            "one state of one form, LU and factor",
            in_fresh_process(ONE_BY_LU, repeat=3),
            limit=2.0,
        )
    ]

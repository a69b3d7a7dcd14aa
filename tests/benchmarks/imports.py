"""How long it takes until the package can be used."""

from __future__ import annotations

from tests.benchmarks.measure import Comparison, in_fresh_process

IMPORT = "start = process_time()\nimport {name}\nelapsed = process_time() - start"


def comparisons() -> list[Comparison]:
    return [
        Comparison(
            "import hystkit",
            in_fresh_process(IMPORT.format(name="hystkit")),
            "import sympy",
            in_fresh_process(IMPORT.format(name="sympy")),
            limit=0.15,
        )
    ]

"""A law as JavaScript, printed from the same expressions that numbers are computed from."""

from __future__ import annotations

import json
import re
from functools import lru_cache

import sympy as sp
from sympy.printing.jscode import JavascriptCodePrinter

from hystkit.circuit.elements import INPUT_NODES, OUTPUT_NODE
from hystkit.circuit.netlist import netlist
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.ledger import HIGH, LOW, needed
from hystkit.symbolic.network import fixed

_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]*")


class _ScriptPrinter(JavascriptCodePrinter):  # type: ignore[misc]
    """JavaScript printer that writes terms in the order of the numeric layer."""

    def _print_Symbol(self, expr: sp.Symbol) -> str:  # noqa: N802
        # Names of parts and nodes are letters, digits and underscores already; nothing else passes.
        if not _IDENTIFIER.fullmatch(expr.name):
            raise ValueError(f"{expr.name!r} cannot be a name in a script")
        return str(expr.name)


@lru_cache(maxsize=64)
def law_script(law: SwitchingLaw) -> str:
    """Write a law as a JavaScript object.

    Parameters
    ----------
    law : SwitchingLaw
        The full law, or one less some non-idealities.

    Returns
    -------
    str
        An object literal. ``trips`` gives upper and lower trip point; ``high`` and ``low`` give
        the voltages of output, plus and minus pin in either state over V_IN [V]. Each holds the
        ``names`` of its arguments in order and the function ``of`` them, which returns an array.
        ``upperState`` is the state that the upper trip leaves.

    Notes
    -----
    The named quantities of the law are computed first, as in the numeric layer, so that both
    round alike.
    """
    at_pin = netlist(law.stage.elements).signal_at_pin
    entries = [
        f"upperState: {json.dumps(law.upper_state)}",
        f"signalAtPin: {json.dumps(at_pin)}",
    ]
    entries.append(f"trips: {_function(law.named, law)}")
    for state in (HIGH, LOW):
        entries.append(f"{state}: {_function(_voltages(law, state), law)}")
    return "{\n  " + ",\n  ".join(entries) + "\n}"


def _voltages(law: SwitchingLaw, state: str) -> tuple[sp.Expr, ...]:
    """Voltages of output, plus and minus pin; a pin wired to a fixed node has that voltage."""
    merged = netlist(law.stage.elements).merged
    free = law.states[state].potentials
    nodes = [merged[node] for node in (OUTPUT_NODE, *INPUT_NODES)]
    return tuple(free[node] if node in free else fixed(node, law.stage).value for node in nodes)


def _function(expressions: tuple[sp.Expr, ...], law: SwitchingLaw) -> str:
    """Write ``{names: [...], of: function}``."""
    rows, leaves = needed(expressions, law.definitions)
    names = sorted(symbol.name for symbol in leaves)
    shared, reduced = [(row.symbol, row.expression) for row in rows], list(expressions)
    if not rows:
        shared, reduced = sp.cse(reduced, list=False)
    printer = _ScriptPrinter()
    lines = [f"const {name} = {printer.doprint(value)};" for name, value in shared]
    results = ", ".join(printer.doprint(value) for value in reduced)
    body = "".join(f"\n      {line}" for line in [*lines, f"return [{results}];"])
    return (
        f"{{\n    names: {json.dumps(names)},\n"
        f"    of: function ({', '.join(names)}) {{{body}\n    }}\n  }}"
    )

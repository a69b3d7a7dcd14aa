"""The derivation of a law, step by step, for a report."""

from __future__ import annotations

from typing import NamedTuple

import sympy as sp

from hystkit.circuit.elements import FIXED_NODES, OUTPUT_NODE
from hystkit.circuit.netlist import Netlist, netlist
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.ledger import HIGH, LOW
from hystkit.symbolic.network import device_source, fixed
from hystkit.symbolic.printing import Letters, fits, write_expression, write_lines
from hystkit.symbolic.symbols import NON_IDEAL, latex_name, node_symbol

_ORDER = ("plus", "minus")


class Step(NamedTuple):
    r"""One step of a derivation.

    Attributes
    ----------
    title : str
        What is done.
    equations : tuple of str
        LaTeX lines for ``align*``, each with its alignment mark; continued lines begin with
        ``&\quad``.
    """

    title: str
    equations: tuple[str, ...]


def derivation(law: SwitchingLaw) -> tuple[Step, ...]:
    """Write down how a law comes about.

    Parameters
    ----------
    law : SwitchingLaw
        Full, or less some non-idealities.

    Returns
    -------
    tuple of Step
        Node equations, both output states, switching condition, named quantities and trip points;
        where the device is not ideal, the ideal law too.
    """
    net = netlist(law.stage.elements)
    steps = [
        Step("Currents out of each node", tuple(_node_lines(law, net))),
        Step("The output in its two states", tuple(_output_lines(law, net))),
        Step("Switching condition", tuple(_condition_lines(law))),
    ]
    ideal = law.without(NON_IDEAL)
    if not law.is_ideal:
        steps += _law_steps(law, "Trip points")
    title = "Trip points, ideal device" if law.is_ideal else "The same with an ideal device"
    return (*steps, *_law_steps(ideal, title), Step("Width", tuple(_width_lines(ideal))))


def equation(
    left: sp.Symbol,
    right: sp.Expr,
    names: dict[sp.Symbol, str] | None = None,
    letters: Letters = (),
) -> list[str]:
    """Write an equation on one or more lines of ``align*``.

    Parameters
    ----------
    left : sympy.Symbol
        What is defined.
    right : sympy.Expr
        What it is.
    names : dict, optional
        What stands in place of symbols on the right.
    letters : tuple of (sympy.Symbol, float), optional
        Room that each of the names takes, where these are numbers.

    Returns
    -------
    list of str
        Lines with their alignment marks.
    """
    first, *more = write_lines(right, names, letters)
    return [f"{latex_name(left.name)} &= {first}", *(f"&\\quad {line}" for line in more)]


def _law_steps(law: SwitchingLaw, title: str) -> list[Step]:
    *named, upper, lower = law.rows
    trips = [line for row in (upper, lower) for line in equation(*row)]
    abbreviations = [line for row in named for line in equation(*row)]
    return [
        *([Step("Abbreviations", tuple(abbreviations))] if named else []),
        Step(title, tuple(trips)),
    ]


def _width_lines(ideal: SwitchingLaw) -> list[str]:
    lines = [f"{latex_name(n)} &= {_WIDTHS[n]}" for n in ("V_width", "V_middle")]
    width = ideal.ideal.width
    # A width of several fractions says no more than the difference does.
    if not width.is_Add and fits(width):
        lines[0] += f" = {write_expression(width)}"
    return lines


_TRIPS = latex_name("V_upper"), latex_name("V_lower")
_WIDTHS = {
    "V_width": f"{_TRIPS[0]} - {_TRIPS[1]}",
    "V_middle": f"\\tfrac{{1}}{{2}}\\left({_TRIPS[0]} + {_TRIPS[1]}\\right)",
}


def _node_lines(law: SwitchingLaw, net: Netlist) -> list[str]:
    inner = sorted(net.free - {*_ORDER, OUTPUT_NODE})
    lines = []
    for node in (*_ORDER, *inner):
        merged = net.merged[node]
        if merged in FIXED_NODES:
            lines.append(
                f"& {latex_name(f'V_{node}')} = {write_expression(_potential(merged, law))}"
            )
            continue
        pin = {"plus": "I_BP", "minus": "I_BN"}.get(node)
        lines.append(_balance(_currents(law, net, node), _pin_current(law, pin)))
    return lines


def _output_lines(law: SwitchingLaw, net: Netlist) -> list[str]:
    lines = []
    for state in (HIGH, LOW):
        label = f"\\text{{{state}:}}\\quad "
        driver = device_source(law.stage, state)
        if driver is not None and not {s.name for s in driver.branch.g.free_symbols} <= {
            *law.non_ideal
        }:
            level = write_expression(driver.potential.constant)
            lines.append(f"& {label}{latex_name('V_out')} = {level}")
            continue
        terms = _currents(law, net, OUTPUT_NODE)
        if driver is not None:
            (resistance,) = driver.branch.g.free_symbols
            drop = node_symbol(OUTPUT_NODE) - driver.potential.constant
            terms.insert(0, f"\\frac{{{write_expression(drop)}}}{{{latex_name(resistance.name)}}}")
        lines.append(_balance(terms, _pin_current(law, None if driver else "I_LK"), label))
    return lines


def _condition_lines(law: SwitchingLaw) -> list[str]:
    difference = f"{latex_name('V_plus')} - {latex_name('V_minus')}"
    right = latex_name("V_OS") if "V_OS" in law.non_ideal else "0"
    signal = latex_name("V_IN")
    return [
        f"& {difference} = {right}",
        *(
            f"& {signal} = {latex_name(trip)} \\quad \\text{{with the output {state}}}"
            for trip, state in (("V_upper", law.upper_state), ("V_lower", law.lower_state))
        ),
    ]


def _currents(law: SwitchingLaw, net: Netlist, node: str) -> list[str]:
    """Write the current through each resistor, out of a node."""
    terms = []
    for resistor in net.at(net.merged[node]):
        other = next((n for n in resistor.nodes if n != net.merged[node]), None)
        if other is None:
            continue
        drop = write_expression(node_symbol(node))
        voltage = _potential(other, law)
        if voltage != 0:
            drop += f" - {write_expression(voltage)}"
        terms.append(f"\\frac{{{drop}}}{{{latex_name(resistor.name)}}}")
    return terms


def _potential(node: str, law: SwitchingLaw) -> sp.Expr:
    return fixed(node, law.stage).value if node in FIXED_NODES else node_symbol(node)


def _pin_current(law: SwitchingLaw, name: str | None) -> list[str]:
    return [latex_name(name)] if name is not None and name in law.non_ideal else []


def _balance(terms: list[str], pin: list[str], label: str = "") -> str:
    return f"& {label}" + " + ".join([*terms, *pin]) + " = 0"

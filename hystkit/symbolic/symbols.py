"""The symbols of the laws: one factory, with the meaning and the unit of each."""

from __future__ import annotations

import re
from functools import cache

import sympy as sp

_MEANINGS: dict[str, tuple[str, str]] = {
    "R_T": ("reference divider, top resistor", "Ω"),
    "R_B": ("reference divider, bottom resistor", "Ω"),
    "R_R": ("resistor from the reference", "Ω"),
    "R_F": ("feedback resistor", "Ω"),
    "R_I": ("input resistor", "Ω"),
    "R_G": ("shunt from the plus input to ground", "Ω"),
    "R_S": ("source resistance of the signal", "Ω"),
    "R_PU": ("pull-up resistor", "Ω"),
    "R_L": ("load resistor", "Ω"),
    "V_CC": ("positive supply", "V"),
    "V_EE": ("negative supply", "V"),
    "V_REF": ("reference voltage", "V"),
    "V_PU": ("pull-up supply", "V"),
    "V_L": ("voltage that the load returns to", "V"),
    "V_OH": ("output level, high", "V"),
    "V_OL": ("output level, low", "V"),
    "R_OH": ("output resistance, high", "Ω"),
    "R_OL": ("output resistance, low", "Ω"),
    "I_LK": ("leakage current into the open output", "A"),
    "V_OS": ("input offset voltage", "V"),
    "I_BP": ("bias current into the plus input", "A"),
    "I_BN": ("bias current into the minus input", "A"),
    "V_IN": ("signal voltage", "V"),
    "V_upper": ("upper trip point at the signal source", "V"),
    "V_lower": ("lower trip point at the signal source", "V"),
    "V_width": ("width, upper less lower trip point", "V"),
    "V_middle": ("middle, mean of both trip points", "V"),
    "V_plus": ("voltage at the plus input", "V"),
    "V_minus": ("voltage at the minus input", "V"),
    "V_out": ("voltage at the output", "V"),
}

#: Non-idealities of the device: zero in the ideal law, symbols in the full one.
NON_IDEAL = ("R_OH", "R_OL", "I_LK", "V_OS", "I_BP", "I_BN")

# Inputs in a subscript, with what the law adds: number and output state.
_INPUTS = re.compile(r"((?:plus|minus)+)([0-9]*[HL]?)")


@cache
def symbol(name: str) -> sp.Symbol:
    """Give the symbol of a name, always the same one.

    Parameters
    ----------
    name : str
        Such as "R_F" or "V_CC".

    Returns
    -------
    sympy.Symbol
        Positive for a resistor, nonnegative for an output resistance, real otherwise.
    """
    if name in NON_IDEAL and name.startswith("R"):
        return sp.Symbol(name, nonnegative=True)
    return sp.Symbol(name, positive=True) if name.startswith("R") else sp.Symbol(name, real=True)


def node_symbol(node: str) -> sp.Symbol:
    """Give the symbol of a node's voltage.

    Parameters
    ----------
    node : str
        A free node.

    Returns
    -------
    sympy.Symbol
        Such as V_plus.
    """
    return symbol(f"V_{node}")


def meaning(name: str) -> tuple[str, str]:
    """Tell what a symbol stands for.

    Parameters
    ----------
    name : str
        Name of a symbol that is not defined by the law itself.

    Returns
    -------
    tuple of str
        Meaning and unit.
    """
    if name in _MEANINGS:
        return _MEANINGS[name]
    if name.startswith("R"):
        return ("resistor", "Ω")
    return (f"voltage at the node {name.partition('_')[2]}", "V")


def split_name(name: str) -> tuple[str, str]:
    """Split the name of a symbol into its letter and its subscript.

    Parameters
    ----------
    name : str
        Such as "R_PU" or "RF2".

    Returns
    -------
    tuple of str
        Such as ("R", "PU") or ("R", "F2"): two letters side by side would read as a product.

    Examples
    --------
    >>> split_name("R_PU"), split_name("RF2"), split_name("R")
    (('R', 'PU'), ('R', 'F2'), ('R', ''))
    """
    base, _, subscript = name.partition("_")
    return base[:1], base[1:] + subscript


@cache
def latex_name(name: str) -> str:
    r"""Write a symbol in LaTeX, its subscript upright.

    Parameters
    ----------
    name : str
        Such as "R_PU".

    Returns
    -------
    str
        Such as ``R_{\mathrm{PU}}``.
    """
    base, subscript = split_name(name)
    if not subscript:
        return base
    signs, rest = split_signs(subscript)
    label = rf"\mathrm{{{rest}}}" if rest else ""
    return f"{base}_{{{signs}{label}}}"


def split_signs(subscript: str) -> tuple[str, str]:
    """Split the signs of the inputs off a subscript.

    Parameters
    ----------
    subscript : str
        Such as "plusminusH" or "PU".

    Returns
    -------
    tuple of str
        Such as ("+-", "H") or ("", "PU").
    """
    found = _INPUTS.fullmatch(subscript)
    if found is None:
        return "", subscript
    return found[1].replace("plus", "+").replace("minus", "-"), found[2]

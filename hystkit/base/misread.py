"""Why something is not an engineering number, and what to write in its place."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable
from dataclasses import replace
from numbers import Real

from hystkit.base.errors import Fault
from hystkit.base.units import Unit

Parser = Callable[[str], "float | None"]

_WRITING = "a point for decimals, digits 0-9, nothing between the digits"
_NOT_FINITE = frozenset(["nan", "inf", "infinity", "∞"])
_EXAMPLES = {"": "4700, 4k7 or 0.25", "Ω": "4k7 or 4.7 kΩ", "%": "1 %", "1/K": "100 ppm/K"}

_NUMBER_AND_REST = re.compile(
    r"([+-]?(?:[0-9]++\.?[0-9]*+|\.[0-9]++)(?:[eE][+-]?[0-9]{1,9})?)\s*(\D*)"
)
_GROUPED = re.compile(r"([+-]?[0-9]{1,3}(?:([\s'’_.,])[0-9]{3})(?:\2[0-9]{3})*)(.*)")


def explain(value: object, unit: Unit, name: str, parse: Parser) -> Fault:
    """Return the fault of a value that was not read as a number.

    Parameters
    ----------
    value : object
        What was given.
    unit : Unit
        The unit that was expected.
    name : str
        What the number is.
    parse : callable
        Reads text in this unit or returns None; whatever is proposed has passed it.
    """
    fault = Fault(
        f"{name} is not a number.",
        asked=f"a number in {unit.symbol}" if unit.symbol else "a number",
        have=_shortened(repr(value)),
        remedy=_EXAMPLES.get(unit.symbol, f"2.5 or 2.5 {unit.symbol}"),
    )
    if isinstance(value, bool) or not isinstance(value, str | Real):
        have = f"{fault.have} ({type(value).__name__})"
        return replace(fault, problem=f"{name} is not a single number.", have=have)
    if isinstance(value, Real) or value.strip().lstrip("+-").casefold() in _NOT_FINITE:
        return replace(fault, problem=f"{name} is not a finite number.")
    if not value.strip():
        return replace(fault, problem=f"{name} is empty.")
    return _explain_text(value.strip(), unit, parse, fault, name)


def _explain_text(text: str, unit: Unit, parse: Parser, fault: Fault, name: str) -> Fault:
    if parse(text) is not None:
        return replace(fault, problem=f"{name} is too large or too small to be held.")
    problem = f"{name} is not written as a number is here."
    if proposed := [each for each in _rewritten(text) if parse(each) is not None]:
        return replace(fault, problem=problem, rule=_WRITING, remedy=" or ".join(proposed))
    match = _NUMBER_AND_REST.fullmatch(text)
    if match is None:
        return fault
    number, rest = match[1], match[2].strip()
    if not rest and "" not in unit.names:
        return _unsigned(number, fault, name)
    if proposed := [f"{number} {each}" for each in _same_letters(rest, unit)]:
        rule = "capitals count in prefixes and units"
        return replace(fault, problem=problem, rule=rule, remedy=" or ".join(proposed))
    wrong = f"{name} is not in {unit.symbol}." if unit.symbol else f"{name} takes no unit."
    return replace(fault, problem=wrong)


def _unsigned(number: str, fault: Fault, name: str) -> Fault:
    """Return the fault of text that leaves open whether it is a fraction or counts per cent."""
    proposed = [f"{number} %"]
    if 0 < abs(float(number)) < 1:
        proposed.append(f"{100 * float(number):g} %")
    rule = "text carries its sign; only a number without quotes is a fraction"
    problem = f"{name} may be a fraction or count per cent."
    return replace(fault, problem=problem, rule=rule, remedy=" or ".join(proposed))


def _rewritten(text: str) -> list[str]:
    """Return the text as it would be written here, once for each way in which it can be meant."""
    plain = "".join(map(_western, text))
    meant = [plain, plain.replace(",", ".")]
    if grouped := _GROUPED.fullmatch(plain):
        whole, mark, rest = grouped.groups()
        meant.append(whole.replace(mark, "") + rest.replace(",", ".", 1))
    return [each for each in dict.fromkeys(meant) if each != text]


def _western(character: str) -> str:
    """Return a digit of any script as 0-9, and a full-width letter or sign at normal width."""
    if unicodedata.east_asian_width(character) == "F":
        character = unicodedata.normalize("NFKC", character)
    return str(unicodedata.decimal(character, character))


def _same_letters(suffix: str, unit: Unit) -> list[str]:
    """Return the suffixes of the unit that differ from `suffix` in the fewest capitals only."""
    alike = [each for each in unit.suffixes if each.casefold() == suffix.casefold()]
    changed = [sum(a != b for a, b in zip(suffix, each, strict=False)) for each in alike]
    return [each for each, count in zip(alike, changed, strict=True) if count == min(changed)]


def _shortened(text: str) -> str:
    return text if len(text) <= 60 else f"{text[:57]}..."

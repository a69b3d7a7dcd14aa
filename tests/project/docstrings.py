"""Read numpy-style docstrings: sections, documented parameters, units in brackets."""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

SECTIONS = (
    "Parameters",
    "Attributes",
    "Returns",
    "Yields",
    "Raises",
    "Warns",
    "See Also",
    "Notes",
    "References",
    "Examples",
)

# What may stand in brackets as a unit. [1] is a plain number or ratio.
UNITS = {
    "1", "%", "V", "mV", "A", "mA", "µA", "Ω", "kΩ", "Ohm", "kOhm", "S", "F", "s", "ms", "h", "Hz",
    "1/s", "1/h", "K", "°C", "1/K", "ppm/K", "W", "V/s", "V/K", "V/V", "V/Ω", "V/Ohm", "V/unit",
    "unit", "unit/s", "unit/V", "px", "in", "dpi", "m", "bytes", "B", "H", "J", "C", "V/√Hz",
}  # fmt: skip


@dataclass(frozen=True)
class Entry:
    """One line of a parameter section with the text below it."""

    names: tuple[str, ...]
    kind: str
    text: str


def sections(doc: str) -> dict[str, str]:
    """Section title -> body, of a cleaned docstring."""
    titles = "|".join(SECTIONS)
    parts = re.split(rf"^({titles})\n-{{3,}}\n", doc, flags=re.MULTILINE)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


def underlined(doc: str) -> list[tuple[str, str]]:
    """Every underlined title with its underline, known or not."""
    return re.findall(r"^(\S[^\n]*)\n(-{3,})$", doc, flags=re.MULTILINE)


def entries(body: str) -> Iterator[Entry]:
    """The entries of a Parameters or Attributes section."""
    for block in re.split(r"\n(?=\S)", body.strip("\n")):
        head, _, text = block.partition("\n")
        names, _, kind = head.partition(" : ")
        yield Entry(tuple(name.strip() for name in names.split(",")), kind.strip(), text.strip())


def documented(doc: str) -> list[str]:
    """Names of the Parameters section, in order; without their stars."""
    body = sections(doc).get("Parameters", "")
    return [name.lstrip("*\\") for entry in entries(body) for name in entry.names if name]


def accepted(function: Callable[..., Any]) -> list[str]:
    """Parameter names of the signature, in order, without self and cls."""
    names = list(inspect.signature(function).parameters)
    return [name for name in names if name not in {"self", "cls"} and not name.startswith("_")]


def bracketed(doc: str) -> list[str]:
    """Units in square brackets, examples and code left out; "[V or A]" holds two."""
    prose = re.split(r"^(?:Examples|References)\n-{3,}\n", doc, flags=re.MULTILINE)[0]
    prose = re.sub(r"``.*?``|`[^`]*`|:math:`[^`]*`", "", prose, flags=re.DOTALL)
    prose = re.sub(r"^\.\. math::.*?(?=\n\S|\Z)", "", prose, flags=re.DOTALL | re.MULTILINE)
    found = re.findall(r"(?<=[\s(])\[([^\[\]\n]{1,12})\]", prose)
    return [unit for one in found for unit in re.split(r" or | per ", one)]

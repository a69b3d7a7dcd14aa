"""Units: how each may be written behind a number, and how it is shown."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import lru_cache

#: SI prefixes as they are shown, and the power of ten of each.
PREFIXES: Mapping[str, int] = {
    "f": -15, "p": -12, "n": -9, "µ": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12,
}  # fmt: skip

#: Further spellings that are read: u and the Greek letter for micro, K as in IEC 60062.
_READ_PREFIXES: Mapping[str, int] = {**PREFIXES, "u": -6, "\u03bc": -6, "K": 3}

#: Units that take prefixes, alone or ahead of a slash. Others never do: "mm³" is no thousandth.
_PREFIXED = frozenset(
    ["", "Ω", "V", "A", "W", "J", "F", "H", "S", "C", "s", "Hz", "m", "g", "N", "Pa", "bar"]
)

#: Smallest and largest prefix shown: plain numbers stay plain, and long times in seconds.
_SHOWN: Mapping[str, tuple[int, int]] = {"": (0, 0), "s": (-15, 0)}

_SPELLINGS: Mapping[str, tuple[str, ...]] = {
    "Ω": ("Ω", "\u2126", "ohm", "ohms", "Ohm"),
    "°C": ("°C", "degC", "\u2103", "C"),
}

#: Multiples of the second that are read; times are shown in seconds.
_MINUTES_AND_HOURS: Mapping[str, float] = {"min": 60.0, "h": 3600.0}

#: Ratios: every spelling and its power of ten. The first one is shown.
_RATIOS: Mapping[str, Mapping[str, int]] = {
    "%": {"%": -2, "ppm": -6},
    "1/K": {"ppm/K": -6, "ppm/°C": -6, "%/K": -2, "1/K": 0, "/K": 0},
}


@dataclass(frozen=True)
class Unit:
    """How one unit is read and shown.

    Attributes
    ----------
    symbol : str
        The unit itself.
    names : frozenset of str
        Its spellings without a prefix, the empty one included.
    suffixes : mapping of str to int
        All that may follow a number, and the power of ten that it stands for.
    marks : mapping of str to int
        Letters that may stand in place of the decimal point, and their power of ten.
    shown : mapping of int to str
        The unit as it is shown, by power of ten.
    multiples : mapping of str to tuple
        What may follow a number and stands for no power of ten, such as "min": a power of ten and
        a factor.
    """

    symbol: str
    names: frozenset[str]
    suffixes: Mapping[str, int]
    marks: Mapping[str, int]
    shown: Mapping[int, str]
    multiples: Mapping[str, tuple[int, float]] = field(default_factory=dict)

    def scale_for(self, exponent: int) -> int:
        """Return the power of ten to show a number in whose first digit stands at `exponent`."""
        return max((scale for scale in self.shown if scale <= exponent), default=min(self.shown))


@lru_cache(maxsize=256)
def unit_of(symbol: str) -> Unit:
    """Return how the unit `symbol` is read and shown.

    Parameters
    ----------
    symbol : str
        Any unit, such as ``"Ω"``, ``"mm"`` or ``"V/s"``; empty for a plain number. One that is not
        known here stands for itself, without prefixes.
    """
    if symbol in _RATIOS:
        return _ratio(symbol)
    head, slash, tail = symbol.partition("/")
    names = [name + slash + tail for name in _SPELLINGS.get(head, (head,))]
    suffixes = dict.fromkeys([*names, ""], 0)
    shown = {0: symbol}
    if head in _PREFIXED:
        # What is there already wins: behind a length, "m" is the metre.
        prefixed = {p + n: e for p, e in _READ_PREFIXES.items() for n in [*names, ""]}
        suffixes = prefixed | suffixes
        shown = _shown_with_prefixes(symbol, head)
    if symbol in ("Ω", ""):
        suffixes["R"] = 0
    marks = {suffix: e for suffix, e in suffixes.items() if len(suffix) == 1 and suffix.isalpha()}
    multiples = _in_minutes_and_hours(symbol, suffixes)
    return Unit(symbol, frozenset([*names, ""]), suffixes, marks, shown, multiples)


def latex_unit(text: str) -> str:
    r"""Return a unit as LaTeX for math mode, upright; amsmath is enough.

    Parameters
    ----------
    text : str
        A unit as it is shown, prefix included.

    Examples
    --------
    >>> print(latex_unit("kΩ"))
    \mathrm{k\Omega}
    """
    body = "".join(_LATEX.get(c, c if c.isascii() else _boxed(c)) for c in _with_root(text))
    return rf"\mathrm{{{body.rstrip()}}}" if text else ""


def _in_minutes_and_hours(symbol: str, suffixes: Mapping[str, int]) -> dict[str, tuple[int, float]]:
    """Minutes and hours, where seconds are expected alone or behind a slash."""
    if symbol == "s":
        return {name: (0, seconds) for name, seconds in _MINUTES_AND_HOURS.items()}
    return {
        f"{suffix.removesuffix('s')}{name}": (exponent, 1 / seconds)
        for suffix, exponent in suffixes.items()
        if suffix.endswith("/s")
        for name, seconds in _MINUTES_AND_HOURS.items()
    }


def _ratio(symbol: str) -> Unit:
    spellings = _RATIOS[symbol]
    text, scale = next(iter(spellings.items()))
    # Text without a sign would leave open whether it is a fraction or counts per cent.
    bare = {} if symbol == "%" else {"": 0}
    return Unit(symbol, frozenset(bare), {**bare, **spellings}, {}, {scale: text})


def _shown_with_prefixes(symbol: str, head: str) -> dict[int, str]:
    lowest, highest = _SHOWN.get(head, (-15, 12))
    return {e: p + symbol for p, e in PREFIXES.items() if lowest <= e <= highest}


def _with_root(text: str) -> str:
    """Replace the root of a hertz by the one character that stands for it below."""
    return text.strip().replace("√Hz", "\0")


def _boxed(character: str) -> str:
    return rf"\text{{{character}}}"


# A space ends the name of a command and is not set in math mode.
_LATEX: Mapping[str, str] = {
    "\0": r"\sqrt{Hz}",
    "Ω": "\\Omega ", "\u2126": "\\Omega ", "µ": "\\mu ", "\u03bc": "\\mu ",
    "°": r"{}^{\circ}", "·": r"{\cdot}", "²": "^{2}", "³": "^{3}", " ": "~",
    "%": r"\%", "&": r"\&", "#": r"\#", "$": r"\$", "_": r"\_", "{": r"\{", "}": r"\}",
    "\\": "\\backslash ", "^": "\\wedge ", "~": "\\sim ",
}  # fmt: skip

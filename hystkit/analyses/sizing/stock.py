"""What a free part is taken from: a preferred series within a range, or the parts in a drawer."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Any

from hystkit.base.errors import Fault, HystkitError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import parse_percent, read, show
from hystkit.circuit.preferred import SERIES
from hystkit.circuit.preferred import values as preferred_values
from hystkit.circuit.reading import Quantity, collect, members
from hystkit.numeric.views import Interval

Range = tuple[Quantity, Quantity]
#: A series by name, or the values at hand.
Source = str | Sequence[Quantity]


@dataclass(frozen=True)
class Stock:
    """Where the value of a free part comes from.

    Attributes
    ----------
    series : str
        Preferred series; empty where `drawer` gives the values.
    range : tuple of float
        Lowest and highest value [Ohm].
    tol : float
        Relative tolerance.
    tempco : float
        Magnitude of the temperature coefficient [1/K].
    drawer : tuple of float
        Values at hand, whatever the range [Ohm].
    """

    series: str
    range: Interval = (1e3, 1e6)
    tol: float = 0.01
    tempco: float = 0.0
    drawer: tuple[float, ...] = ()

    @property
    def values(self) -> tuple[float, ...]:
        """All values, ascending [Ohm]."""
        return self.drawer or preferred_values(self.series, *self.range)

    @property
    def source(self) -> Source:
        """Series or drawer, as an argument of `size`."""
        return self.drawer or self.series

    @property
    def finer(self) -> tuple[str, ...]:
        """Series with more values than this one."""
        names = tuple(SERIES)
        return () if self.drawer else names[names.index(self.series) + 1 :]

    def with_series(self, name: str) -> Stock:
        """Give the same with a finer series; itself where that would be coarser."""
        return replace(self, series=name) if name in self.finer else self

    def with_tol(self, tol: float) -> Stock:
        """Give the same with a tighter tolerance; itself where that would be wider."""
        return replace(self, tol=min(tol, self.tol))

    def reaching(self, factor: float) -> Stock:
        """Give the same with a range that goes further by a factor at both ends."""
        return replace(self, range=(self.range[0] / factor, self.range[1] * factor))

    def text(self) -> str:
        """Say it in a few words."""
        if self.drawer:
            return f"{len(self.drawer)} values at hand"
        low, high = (show(end, "Ω") for end in self.range)
        return f"{self.series} from {low} to {high}"


@dataclass(frozen=True)
class Settings:
    """How the stock of each free part was asked for: one for all, or by part.

    Attributes
    ----------
    series : str, sequence or mapping
        Preferred series or values at hand.
    ranges : pair or mapping
        Allowed range [Ohm].
    tol, tempco : float, str or mapping
        Tolerance, and magnitude of the temperature coefficient [1/K].
    """

    series: Any
    ranges: Any
    tol: Any
    tempco: Any

    def stock(self, parts: tuple[str, ...], faults: list[Fault]) -> dict[str, Stock]:
        """Read what each part is taken from.

        Parameters
        ----------
        parts : tuple of str
            The free parts.
        faults : list of Fault
            Where faults are added.

        Returns
        -------
        dict
            Part to stock, without those that a fault was added for.
        """
        for label, given in vars(self).items():
            if isinstance(given, Mapping):
                faults += _name_faults(label, given, parts)
        found = {}
        for part in parts:
            stock = self._read(part, faults)
            if stock is not None:
                found[part] = stock
        # The same fault of a setting for all parts is told once.
        faults[:] = dict.fromkeys(faults)
        return found

    def completed(self, parts: tuple[str, ...]) -> Settings:
        """Give settings for other parts too, where they were given by part.

        Parameters
        ----------
        parts : tuple of str
            That need settings.

        Returns
        -------
        Settings
            A part without its own takes the coarsest series, the loosest tolerance and
            coefficient and the first range that were given.
        """

        def coarsest(values: list[Any]) -> Any:
            named = [v for v in values if v in SERIES] if all(map(_is_text, values)) else []
            return min(named, key=[*SERIES].index) if named else values[0]

        fallbacks: dict[str, Callable[[list[Any]], Any]] = {
            "series": coarsest,
            "ranges": lambda values: values[0],
            "tol": lambda values: max(values, key=parse_percent),
            "tempco": lambda values: max(values, key=_read_tempco),
        }
        changes = {}
        for label, given in vars(self).items():
            if isinstance(given, Mapping) and given:
                other = fallbacks[label]([*given.values()])
                changes[label] = {part: given.get(part, other) for part in parts}
        return replace(self, **changes)

    def _read(self, part: str, faults: list[Fault]) -> Stock | None:
        before = len(faults)
        chosen = {n: _for(given, part) for n, given in vars(self).items()}
        if any(value is None for value in chosen.values()):
            return None
        series, drawer = _read_source(chosen["series"], faults)
        ends = _read_range(chosen["ranges"], faults)
        tol = _read_tol(chosen["tol"], faults)
        tempco = collect(faults, lambda: _read_tempco(chosen["tempco"]))
        if len(faults) > before:
            return None
        stock = Stock(series, ends, tol, tempco, drawer)
        if not stock.values:
            faults.append(
                Fault(
                    f"no preferred value of {part} lies in its range.",
                    asked=stock.text(),
                    remedy="a wider range or a finer series",
                )
            )
            return None
        return stock


def _for(setting: Any, part: str) -> Any:
    return setting.get(part) if isinstance(setting, Mapping) else setting


def _is_text(value: Any) -> bool:
    return isinstance(value, str)


def _name_faults(label: str, given: Mapping[str, Any], parts: tuple[str, ...]) -> list[Fault]:
    unknown = [
        unknown_name_fault(f"free part ({label})", n, parts) for n in given if n not in parts
    ]
    missing = [name for name in parts if name not in given]
    if missing:
        unknown.append(
            Fault(
                f"{label} is missing for {', '.join(missing)}.",
                asked=f"{label} for {', '.join(given) or 'no part'}",
                rule="a mapping names every free part",
                remedy=f"add {', '.join(missing)}, or give one setting for all",
            )
        )
    return unknown


def _read_source(source: Any, faults: list[Fault]) -> tuple[str, tuple[float, ...]]:
    if isinstance(source, str) or not isinstance(source, Iterable):
        if source not in SERIES:
            faults.append(unknown_name_fault("preferred series", str(source), SERIES))
        return str(source), ()
    values = [collect(faults, partial(read, one, unit="Ω", name="series")) for one in source]
    if not values or any(value <= 0 for value in values):
        faults.append(
            Fault(
                "the values at hand are not resistances.",
                asked=f"series={tuple(source)!r}",
                rule="at least one value, each above zero",
                remedy='series="E96", or the values in the drawer such as ("10k", "22k", "47k")',
            )
        )
    return "", tuple(sorted(set(values)))


def _read_range(given: Any, faults: list[Fault]) -> Interval:
    before = len(faults)
    ends = [collect(faults, partial(read, end, unit="Ω", name="range")) for end in members(given)]
    if len(faults) == before and (len(ends) != 2 or not 0 < ends[0] <= ends[1]):
        faults.append(
            Fault(
                "the range of a free part is not an interval.",
                asked=f"ranges={given!r}",
                rule="two resistances above zero, the lower one first",
                remedy='ranges=("1k", "1M")',
            )
        )
    return (ends[0], ends[1]) if len(ends) == 2 else (math.nan, math.nan)


def _read_tempco(given: Quantity) -> float:
    """Read a temperature coefficient, of which the magnitude counts [1/K]."""
    return abs(read(given, unit="1/K", name="tempco"))


def _read_tol(given: Any, faults: list[Fault]) -> float:
    try:
        number = parse_percent(given)
    except HystkitError as error:
        faults += error.faults
        return math.nan
    if not 0 <= number < 1:
        faults.append(
            Fault(
                "the tolerance of the free parts is outside its range.",
                asked=f"tol={given!r}",
                rule="0 % <= tol < 100 %",
                remedy='tol="1 %"',
            )
        )
    return number

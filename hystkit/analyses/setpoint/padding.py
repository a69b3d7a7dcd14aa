"""The padding resistors with which every unit's trimmer covers a wanted range."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.setpoint.travel import Travel
from hystkit.analyses.setpoint.trim import trim
from hystkit.analyses.setpoint.trimmer import Trimmer, check_place, fitted, padded
from hystkit.base.errors import DesignError, Fault, InfeasibleError, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import code, read, show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.preferred import values as preferred_values
from hystkit.circuit.reading import Quantity, collect, members
from hystkit.numeric.trips import trip_points
from hystkit.numeric.views import Interval

#: Padding resistors are looked for from a thousandth of the trimmer to a thousand times as much,
#: within these limits [Ohm].
RANGE = (10.0, 1e7)
_SPAN = 1e3
#: Totals that trimmers are made with, per decade.
TOTALS = (1.0, 2.0, 5.0)
# Designs that may be refused one after the other before their error is told.
_REFUSED = 50

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Padding(Viewed):
    """Real padding resistors for a trimmer.

    Attributes
    ----------
    travel : Travel
        What the trimmer does with them.
    kind : str
        Which trip, or the width, was to cover a range.
    wanted : pair of float
        That range [V].
    """

    travel: Travel
    kind: str
    wanted: Interval

    @property
    def design(self) -> Design:
        """The design with the padding resistors, without the trimmer."""
        return self.travel.design

    @property
    def excess(self) -> float:
        """How much more than wanted the stated values cover [V]."""
        low, high = self.travel.nominal[self.kind]
        return (high - low) - (self.wanted[1] - self.wanted[0])

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field(name, code(self.design.parts[name].value, 6), "",
                  f"± {show(self.design.parts[name].tol, '%')}")
            for name in padded(self.travel.place)
        ]  # fmt: skip
        return [*rows, Field(f"{self.kind}, wanted", self.wanted, "V"), *self.travel._fields()]


@dataclass(frozen=True)
class _Ask:
    """What was asked for."""

    design: Design
    trimmer: Trimmer
    place: str
    kind: str
    wanted: Interval
    series: str
    tol: float


def padding(
    design: Design,
    trimmer: Trimmer,
    place: str = "divider",
    *,
    upper: tuple[Quantity, Quantity] | None = None,
    lower: tuple[Quantity, Quantity] | None = None,
    width: tuple[Quantity, Quantity] | None = None,
    series: str = "E96",
    tol: Quantity = 0.01,
) -> Padding:
    """Find padding resistors with which every unit can be set anywhere in a range.

    Parameters
    ----------
    design : Design
        Its R_T and R_B, or its R_F, are replaced.
    trimmer : Trimmer
        With its tolerance and end resistance.
    place : {"divider", "feedback"}, default "divider"
        Between R_T and R_B with the wiper at the input, or in series with R_F.
    upper, lower, width : pair of float or str
        Exactly one of them: the range that is to be covered [V]. The width only in the feedback of
        a push-pull output with equal output resistances.
    series : str, default "E96"
        Preferred series of the padding resistors.
    tol : float or str, default 0.01
        Their tolerance.

    Returns
    -------
    Padding
        Of all preferred values from a thousandth to a thousand times the trimmer's total, within
        10 Ohm and 10 MOhm, those with the smallest range over the travel that still holds the
        wanted one with every unit, and hence the finest setting.

    Raises
    ------
    InputError
        If not exactly one range is given, or it cannot be used.
    InfeasibleError
        If no padding resistors do it; names a trimmer with which it can be done, if there is one.
    """
    check_place(design, place)
    kind, wanted = _wanted({"upper": upper, "lower": lower, "width": width})
    share = Part(1.0, tol).tol
    if kind not in Travel(design, trimmer, place).kinds:
        Travel(design, trimmer, place).reaches(**{kind: wanted})
    ask = _Ask(design, trimmer, place, kind, wanted, series, share)
    found = _found(ask)
    if found is not None:
        return Padding(found, kind, wanted)
    raise InfeasibleError(
        "no padding resistors give every unit of this trimmer the whole range.",
        asked=f"{kind} {show(wanted[0], 'V')} to {show(wanted[1], 'V')}",
        have=f"a trimmer of {show(trimmer.total, 'Ω')} ± {show(trimmer.total_tol, '%')} in the "
        f"{place}, {series} ± {show(share, '%')}",
        remedy=_other_total(ask) or "a narrower range, or other resistors around it",
    )


def _found(ask: _Ask) -> Travel | None:
    """Try the narrowest range first; drop what a corner that failed it excludes as well."""
    grid, rest = _covering(ask)
    tried = 0
    while rest.size:
        values = {name: float(v[rest[0]]) for name, v in grid.items()}
        rest = rest[1:]
        parts = {name: Part(value, ask.tol) for name, value in values.items()}
        try:
            travel = trim(ask.design.with_parts(**parts), ask.trimmer, ask.place)
        except DesignError:
            tried += 1
            if tried > _REFUSED:
                raise
            continue
        sure = travel.sure[ask.kind]
        if sure is not None and sure[0] <= ask.wanted[0] and ask.wanted[1] <= sure[1]:
            return travel
        for corner in travel.binding(ask.kind):
            deviations = {n: corner.pop(n, values[n]) / values[n] for n in values}
            total = corner.pop("total")
            moved = {n: grid[n][rest] * deviations[n] for n in values}
            rest = rest[_covers(ask, _ends(ask, moved, total, corner))]
    return None


def _covering(ask: _Ask) -> tuple[dict[str, Floats], NDArray[np.intp]]:
    """All preferred values; and those that cover the range as stated, the narrowest first."""
    total = ask.trimmer.total
    low, high = max(RANGE[0], total / _SPAN), min(RANGE[1], total * _SPAN)
    axis = np.array(preferred_values(ask.series, low, high))
    names = padded(ask.place)
    grid = dict(zip(names, map(np.ravel, np.meshgrid(*[axis] * len(names))), strict=True))
    ends = _ends(ask, grid, total, {})
    order = np.argsort(ends[1] - ends[0], kind="stable")
    return grid, order[_covers(ask, ends)[order]]


def _ends(
    ask: _Ask, padding: dict[str, Floats], total: float, given: dict[str, float]
) -> tuple[Floats, Floats]:
    """Lowest and highest of the kind over the travel [V]."""
    ends = []
    for setting in (0.0, 1.0):
        resistors = fitted(ask.place, padding, total, ask.trimmer.wiper(setting, total))
        ends.append(getattr(trip_points(ask.design, **given, **resistors), ask.kind))
    return np.minimum(*ends), np.maximum(*ends)


def _covers(ask: _Ask, ends: tuple[Floats, Floats]) -> NDArray[np.bool_]:
    return (ends[0] <= ask.wanted[0]) & (ask.wanted[1] <= ends[1])


def _other_total(ask: _Ask) -> str:
    for total in _totals(ask.trimmer.total):
        if 2 * ask.trimmer.end_resistance >= total * (1 - ask.trimmer.total_tol):
            continue
        if _found(replace(ask, trimmer=replace(ask.trimmer, total=total))) is not None:
            return f"a trimmer of {show(total, 'Ω')}, with which it can be done"
    return ""


def _totals(total: float) -> Iterator[float]:
    """Other totals that are made, the nearest first."""
    made = [float(f"{step}e{decade}") for decade in range(1, 7) for step in TOTALS]
    yield from sorted(
        (one for one in made if not np.isclose(one, total)),
        key=lambda one: abs(np.log(one / total)),
    )


def _wanted(given: dict[str, Any]) -> tuple[str, Interval]:
    asked = {kind: pair for kind, pair in given.items() if pair is not None}
    if len(asked) != 1:
        raise InputError(
            "a trimmer covers one range.",
            asked=", ".join(asked) or "nothing",
            rule="exactly one of upper, lower and width",
            remedy="upper=(2.5, 2.9)",
        )
    ((kind, pair),) = asked.items()
    faults: list[Fault] = []
    ends = [collect(faults, partial(read, end, unit="V", name=kind)) for end in members(pair)]
    if not faults and (len(ends) != 2 or not ends[0] < ends[1]):
        faults.append(
            Fault(
                f"{kind} is not a range.",
                asked=f"{kind}={pair!r}",
                rule="two numbers, the lower one first",
                remedy=f"{kind}=(low, high)",
            )
        )
    if faults:
        raise InputError.of("this range", faults)
    return kind, (ends[0], ends[1])

"""Preferred numbers of IEC 60063: the values in which resistors and capacitors are made."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType

from hystkit.base.errors import QuantityError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show

#: Where E24 departs from the rounded geometric series.
_E24_DEPARTS = {26: 27, 29: 30, 32: 33, 35: 36, 38: 39, 42: 43, 46: 47, 83: 82}
#: Where E192 does.
_E192_DEPARTS = {919: 920}

#: Distance at which a computed value still counts as the preferred value itself.
_SAME = 1e-9


def _rounded(count: int, digits: int, departs: Mapping[int, int]) -> tuple[int, ...]:
    """Return one decade of `count` values in geometric progression, departures included."""
    steps = (round(10 ** (digits - 1 + i / count)) for i in range(count))
    return tuple(departs.get(step, step) for step in steps)


_E24 = _rounded(24, 2, _E24_DEPARTS)
_E192 = _rounded(192, 3, _E192_DEPARTS)

#: One decade of every series: two digits up to E24, three from E48 on.
SERIES: Mapping[str, tuple[int, ...]] = MappingProxyType(
    {
        "E3": _E24[::8],
        "E6": _E24[::4],
        "E12": _E24[::2],
        "E24": _E24,
        "E48": _E192[::4],
        "E96": _E192[::2],
        "E192": _E192,
    }
)


def series(name: str) -> tuple[int, ...]:
    """Return one decade of a preferred series.

    Parameters
    ----------
    name : str
        ``"E3"``, ``"E6"``, ``"E12"``, ``"E24"``, ``"E48"``, ``"E96"`` or ``"E192"``.

    Returns
    -------
    tuple of int
        Ascending: 10 to 91 up to E24, 100 to 988 from E48 on.

    Raises
    ------
    UnknownNameError
        If there is no such series.

    References
    ----------
    IEC 60063:2015, Preferred number series for resistors and capacitors.

    Examples
    --------
    >>> series("E6")
    (10, 15, 22, 33, 47, 68)
    """
    try:
        return SERIES[name]
    except (KeyError, TypeError):
        fault = unknown_name_fault("preferred series", name, SERIES)
        raise UnknownNameError.of("the series", [fault]) from None


def values(series: str, low: float, high: float) -> tuple[float, ...]:
    """Return all preferred values in a range.

    Parameters
    ----------
    series : str
        Name of the series, such as ``"E96"``.
    low, high : float
        Ends of the range, both included; 0 < low <= high, in any unit.

    Returns
    -------
    tuple of float
        Ascending; empty where no value falls into the range.

    Raises
    ------
    UnknownNameError
        If there is no such series.
    QuantityError
        If the ends are not positive and finite, or change places.

    Examples
    --------
    >>> values("E12", 1e3, 2e3)
    (1000.0, 1200.0, 1500.0, 1800.0)
    """
    first, last = _index_at_or_above(low, series), _index_at_or_below(high, series)
    if low > high:
        raise QuantityError(
            "the range of values is empty.",
            asked=f"values from {show(low)} to {show(high)}",
            rule="low <= high",
            remedy=f"from {show(high)} to {show(low)}",
        )
    return tuple(_value(index, series) for index in range(first, last + 1))


def nearest(value: float, series: str) -> float:
    """Return the preferred value nearest to another by ratio.

    Parameters
    ----------
    value : float
        Positive and finite, in any unit.
    series : str
        Name of the series.

    Returns
    -------
    float
        The preferred value with the smallest ratio to `value`; of two, the lower.

    Raises
    ------
    UnknownNameError
        If there is no such series.
    QuantityError
        If the value is not positive and finite.

    Examples
    --------
    >>> nearest(5.75e5, "E96")
    576000.0
    """
    below = _value(_index_at_or_below(value, series), series)
    above = _value(_index_at_or_above(value, series), series)
    return below if value / below <= above / value else above


def step(value: float, series: str, n: int) -> float:
    """Return the preferred value `n` steps above another, or below with n < 0.

    Parameters
    ----------
    value : float
        Where to start; positive and finite, on the series or off it. Off it, the first step
        leads to the next preferred value in that direction.
    series : str
        Name of the series.
    n : int
        Number of steps; 0 gives the nearest preferred value.

    Returns
    -------
    float
        The preferred value reached.

    Raises
    ------
    UnknownNameError
        If there is no such series.
    QuantityError
        If the value is not positive and finite.

    Examples
    --------
    >>> step(4700.0, "E24", 1), step(5000.0, "E24", -1)
    (5100.0, 4700.0)
    """
    if n == 0:
        return nearest(value, series)
    start = _index_at_or_below(value, series) if n > 0 else _index_at_or_above(value, series)
    return _value(start + n, series)


def _value(index: int, series_name: str) -> float:
    """Return the preferred value at an index that counts on through all decades from 1.0."""
    decade, place = divmod(index, len(SERIES[series_name]))
    digits = SERIES[series_name][place]
    # Assembled as text, for the float nearest to 4.7e3 and not 47 times a rounded power of ten.
    return float(f"{digits}e{decade + 1 - len(str(digits))}")


def _index_at_or_below(value: float, series_name: str) -> int:
    """Return the index of the highest preferred value that does not exceed `value`."""
    index = _index_near(value, series_name)
    while _value(index, series_name) > value * (1 + _SAME):
        index -= 1
    while _value(index + 1, series_name) <= value * (1 + _SAME):
        index += 1
    return index


def _index_at_or_above(value: float, series_name: str) -> int:
    """Return the index of the lowest preferred value that is not below `value`."""
    index = _index_at_or_below(value, series_name)
    return index if _value(index, series_name) >= value * (1 - _SAME) else index + 1


def _index_near(value: float, series_name: str) -> int:
    count = len(series(series_name))
    if not (math.isfinite(value) and value > 0):
        raise QuantityError(
            "preferred values are positive and finite.",
            asked=f"a value of {series_name} at {value}",
            remedy="a value above zero",
        )
    return math.floor(count * math.log10(value))

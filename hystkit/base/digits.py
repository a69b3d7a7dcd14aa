"""How many digits a number needs, so that what is written down tells what it has to."""

from __future__ import annotations

import math

#: Lengths of what is shown are of these times a power of ten, so that they seldom change.
_ROUND = (1.0, 1.2, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)


def trip_digits(value: float, width: float, most: int = 7) -> int:
    """Return with how many digits a trip is written so that the width stays visible in it.

    Parameters
    ----------
    value : float
        The trip [V].
    width : float
        Upper less lower trip [V].
    most : int, optional
        Digits that are never exceeded.

    Returns
    -------
    int
        Four at least; two digits of the width show in the trip.

    Examples
    --------
    >>> trip_digits(2.5, 0.7), trip_digits(2.5005, 0.00106)
    (4, 5)
    """
    if not (value and width and math.isfinite(value) and math.isfinite(width)):
        return 4
    wanted = math.floor(math.log10(abs(value))) - math.floor(math.log10(abs(width))) + 2
    return min(max(wanted, 4), most)


def span_digits(low: float, high: float) -> int:
    """Return with how many digits the ends of an interval are written to be told apart.

    Parameters
    ----------
    low, high : float
        Both ends, in one unit.

    Returns
    -------
    int
        Four at least; two digits of their distance show in the ends.

    Examples
    --------
    >>> span_digits(2.261, 2.311), span_digits(2.4975, 2.5025)
    (4, 5)
    """
    return trip_digits(max(abs(low), abs(high)), high - low)


def exact_digits(value: float, most: int = 9) -> int:
    """Return with how many digits a number is written so that it reads back the same.

    Parameters
    ----------
    value : float
        Any number.
    most : int, optional
        Digits that are never exceeded.

    Returns
    -------
    int
        Four at least.

    Examples
    --------
    >>> exact_digits(4700.0), exact_digits(2.49987), exact_digits(1 / 3)
    (4, 6, 9)
    """
    return next((n for n in range(4, most) if rounded(value, n) == value), most)


def rounded(value: float, digits: int) -> float:
    """Return a number rounded to significant digits.

    Parameters
    ----------
    value : float
        Any number.
    digits : int
        Significant digits, >= 1.

    Returns
    -------
    float
        What the digits written down read back as.
    """
    return float(f"{value:.{digits - 1}e}")


def rounded_up(value: float) -> float:
    """Return the next of some round numbers.

    Parameters
    ----------
    value : float
        Above 0.

    Returns
    -------
    float
        Not below it.

    Examples
    --------
    >>> rounded_up(1.3), rounded_up(700.0)
    (1.5, 800.0)
    """
    power = 10.0 ** math.floor(math.log10(value))
    return float(next(f for f in _ROUND if f * power >= value * (1 - 1e-9)) * power)

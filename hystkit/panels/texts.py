"""Numbers as they stand in the fields of a panel: short, and exact, so that they read back."""

from __future__ import annotations

import html
import math
from collections.abc import Callable

from hystkit.base.errors import QuantityError
from hystkit.base.quantity import code, parse_percent, read, show
from hystkit.symbolic.symbols import split_name

_DIGITS = (4, 6, 9, 12, 15, 17)


def ohms(value: float) -> str:
    """Write a resistance in letter code, with as many digits as it needs.

    Parameters
    ----------
    value : float
        Resistance [Ω].

    Returns
    -------
    str
        `read` gives the very same number back.

    Examples
    --------
    >>> ohms(46400.0), ohms(33333.25)
    ('46k4', '33k33325')
    """
    return _exact(value, lambda digits: code(value, digits), lambda text: read(text, unit="Ω"))


def amount(value: float, unit: str) -> str:
    """Write a number with its unit, with as many digits as it needs.

    Parameters
    ----------
    value : float
        In SI units.
    unit : str
        Its unit.

    Returns
    -------
    str
        `read` gives the very same number back.

    Examples
    --------
    >>> amount(0.05, "V"), amount(4.9970001, "V")
    ('50 mV', '4.9970001 V')
    """
    return _exact(value, lambda digits: show(value, unit, digits), lambda t: read(t, unit=unit))


def percent(fraction: float) -> str:
    """Write a tolerance in per cent, with as many digits as it needs.

    Parameters
    ----------
    fraction : float
        Tolerance as a fraction.

    Returns
    -------
    str
        `parse_percent` gives the very same fraction back.

    Examples
    --------
    >>> percent(0.01), percent(0.0025), percent(0.0)
    ('1 %', '0.25 %', '0 %')
    """
    return _exact(fraction, lambda digits: show(fraction, "%", digits), parse_percent)


def subscripted(name: str) -> str:
    """Write the name of a part or level as HTML.

    Parameters
    ----------
    name : str
        Such as "R_PU".

    Returns
    -------
    str
        Escaped.

    Examples
    --------
    >>> subscripted("R_PU"), subscripted("R12")
    ('R<span class="hystkit-sub">PU</span>', 'R<span class="hystkit-sub">12</span>')
    """
    head, index = split_name(name)
    # A span, for the labels of sliders let no other tag for an index through.
    below = f'<span class="hystkit-sub">{html.escape(index)}</span>' if index else ""
    return html.escape(head) + below


def _exact(value: float, write: Callable[[int], str], read_back: Callable[[str], float]) -> str:
    for digits in _DIGITS:
        text = write(digits)
        if _reads_as(text, value, read_back):
            return text
    return repr(value)


def _reads_as(text: str, value: float, read_back: Callable[[str], float]) -> bool:
    try:
        found = read_back(text)
    except QuantityError:
        return False
    return found == value or (math.isnan(found) and math.isnan(value))

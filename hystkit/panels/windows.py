"""Windows as they stand in a field: "2.25 V to 2.32 V", or in the unit of the signal."""

from __future__ import annotations

import math
import re

from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read, read_own
from hystkit.circuit.signals import Signal
from hystkit.numeric.yields import Window
from hystkit.panels.texts import amount

_BETWEEN = re.compile(r"\s+to\s+|\s*\.\.+\s*|\s*…\s*")
_FROM = re.compile(r"(?:from|above|>=?|≥)\s*", re.IGNORECASE)
_UP_TO = re.compile(r"(?:up\s+to|below|<=?|≤)\s*", re.IGNORECASE)


def read_window(text: str, signal: Signal | None = None, name: str = "window") -> Window | None:
    """Read a window of a trip.

    Parameters
    ----------
    text : str
        "2.25 V to 2.32 V", "2.25..2.32", "from 2.25" or "up to 2.32 V"; empty for none. With a
        signal also in its unit: "1.38 m to 1.43 m".
    signal : Signal, optional
        Quantity <-> volts.
    name : str, default "window"
        For the refusal.

    Returns
    -------
    tuple of float or None, or None
        Lowest and highest voltage [V]; an end that is open is None.

    Raises
    ------
    QuantityError
        If an end is not a number.
    InputError
        If it is not a window, or an end is nothing that the signal can be.

    Examples
    --------
    >>> read_window("2.25 to 2.32 V"), read_window("from 2.25")
    ((2.25, 2.32), (2.25, None))
    """
    found = read_ends(text, signal, name)
    if isinstance(found, float):
        raise _refused(f"{name} needs two ends.", text)
    return found


def read_ends(
    text: str, signal: Signal | None = None, name: str = "trip", unit: str = "V"
) -> Window | float | None:
    """Read a voltage or a window.

    Parameters
    ----------
    text : str
        As `read_window` takes it, or one number.
    signal : Signal, optional
        Quantity <-> volts.
    name : str, default "trip"
        For the refusal.
    unit : str, default "V"
        What plain numbers are in; another than that of the result only without a signal.

    Returns
    -------
    float, tuple or None
        [V], or in `unit`.
    """
    text = text.strip()
    if not text:
        return None
    if opened := _FROM.match(text):
        low = _volts([text[opened.end() :]], signal, name, unit)[0]
        return (None, low) if _turned(text, signal) else (low, None)
    if opened := _UP_TO.match(text):
        high = _volts([text[opened.end() :]], signal, name, unit)[0]
        return (high, None) if _turned(text, signal) else (None, high)
    pieces = _BETWEEN.split(text)
    if len(pieces) > 2:
        raise _refused(f"{name} has more than two ends.", text)
    ends = _volts(pieces, signal, name, unit)
    if len(ends) == 1:
        return ends[0]
    if _turned(text, signal):
        ends.reverse()
    if ends[0] > ends[1]:
        raise _refused(f"the ends of {name} are the wrong way round.", text)
    return ends[0], ends[1]


def read_temperatures(text: str) -> tuple[float, float] | None:
    """Read a range of temperature.

    Parameters
    ----------
    text : str
        "-20 to 60" or "-20 °C .. 60 °C"; empty for none.

    Returns
    -------
    tuple of float, or None
        [°C].
    """
    if not text.strip():
        return None
    pieces = _BETWEEN.split(text.strip())
    if len(pieces) != 2:
        raise _refused("the temperature range needs two ends.", text, "-20 to 60")
    low, high = (read(piece, unit="°C", name="temperature") for piece in pieces)
    if low > high:
        raise _refused(
            "the ends of the temperature range are the wrong way round.", text, "-20 to 60"
        )
    return low, high


def write_window(window: Window | float | None, unit: str = "V") -> str:
    """Write a window or a voltage as `read_ends` reads it.

    Parameters
    ----------
    window : pair of float, float or None
        In `unit`.
    unit : str, default "V"
        Of the window.

    Returns
    -------
    str
        Reads back exactly.
    """
    if window is None:
        return ""
    if isinstance(window, (int, float)):
        return amount(float(window), unit)
    low, high = window
    if low is None:
        return "" if high is None else f"up to {amount(high, unit)}"
    return (
        f"from {amount(low, unit)}"
        if high is None
        else f"{amount(low, unit)} to {amount(high, unit)}"
    )


def write_temperatures(temperature: tuple[float, float] | None) -> str:
    """Write a range of temperature as `read_temperatures` reads it.

    Parameters
    ----------
    temperature : tuple of float, or None
        [°C].

    Returns
    -------
    str
        Reads back exactly.
    """
    if temperature is None:
        return ""
    return " to ".join(amount(end, "°C") for end in temperature)


def _in_measurand(text: str, signal: Signal | None) -> bool:
    # Volts are volts at the signal source, whatever is measured.
    return signal is not None and signal.unit not in ("", "V") and text.endswith(signal.unit)


def _turned(text: str, signal: Signal | None) -> bool:
    """Whether the ends in volts stand the other way round than those that were written."""
    return signal is not None and signal.decreasing and _in_measurand(text, signal)


def _volts(pieces: list[str], signal: Signal | None, name: str, unit: str) -> list[float]:
    if signal is None or not _in_measurand(pieces[-1], signal):
        return [read(piece, unit=unit, name=name) for piece in pieces]
    quantities = [read_own(piece, unit=signal.unit, name=name) for piece in pieces]
    found = [float(signal.volts(quantity)) for quantity in quantities]
    if not all(math.isfinite(volts) for volts in found):
        raise _refused(f"{name} is nothing that the signal can be.", " to ".join(pieces))
    return found


def _refused(problem: str, text: str, example: str = "2.25 V to 2.35 V") -> InputError:
    return InputError.of("this entry", [Fault(problem, asked=text, remedy=example)])

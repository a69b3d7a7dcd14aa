"""Read what is wanted, and find everything that is wrong with it."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from functools import partial

from hystkit.analyses.sizing.requirement import Requirement, Wanted, shown_window
from hystkit.base.errors import Fault
from hystkit.base.quantity import read
from hystkit.circuit.reading import collect, members
from hystkit.circuit.signals import Signal
from hystkit.numeric.measurand import LOADS
from hystkit.numeric.views import Interval


def read_requirement(
    wanted: Mapping[str, Wanted | None], signal: Signal | None, load: str, faults: list[Fault]
) -> Requirement | None:
    """Read what is wanted.

    Parameters
    ----------
    wanted : mapping of str to number, window or None
        "upper" and "lower" [V], or "on_at" and "off_at" in the signal's unit.
    signal : Signal or None
        Quantity <-> volts.
    load : str
        Output state in which the load is on.
    faults : list of Fault
        Where faults are added.

    Returns
    -------
    Requirement or None
        None where faults were added.
    """
    before = len(faults)
    given = {name: value for name, value in wanted.items() if value is not None}
    if load not in LOADS:
        faults.append(
            Fault(
                "the load is on in neither output state.",
                asked=f"load={load!r}",
                remedy='load="high" or load="low"',
            )
        )
    in_volts = [*given] == ["upper", "lower"]
    if not in_volts and [*given] != ["on_at", "off_at"]:
        faults.append(
            Fault(
                "the wanted trips are incomplete." if given else "no trips are wanted.",
                asked=", ".join(given) or "nothing",
                rule="upper and lower together, or on_at and off_at together",
                remedy="upper=2.7, lower=2.3",
            )
        )
        return None
    if not in_volts and signal is None:
        faults.append(
            Fault(
                "on_at and off_at need the signal that they are read from.",
                asked=", ".join(f"{n} = {v}" for n, v in given.items()),
                have="no signal",
                remedy="signal=hk.signals.Linear(...), or upper= and lower= in volts",
            )
        )
        return None
    unit = "V" if signal is None or in_volts else signal.unit
    first, second = (_window(faults, name, value, unit) for name, value in given.items())
    if len(faults) == before:
        found = Requirement(first, second, None if in_volts else load)
        faults += _faults(found, None if in_volts else signal)
        if len(faults) == before:
            return found
    return None


def _window(faults: list[Fault], name: str, wanted: Wanted, unit: str) -> Interval:
    bare = isinstance(wanted, str) or not isinstance(wanted, Iterable)
    pair = (wanted, wanted) if bare else members(wanted)
    if len(pair) != 2:
        faults.append(
            Fault(
                f"{name} is neither a number nor a window.",
                asked=f"{name}={wanted!r}",
                rule="a number, or two numbers with the lower one first",
                remedy=f"{name}=(low, high)",
            )
        )
        return (math.nan, math.nan)
    before = len(faults)
    low, high = (collect(faults, partial(read, end, unit=unit, name=name)) for end in pair)
    if len(faults) == before and low > high:
        faults.append(
            Fault(
                f"the window of {name} is the wrong way round.",
                asked=f"{name}={wanted!r}",
                rule="the lower number first",
                remedy=f"{name}=({high:g}, {low:g})",
            )
        )
    if not bare and low == high:
        faults.append(
            Fault(
                f"the window of {name} has no width.",
                asked=f"{name}={wanted!r}",
                rule="low < high",
                remedy=f"{name}={low:g}, a number, for the trip that comes nearest",
            )
        )
    return (low, high)


def _faults(found: Requirement, signal: Signal | None) -> list[Fault]:
    faults = []
    (a, b), (c, d) = found.first, found.second
    one, other = found.names
    if (a < b) != (c < d):
        faults.append(
            Fault(
                f"one of {one} and {other} is a window, the other a number.",
                asked=found.text("V" if signal is None else signal.unit),
                rule="windows are held over all tolerances, numbers are met as closely as can be",
                remedy="two windows, or two numbers",
            )
        )
    if signal is None and a + b <= c + d:
        faults.append(
            Fault(
                "the upper trip is not above the lower.",
                asked=f"upper {shown_window((a, b), 'V')}, lower {shown_window((c, d), 'V')}",
                rule="upper > lower: the width is their difference",
                remedy="exchange them",
            )
        )
    if signal is not None and a + b == c + d:
        faults.append(
            Fault(
                "the load is to switch on and off at one and the same point.",
                asked=f"on at {shown_window((a, b), signal.unit)}, "
                f"off at {shown_window((c, d), signal.unit)}",
                rule="hysteresis lies between two points",
                remedy="two different points",
            )
        )
    low, high = (-math.inf, math.inf) if signal is None else signal.span
    for name, (start, stop) in zip(found.names, (found.first, found.second), strict=True):
        if signal is not None and not (low <= start and stop <= high):
            faults.append(
                Fault(
                    f"{name} lies outside the span of the signal.",
                    asked=f"{name} = {shown_window((start, stop), signal.unit)}",
                    have=f"span {shown_window((low, high), signal.unit)}",
                    rule="a signal is known within its span",
                    remedy="a signal with a wider span",
                )
            )
    return faults

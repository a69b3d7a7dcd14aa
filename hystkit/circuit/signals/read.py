"""How signals read what they are given: what is wrong becomes a fault, all of them together."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import partial
from typing import Any

import numpy as np

from hystkit.base.errors import Fault
from hystkit.base.quantity import parse_percent, read, show
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, collect, members

_EXAMPLES = {"Ω": "a value such as 10k", "A": "a value such as 1 mA", "V": "a value such as 2.5 V"}


def read_span(faults: list[Fault], span: object) -> tuple[float, ...]:
    """Read the span of a signal.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    span : object
        As given: two numbers or texts, the lower one first.

    Returns
    -------
    tuple of float
        Both ends; NaN for what could not be read.
    """
    ends = tuple(collect(faults, partial(read, end, name="span")) for end in members(span))
    # What could not be read is NaN here, and a fault already.
    if len(ends) != 2 or ends[0] >= ends[1]:
        faults.append(
            Fault(
                "the span of a signal is not an interval.",
                asked=f"span = {span!r}",
                rule="two numbers, the lower one first",
                remedy="the range that occurs in service, such as (0, 2)",
            )
        )
    return ends


def read_positive(faults: list[Fault], name: str, given: Quantity, unit: str) -> float:
    """Read a number that has to be above zero.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : float or str
        As given.
    unit : str
        Its unit.

    Returns
    -------
    float
        NaN where it could not be read.
    """
    number = collect(faults, lambda: read(given, unit=unit, name=name))
    # What could not be read is NaN here, and a fault already.
    if number <= 0:
        faults.append(
            Fault(
                f"{name} is not positive.",
                asked=f"{name} = {number:g} {unit}".rstrip(),
                rule=f"{name} > 0",
                remedy=_EXAMPLES.get(unit, "the value of the datasheet"),
            )
        )
    return number


def read_share(faults: list[Fault], name: str, given: Quantity) -> float:
    """Read a relative tolerance or error.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : float or str
        As given: a fraction or text such as "1 %".

    Returns
    -------
    float
        The fraction; NaN where it could not be read.
    """
    share = collect(faults, lambda: parse_percent(given, name=name))
    # What could not be read is NaN here, and a fault already.
    if share < 0 or share >= 1:
        faults.append(
            Fault(
                f"{name} is outside its range.",
                asked=f"{name} = {given!r}",
                rule=f"0 <= {name} < 1 (a fraction)",
                remedy='a fraction such as 0.01, or the text "1 %"',
            )
        )
    return share


def read_resistor(faults: list[Fault], name: str, given: Part | Quantity) -> Part:
    """Read a resistor that belongs to a signal.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : Part, float or str
        As given [Ohm].

    Returns
    -------
    Part
        Of any value where it could not be read.
    """
    value = _value_in("Ω", faults, name, given)
    number = read_positive(faults, name, value, "Ω")
    return given if isinstance(given, Part) else Part(0.0 if math.isnan(number) else number)


def read_excitation(faults: list[Fault], given: Part | Quantity | None) -> Part | None:
    """Read the voltage across a sensor.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    given : Part, float, str or None
        As given [V].

    Returns
    -------
    Part or None
        None where V_CC feeds the sensor.
    """
    if given is None:
        return None
    value = _value_in("V", faults, "excitation", given)
    volts = collect(faults, lambda: read(value, unit="V", name="excitation"))
    if volts == 0:
        faults.append(
            Fault(
                "the excitation of a sensor is zero.",
                asked=f"excitation = {volts:g} V",
                rule="the voltage changes with the quantity",
                remedy="a value such as 2.5 V; leave it out where V_CC feeds the sensor",
            )
        )
    return given if isinstance(given, Part) else Part(0.0 if math.isnan(volts) else volts)


def _value_in(unit: str, faults: list[Fault], name: str, given: Part | Quantity) -> Quantity:
    """Give the value of a part, or what stands for one, and refuse a part in another unit."""
    if not isinstance(given, Part):
        return given
    if given.unit not in ("", unit):
        faults.append(
            Fault(
                f"{name} is not in {unit}.",
                asked=f"a part in {unit}",
                have=show(given.value, given.unit),
                remedy=_EXAMPLES[unit],
            )
        )
    return given.value


def read_numbers(
    faults: list[Fault], name: str, given: object, unit: str = ""
) -> tuple[float, ...]:
    """Read a column of a table.

    Parameters
    ----------
    faults : list of Fault
        Where what is wrong with it is added.
    name : str
        What to call it.
    given : object
        As given: a collection of numbers or texts.
    unit : str
        Their unit.

    Returns
    -------
    tuple of float
        NaN for what could not be read.
    """
    return tuple(
        collect(faults, partial(read, one, unit=unit, name=f"{name}[{place}]"))
        for place, one in enumerate(members(given))
    )


def is_table(first: Any, second: Any, fewest: int) -> bool:
    """Tell whether two columns can be read both ways.

    Parameters
    ----------
    first, second : sequence of float or ndarray
        The columns; the first one has to rise.
    fewest : int
        How many pairs are needed.

    Returns
    -------
    bool
        Whether the second rises or falls throughout.
    """
    steps = np.diff(second)
    return len(first) == len(second) >= fewest and bool(
        np.all(np.diff(first) > 0) and (np.all(steps > 0) or np.all(steps < 0))
    )


def sensor_faults(sensor: Any, span: Sequence[float], unit: str) -> list[Fault]:
    """Check that a resistive sensor covers the span of its signal.

    Parameters
    ----------
    sensor : object
        As given.
    span : sequence of float
        Already sound.
    unit : str
        Unit of the span.

    Returns
    -------
    list of Fault
        Empty for a sound sensor.
    """
    if not (hasattr(sensor, "resistance") and hasattr(sensor, "quantity")):
        return [
            Fault(
                "this is not a resistive sensor.",
                asked=f"sensor = {sensor!r}",
                have="Ntc, NtcCoefficients, ResistanceTable, Rtd",
                remedy='one of these, such as hk.signals.Ntc("10k", 3950)',
            )
        ]
    with np.errstate(all="ignore"):
        ohms = np.asarray(sensor.resistance(np.asarray(span, dtype=float)), dtype=float)
    if np.all(np.isfinite(ohms) & (ohms > 0)):
        return []
    return [
        Fault(
            "the sensor has no resistance at an end of the span.",
            asked=f"span = {span[0]:g} to {span[1]:g} {unit}".rstrip(),
            have=f"{ohms[0]:g} Ω and {ohms[1]:g} Ω",
            rule="the span lies within the range of the sensor",
            remedy="a narrower span, or a sensor for this range",
        )
    ]

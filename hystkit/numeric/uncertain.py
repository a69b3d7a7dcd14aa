"""The uncertain quantities of a design, over its tolerances and a range of temperature."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from hystkit.base.errors import DesignError, Fault
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.circuit.design import Design
from hystkit.circuit.device import UNITS
from hystkit.numeric.tolerances import toleranced
from hystkit.numeric.views import Interval

#: Temperature that values and tolerances are stated for [°C].
REFERENCE_TEMPERATURE = 25.0
#: Share of its tolerance, about nominal, that two-sided binning takes out of a lot of parts.
SORTED_OUT = 0.5


@dataclass(frozen=True)
class Quantity:
    """One uncertain quantity of a design.

    Attributes
    ----------
    name : str
        Symbol or device field.
    nominal, low, high : float
        Stated, lowest and highest value, in `unit`.
    unit : str
        "Ω", "V" or "A".
    hole : float
        Share of the range about nominal that is empty when parts are binned [1].
    """

    name: str
    nominal: float
    low: float
    high: float
    unit: str
    hole: float = 0.0

    @property
    def half(self) -> float:
        """Half of the range, in `unit`."""
        return (self.high - self.low) / 2


@dataclass(frozen=True)
class Box(Viewed):
    """Everything uncertain about a design: a range for each quantity, independent of the others.

    Attributes
    ----------
    quantities : Named of Quantity
        By name; empty where nothing is uncertain.
    excursion : float
        Farthest distance from the temperature that values are stated for [K].
    """

    quantities: Named[Quantity]
    excursion: float = 0.0

    @property
    def intervals(self) -> dict[str, Interval]:
        """Name to lowest and highest value."""
        return {name: (one.low, one.high) for name, one in self.quantities.items()}

    def _fields(self) -> Sequence[Field]:
        return [Field(name, (one.low, one.high), one.unit) for name, one in self.quantities.items()]


def uncertain(design: Design, temperature: Interval | None = None) -> Box:
    """Collect what is uncertain about a design.

    Parameters
    ----------
    design : Design
        Tolerances and temperature coefficients stand at its parts and levels, a tolerance at its
        supply, limits and the offset's drift at its device.
    temperature : pair of float, optional
        Range in service [°C]; values hold at 25 °C. Without it nothing drifts.

    Returns
    -------
    Box
        The range of each quantity.

    Raises
    ------
    DesignError
        If drift takes a resistance to zero; every such part is named.

    Notes
    -----
    A temperature coefficient is taken as the magnitude that a datasheet guarantees: its sign is
    unknown and that of each part independent of the others. A value x with tolerance t and
    coefficient a therefore lies within x (1 +- t) (1 +- a dT), dT being the farthest distance
    from 25 °C, and every combination within these limits can occur.
    """
    excursion = 0.0
    if temperature is not None:
        excursion = max(abs(end - REFERENCE_TEMPERATURE) for end in temperature)
    intervals = toleranced(design, excursion)
    faults = [
        Fault(
            f"{name} would drift to zero.",
            asked=f"{part.tempco:g} 1/K over {excursion:g} K",
            rule="temperature coefficient times temperature difference < 1",
            remedy="the coefficient in 1/K: 100 ppm/K is 100e-6",
        )
        for name, part in {**design.parts, **design.levels}.items()
        if abs(part.tempco) * excursion >= 1
    ]
    if faults:
        raise DesignError.of("this temperature range", faults)
    found = {n: _quantity(design, n, pair, excursion) for n, pair in intervals.items()}
    return Box(Named(found), excursion)


def _quantity(design: Design, name: str, interval: Interval, excursion: float) -> Quantity:
    low, high = interval
    part = design.parts.get(name)
    hole = 0.0
    if part is not None and part.tol:
        # Drift carries parts from the edge of the hole into it.
        left = SORTED_OUT * part.tol - abs(part.tempco) * excursion
        hole = max(0.0, left * part.value / ((high - low) / 2))
    return Quantity(name, nominal(design, name), low, high, unit_of(design, name), hole)


def nominal(design: Design, name: str) -> float:
    """Give the stated value of a quantity.

    Parameters
    ----------
    design : Design
        That it belongs to.
    name : str
        A part, a level, V_CC, V_EE or a device field.

    Returns
    -------
    float
        In [Ohm], [V] or [A].
    """
    stated = {
        **design.device.law_fields,
        **{name: part.value for name, part in {**design.parts, **design.levels}.items()},
        "V_CC": design.supply.v_cc,
        "V_EE": design.supply.low_rail,
    }
    return stated[name]


def unit_of(design: Design, name: str) -> str:
    """Give the unit of a quantity.

    Parameters
    ----------
    design : Design
        That it belongs to.
    name : str
        A part, a level, V_CC, V_EE or a device field.

    Returns
    -------
    str
        "Ω", "V" or "A".
    """
    return UNITS.get(name) or ("Ω" if name in design.parts else "V")

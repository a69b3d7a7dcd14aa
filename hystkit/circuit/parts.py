"""What a stage is built with: a part with its tolerance, and the supply."""

from __future__ import annotations

import math
from dataclasses import dataclass

from hystkit.base.errors import DesignError, Fault
from hystkit.base.quantity import parse_percent, read, show
from hystkit.circuit.reading import Quantity, collect, set_frozen

#: Above this a temperature coefficient [1/K] was most likely meant in ppm/K.
_LARGEST_TEMPCO = 0.1


@dataclass(frozen=True)
class Part:
    """A resistance or a voltage with its tolerance.

    Parameters
    ----------
    value : float or str
        Nominal value, such as ``26700.0``, ``"26k7"`` or ``"2.5 V"`` [Ohm or V].
    tol : float or str, default 0
        Relative tolerance, half of the full spread: ``0.01`` or ``"1 %"``; 0 <= tol < 1.
    tempco : float or str, default 0
        Temperature coefficient [1/K], such as ``50e-6`` or ``"50 ppm/K"``; 0.1/K at most.

    Raises
    ------
    DesignError
        Naming every one of the three that cannot be used.

    Notes
    -----
    A text's unit is remembered, so that a design can refuse "2.5 V" for a resistor. It takes no
    part in comparisons: ``Part("2.5 V") == Part(2.5)``.

    Examples
    --------
    >>> Part("26k7", tol="1 %")
    Part(value=26700.0, tol=0.01, tempco=0.0)
    """

    value: float
    tol: float = 0.0
    tempco: float = 0.0

    def __init__(self, value: Quantity, tol: Quantity = 0.0, tempco: Quantity = 0.0) -> None:
        faults: list[Fault] = []
        set_frozen(self, "value", collect(faults, lambda: _read_any(value)))
        set_frozen(self, "tol", collect(faults, lambda: parse_percent(tol)))
        set_frozen(self, "tempco", collect(faults, lambda: read(tempco, unit="1/K", name="tempco")))
        # No field of the dataclass, so that it stays out of comparisons, records and the repr.
        set_frozen(self, "_unit", _unit_in(value))
        # What could not be read is NaN here, and a fault already.
        if self.tol < 0 or self.tol >= 1:
            faults.append(
                Fault(
                    "the tolerance of a part is outside its range.",
                    asked=f"tol = {tol!r}",
                    rule="0 % <= tol < 100 %",
                    remedy="1 %",
                )
            )
        if abs(self.tempco) > _LARGEST_TEMPCO:
            faults.append(
                Fault(
                    "the temperature coefficient of a part is outside its range.",
                    asked=f"tempco = {tempco!r}",
                    rule=f"-{_LARGEST_TEMPCO:g}/K <= tempco <= {_LARGEST_TEMPCO:g}/K",
                    remedy="100 ppm/K",
                )
            )
        if faults:
            raise DesignError.of("this part", faults)

    @property
    def unit(self) -> str:
        """Unit that the text of the value carried, "Ω" or "V"; empty where it carried none."""
        return str(vars(self)["_unit"])

    @property
    def rating(self) -> str:
        """Tolerance and temperature coefficient in words; empty where neither is stated."""
        found = [f"± {show(self.tol, '%')}"] if self.tol else []
        found += [f"{self.tempco * 1e6:g} ppm/K"] if self.tempco else []
        return ", ".join(found)

    def with_value(self, value: Quantity) -> Part:
        """Give the same part with another nominal value.

        Parameters
        ----------
        value : float or str
            New nominal value [Ohm or V].

        Returns
        -------
        Part
            Tolerance and temperature coefficient are kept.
        """
        return Part(value, self.tol, self.tempco)


@dataclass(frozen=True)
class Supply:
    """The supply of the device.

    Parameters
    ----------
    v_cc : float or str
        Positive rail [V].
    v_ee : float or str, optional
        Negative rail [V]; left out for a single supply, whose negative rail is 0 V.
    tol : float or str, default 0
        Relative tolerance of both rails.

    Raises
    ------
    DesignError
        If a rail is not finite, V_CC is not above V_EE, or the tolerance is out of range.
    """

    v_cc: float
    v_ee: float | None = None
    tol: float = 0.0

    def __init__(self, v_cc: Quantity, v_ee: Quantity | None = None, tol: Quantity = 0.0) -> None:
        faults: list[Fault] = []
        set_frozen(self, "v_cc", collect(faults, lambda: read(v_cc, unit="V", name="V_CC")))
        low = None if v_ee is None else collect(faults, lambda: read(v_ee, unit="V", name="V_EE"))
        set_frozen(self, "v_ee", low)
        set_frozen(self, "tol", collect(faults, lambda: parse_percent(tol)))
        # What could not be read is NaN here, and a fault already.
        if self.tol < 0 or self.tol >= 1:
            faults.append(
                Fault(
                    "the supply tolerance is outside its range.",
                    asked=f"tol = {tol!r}",
                    rule="0 % <= tol < 100 %",
                    remedy="5 %",
                )
            )
        if self.v_cc <= self.low_rail:
            faults.append(_rails_fault(self))
        if faults:
            raise DesignError.of("this supply", faults)

    @property
    def split(self) -> bool:
        """Whether a negative rail of its own was given."""
        return self.v_ee is not None

    @property
    def low_rail(self) -> float:
        """Voltage of the negative rail [V], 0 in a single supply."""
        return 0.0 if self.v_ee is None else self.v_ee


def _rails_fault(supply: Supply) -> Fault:
    if supply.split:
        return Fault(
            "the supply rails are the wrong way round.",
            asked=f"V_CC = {supply.v_cc:g} V, V_EE = {supply.low_rail:g} V",
            rule="V_CC > V_EE",
            remedy="exchange the two rails",
        )
    return Fault(
        "V_CC is not above 0 V.",
        asked=f"V_CC = {supply.v_cc:g} V",
        rule="V_CC > 0 V, the negative rail of a single supply",
        remedy="a positive V_CC, or both rails: Supply(12, -12)",
    )


def _read_any(value: Quantity) -> float:
    """Read a resistance or a voltage, whichever unit the text carries."""
    return read(value, unit="V" if _unit_in(value) == "V" else "Ω", name="value")


def _unit_in(value: object) -> str:
    """Tell which unit a text carries: "V", "Ω", or "" where it fits both."""
    if not isinstance(value, str):
        return ""
    if "V" in value:
        return "V"
    faults: list[Fault] = []
    return "Ω" if math.isnan(collect(faults, lambda: read(value, unit="V"))) else ""

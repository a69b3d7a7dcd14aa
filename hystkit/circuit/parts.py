"""What a stage is built with: a part with its tolerance, the supply and the switching device."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any

from hystkit.base.errors import DesignError, Fault, QuantityError
from hystkit.base.quantity import parse_percent, read

Quantity = float | int | str


@dataclass(frozen=True)
class Part:
    """A resistance or a voltage with its tolerance.

    Parameters
    ----------
    value : float or str
        Nominal value, such as ``26700.0``, ``"26k7"`` or ``"2.5 V"`` [Ohm or V].
    tol : float or str, default 0
        Relative tolerance, half of the full spread: ``0.01`` or ``"1 %"``; 0 <= tol < 1.
    tempco : float, default 0
        Temperature coefficient [1/K].

    Raises
    ------
    DesignError
        Naming every one of the three that cannot be used.

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
        _set(self, "value", _collect(faults, lambda: _read_any(value)))
        _set(self, "tol", _collect(faults, lambda: parse_percent(tol)))
        _set(self, "tempco", _collect(faults, lambda: read(tempco, name="tempco")))
        if not faults and not 0 <= self.tol < 1:
            faults.append(
                Fault(
                    "the tolerance of a part is outside its range.",
                    asked=f"tol = {tol!r}",
                    rule="0 <= tol < 1 (a fraction of the value)",
                    remedy='a fraction such as 0.01, or the text "1 %"',
                )
            )
        if faults:
            raise DesignError.of("this part", faults)

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
        _set(self, "v_cc", _collect(faults, lambda: read(v_cc, unit="V", name="V_CC")))
        low = None if v_ee is None else _collect(faults, lambda: read(v_ee, unit="V", name="V_EE"))
        _set(self, "v_ee", low)
        _set(self, "tol", _collect(faults, lambda: parse_percent(tol)))
        if not faults and not 0 <= self.tol < 1:
            faults.append(
                Fault(
                    "the supply tolerance is outside its range.",
                    asked=f"tol = {tol!r}",
                    rule="0 <= tol < 1 (a fraction of the voltage)",
                    remedy='a fraction such as 0.05, or the text "5 %"',
                )
            )
        if not faults and not self.v_cc > self.low_rail:
            faults.append(
                Fault(
                    "the supply rails are the wrong way round.",
                    asked=f"V_CC = {self.v_cc:g} V, V_EE = {self.low_rail:g} V",
                    rule="V_CC > V_EE (V_EE is 0 V in a single supply)",
                    remedy="exchange the two rails, or give a positive V_CC",
                )
            )
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


#: Device fields that may be below zero; all the others are magnitudes.
_SIGNED = {"offset", "bias_plus", "bias_minus", "leakage", "common_mode_low", "common_mode_high"}
_UNITS = {
    "drop_high": "V",
    "drop_low": "V",
    "r_high": "Ω",
    "r_low": "Ω",
    "leakage": "A",
    "offset": "V",
    "bias_plus": "A",
    "bias_minus": "A",
    "delay": "s",
    "common_mode_low": "V",
    "common_mode_high": "V",
}


@dataclass(frozen=True)
class Device:
    """The comparator or op-amp, as its datasheet describes it.

    Parameters
    ----------
    drop_high, drop_low : float or str, default 0
        Distance of the output from V_CC when high, from V_EE when low [V].
    r_high, r_low : float or str, default 0
        Output resistance in each state [Ohm]; r_high has no meaning in an open collector.
    leakage : float or str, default 0
        Current into the output pin of an open collector that is off [A].
    offset : float or str, default 0
        Input offset voltage: the stage switches at v(plus) - v(minus) = offset [V].
    bias_plus, bias_minus : float or str, default 0
        Currents that flow into the plus and the minus pin [A].
    delay : float or str, default 0
        Propagation delay [s].
    common_mode_low : float or str, optional
        Where the common-mode input range begins, above V_EE [V]; may be negative.
    common_mode_high : float or str, optional
        Where it ends, below V_CC [V]; may be negative. Not stated when left out.
    name : str, default ""
        Generic name, such as "open-collector quad comparator class".

    Raises
    ------
    DesignError
        Naming every field that is not finite, has the wrong unit or must not be negative.
    """

    drop_high: float = 0.0
    drop_low: float = 0.0
    r_high: float = 0.0
    r_low: float = 0.0
    leakage: float = 0.0
    offset: float = 0.0
    bias_plus: float = 0.0
    bias_minus: float = 0.0
    delay: float = 0.0
    common_mode_low: float | None = None
    common_mode_high: float | None = None
    name: str = ""

    # Text such as "20m" is accepted for every number; the fields hold floats.
    def __init__(
        self,
        drop_high: Quantity = 0.0,
        drop_low: Quantity = 0.0,
        r_high: Quantity = 0.0,
        r_low: Quantity = 0.0,
        leakage: Quantity = 0.0,
        offset: Quantity = 0.0,
        bias_plus: Quantity = 0.0,
        bias_minus: Quantity = 0.0,
        delay: Quantity = 0.0,
        common_mode_low: Quantity | None = None,
        common_mode_high: Quantity | None = None,
        name: str = "",
    ) -> None:
        given = locals()
        faults: list[Fault] = []
        for field in fields(self):
            value = given[field.name]
            if field.name != "name" and value is not None:
                value = _device_number(faults, field.name, value)
            _set(self, field.name, value)
        if faults:
            raise DesignError.of("this device", faults)


def _device_number(faults: list[Fault], name: str, value: Quantity) -> float:
    number = _collect(faults, lambda: read(value, unit=_UNITS[name], name=name))
    if name not in _SIGNED and number < 0:
        faults.append(
            Fault(
                f"{name} is negative.",
                asked=f"{name} = {value!r}",
                rule=f"{name} >= 0 [{_UNITS[name]}]",
                remedy="the magnitude that the datasheet states",
            )
        )
    return number


def _read_any(value: Quantity) -> float:
    """Read a resistance or a voltage, whichever unit the text carries."""
    is_voltage = isinstance(value, str) and value.rstrip().endswith("V")
    return read(value, unit="V" if is_voltage else "Ω")


def _collect(faults: list[Fault], reader: Callable[[], float]) -> float:
    """Call `reader`; a text that it cannot read becomes one more fault and the number NaN."""
    try:
        return reader()
    except QuantityError as error:
        faults.extend(error.faults)
        return math.nan


def _set(target: object, name: str, value: Any) -> None:
    object.__setattr__(target, name, value)

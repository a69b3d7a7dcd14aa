"""What a stage is built with: a part with its tolerance, and the supply."""

from __future__ import annotations

from dataclasses import dataclass

from hystkit.base.errors import DesignError, Fault
from hystkit.base.quantity import parse_percent, read
from hystkit.circuit.reading import Quantity, collect, set_frozen


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
        set_frozen(self, "value", collect(faults, lambda: _read_any(value)))
        set_frozen(self, "tol", collect(faults, lambda: parse_percent(tol)))
        set_frozen(self, "tempco", collect(faults, lambda: read(tempco, name="tempco")))
        # What could not be read is NaN here, and a fault already.
        if self.tol < 0 or self.tol >= 1:
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
                    rule="0 <= tol < 1 (a fraction of the voltage)",
                    remedy='a fraction such as 0.05, or the text "5 %"',
                )
            )
        if self.v_cc <= self.low_rail:
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


def _read_any(value: Quantity) -> float:
    """Read a resistance or a voltage, whichever unit the text carries."""
    is_voltage = isinstance(value, str) and "V" in value
    return read(value, unit="V" if is_voltage else "Ω")

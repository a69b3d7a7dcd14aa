"""Light-emitting diodes: a lamp, and the input of an optocoupler."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from hystkit.analyses.drive.reading import (
    PartLike,
    fill_positive,
    read_name,
    read_part,
    read_range,
)
from hystkit.base.errors import DesignError, Fault
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, set_frozen

#: Largest current transfer ratio that is read: that of a Darlington output [1].
_LARGEST_CTR = 100.0


@dataclass(frozen=True)
class Led(Viewed):
    """A light-emitting diode.

    Parameters
    ----------
    v_f : Part, float or str
        Forward voltage at that current, taken as constant [V].
    current : float or str
        Least current that it has to get [A].
    most : float or str, optional
        Most that it may get [A]; not stated when left out.
    name : str, default ""
        Generic name, such as "alarm lamp".

    Raises
    ------
    DesignError
        Naming everything that cannot be used.
    """

    v_f: Part
    current: float
    most: float | None
    name: str

    def __init__(
        self, v_f: PartLike, current: Quantity, most: Quantity | None = None, name: str = ""
    ) -> None:
        faults: list[Fault] = []
        set_frozen(self, "v_f", read_part(faults, "v_f", v_f, "V"))
        fill_positive(faults, self, {"current": (current, "A"), "most": (most, "A")})
        set_frozen(self, "name", read_name(faults, name))
        faults += _order_faults(self.current, self.most)
        if faults:
            raise DesignError.of("this LED", faults)

    def _fields(self) -> Sequence[Field]:
        return (
            Field("forward voltage", self.v_f.value, "V"),
            Field("current, at least", self.current, "A"),
            Field("current, at most", self.most, "A"),
        )


@dataclass(frozen=True)
class Optocoupler(Viewed):
    """The input of an optocoupler, which has to get enough current over its whole life.

    Parameters
    ----------
    v_f : Part, float or str
        Forward voltage of the input, taken as constant [V].
    ctr : float
        Least current transfer ratio as new [1]: 0.5 for 50 %.
    output_current : float or str
        That its output has to carry [A].
    ageing : float, default 0.5
        Share of the ratio that is left at the end of its life [1]; a half is common practice.
    most : float or str, optional
        Most that the input may get [A]; not stated when left out.
    name : str, default ""
        Generic name.

    Raises
    ------
    DesignError
        Naming everything that cannot be used.

    Examples
    --------
    >>> print(f'{Optocoupler(1.2, ctr=0.5, output_current="1 mA").current * 1e3:.1f} mA')
    4.0 mA
    """

    v_f: Part
    ctr: float
    output_current: float
    ageing: float
    most: float | None
    name: str

    def __init__(
        self,
        v_f: PartLike,
        ctr: float,
        output_current: Quantity,
        ageing: float = 0.5,
        most: Quantity | None = None,
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        set_frozen(self, "v_f", read_part(faults, "v_f", v_f, "V"))
        ratio = read_range(faults, "ctr", ctr, 0.0, _LARGEST_CTR, "a ratio: 0.5 for 50 %")
        set_frozen(self, "ctr", ratio)
        left = read_range(faults, "ageing", ageing, 0.0, 1.0, "the share that is left, such as 0.5")
        set_frozen(self, "ageing", left)
        fill_positive(faults, self, {"output_current": (output_current, "A"), "most": (most, "A")})
        set_frozen(self, "name", read_name(faults, name))
        if not faults:
            faults += _order_faults(self.current, self.most)
        if faults:
            raise DesignError.of("this optocoupler", faults)

    @property
    def current(self) -> float:
        """Least current that the input has to get [A]."""
        return self.output_current / (self.ctr * self.ageing)

    def _fields(self) -> Sequence[Field]:
        life = f"{show(self.ctr, '%')} as new, {show(self.ageing, '%')} of it left"
        return (
            Field("forward voltage", self.v_f.value, "V"),
            Field("output current", self.output_current, "A"),
            Field("input current, at least", self.current, "A", life),
            Field("input current, at most", self.most, "A"),
        )


def _order_faults(least: float, most: float | None) -> list[Fault]:
    # What could not be read is NaN here, and a fault already.
    if most is None or not least > most:
        return []
    return [
        Fault(
            "the current that is needed is more than the most that is allowed.",
            asked=f"{show(least, 'A')} at least",
            have=f"{show(most, 'A')} at most",
            remedy="a more efficient part, or a switch between it and the output",
        )
    ]

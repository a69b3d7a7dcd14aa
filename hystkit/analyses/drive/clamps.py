"""What limits the voltage of a coil that is switched off, and what its current does then."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.analyses.drive.reading import fill_positive
from hystkit.base.errors import DesignError, Fault
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.reading import Quantity


class Clamp(Viewed):
    """What a coil's current flows through once the switch is open.

    To the coil it is a voltage with a resistance in series, both of which oppose the current.
    """

    __slots__ = ()

    #: Whether the coil's current flows through the supply too while it decays.
    through_supply = False

    @property
    @abstractmethod
    def title(self) -> str:
        """What stands in a table."""

    @abstractmethod
    def opposing(self, supply: float) -> tuple[float, float]:
        """Give what opposes the current of the coil.

        Parameters
        ----------
        supply : float
            Voltage that the coil is switched to [V].

        Returns
        -------
        tuple of float
            Voltage [V] and resistance [Ohm], without those of the winding.
        """


@dataclass(frozen=True)
class Diode(Clamp):
    """A freewheeling diode across the coil: the lowest peak and the slowest release.

    Parameters
    ----------
    v_f : float or str, default 0.7
        Its forward voltage, taken as constant; typical of silicon [V].

    Raises
    ------
    DesignError
        If it is not above zero.
    """

    v_f: float = 0.7

    def __init__(self, v_f: Quantity = 0.7) -> None:
        _filled(self, {"v_f": (v_f, "V")})

    @property
    def title(self) -> str:
        """What stands in a table."""
        return "diode"

    def opposing(self, supply: float) -> tuple[float, float]:
        """Give what opposes the current of the coil; see `Clamp.opposing`.

        Parameters
        ----------
        supply : float
            Voltage that the coil is switched to [V].

        Returns
        -------
        tuple of float
            Voltage [V] and resistance [Ohm].
        """
        return self.v_f, 0.0

    def _fields(self) -> Sequence[Field]:
        return [Field("forward voltage", self.v_f, "V")]


@dataclass(frozen=True)
class DiodeAndZener(Clamp):
    """A diode and a Zener diode (or a TVS) in series across the coil: a fast release.

    Parameters
    ----------
    v_z : float or str
        Voltage of the Zener diode, taken as constant [V]: the highest for the peak on the switch,
        the lowest for the release time.
    v_f : float or str, default 0.7
        Forward voltage of the diode; typical of silicon [V].

    Raises
    ------
    DesignError
        Naming every voltage that is not above zero.
    """

    v_z: float
    v_f: float = 0.7

    def __init__(self, v_z: Quantity, v_f: Quantity = 0.7) -> None:
        _filled(self, {"v_z": (v_z, "V"), "v_f": (v_f, "V")})

    @property
    def title(self) -> str:
        """What stands in a table."""
        return f"diode and {show(self.v_z, 'V')} Zener diode"

    def opposing(self, supply: float) -> tuple[float, float]:
        """Give what opposes the current of the coil; see `Clamp.opposing`.

        Parameters
        ----------
        supply : float
            Voltage that the coil is switched to [V].

        Returns
        -------
        tuple of float
            Voltage [V] and resistance [Ohm].
        """
        return self.v_z + self.v_f, 0.0

    def _fields(self) -> Sequence[Field]:
        return [Field("Zener voltage", self.v_z, "V"), Field("forward voltage", self.v_f, "V")]


@dataclass(frozen=True)
class DiodeAndResistor(Clamp):
    """A diode and a resistor in series across the coil.

    Parameters
    ----------
    resistance : float or str
        Of the resistor [Ohm].
    v_f : float or str, default 0.7
        Forward voltage of the diode; typical of silicon [V].

    Raises
    ------
    DesignError
        Naming every value that is not above zero.
    """

    resistance: float
    v_f: float = 0.7

    def __init__(self, resistance: Quantity, v_f: Quantity = 0.7) -> None:
        _filled(self, {"resistance": (resistance, "Ω"), "v_f": (v_f, "V")})

    @property
    def title(self) -> str:
        """What stands in a table."""
        return f"diode and {show(self.resistance, 'Ω')}"

    def opposing(self, supply: float) -> tuple[float, float]:
        """Give what opposes the current of the coil; see `Clamp.opposing`.

        Parameters
        ----------
        supply : float
            Voltage that the coil is switched to [V].

        Returns
        -------
        tuple of float
            Voltage [V] and resistance [Ohm].
        """
        return self.v_f, self.resistance

    def _fields(self) -> Sequence[Field]:
        return [Field("resistor", self.resistance, "Ω"), Field("forward voltage", self.v_f, "V")]


@dataclass(frozen=True)
class ClampAtSwitch(Clamp):
    """A TVS or Zener diode across the switch, or a switch that is rated to avalanche itself.

    The supply drives the current through it while it decays, and adds to its energy.

    Parameters
    ----------
    voltage : float or str
        At which it holds the switch, taken as constant [V]; above the supply of the coil.

    Raises
    ------
    DesignError
        If it is not above zero.
    """

    voltage: float
    through_supply = True

    def __init__(self, voltage: Quantity) -> None:
        _filled(self, {"voltage": (voltage, "V")})

    @property
    def title(self) -> str:
        """What stands in a table."""
        return f"{show(self.voltage, 'V')} across the switch"

    def opposing(self, supply: float) -> tuple[float, float]:
        """Give what opposes the current of the coil; see `Clamp.opposing`.

        Parameters
        ----------
        supply : float
            Voltage that the coil is switched to [V].

        Returns
        -------
        tuple of float
            Voltage [V], less that of the supply, and resistance [Ohm].
        """
        return self.voltage - supply, 0.0

    def _fields(self) -> Sequence[Field]:
        return [Field("clamping voltage", self.voltage, "V")]


@dataclass(frozen=True)
class Decay:
    r"""Current of a coil that decays against a voltage and a resistance.

    .. math:: L\,\frac{di}{dt} = -R\,i - V, \qquad
        i(t) = \left(I_0 + \frac{V}{R}\right) e^{-tR/L} - \frac{V}{R}

    Attributes
    ----------
    inductance : float
        L, taken as constant [H].
    resistance : float
        R, winding included [Ohm].
    voltage : float or ndarray
        V, above zero [V].
    current : float
        I_0 [A].

    References
    ----------
    The decay of an R-L circuit, in every textbook on circuits.
    """

    inductance: float
    resistance: float
    voltage: Any
    current: float

    def time_to(self, current: float) -> Any:
        """Time after which the current has fallen to a value.

        Parameters
        ----------
        current : float
            Between 0 and the initial one [A].

        Returns
        -------
        float or ndarray
            [s].
        """
        # log1p keeps its digits where the voltage is far above the winding's drop.
        fall = self.resistance * (self.current - current)
        share = fall / (self.voltage + self.resistance * current)
        return self.inductance / self.resistance * np.log1p(share)

    @property
    def charge(self) -> Any:
        """Integral of the current until it is zero [C]."""
        return (self.inductance * self.current - self.voltage * self.time_to(0.0)) / self.resistance

    @property
    def square(self) -> Any:
        """Integral of the squared current until it is zero, in ampere squared times second."""
        stored = self.inductance * self.current**2 / 2
        return (stored - self.voltage * self.charge) / self.resistance


def _filled(clamp: Clamp, given: dict[str, tuple[Quantity, str]]) -> None:
    faults: list[Fault] = []
    fill_positive(faults, clamp, given)
    if faults:
        raise DesignError.of("this clamp", faults)

"""The coil of a relay, contactor or valve, and how it lets go."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.analyses.drive.clamps import Clamp, ClampAtSwitch, Decay, Diode, DiodeAndZener
from hystkit.analyses.drive.reading import (
    PartLike,
    ends,
    fill_positive,
    read_name,
    read_part,
    read_range,
)
from hystkit.base.errors import DesignError, Fault
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, is_kind, set_frozen, wrong_kind


@dataclass(frozen=True)
class Release(Viewed):
    """What happens when a coil is switched off, at its highest current.

    Attributes
    ----------
    clamp : Clamp
        That takes over the current.
    current : float
        At the moment of switching [A].
    peak : float
        Highest voltage across the switch, to ground [V].
    time : float
        Until the current has fallen to that at which the coil has let go for certain [s]. The
        armature takes its own time after that.
    clamp_energy : float
        Turned into heat in the clamp, each time [J].
    winding_energy : float
        Turned into heat in the winding [J].
    supply_energy : float
        Delivered by the supply while the current decays [J].
    """

    clamp: Clamp
    current: float
    peak: float
    time: float
    clamp_energy: float
    winding_energy: float
    supply_energy: float

    @property
    def _title(self) -> str:
        return f"Release with {self.clamp.title}"

    def _fields(self) -> Sequence[Field]:
        return (
            Field("coil current", self.current, "A"),
            Field("peak on the switch", self.peak, "V"),
            Field("release time", self.time, "s", "electrical; the armature's own time adds"),
            Field("energy in the clamp", self.clamp_energy, "J", "each release"),
        )


@dataclass(frozen=True)
class Coil(Viewed):
    """The coil of a relay, contactor or valve, which a switch connects to ground.

    Parameters
    ----------
    resistance : Part, float or str
        Of the winding, at its lowest temperature in service for the highest current [Ohm].
    inductance : float or str
        Of the winding, with the armature pulled in [H].
    voltage : Part, float or str
        Rated voltage, which is that of its supply too [V]; a tolerance is that of the supply.
    clamp : Clamp or None, default Diode()
        What takes over the current when the switch opens; None where nothing does.
    drop_out : float, default 0.1
        Share of the rated current below which it has let go for certain; a tenth is typical of
        relays on direct current.
    name : str, default ""
        Generic name, such as "pump relay".

    Raises
    ------
    DesignError
        Naming everything that cannot be used.

    Notes
    -----
    On direct current. The inductance is taken as constant. It falls when the armature opens and
    where the iron saturates, so that the release time is an estimate; the peak is not affected.

    Examples
    --------
    >>> relay = Coil("360", inductance="0.7", voltage=12)
    >>> print(f"{relay.current * 1e3:.1f} mA, {relay.release().time * 1e3:.2f} ms")
    33.3 mA, 3.69 ms
    """

    resistance: Part
    inductance: float
    voltage: Part
    clamp: Clamp | None
    drop_out: float
    name: str

    def __init__(
        self,
        resistance: PartLike,
        inductance: Quantity,
        voltage: PartLike,
        clamp: Clamp | None = Diode(),  # noqa: B008 - immutable
        drop_out: float = 0.1,
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        set_frozen(self, "resistance", read_part(faults, "resistance", resistance, "Ω"))
        fill_positive(faults, self, {"inductance": (inductance, "H")})
        set_frozen(self, "voltage", read_part(faults, "voltage", voltage, "V"))
        set_frozen(self, "clamp", clamp)
        share = read_range(faults, "drop_out", drop_out, 0.0, 1.0, "0.1, typical of relays")
        set_frozen(self, "drop_out", share)
        set_frozen(self, "name", read_name(faults, name))
        faults += _clamp_faults(clamp, self.highest_voltage)
        if faults:
            raise DesignError.of("this coil", faults)

    @property
    def current(self) -> float:
        """Rated current, without the switch [A]."""
        return self.voltage.value / self.resistance.value

    @property
    def highest_voltage(self) -> float:
        """Of the supply, within its tolerance [V]."""
        return ends(self.voltage)[1]

    @property
    def largest_current(self) -> float:
        """With the highest voltage and the lowest resistance, and no drop in the switch [A]."""
        return self.highest_voltage / ends(self.resistance)[0]

    @property
    def slowest(self) -> float:
        """Longest possible release time, that of an ideal diode [s]."""
        return float(self._decay(0.0, 0.0).time_to(self._let_go))

    def release(self, clamp: Clamp | None = None) -> Release:
        """Switch the coil off at its largest current and its highest supply.

        Parameters
        ----------
        clamp : Clamp, optional
            Another one than the coil's own.

        Returns
        -------
        Release
            Worst case of peak and time over the tolerances of winding and supply.

        Raises
        ------
        DesignError
            If there is no clamp, or it holds the switch below the supply.

        Notes
        -----
        Across the coil: 1/2 L I^2 = heat in the clamp + heat in the winding. Across the switch
        the supply adds its voltage times the charge that flows.
        """
        clamp = self.clamp if clamp is None else clamp
        if clamp is None:
            raise DesignError(
                "nothing takes over the current of this coil.",
                asked="its release",
                have="clamp=None",
                rule="an inductance keeps its current going, at whatever voltage that takes",
                remedy="hk.drives.Diode(), or DiodeAndZener for a faster release",
            )
        if faults := _clamp_faults(clamp, self.highest_voltage):
            raise DesignError.of("this clamp", faults)
        volts, ohms = clamp.opposing(self.highest_voltage)
        decay = self._decay(volts, ohms)
        from_supply = self.highest_voltage * decay.charge if clamp.through_supply else 0.0
        return Release(
            clamp=clamp,
            current=decay.current,
            peak=self.highest_voltage + volts + ohms * decay.current,
            time=float(decay.time_to(self._let_go)),
            clamp_energy=float(volts * decay.charge + ohms * decay.square) + from_supply,
            winding_energy=float(ends(self.resistance)[0] * decay.square),
            supply_energy=from_supply,
        )

    def release_time(self, peak: Any) -> Any:
        """Release time that a peak on the switch buys, with a constant voltage across the coil.

        Parameters
        ----------
        peak : float or array_like
            Voltage that the switch is held at [V].

        Returns
        -------
        float or ndarray
            [s]; NaN where the peak is not above the highest supply.
        """
        volts = np.asarray(peak, dtype=float) - self.highest_voltage
        with np.errstate(all="ignore"):
            times = self._decay(volts, 0.0).time_to(self._let_go)
        return np.where(volts > 0, times, np.nan)[()]

    def peak_for(self, release_time: Any) -> Any:
        """Lowest peak on the switch with which the coil lets go in time.

        Parameters
        ----------
        release_time : float or array_like
            Longest release time [s], above zero.

        Returns
        -------
        float or ndarray
            [V]; the highest supply where an ideal diode is fast enough. NaN for times that are
            not positive.
        """
        times = np.asarray(release_time, dtype=float)
        least, current = ends(self.resistance)[0], self.largest_current
        with np.errstate(all="ignore"):
            grown = np.expm1(times * least / self.inductance)
            volts = least * (current - self._let_go - self._let_go * grown) / grown
        return np.where(times > 0, self.highest_voltage + np.maximum(volts, 0.0), np.nan)[()]

    @property
    def _let_go(self) -> float:
        return self.drop_out * self.current

    def _decay(self, volts: Any, ohms: float) -> Decay:
        least = ends(self.resistance)[0]
        return Decay(self.inductance, least + ohms, volts, self.largest_current)

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field("voltage", self.voltage.value, "V"),
            Field("winding", self.resistance.value, "Ω"),
            Field("inductance", self.inductance, "H"),
            Field("current", self.current, "A", f"{show(self.largest_current, 'A')} at most"),
            Field("clamp", "none" if self.clamp is None else self.clamp.title),
        ]
        return rows if self.clamp is None else [*rows, *self.release()._fields()[1:]]


def _clamp_faults(clamp: Clamp | None, supply: float) -> list[Fault]:
    if not is_kind(clamp, Clamp | None):
        example = 'clamp=hk.drives.DiodeAndZener("24 V")'
        return [wrong_kind("clamp", clamp, "a clamp", example)]
    if isinstance(clamp, ClampAtSwitch) and clamp.voltage <= supply:
        return [
            Fault(
                "the clamp across the switch conducts all the time.",
                asked=f"a clamp at {show(clamp.voltage, 'V')}",
                have=f"a supply of up to {show(supply, 'V')}",
                rule="clamping voltage > supply of the coil",
                remedy=f"twice the supply, {show(2 * supply, 'V')}, or a clamp across the coil: "
                f"{DiodeAndZener.__name__}",
            )
        ]
    return []

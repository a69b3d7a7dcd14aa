"""A coil behind a low-side switch: bipolar transistor or MOSFET."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from hystkit.analyses.drive.cautions import CONTACTS, FUNCTIONAL, KICK_BACK
from hystkit.analyses.drive.choice import ROUNDING
from hystkit.analyses.drive.coil import Coil, Release
from hystkit.analyses.drive.reading import ends
from hystkit.analyses.drive.result import Drive
from hystkit.analyses.drive.switches import Mosfet, Transistor
from hystkit.base.fields import Field
from hystkit.base.quantity import show
from hystkit.numeric.views import Interval

#: Above this a silicon base may begin to conduct, the more the hotter; common practice [V].
BASE_OFF = 0.4
#: Reverse voltage that the base-emitter junction of most transistors takes; typical [V].
BASE_REVERSE = 5.0


@dataclass(frozen=True)
class Switched(Drive):
    """A coil that a switch connects to ground.

    Attributes
    ----------
    switch : Transistor or Mosfet
        Between the coil and ground.
    load : Coil
        The coil.
    """

    switch: Transistor | Mosfet
    load: Coil

    @property
    def release(self) -> Release | None:
        """What happens when the coil is switched off; None without a clamp."""
        return None if self.load.clamp is None else self.load.release()

    @property
    def cautions(self) -> tuple[str, ...]:
        """What has to stand beside a coil and its contacts."""
        return (KICK_BACK, CONTACTS, FUNCTIONAL)

    def _rating_warnings(self) -> Iterator[str]:
        current, rated = self.load.largest_current, self.switch.rated_current
        if rated is not None and current > rated:
            most, allowed = show(current, "A"), show(rated, "A")
            yield f"the coil draws up to {most}, the switch may carry {allowed}"
        if self.release is None:
            yield "nothing takes over the coil's current: its voltage destroys the switch"
            return
        peak, blocked = show(self.release.peak, "V"), self.switch.rated_voltage
        if blocked is None:
            yield f"the switch has to block {peak}; its rated voltage is not stated"
        elif self.release.peak > blocked:
            yield f"the switch has to block {peak}, it is rated for {show(blocked, 'V')}"

    def _coil_fields(self, current: float, dissipation: float) -> Sequence[Field]:
        most = show(self.load.largest_current, "A")
        rows = [
            Field("coil current", current, "A", f"{most} at most"),
            Field("heat in the switch", dissipation, "W", "at the largest coil current"),
        ]
        if self.release is None:
            return rows
        peak, *rest = self.release._fields()[1:]
        clamp = self.release.clamp.title
        return [*rows, Field(peak.label, self.release.peak, "V", f"with {clamp}"), *rest]


@dataclass(frozen=True)
class TransistorDrive(Switched):
    """A coil behind a bipolar transistor, with a base resistor that saturates it.

    Attributes
    ----------
    switch : Transistor
        Between the coil and ground.
    """

    switch: Transistor

    @property
    def load_current(self) -> float:
        """Coil current with the saturation voltage across the transistor [A]."""
        return (self.load.voltage.value - self.switch.v_ce_sat) / self.load.resistance.value

    @property
    def base_current(self) -> float:
        """Current into the base [A]."""
        return self.drive_current

    @property
    def forced_beta(self) -> float:
        """Ratio of coil current to base current [1]; infinite where the base gets none."""
        return _ratio(self.load_current, self.base_current)

    @property
    def highest_forced_beta(self) -> float:
        """Highest such ratio over all tolerances [1]."""
        return _ratio(self.load.largest_current, self.drive_current_range[0])

    @property
    def dissipation(self) -> float:
        """Heat in the transistor at the largest coil and base currents [W]."""
        base = max(self.drive_current_range[1], 0.0)
        most = ends(self.switch.v_be)[1]
        return self.load.largest_current * self.switch.v_ce_sat + base * most

    def _own_warnings(self) -> Iterator[str]:
        if self.direct:
            yield (
                "the base hangs at the output without a resistor: the output stands at"
                f" {show(self.v_out_high, 'V')}, {show(self.base_current, 'A')} flow into the base"
            )
        if self.highest_forced_beta > self.switch.forced_beta * (1 + 2 * ROUNDING):
            yield (
                f"the forced gain comes to {self.highest_forced_beta:.3g}, wanted are"
                f" {self.switch.forced_beta:g} at most: the transistor may not saturate"
            )
        low, high = self.v_out_ranges["low"]
        if self._at_base(high) > BASE_OFF:
            yield (
                f"the low level leaves {show(self._at_base(high), 'V')} at the base: the transistor"
                " may stay on; a base-emitter resistor divides it"
            )
        if self._at_base(low) < -BASE_REVERSE:
            yield (
                f"the low level pulls the base to {show(self._at_base(low), 'V')}, most take"
                f" {show(-BASE_REVERSE, 'V')}: a diode from emitter to base"
            )
        yield from self._rating_warnings()

    def _at_base(self, volts: float) -> float:
        """Voltage at the base of a transistor that is off [V]."""
        if self.switch.base_emitter is None or self.resistor is None:
            return volts
        return volts * self.switch.base_emitter / (self.switch.base_emitter + self.resistor.value)

    def _own_fields(self) -> Sequence[Field]:
        gain = f"{self.highest_forced_beta:.3g} at most"
        low, high = (show(end, "A") for end in self.drive_current_range)
        return (
            self._resistor_field("base resistor"),
            Field("base current", self.base_current, "A", f"{low} to {high}"),
            Field("forced gain", f"{self.forced_beta:.3g}", "", gain),
            *self._coil_fields(self.load_current, self.dissipation),
        )


@dataclass(frozen=True)
class MosfetDrive(Switched):
    """A coil behind an n-channel MOSFET.

    Attributes
    ----------
    switch : Mosfet
        Between the coil and ground.
    tol : float
        Tolerance of gate resistor and pull-down.
    """

    switch: Mosfet
    tol: float

    @property
    def load_current(self) -> float:
        """Coil current with the on-resistance in series [A]."""
        return self.load.voltage.value / (self.load.resistance.value + self.switch.r_on)

    @property
    def gate_voltage(self) -> float:
        """Gate voltage when the output is high [V]."""
        return self.v_out_high * self._share(0.0)

    @property
    def gate_voltage_range(self) -> Interval:
        """Lowest and highest gate voltage over all tolerances, output high [V]."""
        low, high = self.v_out_ranges["high"]
        return low * self._share(-self.tol), high * self._share(self.tol)

    @property
    def fully_on(self) -> bool:
        """Whether the gate reaches the voltage that the on-resistance is stated for, always."""
        return self.gate_voltage_range[0] >= self.switch.drive_voltage

    @property
    def dissipation(self) -> float:
        """Heat in the MOSFET at the largest coil current, if it is fully on [W]."""
        return self.load.largest_current**2 * self.switch.r_on

    def _share(self, off: float) -> float:
        """Share of the output voltage at the gate, its two resistors off in opposite ways."""
        if self.switch.pull_down is None:
            return 1.0
        down = self.switch.pull_down * (1 + off)
        return down / (down + self.switch.gate_resistor * (1 - off))

    def _own_warnings(self) -> Iterator[str]:
        switch = self.switch
        low, high = self.gate_voltage_range
        if not self.fully_on:
            yield (
                f"the gate reaches {show(low, 'V')}, the on-resistance is stated for"
                f" {show(switch.drive_voltage, 'V')}: a logic-level type, or a higher output level"
            )
        off_low, off_high = (end * self._share(self.tol) for end in self.v_out_ranges["low"])
        if max(abs(high), abs(off_low)) > switch.v_gs_max:
            worst = max(high, off_low, key=abs)
            yield (
                f"the gate comes to {show(worst, 'V')}, more than the {show(switch.v_gs_max, 'V')}"
                " that it takes"
            )
        if switch.threshold is not None and off_high >= switch.threshold:
            yield (
                f"the low level leaves {show(off_high, 'V')} at the gate, which begins to conduct"
                f" at {show(switch.threshold, 'V')}"
            )
        if switch.pull_down is None:
            yield "without a pull-down the gate floats while the stage has no supply"
        yield from self._rating_warnings()

    def _own_fields(self) -> Sequence[Field]:
        low, high = (show(end, "V") for end in self.gate_voltage_range)
        return (
            Field("gate voltage", self.gate_voltage, "V", f"{low} to {high}"),
            Field("fully on", self.fully_on, "", f"at {show(self.switch.drive_voltage, 'V')}"),
            *self._coil_fields(self.load_current, self.dissipation),
        )


def _ratio(load: float, base: float) -> float:
    return load / base if base > 0 else np.inf

"""An LED or an optocoupler input at the output, to ground or to the supply."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from hystkit.analyses.drive.cautions import FUNCTIONAL, ISOLATION
from hystkit.analyses.drive.choice import ROUNDING
from hystkit.analyses.drive.lamps import Led, Optocoupler
from hystkit.analyses.drive.result import Drive
from hystkit.base.fields import Field
from hystkit.base.quantity import show

#: Reverse voltage that most LEDs take; typical [V].
REVERSE = 5.0


@dataclass(frozen=True)
class LedDrive(Drive):
    """An LED behind a resistor, lit by the high level from ground or by the low one from V_CC.

    Attributes
    ----------
    load : Led or Optocoupler
        What is lit.
    """

    load: Led | Optocoupler

    @property
    def to(self) -> str:
        """Where the LED's other end is: "ground" or "supply"."""
        return "supply" if self.loaded.state == "low" else "ground"

    @property
    def current(self) -> float:
        """Current of the LED [A]."""
        return self.drive_current

    @property
    def dissipation(self) -> float:
        """Heat in the LED at its highest current and stated voltage [W]."""
        return max(self.drive_current_range[1], 0.0) * self.load.v_f.value

    @property
    def cautions(self) -> tuple[str, ...]:
        """What has to stand beside an indicator or an isolated signal."""
        coupled = isinstance(self.load, Optocoupler)
        return (ISOLATION, FUNCTIONAL) if coupled else (FUNCTIONAL,)

    def _own_warnings(self) -> Iterator[str]:
        low, high = self.drive_current_range
        if self.direct:
            yield "the LED hangs at the output without a resistor: its current is not limited"
        if low < self.load.current * (1 - ROUNDING):
            yield (
                f"the LED gets {show(max(low, 0.0), 'A')} at least, needed are"
                f" {show(self.load.current, 'A')}"
            )
        if self.load.most is not None and high > self.load.most:
            yield f"the LED gets up to {show(high, 'A')}, allowed are {show(self.load.most, 'A')}"
        reverse = self._reverse()
        if reverse > REVERSE:
            yield (
                f"the LED blocks up to {show(reverse, 'V')}, most take {show(REVERSE, 'V')}: a"
                " diode across it, the other way round"
            )
        if self.loaded.current > 0 and self._leaks():
            yield "the LED conducts in both output states and does not go out"

    def _reverse(self) -> float:
        """Highest voltage against the LED while it is off [V]."""
        if self.to == "ground":
            return -self.v_out_ranges["low"][0]
        return self.v_out_ranges["high"][1] - self.given.supply.v_cc

    def _leaks(self) -> bool:
        other = "high" if self.loaded.state == "low" else "low"
        return self.loaded.in_state(other) is self.loaded.fitted

    def _own_fields(self) -> Sequence[Field]:
        low, high = (show(end, "A") for end in self.drive_current_range)
        return (
            self._resistor_field("series resistor"),
            Field("LED", f"from the output to {self.to}" if self.to == "ground"
                  else "from V_CC to the output"),
            Field("LED current", self.current, "A", f"{low} to {high}"),
            Field("needed, at least", self.load.current, "A"),
        )  # fmt: skip

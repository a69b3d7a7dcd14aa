"""What the output of a stage drives, and what that does to the stage."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from hystkit.analyses.drive.choice import rating_for
from hystkit.analyses.drive.port import STATES, Loaded, at_trip
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.quantity import code, show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.numeric.operating import OperatingPoint
from hystkit.numeric.status import Status
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Interval

#: Share of the swing that a load may take from either level, common practice: a tenth.
LOADING = 0.1
#: Share of the width by which the trips of the loaded design may be off unsaid.
MISLEADS = 0.01


@dataclass(frozen=True)
class Drive(Viewed):
    """What the output of a stage drives; a subclass for each kind adds what is its own.

    Everything is computed when it is first asked for.

    Attributes
    ----------
    loaded : Loaded
        The design with what hangs at its output.
    direct : bool
        Whether a junction hangs at the output without a resistor.
    """

    loaded: Loaded
    direct: bool

    @property
    def given(self) -> Design:
        """The design as it was, without the load."""
        return self.loaded.given

    @cached_property
    def design(self) -> Design:
        """The design that trips, ruler and reports of the loaded stage are made from.

        With R_L and V_L wherever that is nearer to `trips_after`; as it was where a linear load
        misleads, such as an LED at the supply, which blocks while an open collector is off.
        """
        fitted, given = (self._distance(one) for one in (self.loaded.fitted, self.given))
        return self.loaded.fitted if fitted <= given else self.given

    @property
    def trips_before(self) -> TripPoints:
        """Trip points without the load."""
        return trip_points(self.given)

    @property
    def trips_after(self) -> TripPoints:
        """Trip points with the load, its junction blocking where it does."""
        return self.loaded.trips

    @property
    def deviation(self) -> float:
        """How far the trips of `design` lie from `trips_after` [V]."""
        return self._distance(self.design)

    @property
    def v_out_high(self) -> float:
        """Output voltage when high, at the trip that leaves this state [V]."""
        return float(self.loaded.point("high").voltages["out"])

    @property
    def v_out_low(self) -> float:
        """Output voltage when low, at the trip that leaves this state [V]."""
        return float(self.loaded.point("low").voltages["out"])

    @cached_property
    def v_out_ranges(self) -> Named[Interval]:
        """Lowest and highest output voltage over all tolerances, "high" and "low" [V]."""
        volts = {s: self.loaded.corners(s)[1].voltages["out"] for s in STATES}
        return Named({s: (float(np.min(v)), float(np.max(v))) for s, v in volts.items()})

    @property
    def drive_current(self) -> float:
        """Current that reaches the load: of a base, an LED or a pull-down [A]."""
        return self.loaded.current

    @property
    def drive_current_range(self) -> Interval:
        """Lowest and highest of this current over all tolerances [A]."""
        return self.loaded.current_range

    @property
    def resistor(self) -> Part | None:
        """Between the output and the junction [Ohm]; None without one."""
        port = self.loaded.port
        return None if self.direct or port is None else port.resistance

    @property
    def resistor_dissipation(self) -> float:
        """Highest power in R_L over all tolerances, while the load is on [W]."""
        values, point = self.loaded.corners(self.loaded.state)
        power = point.currents.get("R_L", 0.0) ** 2 * values.get("R_L", 0.0)
        return 0.0 if self.direct else float(np.max(power))

    @property
    def resistor_rating(self) -> float | None:
        """Smallest standard rating for that, twice the power at least [W]; None if too small."""
        return rating_for(self.resistor_dissipation)

    @property
    def supply_current(self) -> float:
        """Current from V_CC while the load is on, without the device's own [A].

        That of a coil comes from the coil's supply and is not part of it.
        """
        point = self.loaded.point(self.loaded.state)
        from_supply = self.drive_current if self.loaded.state == "low" else 0.0
        return float(point.supply_current) + from_supply

    @property
    def supply_current_before(self) -> float:
        """The same without the load [A]."""
        return float(self._before(self.loaded.state).supply_current)

    def output_current(self, state: str) -> float:
        """Return the highest current that the output drives over all tolerances.

        Parameters
        ----------
        state : {"high", "low"}
            Output state.

        Returns
        -------
        float
            Sourced when high, sunk when low [A].
        """
        sign = 1.0 if state == "high" else -1.0
        return float(np.max(sign * self.loaded.corners(state)[1].output_current))

    @property
    def warnings(self) -> tuple[str, ...]:
        """What is wrong or marginal with these values, in words with numbers."""
        return (*self._stage_warnings(), *self._own_warnings())

    @property
    @abstractmethod
    def cautions(self) -> tuple[str, ...]:
        """What has to stand beside this drive wherever it is shown."""

    @abstractmethod
    def _own_warnings(self) -> Iterator[str]:
        """Find what is wrong with this kind of drive."""

    @abstractmethod
    def _own_fields(self) -> Sequence[Field]:
        """Return what this kind of drive has to show, after what all have."""

    def _stage_warnings(self) -> Iterator[str]:
        status = Status(int(self.trips_after.status))
        if status is not Status.OK:
            yield f"with this load the stage does not work: {status.message}"
        before = {s: float(self._before(s).voltages["out"]) for s in STATES}
        after = {"high": self.v_out_high, "low": self.v_out_low}
        for state in STATES:
            moved = abs(after[state] - before[state])
            if moved > LOADING * (before["high"] - before["low"]):
                yield (
                    f"the load holds the {state} level at {show(after[state], 'V')},"
                    f" {show(before[state], 'V')} without it: the trips move with it"
                )
        if self.deviation > MISLEADS * self.trips_after.width:
            off = show(self.deviation, "V")
            yield f"no linear load stands for this one: the trips of its design are {off} off"
        yield from self._current_warnings()
        if self.resistor is not None and self.resistor_rating is None:
            power = show(self.resistor_dissipation, "W")
            yield f"the resistor turns {power} into heat, too much for one standard part"

    def _current_warnings(self) -> Iterator[str]:
        device = self.given.device
        for state, verb, most in (
            ("high", "source", device.source_current),
            ("low", "sink", device.sink_current),
        ):
            current = self.output_current(state)
            if most is not None and current > most:
                yield (
                    f"the output has to {verb} {show(current, 'A')}, allowed are {show(most, 'A')}"
                )

    def _before(self, state: str) -> OperatingPoint:
        return at_trip(self.given.stage, state, self.given.values)

    def _distance(self, design: Design) -> float:
        """How far the trips of a design lie from what they are [V]; 0 where neither switches."""
        found, wanted = trip_points(design), self.trips_after
        if found.status or wanted.status:
            return 0.0 if found.status and wanted.status else np.inf
        return float(max(abs(found.upper - wanted.upper), abs(found.lower - wanted.lower)))

    def _resistor_field(self, label: str) -> Field:
        if self.resistor is None:
            return Field(label, None)
        rating = self.resistor_rating
        rated = "" if rating is None else f", rated {show(rating, 'W')}"
        note = f"{show(self.resistor_dissipation, 'W', 3)}{rated}"
        return Field(label, code(self.resistor.value, 6), "", note)

    def _fields(self) -> Sequence[Field]:
        before = trip_points(self.given)
        rows = [
            *self._own_fields(),
            Field("output high", self.v_out_high, "V", _range(self.v_out_ranges["high"])),
            Field("output low", self.v_out_low, "V", _range(self.v_out_ranges["low"])),
        ]
        for kind in ("upper", "lower", "width"):
            note = f"{show(float(getattr(before, kind)), 'V')} without the load"
            rows.append(Field(kind, float(getattr(self.trips_after, kind)), "V", note,
                              rf"V_{{\mathrm{{{kind}}}}}"))  # fmt: skip
        note = f"{show(self.supply_current_before, 'A')} without the load"
        rows.append(Field("supply current", self.supply_current, "A", note))
        rows += [Field("warning", "!", "", text) for text in self.warnings]
        return rows + [Field("caution", "!", "", text) for text in self.cautions]


def _range(interval: Interval) -> str:
    low, high = (show(end, "V") for end in interval)
    return "" if low == high else f"{low} to {high}"

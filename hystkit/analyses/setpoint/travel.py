"""What a trimmer does to the trips over its travel, with every unit of every part."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.setpoint.trimmer import Trimmer, fitted, padded
from hystkit.base.errors import DesignError, InfeasibleError, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.numeric.tolerances import toleranced
from hystkit.numeric.trips import trip_points
from hystkit.numeric.views import Interval

Floats = NDArray[np.float64]
_ALL = ("upper", "lower", "width")
#: More uncertain quantities than this, the trimmer's total among them, need too many corners.
MAX_QUANTITIES = 16
# Settings at which the resolution is looked at.
_SETTINGS = 401
# Halvings of the travel when a setting is looked for.
_HALVINGS = 60


@dataclass(frozen=True)
class Setting(Viewed):
    """A trimmer that has been set so that one trip is right.

    Attributes
    ----------
    kind : str
        What was set: "upper", "lower" or "width".
    value : float
        To what [V].
    position : float
        Setting of the nominal design, share of the travel.
    positions : pair of float
        Lowest and highest setting over all corners of the tolerances.
    after : dict of str
        "upper", "lower" and "width" to lowest and highest value [V] over all corners, each set.
    """

    kind: str
    value: float
    position: float
    positions: Interval
    after: dict[str, Interval]

    def _fields(self) -> Sequence[Field]:
        low, high = self.positions
        return [
            Field(f"{self.kind} set to", self.value, "V"),
            Field(
                "setting",
                show(self.position, "%", 3),
                "",
                f"{show(low, '%', 3)} to {show(high, '%', 3)} with tolerances",
            ),
            *(Field(kind, pair, "V") for kind, pair in self.after.items() if kind != self.kind),
        ]


@dataclass(frozen=True)
class Travel(Viewed):
    """The trips over the travel of a trimmer.

    Attributes
    ----------
    design : Design
        Whose R_T and R_B, or R_F, are the padding resistors of the trimmer.
    trimmer : Trimmer
        With its tolerance.
    place : {"divider", "feedback"}
        Where it sits.

    Notes
    -----
    With the wiper at an end, R_T and R_B (or R_F) are the padding resistor plus a multiple of the
    trimmer's total, so that a trip is a linear-fractional function of each padding resistor and of
    the total, and its extremes lie in the corners of the tolerances; the proof is that of
    `hystkit.numeric.extremes.corners`. In between, moving the wiper raises R_B and lowers R_T by
    the same amount. Both raise the voltage of the node between them as long as it lies between the
    rails, which is checked in the corners; so each trip goes one way over the whole travel. In the
    feedback the wiper adds to one resistor, and the same follows from the linear-fractional form.
    The width is the difference of two such functions, which share their denominator with equal
    output resistances: only there, and only in the feedback, it goes one way and is told.
    """

    design: Design
    trimmer: Trimmer
    place: str

    @property
    def kinds(self) -> tuple[str, ...]:
        """What is told: "upper", "lower", and "width" where it goes one way."""
        device = self.design.device
        alike = device.r_high == device.r_low and not {"r_high", "r_low"} & {*device.limits}
        pushes = self.design.stage.output == "push-pull"
        return _ALL if self.place == "feedback" and pushes and alike else _ALL[:2]

    @cached_property
    def nominal(self) -> dict[str, Interval]:
        """Lowest and highest of each kind with stated values [V]."""
        ends = [self.at(setting) for setting in (0.0, 1.0)]
        return {kind: _ordered(*(float(end[kind]) for end in ends)) for kind in self.kinds}

    @cached_property
    def possible(self) -> dict[str, Interval]:
        """Lowest and highest of each that any unit reaches [V], end resistances being zero."""
        ends = [self.corners(setting, 0.0) for setting in (0.0, 1.0)]
        return {
            kind: (
                min(float(end[kind].min()) for end in ends),
                max(float(end[kind].max()) for end in ends),
            )
            for kind in self.kinds
        }

    @cached_property
    def sure(self) -> dict[str, Interval | None]:
        """What every unit reaches of each [V], with full end resistances; None where nothing is."""
        end = self.trimmer.end_resistance
        starts, stops = (self.corners(setting, end) for setting in (0.0, 1.0))
        return {kind: _common(starts[kind], stops[kind]) for kind in self.kinds}

    def binding(self, kind: str) -> list[dict[str, float]]:
        """Name the corners that bound what every unit reaches.

        Parameters
        ----------
        kind : str
            One of the kinds.

        Returns
        -------
        list of dict
            Part, level, rail or device field to value, and "total" of the trimmer.
        """
        end = self.trimmer.end_resistance
        starts, stops = (self.corners(setting, end)[kind] for setting in (0.0, 1.0))
        places = {int(np.minimum(starts, stops).argmax()), int(np.maximum(starts, stops).argmin())}
        return [{n: float(v[place]) for n, v in self._grid.items()} for place in sorted(places)]

    @cached_property
    def per_turn(self) -> dict[str, Interval]:
        """Smallest and largest step of each in one turn of the screw [V]."""
        return self._steps(min(1.0, 1.0 / self.trimmer.turns))

    @cached_property
    def resolution(self) -> dict[str, Interval]:
        """Smallest and largest step of each at the setting resolution [V]."""
        trimmer = self.trimmer
        travel = trimmer.total - 2 * trimmer.end_resistance
        return self._steps(min(1.0, trimmer.setting_resolution * trimmer.total / travel))

    def at(self, setting: Any) -> dict[str, Any]:
        """Trips at a setting, with stated values.

        Parameters
        ----------
        setting : float or ndarray
            Share of the travel, 0 to 1: 0 with the wiper at the end of R_B, or with the least
            resistance in the feedback.

        Returns
        -------
        dict
            "upper", "lower" and "width" [V].
        """
        stated = {name: self.design.parts[name].value for name in padded(self.place)}
        wiper = self.trimmer.wiper(setting)
        trips = trip_points(self.design, **fitted(self.place, stated, self.trimmer.total, wiper))
        return {kind: getattr(trips, kind) for kind in _ALL}

    def reaches(self, **wanted: float | Interval) -> dict[str, str]:
        """Tell whether wanted values can be set, each by itself.

        Parameters
        ----------
        **wanted : float or pair of float
            Kinds: a value, or a range of which every value is to be set [V].

        Returns
        -------
        dict
            Name to "always", "not with every unit" or "never".
        """
        found = {}
        for kind, value in self._known(wanted).items():
            low, high = value if isinstance(value, tuple) else (value, value)
            sure, possible = self.sure[kind], self.possible[kind]
            if sure is not None and sure[0] <= low and high <= sure[1]:
                found[kind] = "always"
            elif possible[0] <= low and high <= possible[1]:
                found[kind] = "not with every unit"
            else:
                found[kind] = "never"
        return found

    def set_to(self, **wanted: float) -> Setting:
        """Set the trimmer so that one kind is right.

        Parameters
        ----------
        **wanted : float
            One of the kinds [V].

        Returns
        -------
        Setting
            Where the wiper and the others are then, over all corners of the tolerances. The
            inside of the tolerances is not proved to lie between them.

        Raises
        ------
        InputError
            If not exactly one of them is given.
        InfeasibleError
            If not every unit can be set to it.
        """
        if len(self._known(wanted)) != 1:
            raise InputError(
                "a trimmer sets one thing.",
                asked=", ".join(wanted) or "nothing",
                rule=f"one of {', '.join(self.kinds)}",
                remedy="set_to(upper=2.7)",
            )
        ((kind, value),) = wanted.items()
        sure = self.sure[kind]
        if sure is None or not sure[0] <= value <= sure[1]:
            have = "nothing" if sure is None else f"{show(sure[0], 'V')} to {show(sure[1], 'V')}"
            raise InfeasibleError(
                f"not every unit can be set to this {kind}.",
                asked=f"{kind} = {show(value, 'V')}",
                have=f"every unit reaches {have}",
                remedy=f"other padding resistors: padding(..., {kind}=(low, high))",
            )
        low = np.zeros_like(self.corners(0.0, 0.0)[kind])
        high = np.ones_like(low)
        end = self.trimmer.end_resistance
        rises = self.corners(1.0, end)[kind] >= self.corners(0.0, end)[kind]
        for _ in range(_HALVINGS):
            middle = (low + high) / 2
            short = (self.corners(middle, end)[kind] < value) == rises
            low, high = np.where(short, middle, low), np.where(short, high, middle)
        corners = self.corners(low, end)
        nominal = int(np.argmin(np.abs(self.at(np.linspace(0, 1, 10001))[kind] - value)))
        after = {name: (float(v.min()), float(v.max())) for name, v in corners.items()}
        positions = (float(low.min()), float(low.max()))
        return Setting(kind, float(value), nominal / 10000, positions, after)

    @cached_property
    def _grid(self) -> dict[str, Floats]:
        """All corners of the tolerances, the trimmer's total among them, shape (corners,)."""
        box = toleranced(self.design)
        total, tol = self.trimmer.total, self.trimmer.total_tol
        box["total"] = (total * (1 - tol), total * (1 + tol))
        if len(box) > MAX_QUANTITIES:
            raise DesignError(
                "this design has too many uncertain quantities for a trimmer's exact range.",
                have=f"{len(box)}: {', '.join(box)}",
                rule=f"at most {MAX_QUANTITIES}, of which all combinations are evaluated",
                remedy="no tolerance on those that matter least",
            )
        numbers = np.arange(1 << len(box))
        return {
            name: np.array(pair)[numbers >> place & 1]
            for place, (name, pair) in enumerate(box.items())
        }

    def shared(self, top: float, bottom: float) -> dict[str, Any]:
        """Put shares of the trimmer into the arms of a divider, in all corners of tolerances.

        Parameters
        ----------
        top, bottom : float
            Shares of the total in series with R_T and with R_B.

        Returns
        -------
        dict
            Overrides of the design, shape (corners,).
        """
        grid, padding, total = self._apart()
        arms = {"R_T": padding["R_T"] + top * total, "R_B": padding["R_B"] + bottom * total}
        return {**grid, **arms}

    def _apart(self) -> tuple[dict[str, Any], dict[str, Any], Any]:
        """Everything else, the padding resistors, and the total, in every corner."""
        grid: dict[str, Any] = dict(self._grid)
        total = grid.pop("total")
        stated = {name: self.design.parts[name].value for name in padded(self.place)}
        return grid, {name: grid.pop(name, value) for name, value in stated.items()}, total

    def values(self, setting: Any, end: float) -> dict[str, Any]:
        """Give the overrides of the design at a setting, in every corner of the tolerances.

        Parameters
        ----------
        setting : float or ndarray, shape (corners,)
            Share of the travel, 0 to 1.
        end : float
            End resistance [Ohm].

        Returns
        -------
        dict
            Name to value or to ndarray, shape (corners,).
        """
        grid, padding, total = self._apart()
        wiper = self.trimmer.wiper(setting, total, end)
        return {**grid, **fitted(self.place, padding, total, wiper)}

    def corners(self, setting: Any, end: float) -> dict[str, Floats]:
        """Evaluate the trips at a setting, in every corner of the tolerances.

        Parameters
        ----------
        setting : float or ndarray, shape (corners,)
            Share of the travel, 0 to 1.
        end : float
            End resistance [Ohm].

        Returns
        -------
        dict
            "upper", "lower" and "width" to ndarray, shape (corners,) [V]; NaN where the stage does
            not switch.
        """
        trips = trip_points(self.design, **self.values(setting, end))
        return {kind: np.atleast_1d(getattr(trips, kind)) for kind in _ALL}

    def _steps(self, step: float) -> dict[str, Interval]:
        starts = np.linspace(0.0, 1.0 - step, _SETTINGS)
        before, after = self.at(starts), self.at(starts + step)
        moved = {kind: np.abs(after[kind] - before[kind]) for kind in self.kinds}
        return {kind: (float(v.min()), float(v.max())) for kind, v in moved.items()}

    def _known(self, wanted: dict[str, Any]) -> dict[str, Any]:
        unknown = [name for name in wanted if name not in self.kinds]
        if unknown:
            raise InputError(
                f"a trimmer in the {self.place} does not set {', '.join(unknown)} here.",
                asked=", ".join(wanted),
                have=", ".join(self.kinds),
                rule="only what goes one way over the travel can be told",
                remedy="one of these",
            )
        return wanted

    @property
    def _title(self) -> str:
        total = show(self.trimmer.total, "Ω")
        return f"Trimmer of {total} in the {self.place} of {self.design.stage.title}"

    def _fields(self) -> Sequence[Field]:
        rows = []
        for kind in self.kinds:
            sure = self.sure[kind]
            rows.append(Field(f"{kind}, stated values", self.nominal[kind], "V"))
            rows.append(Field(f"{kind}, every unit", sure, "V", "" if sure else "nothing for sure"))
            rows.append(Field(f"{kind}, any unit", self.possible[kind], "V"))
            rows.append(Field(f"{kind}, one turn", self.per_turn[kind], "V"))
            if self.trimmer.setting_resolution:
                rows.append(Field(f"{kind}, one step", self.resolution[kind], "V"))
        return rows


def _common(starts: Floats, stops: Floats) -> Interval | None:
    """Range that lies between start and stop in every corner, all going the same way."""
    low, high = (starts, stops) if starts[0] <= stops[0] else (stops, starts)
    if not np.all(low <= high):
        return None
    common = float(low.max()), float(high.min())
    return common if common[0] <= common[1] else None


def _ordered(one: float, other: float) -> Interval:
    return (one, other) if one <= other else (other, one)

"""The results of a design in a few lines, and as plain values for other programs."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from hystkit import __version__
from hystkit.base.errors import DesignError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import show_span
from hystkit.circuit.design import Design
from hystkit.circuit.trip_texts import TripTexts
from hystkit.numeric.levels import levels
from hystkit.numeric.views import Interval, Levels
from hystkit.symbolic.symbols import latex_name, meaning

FORMAT = "hystkit numbers"
VERSION = 1


@dataclass(frozen=True)
class Summary(Viewed):
    """Trip points of a design, in volts and in the measurand, with their tolerance intervals.

    Attributes
    ----------
    design : Design
        Whose trip points.

    Raises
    ------
    DesignError
        If the design has no trip points.
    """

    design: Design

    def __post_init__(self) -> None:
        if not self.levels.ok:
            raise DesignError(
                "this design has no trip points.",
                asked=f"results of {self.design.name or self.design.stage.title}",
                have=self.levels.message,
                remedy="other part values; hystkit.trip_points tells the status of each",
            )

    @cached_property
    def levels(self) -> Levels:
        """Everything of the design on its volt axis."""
        return levels(self.design)

    @cached_property
    def texts(self) -> TripTexts:
        """The trip points as they are written."""
        return TripTexts(self.levels.upper, self.levels.lower, self.design.signal)

    @property
    def heading(self) -> str:
        """The name of the design, where it has one, and its form."""
        return ": ".join(filter(None, (self.design.name, self.design.stage.title)))

    @property
    def trips(self) -> dict[str, float]:
        """Upper, lower, width and middle [V]."""
        return dict(self.texts.volts)

    @property
    def intervals(self) -> dict[str, Interval]:
        """Lowest and highest trip points over the tolerances [V]; none without tolerances."""
        found = {"upper": self.levels.upper_interval, "lower": self.levels.lower_interval}
        return {name: interval for name, interval in found.items() if interval is not None}

    @property
    def quantities(self) -> dict[str, float]:
        """Upper, lower and width in the signal's own unit; none without a signal."""
        return {name: value for name, value in self.texts.quantities.items() if name != "middle"}

    def quantity(self, name: str) -> str:
        """Tell what a trip point is in the measurand.

        Parameters
        ----------
        name : str
            "upper", "lower" or "width"; the middle is given in volts only.

        Returns
        -------
        str
            Such as "level 1.405 m", or "0.6038 m" for the width; empty without a signal.
        """
        return self.texts.quantity(name) if name != "middle" else ""

    def interval(self, name: str) -> str:
        """Tell within which limits the tolerances leave a trip point.

        Parameters
        ----------
        name : str
            "upper" or "lower".

        Returns
        -------
        str
            Empty without tolerances; why they are not evaluated, where they are too many.
        """
        ends = self.intervals.get(name)
        if ends is None:
            return self.levels.not_evaluated if name in ("upper", "lower") else ""
        if any(map(math.isnan, ends)):
            return "does not switch everywhere within tolerances"
        return f"{show_span(*ends, 'V')} over tolerances"

    def record(self) -> dict[str, Any]:
        """Give everything as plain values, unrounded, in SI units.

        Returns
        -------
        dict
            Fit for JSON; None stands for what cannot be told.
        """
        signal = self.design.signal
        tolerances = {
            **{
                name: p.tol for name, p in (*self.design.parts.items(), *self.design.levels.items())
            },
            **dict.fromkeys(("V_CC", "V_EE"), self.design.supply.tol),
        }
        return {
            "format": FORMAT,
            "version": VERSION,
            "hystkit": __version__,
            "design": self.design.name,
            "stage": self.design.stage.title,
            "values": {
                name: {"value": value, "unit": meaning(name)[1], "tol": tolerances.get(name, 0.0)}
                for name, value in self.design.values.items()
            },
            "trips": {name: self._trip(name, volts) for name, volts in self.trips.items()},
            "output": {
                "unit": "V",
                "high": _plain(self.levels.output_high),
                "low": _plain(self.levels.output_low),
            },
            "measurand": signal
            and {
                "name": signal.name,
                "unit": signal.unit,
                **{name: _plain(value) for name, value in self.quantities.items()},
            },
        }

    @property
    def _title(self) -> str:
        return self.heading

    def _fields(self) -> Sequence[Field]:
        return [
            Field(
                name,
                volts,
                "V",
                "; ".join(filter(None, (self.quantity(name), self.interval(name)))),
                latex_name(f"V_{name}"),
                self.texts.digits(name),
            )
            for name, volts in self.trips.items()
        ]

    def _trip(self, name: str, volts: float) -> dict[str, Any]:
        interval = self.intervals.get(name)
        ends = (
            dict(zip(("lowest", "highest"), map(_plain, interval), strict=True)) if interval else {}
        )
        return {"value": volts, "unit": "V", **ends}


def _plain(value: float) -> float | None:
    """JSON knows no NaN."""
    return value if math.isfinite(value) else None

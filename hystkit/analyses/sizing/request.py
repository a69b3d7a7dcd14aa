"""A sizing request for one form: its grid, its error, its limits."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.sizing.search import MAX_COMBINATIONS, Grid
from hystkit.analyses.sizing.target import Limits, Target
from hystkit.base.errors import Fault, InfeasibleWidthError, InputError
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.preferred import values as preferred_values
from hystkit.numeric.compile import kernel
from hystkit.numeric.operating import input_resistance, operating_point

Range = tuple[float, float]


@dataclass(frozen=True)
class Request:
    """What is searched for one form.

    Attributes
    ----------
    template : Design
        Everything that is fixed; its free parts hold any value.
    target : Target
        Wanted trips.
    free : tuple of str
        Parts that are searched.
    series, ranges, tol : dict
        Preferred series, allowed range [Ohm] and tolerance of each free part.
    limits : Limits
        What every candidate keeps.
    """

    template: Design
    target: Target
    free: tuple[str, ...]
    series: dict[str, str]
    ranges: dict[str, Range]
    tol: dict[str, float]
    limits: Limits

    @property
    def grid(self) -> Grid:
        """Preferred values of every free part within its range."""
        grid = Grid(
            {
                name: np.array(preferred_values(self.series[name], *self.ranges[name]))
                for name in self.free
            }
        )
        faults = [
            Fault(
                f"no preferred value of {name} lies in its range.",
                asked=f"{self.series[name]} from {self.ranges[name][0]:g} to "
                f"{self.ranges[name][1]:g} Ω",
                remedy="a wider range or a finer series",
            )
            for name, found in grid.values.items()
            if found.size == 0
        ]
        if not faults and grid.combinations > MAX_COMBINATIONS:
            faults.append(
                Fault(
                    "the grid is too large to be searched as a whole.",
                    asked=" x ".join(f"{v.size} values of {n}" for n, v in grid.values.items()),
                    rule=f"at most {MAX_COMBINATIONS:,} combinations beside the longest list",
                    remedy="fix one part, or give narrower ranges or a coarser series",
                )
            )
        if faults:
            raise InputError.of("this search", faults)
        return grid

    def error(self, point: Mapping[str, Any]) -> NDArray[np.float64]:
        """Error of grid points.

        Parameters
        ----------
        point : mapping of str to ndarray, shape (n,)
            Values of the free parts [Ohm].

        Returns
        -------
        ndarray, shape (n,)
            As `Target.error`.
        """
        upper, lower = kernel(self.template.stage).trips({**self.template.values, **point})
        return np.asarray(self.target.error(upper, lower))

    def allowed(self, point: Mapping[str, Any]) -> NDArray[np.bool_]:
        """Whether grid points keep the limits.

        Parameters
        ----------
        point : mapping of str to ndarray, shape (n,)
            Values of the free parts [Ohm].

        Returns
        -------
        ndarray of bool, shape (n,)
        """
        worst = self.loads(point)
        size = np.shape(next(iter(point.values())))
        kept = np.ones(size, dtype=bool)
        for name, most in vars(self.limits).items():
            if np.isfinite(most):
                kept &= worst[name] <= most
        return kept

    def loads(self, point: Mapping[str, Any]) -> dict[str, NDArray[np.float64]]:
        """Largest of each limited quantity, at both trips and in both output states.

        Parameters
        ----------
        point : mapping of str to ndarray, shape (n,)
            Values of the free parts [Ohm].

        Returns
        -------
        dict
            Names of `Limits` to ndarray, shape (n,).
        """
        stage = self.template.stage
        values = {**self.template.values, **point}
        states = ("high", "low")
        trips = kernel(stage).trips(values)
        at = [operating_point(stage, state, values, trip) for state in states for trip in trips]
        seen = [
            input_resistance(stage, pin, state, values)
            for pin in ("plus", "minus")
            for state in states
        ]
        return {
            "supply_current": _largest(point.supply_current for point in at),
            "input_resistance": _largest(seen),
            "output_current": _largest(np.abs(point.output_current) for point in at),
        }

    def design(self, values: Mapping[str, float]) -> Design:
        """Put values into the template.

        Parameters
        ----------
        values : mapping of str to float
            Values of the free parts [Ohm].

        Returns
        -------
        Design
            With the tolerances of the request.
        """
        parts = {name: Part(float(value), self.tol[name]) for name, value in values.items()}
        return self.template.with_parts(**parts)

    def changed(self, **changes: Any) -> Request:
        """Give the same request with other fields.

        Parameters
        ----------
        **changes
            Fields of the request; a bare series, range or tolerance is taken for all free parts.

        Returns
        -------
        Request
            The changed copy.
        """
        spread: dict[str, Any] = {
            name: dict.fromkeys(self.free, value)
            if name in ("series", "ranges", "tol") and not isinstance(value, dict)
            else value
            for name, value in changes.items()
        }
        return replace(self, **spread)

    def check_swing(self) -> None:
        """Refuse a width that no resistor ratio of an inverting form can give.

        Raises
        ------
        InfeasibleWidthError
            If even the smallest wanted width exceeds the output swing.
        """
        stage, values = self.template.stage, self.template.values
        if stage.is_custom or stage.sense != "inverting":
            return
        high_name = "V_OH" if "V_OH" in values else "V_PU"
        swing = values[high_name] - values["V_OL"]
        width = self.target.upper[0] - self.target.lower[1]
        if width > swing:
            raise InfeasibleWidthError(
                "no resistor ratio gives the width that was asked for.",
                asked=f"width = {show(width, 'V')} (upper {show(self.target.upper[0], 'V')}, "
                f"lower {show(self.target.lower[1], 'V')})",
                have=f"output swing = {show(swing, 'V')} ({high_name} "
                f"{show(values[high_name], 'V')}, V_OL {show(values['V_OL'], 'V')})",
                rule="width <= output swing of an inverting form",
                remedy=f"a device with a larger swing, or a width <= {show(swing, 'V')}",
            )


def _largest(values: Any) -> NDArray[np.float64]:
    return np.asarray(np.maximum.reduce(np.broadcast_arrays(*values)))

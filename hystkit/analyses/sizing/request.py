"""A sizing request for one form: what is fixed, what is searched, and its candidates."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from hystkit.analyses.sizing.bounds import minimised
from hystkit.analyses.sizing.candidate import Candidate
from hystkit.analyses.sizing.limits import Limits
from hystkit.analyses.sizing.requirement import Requirement
from hystkit.analyses.sizing.search import Grid
from hystkit.analyses.sizing.stock import Stock
from hystkit.analyses.sizing.target import Target
from hystkit.base.errors import InfeasibleWidthError
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part

#: Among candidates that are equal, those with parts near this value come first [Ohm].
CUSTOMARY = 3e4


@dataclass(frozen=True)
class Request:
    """What is searched for one form.

    Attributes
    ----------
    template : Design
        Everything that is fixed; its free parts have their tolerances and hold any value.
    requirement : Requirement
        What is wanted.
    stock : dict of Stock
        What each free part is taken from.
    limits : Limits
        What every candidate keeps.
    excursion : float
        Farthest distance from the temperature that values are stated for [K].
    chosen : tuple of str
        Parts that were neither given nor free, and were therefore given a customary value.
    has_source : bool
        Whether R_S stands for the resistance of the signal's source.
    """

    template: Design
    requirement: Requirement
    stock: dict[str, Stock]
    limits: Limits
    excursion: float = 0.0
    chosen: tuple[str, ...] = ()
    has_source: bool = False

    @cached_property
    def target(self) -> Target:
        """Wanted trips [V]."""
        template = self.template
        return self.requirement.target(template.stage.sense, template.signal, template.supply.v_cc)

    @property
    def grid(self) -> Grid:
        """Values of every free part."""
        return Grid({name: np.array(stock.values) for name, stock in self.stock.items()})

    def candidates(self, count: int) -> tuple[Candidate, ...]:
        """Search for the best points of the grid.

        Parameters
        ----------
        count : int
            How many are wanted.

        Returns
        -------
        tuple of Candidate
            Best first; fewer where fewer are allowed.
        """
        points, errors = minimised(
            self.grid, self.template, self.target, self.limits, count, self.excursion
        )
        # Equal to nine digits is equal; then parts of customary size go first.
        far = sum(np.abs(np.log(p / CUSTOMARY)) for p in points.values())
        order = np.lexsort((np.round(far, 9), np.round(errors, 9)))[:count]
        chosen = [{n: float(p[i]) for n, p in points.items()} for i in order]
        return tuple(self.candidate(values) for values in chosen)

    def candidate(self, values: Mapping[str, float]) -> Candidate:
        """Put values into the template.

        Parameters
        ----------
        values : mapping of str to float
            Values of the free parts [Ohm].

        Returns
        -------
        Candidate
            With the tolerances of the request.
        """
        parts = {n: self.template.parts[n].with_value(value) for n, value in values.items()}
        design = self.template.with_parts(**parts)
        return Candidate(design, self.requirement, self.target, self.excursion, self.has_source)

    def changed(self, **changes: Any) -> Request:
        """Give the same request with other fields.

        Parameters
        ----------
        **changes
            Fields of the request; the template follows other tolerances of the stock.

        Returns
        -------
        Request
            The changed copy.
        """
        request = replace(self, **changes)
        parts = {
            name: Part(request.template.parts[name].value, stock.tol, stock.tempco)
            for name, stock in request.stock.items()
        }
        return replace(request, template=request.template.with_parts(**parts))

    def check(self) -> None:
        """Refuse what no values of the parts can give.

        Raises
        ------
        InputError
            If a stage of this sense cannot switch in this order.
        InfeasibleError
            If the signal's own tolerances leave nothing of a window.
        InfeasibleWidthError
            If even the smallest wanted width exceeds the output swing of an inverting form.
        """
        target = self.target
        stage, values = self.template.stage, self.template.values
        if stage.is_custom or stage.sense != "inverting":
            return
        sources = ["V_OH"] if "V_OH" in values else ["V_PU"]
        sources += ["V_L"] if "R_L" in self.template.parts and "V_PU" in values else []
        high = max(sources, key=lambda name: values[name])
        swing = values[high] - values["V_OL"]
        upper, lower = target.upper, target.lower
        width = upper[0] - lower[1]
        if width > swing:
            raise InfeasibleWidthError(
                "no resistor ratio gives the width that was asked for.",
                asked=f"width = {show(width, 'V')} (upper {show(upper[0], 'V')}, "
                f"lower {show(lower[1], 'V')})",
                have=f"output swing = {show(swing, 'V')} ({high} {show(values[high], 'V')}, "
                f"V_OL {show(values['V_OL'], 'V')})",
                rule="width <= output swing of an inverting form",
                remedy=f"a device with a larger swing, or a width <= {show(swing, 'V')}",
            )

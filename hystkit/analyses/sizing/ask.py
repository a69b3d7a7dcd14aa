"""Everything that was asked for, from which the request of any form is made."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from hystkit.analyses.sizing.limits import Limits
from hystkit.analyses.sizing.request import Request
from hystkit.analyses.sizing.requirement import SOURCE, Requirement, is_source
from hystkit.analyses.sizing.stock import Settings, Stock
from hystkit.base.errors import DesignError, Fault, HystkitError, InputError
from hystkit.circuit.design import Design, PartLike
from hystkit.circuit.device import Device
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.preferred import nearest
from hystkit.circuit.signals import Signal
from hystkit.circuit.stage import Stage
from hystkit.numeric.uncertain import REFERENCE_TEMPERATURE, uncertain

#: Parts that are given a customary value where a form leaves more than three to be found, in this
#: order, and that value [Ohm].
CUSTOMARY_PARTS = {"R_PU": 4.7e3, "R_R": 1e4, "R_G": 3.3e4, "R_B": 3.3e4}
#: Two trips leave no more than scale and taste open beyond this many parts.
_ENOUGH = 3
# Parts of the template that are searched hold any value.
_ANY = 1e4


@dataclass(frozen=True)
class Ask:
    """What was asked for, without the form.

    Attributes
    ----------
    requirement : Requirement
        What is wanted.
    settings : Settings
        How the stock of the free parts was given.
    supply : Supply
        Rails.
    parts : mapping of str to Part, float or str
        Fixed parts.
    device, levels, signal
        As for `Design`.
    limits : Limits
        What every candidate keeps.
    excursion : float
        Farthest distance from the temperature that values are stated for [K].
    """

    requirement: Requirement
    settings: Settings
    supply: Supply
    parts: Mapping[str, PartLike]
    device: Device | None
    levels: Mapping[str, PartLike]
    signal: Signal | None
    limits: Limits
    excursion: float

    def request(self, stage: Stage, free: tuple[str, ...] | None) -> Request:
        """Make the request of a form that was asked for.

        Parameters
        ----------
        stage : Stage
            The form.
        free : tuple of str or None
            Parts that are searched; all that are not fixed when None.

        Returns
        -------
        Request
            Of this form.

        Raises
        ------
        InputError
            Naming everything that does not go with this form.
        InfeasibleError
            If no values of its parts can give what is wanted.
        """
        stage = stage.with_options(
            *stage.including,
            *(n for n in stage.optional if n in self.parts or n in (free or ())),
        )
        searched = free or tuple(n for n in stage.parts if n not in self.parts)
        faults = _free_faults(stage, free, searched, self.parts)
        stock = self.settings.stock(searched, faults)
        if faults:
            raise InputError.of("this request", faults)
        return self._request(stage, self.parts, stock, ())

    def alternative(self, stage: Stage) -> Request:
        """Make the request of a form that was not asked for by name.

        Parameters
        ----------
        stage : Stage
            The form.

        Returns
        -------
        Request
            Fixed parts that this form does not have are left out. Where it leaves more than three
            parts to be found, the least important are given customary values.

        Raises
        ------
        InputError
            If this form does not go with what was asked for.
        InfeasibleError
            If no values of its parts can give what is wanted.
        """
        stage = stage.with_options(*(n for n in stage.optional if n in self.parts))
        parts = {n: p for n, p in self.parts.items() if n in stage.parts}
        searched = [n for n in stage.parts if n not in parts]
        faults: list[Fault] = []
        stock = self.settings.completed(tuple(searched)).stock(tuple(searched), faults)
        if faults:
            raise InputError.of("this request", faults)
        chosen = []
        for name, value in CUSTOMARY_PARTS.items():
            if name in searched and len(searched) > _ENOUGH:
                searched.remove(name)
                parts[name] = _customary(stock.pop(name), value)
                chosen.append(name)
        return self._request(stage, parts, stock, tuple(chosen))

    def alternatives(self) -> tuple[dict[str, Request], dict[str, HystkitError]]:
        """Make the requests of all built-in forms that can be asked for this.

        Returns
        -------
        tuple of two dict
            Title of each form to its request; and of each other form that needs nothing more than
            was given, to the reason why it cannot.

        Raises
        ------
        DesignError
            If no form goes with the supply and the levels.
        """
        requests, refused = {}, {}
        for stage in self._stages():
            try:
                requests[stage.title] = self.alternative(stage)
            except HystkitError as error:
                refused[stage.title] = error
        return requests, refused

    def _request(
        self,
        stage: Stage,
        parts: Mapping[str, PartLike],
        stock: dict[str, Stock],
        chosen: tuple[str, ...],
    ) -> Request:
        free = {name: Part(_ANY, s.tol, s.tempco) for name, s in stock.items()}
        source = None
        if SOURCE in stage.optional and SOURCE not in {**parts, **free}:
            source = self.requirement.source_resistance(self.signal)
        if source is not None:
            parts = {**parts, SOURCE: source}
        template = Design(
            stage,
            {**parts, **free},
            supply=self.supply,
            device=self.device,
            levels=self.levels,
            signal=self.signal,
        )
        reach = self.excursion
        uncertain(template, (REFERENCE_TEMPERATURE - reach, REFERENCE_TEMPERATURE + reach))
        request = Request(
            template,
            self.requirement,
            stock,
            self.limits,
            self.excursion,
            chosen,
            source is not None or self._gives_source(template, stock),
        )
        request.check()
        return request

    def _gives_source(self, template: Design, stock: dict[str, Stock]) -> bool:
        """Tell whether R_S, given beside trips in volts, is that of the signal's source."""
        if self.requirement.load is not None or SOURCE in stock:
            return False
        given = template.parts.get(SOURCE) if SOURCE in template.stage.optional else None
        return is_source(given, self.signal)

    def _stages(self) -> tuple[Stage, ...]:
        """Built-in forms that need nothing which was not given."""
        kind = "split" if self.supply.split else "single"
        found = tuple(
            stage
            for stage in Stage.all()
            if stage.supply == kind
            and (stage.reference == "source") == ("V_REF" in self.levels)
            and all(name in _with_load(stage, self.parts).levels for name in self.levels)
        )
        if not found:
            raise DesignError(
                "no built-in form goes with these levels.",
                asked=f"levels {', '.join(self.levels)}, {kind} supply",
                have="levels V_REF, V_PU, V_L with R_L, V_OH with push-pull, V_OL",
                remedy="other levels, or name the stage",
            )
        return found


def _with_load(stage: Stage, parts: Mapping[str, PartLike]) -> Stage:
    return stage.with_options("R_L") if "R_L" in parts else stage


def _customary(stock: Stock, value: float) -> Part:
    """Take the value at hand that is nearest to a customary one."""
    low, high = stock.values[0], stock.values[-1]
    wanted = min(max(value, low), high)
    if stock.drawer:
        found = min(stock.drawer, key=lambda one: abs(one - wanted))
    else:
        found = nearest(wanted, stock.series)
    return Part(found, stock.tol, stock.tempco)


def _are_names(free: Any) -> bool:
    return isinstance(free, (tuple, list)) and len(set(free)) == len(free)


def _free_faults(
    stage: Stage,
    free: tuple[str, ...] | None,
    searched: tuple[str, ...],
    parts: Mapping[str, PartLike],
) -> list[Fault]:
    faults = []
    if free is not None and not _are_names(free):
        faults.append(
            Fault(
                "the free parts are not a list of names.",
                asked=f"free={free!r}",
                rule="each name once",
                remedy='free=("R_T", "R_F")',
            )
        )
        return faults
    both = [name for name in free or () if name in parts]
    if both:
        faults.append(
            Fault(
                f"{', '.join(both)} cannot be both free and given.",
                asked=f"free {', '.join(free or ())}, parts {', '.join(parts)}",
                remedy=f"leave {', '.join(both)} out of one of the two",
            )
        )
    missing = [n for n in stage.parts if n not in searched and n not in parts]
    if missing:
        faults.append(
            Fault(
                f"{', '.join(missing)} {'is' if len(missing) == 1 else 'are'} neither free nor"
                " given.",
                asked=f"free {', '.join(searched) or 'none'}, parts {', '.join(parts) or 'none'}",
                rule=f"this stage has {', '.join(stage.parts)}",
                remedy='free=(...) names what is searched, parts={"R_PU": "4k7"} what is fixed',
            )
        )
    if not searched:
        faults.append(
            Fault(
                "no part is free.",
                asked=f"parts {', '.join(parts)}",
                rule="at least one part is searched",
                remedy="leave one of them out",
            )
        )
    return faults

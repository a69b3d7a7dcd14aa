"""The switching law of a stage: both trip points as formulas, derived from the circuit alone."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import sympy as sp

from hystkit.base.errors import InfeasibleError, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.circuit.reading import is_kind, wrong_kind
from hystkit.circuit.stage import Stage
from hystkit.symbolic import solving
from hystkit.symbolic.arrange import by_source
from hystkit.symbolic.ledger import HIGH, LOW, Definition, Ledger, expand, needed, restrict
from hystkit.symbolic.network import StateLaw, solve_state
from hystkit.symbolic.printing import fits
from hystkit.symbolic.shown import Equations
from hystkit.symbolic.symbols import NON_IDEAL, meaning, symbol

if TYPE_CHECKING:
    from hystkit.symbolic.steps import Step


@dataclass(frozen=True)
class TripFormulas(Equations):
    """The four formulas of a stage, in symbols of the circuit.

    Attributes
    ----------
    upper, lower, width, middle : sympy.Expr
        Trip points at the signal source, their difference and their mean [V].
    """

    upper: sp.Expr
    lower: sp.Expr
    width: sp.Expr
    middle: sp.Expr

    @property
    def rows(self) -> tuple[tuple[sp.Symbol, sp.Expr], ...]:
        """The four formulas, each with its symbol."""
        names = ("V_upper", "V_lower", "V_width", "V_middle")
        right = (self.upper, self.lower, self.width, self.middle)
        return tuple(zip(map(symbol, names), right, strict=True))

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the symbols that the formulas use, in alphabetical order."""
        return tuple(sorted(s.name for s in (self.upper.free_symbols | self.lower.free_symbols)))

    def solve_for(self, one: str, two: str) -> tuple[dict[str, sp.Expr], ...]:
        """Give two parts or levels from wanted trip points.

        Parameters
        ----------
        one, two : str
            Two names of the formulas, such as "R_T" and "R_B".

        Returns
        -------
        tuple of dict
            Each solution as name to expression in V_upper, V_lower and the other symbols. Values
            that come out negative mean that no real part gives these trips.

        Raises
        ------
        UnknownNameError
            If the formulas do not know a name.
        InfeasibleError
            If the two cannot set both trip points: only their ratio counts, or one of them does
            not act.

        Examples
        --------
        >>> derive(Stage("inverting", reference="source")).solve_for("V_REF", "R_R")[0]["R_R"]
        R_F*(-V_lower + V_upper)/(V_OH - V_OL + V_lower - V_upper)
        """
        self._known(one, two)
        found = solving.solve_pair(self.upper, self.lower, symbol(one), symbol(two))
        if not found:
            raise InfeasibleError(
                f"{one} and {two} together do not set both trip points.",
                asked=f"{one} and {two} from wanted upper and lower trips",
                have=f"formulas in {', '.join(self.names)}",
                rule="two unknowns that act on the trips independently of each other",
                remedy="another pair: one that sets the middle and one that sets the width",
            )
        return found

    def sensitivity(self, name: str) -> Sensitivity:
        r"""Relative change of each trip for a relative change of a part or level.

        .. math:: S = \frac{x}{f} \frac{\partial f}{\partial x}

        Parameters
        ----------
        name : str
            A name of the formulas.

        Returns
        -------
        Sensitivity
            For upper, lower and width; without unit.

        Raises
        ------
        UnknownNameError
            If the formulas do not know the name.
        """
        self._known(name)
        x = symbol(name)
        parts = (solving.normalised(f, x) for f in (self.upper, self.lower, self.width))
        return Sensitivity(*parts)

    def _known(self, *names: str) -> None:
        faults = [
            unknown_name_fault("symbol of this law", name, self.names)
            for name in names
            if name not in self.names
        ]
        if faults:
            raise UnknownNameError.of("this request", faults)


@dataclass(frozen=True)
class Sensitivity:
    """Normalised sensitivities (x/f) df/dx, without unit.

    Attributes
    ----------
    upper, lower, width : sympy.Expr
        Of either trip point and of the width.
    """

    upper: sp.Expr
    lower: sp.Expr
    width: sp.Expr


@dataclass(frozen=True)
class SwitchingLaw(Equations):
    """What a stage does, derived from its circuit.

    `upper`, `lower`, `width` and `middle` are the full law in symbols of the circuit; `ideal` is
    the same with every non-ideality zero. `definitions` and `states` hold the full law as it is
    written down: with named intermediate quantities.

    Attributes
    ----------
    stage : Stage
        What it was derived from.
    definitions : tuple of Definition
        Named intermediate quantities, each after those that it uses.
    states : dict
        "high" and "low": the trip that leaves this state and the voltage of every node over V_IN.
    non_ideal : tuple of str
        Non-idealities that this law knows.
    """

    # The other two fields follow from these, so that laws compare and hash by them alone.
    stage: Stage
    non_ideal: tuple[str, ...]
    definitions: tuple[Definition, ...] = field(compare=False, repr=False)
    states: dict[str, StateLaw] = field(compare=False, repr=False)

    @property
    def upper_state(self) -> str:
        """Output state that the upper trip point leaves: high when inverting."""
        return HIGH if self.stage.sense == "inverting" else LOW

    @property
    def lower_state(self) -> str:
        """Output state that the lower trip point leaves."""
        return LOW if self.stage.sense == "inverting" else HIGH

    @property
    def named(self) -> tuple[sp.Expr, sp.Expr]:
        """Upper and lower trip point in terms of `definitions`."""
        return self.states[self.upper_state].trip, self.states[self.lower_state].trip

    @cached_property
    def formulas(self) -> TripFormulas:
        """The full law, definitions put back in."""
        upper, lower = (expand(trip, self.definitions) for trip in self.named)
        return TripFormulas(upper, lower, upper - lower, (upper + lower) / 2)

    @property
    def upper(self) -> sp.Expr:
        """Upper trip point at the signal source [V]."""
        return self.formulas.upper

    @property
    def lower(self) -> sp.Expr:
        """Lower trip point at the signal source [V]."""
        return self.formulas.lower

    @property
    def width(self) -> sp.Expr:
        """Width, upper less lower [V]."""
        return self.formulas.width

    @property
    def middle(self) -> sp.Expr:
        """Mean of both trip points [V]."""
        return self.formulas.middle

    @cached_property
    def ideal(self) -> TripFormulas:
        """The same with every non-ideality zero, arranged as an engineer writes it."""
        bare = self.without(NON_IDEAL)
        upper, lower = (expand(trip, bare.definitions) for trip in bare.named)
        sources = tuple(
            sorted((s for s in upper.free_symbols | lower.free_symbols if _is_source(s)), key=str)
        )
        return TripFormulas(
            *(
                by_source(expression, sources)
                for expression in (upper, lower, upper - lower, (upper + lower) / 2)
            )
        )

    def without(self, names: Iterable[str]) -> SwitchingLaw:
        """Set non-idealities to zero.

        Parameters
        ----------
        names : iterable of str
            Of `non_ideal`; others are left alone.

        Returns
        -------
        SwitchingLaw
            The law in which they, and what they made necessary, no longer stand.
        """
        given = set(names)
        gone = tuple(name for name in self.non_ideal if name in given)
        return _without(self, gone) if gone else self

    def for_design(self, design: Design) -> SwitchingLaw:
        """Give the law with those non-idealities only that the design has.

        Parameters
        ----------
        design : Design
            Of this law's stage.

        Returns
        -------
        SwitchingLaw
            This law, less what is zero in the design.
        """
        return self.without(name for name in self.non_ideal if design.values[name] == 0)

    @property
    def is_ideal(self) -> bool:
        """Whether no non-ideality is left in this law."""
        return not self.non_ideal

    def solve_for(self, one: str, two: str) -> tuple[dict[str, sp.Expr], ...]:
        """Give two parts or levels from wanted trip points, with an ideal device.

        Parameters
        ----------
        one, two : str
            Two names of the ideal law.

        Returns
        -------
        tuple of dict
            As `TripFormulas.solve_for`; ``law.formulas.solve_for`` does the same in the full law.
        """
        return self.ideal.solve_for(one, two)

    def sensitivity(self, name: str) -> Sensitivity:
        """Normalised sensitivity (x/f) df/dx of the full law.

        Parameters
        ----------
        name : str
            A name of the law.

        Returns
        -------
        Sensitivity
            For upper, lower and width; ``law.ideal.sensitivity`` gives the short form.
        """
        return self.formulas.sensitivity(name)

    @cached_property
    def symbols(self) -> dict[str, tuple[str, str]]:
        """Every symbol of the law, its definitions included, with meaning and unit."""
        used = {s.name for trip in self.named for s in trip.free_symbols}
        used |= {s.name for row in self.definitions for s in row.expression.free_symbols}
        known = {row.symbol.name: (_in_state(row), row.unit) for row in self.definitions}
        named = {name: meaning(name) for name in sorted(used - known.keys())}
        return named | known | {n: meaning(n) for n in ("V_upper", "V_lower")}

    @cached_property
    def steps(self) -> tuple[Step, ...]:
        """The derivation, step by step, as LaTeX for a report."""
        from hystkit.symbolic.steps import derivation  # steps write a law down

        return derivation(self)

    @cached_property
    def rows(self) -> tuple[tuple[sp.Symbol, sp.Expr], ...]:
        """What the law defines, in reading order: named quantities, then both trip points.

        An ideal law needs no named quantities where its arranged formulas fit on a line.
        """
        ideal = self.ideal if self.is_ideal else None
        if ideal is not None and fits(ideal.upper) and fits(ideal.lower):
            return ((symbol("V_upper"), ideal.upper), (symbol("V_lower"), ideal.lower))
        return self.named_rows

    @cached_property
    def named_rows(self) -> tuple[tuple[sp.Symbol, sp.Expr], ...]:
        """The named quantities that act on the trip points, then both trip points by them."""
        upper, lower = self.named
        acting, _ = needed(self.named, self.definitions)
        named = ((row.symbol, row.expression) for row in acting)
        return (*named, (symbol("V_upper"), upper), (symbol("V_lower"), lower))

    def latex(self, variant: str = "formula", *, design: Design | None = None) -> str:
        """Write the law in LaTeX that needs amsmath only.

        Parameters
        ----------
        variant : {"formula", "derivation", "numbers", "table"}
            Both trips as one ``aligned`` block; the derivation as ``align*`` with its steps; the
            formula with the design's numbers and units; a ``tabular`` of parts and trips.
        design : Design, optional
            Needed for "numbers" and "table".

        Returns
        -------
        str
            "formula" and "numbers" are for math mode.

        Raises
        ------
        UnknownNameError
            If there is no such variant.
        InputError
            If the design is missing or of another stage.
        """
        from hystkit.symbolic.writing import write  # writing builds on laws

        return write(self, variant, design)


def derive(subject: Stage | Design) -> SwitchingLaw:
    """Derive the switching law of a stage.

    The output in each of its two states is a Thevenin source; the inner nodes are eliminated
    exactly; the switching condition v(plus) - v(minus) = V_OS is solved for the signal voltage.
    Values play no part: designs of the same circuit share one law, which is cached.

    Parameters
    ----------
    subject : Stage or Design
        The circuit.

    Returns
    -------
    SwitchingLaw
        Both trip points as exact formulas.

    Raises
    ------
    InputError
        If `subject` is neither a stage nor a design.

    Notes
    -----
    Holds for any resistive network, static: delays and capacitances are outside the law.

    Examples
    --------
    >>> derive(Stage("inverting", reference="source")).ideal.upper
    (R_F*V_REF + R_R*V_OH)/(R_F + R_R)
    """
    stage = subject.stage if isinstance(subject, Design) else subject
    if not is_kind(stage, Stage):
        remedy = 'hk.derive(hk.Stage("inverting"))'
        fault = wrong_kind("subject", stage, "a Stage or a Design", remedy)
        raise InputError.of("this request", [fault])
    return _derive(stage)


@lru_cache(maxsize=256)
def _derive(stage: Stage) -> SwitchingLaw:
    ledger = Ledger()
    solved = {state: solve_state(stage, state, ledger) for state in (HIGH, LOW)}
    states = _mapped(solved, ledger.shared_names())
    definitions = ledger.definitions()
    expressions = [e for law in states.values() for e in (law.trip, *law.potentials.values())]
    used = {
        s.name
        for e in (*expressions, *(row.expression for row in definitions))
        for s in e.free_symbols
    }
    non_ideal = tuple(name for name in NON_IDEAL if name in used)
    return SwitchingLaw(stage, non_ideal, definitions, states)


@lru_cache(maxsize=256)
def _without(law: SwitchingLaw, gone: tuple[str, ...]) -> SwitchingLaw:
    kept, changes = restrict(law.definitions, (symbol(name) for name in gone))
    left = tuple(name for name in law.non_ideal if name not in gone)
    return SwitchingLaw(law.stage, left, kept, _mapped(law.states, changes))


def _mapped(states: dict[str, StateLaw], changes: dict[sp.Symbol, sp.Expr]) -> dict[str, StateLaw]:
    return {
        state: StateLaw(
            law.trip.xreplace(changes),
            {node: v.xreplace(changes) for node, v in law.potentials.items()},
        )
        for state, law in states.items()
    }


def _is_source(candidate: sp.Symbol) -> bool:
    return bool(candidate.name.startswith(("V", "I")))


def _in_state(row: Definition) -> str:
    return row.meaning if row.state is None else f"{row.meaning}, output {row.state}"

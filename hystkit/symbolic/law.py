"""The switching law of a stage: both trip points as formulas, derived from the circuit alone."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import sympy as sp

from hystkit.base.errors import Fault, InfeasibleError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.circuit.stage import Stage
from hystkit.symbolic import solving
from hystkit.symbolic.arrange import by_source
from hystkit.symbolic.ledger import HIGH, LOW, Definition, Ledger, expand, restrict
from hystkit.symbolic.network import StateLaw, solve_state
from hystkit.symbolic.symbols import NON_IDEAL, meaning, symbol

if TYPE_CHECKING:
    from hystkit.symbolic.steps import Step


@dataclass(frozen=True)
class TripFormulas:
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
        >>> derive(Stage("inverting", reference="source")).ideal.solve_for("V_REF", "R_R")[0]["R_R"]
        R_F*(V_lower - V_upper)/(V_OL - V_OH + V_upper - V_lower)
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
        """Relative change of each trip for a relative change of a part or level.

        .. math:: S = \\frac{x}{f} \\frac{\\partial f}{\\partial x}

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
class SwitchingLaw:
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

    stage: Stage
    definitions: tuple[Definition, ...]
    states: dict[str, StateLaw] = field(hash=False)
    non_ideal: tuple[str, ...]

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
        gone = [name for name in self.non_ideal if name in set(names)]
        kept, changes = restrict(self.definitions, (symbol(name) for name in gone))
        states = {
            state: StateLaw(
                law.trip.xreplace(changes),
                {node: v.xreplace(changes) for node, v in law.potentials.items()},
            )
            for state, law in self.states.items()
        }
        used = tuple(name for name in self.non_ideal if name not in gone)
        return SwitchingLaw(self.stage, kept, states, used)

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

    def latex(self, variant: str = "formula", *, design: Design | None = None) -> str:
        """Write the law in LaTeX; see `hystkit.symbolic.writing.write`."""
        from hystkit.symbolic.writing import write  # writing builds on laws

        return write(self, variant, design)

    def _repr_latex_(self) -> str:
        return f"$\\displaystyle {self.latex()}$"


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

    Notes
    -----
    Holds for any resistive network, static: delays and capacitances are outside the law.

    Examples
    --------
    >>> derive(Stage("inverting", reference="source")).ideal.upper
    (R_F*V_REF + R_R*V_OH)/(R_F + R_R)
    """
    stage = subject.stage if isinstance(subject, Design) else subject
    return _derive(stage)


@lru_cache(maxsize=256)
def _derive(stage: Stage) -> SwitchingLaw:
    ledger = Ledger()
    states = {state: solve_state(stage, state, ledger) for state in (HIGH, LOW)}
    changes = ledger.shared_names()
    renamed = {
        state: StateLaw(
            law.trip.xreplace(changes),
            {node: v.xreplace(changes) for node, v in law.potentials.items()},
        )
        for state, law in states.items()
    }
    definitions = ledger.definitions()
    used = {s.name for law in renamed.values() for s in expand(law.trip, definitions).free_symbols}
    used |= {
        s.name
        for law in renamed.values()
        for v in law.potentials.values()
        for s in expand(v, definitions).free_symbols
    }
    return SwitchingLaw(
        stage, definitions, renamed, tuple(name for name in NON_IDEAL if name in used)
    )


def _is_source(candidate: sp.Symbol) -> bool:
    return bool(candidate.name.startswith(("V", "I")))


def _in_state(row: Definition) -> str:
    return row.meaning if row.state is None else f"{row.meaning}, output {row.state}"


__all__ = ["Definition", "Fault", "Sensitivity", "SwitchingLaw", "TripFormulas", "derive"]

"""One sized design with what it reaches, and the list of them."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from functools import cached_property

from hystkit.analyses.sizing.target import Limits, Target
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import code, show
from hystkit.circuit.design import Design
from hystkit.numeric.extremes import trip_intervals
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Interval


@dataclass(frozen=True)
class Candidate(Viewed):
    """A design of real parts that comes close to what is wanted.

    Attributes
    ----------
    design : Design
        With its parts' tolerances.
    target : Target
        What is wanted.
    error : float
        As `Target.error`, at nominal values.
    """

    design: Design
    target: Target
    error: float

    @cached_property
    def trips(self) -> TripPoints:
        """Nominal trip points."""
        return trip_points(self.design)

    @cached_property
    def extremes(self) -> dict[str, Interval]:
        """Exact lowest and highest of both trips over all tolerances [V]."""
        nominal = tuple((float(t), float(t)) for t in (self.trips.upper, self.trips.lower))
        return dict(zip(("upper", "lower"), trip_intervals(self.design) or nominal, strict=True))

    @property
    def margin(self) -> float:
        """Distance of the worst case from the nearest window end [V]; NaN without windows."""
        return self.target.margin(self.extremes["upper"], self.extremes["lower"])

    @property
    def holds(self) -> bool:
        """Whether both windows hold over the exact worst case; true without windows."""
        return not self.target.has_windows or self.margin >= 0

    @property
    def bill(self) -> tuple[tuple[str, str, str], ...]:
        """Bill of materials: reference, value, tolerance."""
        return tuple(
            (name, code(part.value), show(part.tol, "%"))
            for name, part in self.design.parts.items()
        )

    def _fields(self) -> Sequence[Field]:
        parts = [Field(name, value, "", f"± {tol}") for name, value, tol in self.bill]
        worst = [
            Field(f"{name}, worst case", interval, "V") for name, interval in self.extremes.items()
        ]
        margin = [Field("margin", self.margin, "V")] if self.target.has_windows else []
        return [*parts, *self.trips._fields(), *worst, *margin]


@dataclass(frozen=True)
class Suggestion:
    """A change that makes a request feasible, verified by running it.

    Attributes
    ----------
    text : str
        What to change.
    candidate : Candidate
        The best design after the change.
    """

    text: str
    candidate: Candidate


@dataclass(frozen=True)
class Sizing(Sequence[Candidate], Viewed):
    """Ranked candidates; behaves like a sequence of them.

    Attributes
    ----------
    candidates : tuple of Candidate
        Best first: those that hold before those that do not, then by margin or error.
    limits : Limits
        What every candidate keeps.
    searched : int
        Number of grid points that the search covers.
    reason : str
        Why nothing fits; empty where something does.
    suggestions : tuple of Suggestion
        Smallest changes after which something fits.
    """

    candidates: tuple[Candidate, ...]
    limits: Limits
    searched: int
    reason: str = ""
    suggestions: tuple[Suggestion, ...] = field(default=())

    @property
    def fits(self) -> bool:
        """Whether the best candidate holds."""
        return bool(self.candidates) and self.candidates[0].holds

    def __len__(self) -> int:
        """Return the number of candidates."""
        return len(self.candidates)

    def __getitem__(self, index):  # type: ignore[no-untyped-def]
        """Return one candidate, or a tuple of them for a slice."""
        return self.candidates[index]

    def __iter__(self) -> Iterator[Candidate]:
        """Iterate from the best."""
        return iter(self.candidates)

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field(
                str(rank),
                ", ".join(f"{name} {value}" for name, value, _ in c.bill),
                "",
                f"{show(float(c.trips.upper), 'V')} / {show(float(c.trips.lower), 'V')}"
                + (f", margin {show(c.margin, 'V')}" if c.target.has_windows else ""),
            )
            for rank, c in enumerate(self.candidates, 1)
        ]
        told = [Field("nothing fits", self.reason)] if self.reason else []
        return [*rows, *told, *(Field("try", s.text) for s in self.suggestions)]

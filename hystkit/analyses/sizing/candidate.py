"""One sized design with what it reaches, and the list of them."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, overload

import numpy as np

from hystkit.analyses.sizing.chance import yield_within
from hystkit.analyses.sizing.conditions import WorstCase
from hystkit.analyses.sizing.requirement import SOURCE, Requirement, signal_corners
from hystkit.analyses.sizing.target import Target
from hystkit.base.errors import InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import code, show
from hystkit.circuit.design import Design
from hystkit.circuit.device import TYPICAL
from hystkit.circuit.parts import Part
from hystkit.numeric.sampling import Plan
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Interval
from hystkit.numeric.yields import Yield, percent


@dataclass(frozen=True)
class BillLine:
    """One line of a bill of materials.

    Attributes
    ----------
    reference : str
        Name in the circuit.
    value : str
        Letter code of IEC 60062, or the device.
    ohms : float or None
        Resistance [Ohm].
    tol, tempco : float
        Relative tolerance, and magnitude of the temperature coefficient [1/K].
    remark : str
        What else has to be said about it.
    """

    reference: str
    value: str
    ohms: float | None = None
    tol: float = 0.0
    tempco: float = 0.0
    remark: str = ""

    @property
    def rating(self) -> str:
        """Tolerance, temperature coefficient and remark, in words."""
        found = [f"± {show(self.tol, '%')}"] if self.tol else []
        found += [f"{self.tempco * 1e6:g} ppm/K"] if self.tempco else []
        found += [self.remark] if self.remark else []
        return ", ".join(found)


@dataclass(frozen=True)
class Candidate(Viewed):
    """A design of real parts that comes close to what is wanted.

    Attributes
    ----------
    design : Design
        With its parts' tolerances.
    requirement : Requirement
        What is wanted, as it was asked for.
    target : Target
        The same as trips [V].
    excursion : float
        Farthest distance from the temperature that values are stated for [K].
    has_source : bool
        Whether R_S stands for the resistance of the signal's source, and is no part.
    """

    design: Design
    requirement: Requirement
    target: Target
    excursion: float = 0.0
    has_source: bool = False

    @cached_property
    def trips(self) -> TripPoints:
        """Nominal trip points."""
        return trip_points(self.design)

    @cached_property
    def error(self) -> float:
        """Largest distance of a nominal trip from what is wanted.

        [V]; with windows, in half-widths of the window from its middle, without unit.
        """
        return float(self.target.error(self.trips.upper, self.trips.lower))

    @cached_property
    def worst_error(self) -> float:
        """The same over all tolerances, exactly: at most 1 where both windows hold."""
        return float(self._worst.error({}))

    @cached_property
    def margin(self) -> float:
        """Distance of the exact worst case from the nearest window end [V].

        Negative where a window does not hold; NaN without windows.
        """
        return float(self._worst.margin({})) if self.target.has_windows else np.nan

    @property
    def holds(self) -> bool:
        """Whether both windows hold over all tolerances; without windows, whether it is close.

        A nominal trip is close when it is off by no more than half of the wanted width.
        """
        if self.target.has_windows:
            return self.worst_error <= 1
        return self.error <= self.target.width / 2

    @cached_property
    def extremes(self) -> dict[str, Interval]:
        """Exact lowest and highest of both trips over all tolerances [V].

        NaN where the stage does not switch with every combination.
        """
        up, down, switches = self._worst.ranges({})
        if not switches:
            return dict.fromkeys(("upper", "lower"), (np.nan, np.nan))
        return {
            name: (float(low.min()), float(high.max()))
            for name, (low, high) in (("upper", up), ("lower", down))
        }

    @cached_property
    def switching(self) -> dict[str, Interval]:
        """Where the load switches over all tolerances, those of the signal included.

        "on_at" and "off_at" to lowest and highest quantity, in the signal's unit; empty for a
        request in volts.
        """
        signal = self.design.signal
        if signal is None or self.requirement.load is None:
            return {}
        up, down, _ = self._worst.ranges({})
        ranges = {"upper": up, "lower": down}
        shared = {"V_CC": self._worst.cases.v_cc(0)} if signal.ratiometric else {}
        found: dict[str, Interval] = {}
        for edge, trip in self.requirement.edges(self.design.stage.sense).items():
            quantities = [
                signal.quantity(volts, **corner, **shared)
                for volts in ranges[trip]
                for corner in signal_corners(signal)
            ]
            found[edge] = (float(np.min(quantities)), float(np.max(quantities)))
        return found

    @cached_property
    def expected_yield(self) -> Yield | None:
        """Share of units that keep both windows, with its confidence interval of 95 %.

        Of 65,536 samples, each quantity normal with its tolerance as three standard deviations
        and truncated there; None without windows. For other distributions see `sampled_yield`.
        """
        return self.sampled_yield() if self.target.has_windows else None

    def sampled_yield(
        self, samples: int = 65536, seed: int = 0, distribution: str = "normal", sigmas: float = 3.0
    ) -> Yield:
        """Give the share of units that keep both windows.

        Parameters
        ----------
        samples, seed : int
            Number of Monte Carlo samples; the same seed gives the same samples.
        distribution : {"normal", "uniform", "binned"}, default "normal"
            As of `hystkit.spread`.
        sigmas : float, default 3
            Standard deviations in half a range, for the normal distribution.

        Returns
        -------
        Yield
            The signal's own tolerances included where the request was in its unit.

        Raises
        ------
        InputError
            If no windows were asked for.
        """
        if not self.target.has_windows:
            raise InputError(
                "without windows there is no yield.",
                asked=self.requirement.text("V"),
                rule="a yield is the share of units within windows",
                remedy="windows (low, high), or hk.spread(design).yield_within(...)",
            )
        plan = Plan(samples, seed, distribution, sigmas)
        return yield_within(self.design, self.requirement, self.target, self.excursion, plan)

    @property
    def bill(self) -> tuple[BillLine, ...]:
        """Bill of materials: every part, then the device where it has a name."""
        parts = [
            BillLine(name, code(part.value, 6), part.value, part.tol, part.tempco)
            for name, part in self._fitted.items()
        ]
        device = self.design.device
        if not device.name:
            return tuple(parts)
        return (*parts, BillLine("U", device.name, remark=TYPICAL if device.typical else ""))

    @property
    def _fitted(self) -> dict[str, Part]:
        """Parts that are real ones."""
        parts = self.design.parts.items()
        return {name: part for name, part in parts if not (self.has_source and name == SOURCE)}

    @cached_property
    def _worst(self) -> WorstCase:
        return WorstCase.of(self.design, (), self.target, self.excursion)

    @property
    def values(self) -> str:
        """All parts in one line."""
        return ", ".join(f"{name} {code(p.value, 6)}" for name, p in self._fitted.items())

    @property
    def verdict(self) -> str:
        """Whether it does what was asked, in one line."""
        if not self.target.has_windows:
            return f"off by {show(round(self.error, 12), 'V')}"
        if not np.isfinite(self.worst_error):
            return "does not switch with every combination of tolerances"
        margin, unit = self._room
        if self.holds:
            return f"both windows hold, margin {show(margin, unit)}"
        return f"leaves a window by {show(-margin, unit)}"

    @property
    def outcome(self) -> str:
        """The verdict, with the yield where windows were asked for."""
        if self.expected_yield is None:
            return self.verdict
        return f"{self.verdict}; yield {percent(self.expected_yield.value)}"

    @property
    def _room(self) -> tuple[float, str]:
        """Margin in the unit that the windows were asked for in."""
        signal = self.design.signal
        if signal is None or not self.switching:
            return self.margin, "V"
        windows = dict(
            zip(self.switching, (self.requirement.first, self.requirement.second), strict=True)
        )
        found = [
            min(low - windows[edge][0], windows[edge][1] - high)
            for edge, (low, high) in self.switching.items()
        ]
        return min(found), signal.unit

    @property
    def _title(self) -> str:
        return self.design.stage.title

    def _fields(self) -> Sequence[Field]:
        unit = "" if self.design.signal is None else self.design.signal.unit
        parts = [Field(line.reference, line.value, "", line.rating) for line in self.bill]
        if self.has_source:
            ohms, tol = self.design.parts[SOURCE].value, self.design.parts[SOURCE].tol
            spread = (ohms * (1 - tol), ohms * (1 + tol))
            parts.append(Field(SOURCE, spread, "Ω", "resistance of the signal's source"))
        worst = [Field(f"{n}, worst case", pair, "V") for n, pair in self.extremes.items()]
        worst += [
            Field(f"load {edge.replace('_', ' ')}, worst case", pair, unit)
            for edge, pair in self.switching.items()
        ]
        if self.expected_yield is not None:
            worst += self.expected_yield._fields()
        verdict = Field("verdict", self.verdict, "", self.requirement.text(unit))
        return [*parts, *self.trips._fields(), *worst, verdict]


@dataclass(frozen=True)
class Suggestion:
    """A change after which something fits, verified by running it.

    Attributes
    ----------
    text : str
        What to change.
    candidate : Candidate
        The best design after the change.
    changes : dict
        Arguments of `size` that are different then.
    """

    text: str
    candidate: Candidate
    changes: dict[str, Any]


@dataclass(frozen=True)
class Sizing(Sequence[Candidate], Viewed):
    """Ranked candidates; behaves like a sequence of them.

    Attributes
    ----------
    candidates : tuple of Candidate
        Best first: by the error over all tolerances where windows were asked for, so that those
        that hold come first, else by the nominal error; those that leave a window by yield.
    asked : str
        What was asked for.
    searched : int
        Number of combinations of part values that the search covers.
    refused : dict of str
        Forms that cannot be asked for this, with the reason, where all forms were to be tried.
    reason : str
        Why nothing fits; empty where something does.
    suggestions : tuple of Suggestion
        Smallest changes after which something fits.
    """

    candidates: tuple[Candidate, ...]
    asked: str
    searched: int
    refused: dict[str, str]
    reason: str = ""
    suggestions: tuple[Suggestion, ...] = ()

    @property
    def fits(self) -> bool:
        """Whether the best candidate does what was asked."""
        return bool(self.candidates) and self.candidates[0].holds

    def __len__(self) -> int:
        """Return the number of candidates."""
        return len(self.candidates)

    @overload
    def __getitem__(self, index: int) -> Candidate: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[Candidate, ...]: ...
    def __getitem__(self, index: int | slice) -> Candidate | tuple[Candidate, ...]:
        """Return one candidate, or a tuple of them for a slice."""
        return self.candidates[index]

    def __iter__(self) -> Iterator[Candidate]:
        """Iterate from the best."""
        return iter(self.candidates)

    @property
    def _title(self) -> str:
        return f"{self.asked}: {self.searched:,} combinations searched"

    def _fields(self) -> Sequence[Field]:
        forms = {c.design.stage for c in self.candidates}
        rows = [
            Field(
                str(rank),
                c.values,
                "",
                f"{show(float(c.trips.upper), 'V')} / {show(float(c.trips.lower), 'V')}, "
                + (c.verdict if c.holds else c.outcome)
                + (f" ({c.design.stage.title})" if len(forms) > 1 else ""),
            )
            for rank, c in enumerate(self.candidates, 1)
        ]
        told = [Field("nothing fits", "", "", self.reason)] if self.reason else []
        return [*rows, *told, *(Field("try", s.text, "", s.candidate.values)
                                for s in self.suggestions)]  # fmt: skip

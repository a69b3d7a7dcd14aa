"""How far the trips of a stage spread, live: samples, exact limits, windows, yield and shares."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from typing import Any

import numpy as np

from hystkit.analyses.spread.result import Spread
from hystkit.analyses.spread.spread import spread
from hystkit.base.errors import InputError
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.figures.contributions import ContributionsPicture
from hystkit.figures.spread import SpreadPicture, WindowedSpread
from hystkit.numeric.levels import levels
from hystkit.numeric.sampling import DISTRIBUTIONS
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Levels
from hystkit.numeric.yields import Window, yield_of
from hystkit.panels.asking import Asked, AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.spread_table import spread_rows
from hystkit.panels.table import Rows
from hystkit.panels.view import PictureView
from hystkit.panels.windows import (
    read_temperatures,
    read_window,
    write_temperatures,
    write_window,
)
from hystkit.symbolic.law import SwitchingLaw

#: Samples that a panel begins with, and the most that it takes.
SAMPLES, MOST_SAMPLES = 20_000, 1_000_000
_DISTRIBUTIONS = {
    "normal": "normal, cut at the tolerance",
    "uniform": "uniform",
    "binned": "better parts sorted out",
}


@dataclass(frozen=True)
class SpreadRequest:
    """What a `SpreadPanel` asks.

    Attributes
    ----------
    temperature : tuple of float, or None
        Range in service [°C]; None leaves drift out.
    distribution : {"normal", "uniform", "binned"}
        Of every quantity over its range.
    upper, lower : pair of float, or None
        Wanted windows [V]; an end that is None is open.
    samples : int
        Number of samples.
    """

    temperature: tuple[float, float] | None = None
    distribution: str = "normal"
    upper: Window | None = None
    lower: Window | None = None
    samples: int = SAMPLES


class SpreadPanel(AskingPanel):
    """Move parts, tolerances and windows, and see samples, exact limits and yield follow.

    Parameters
    ----------
    design : Design
        What to begin with.
    **asked : object
        Fields of `SpreadRequest`: temperature, distribution, upper, lower, samples.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : SpreadRequest
        What is asked of it; changed with `set`.
    result : TripPoints
        The nominal trip points.
    spread : Spread
        Their spread.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = SpreadPanel(header_tank(), upper=(2.28, None))
    >>> panel.set(R_F="97k6")
    >>> print(f"{panel.share.value:.0%}")
    100%
    >>> panel.close()
    """

    spread: Spread

    @property
    def share(self) -> Any:
        """Yield within the windows; None where none is wanted."""
        return self._shown.share

    def _first_request(self) -> SpreadRequest:
        return SpreadRequest()

    def _checked(self, design: Design, request: SpreadRequest) -> SpreadRequest:
        self._spread_of(design, request)
        if request.samples > MOST_SAMPLES:
            raise InputError(
                "a panel draws no more samples than that.",
                asked=f"samples={request.samples}",
                rule=f"samples <= {MOST_SAMPLES}",
                remedy=f"{SAMPLES}, or hystkit.spread for more",
            )
        one = np.zeros(1)
        yield_of({"upper": one, "lower": one}, {"upper": request.upper, "lower": request.lower})
        return request

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk
        windows = [
            Asked(
                desk,
                trip,
                f"{trip} within",
                f"window of the {trip} trip, such as 2.25 V to 2.35 V",
                partial(self._read_window, trip),
                write_window,
                "any",
            )
            for trip in ("upper", "lower")
        ]
        labels = {_DISTRIBUTIONS[name]: name for name in DISTRIBUTIONS}
        self.asked = RequestSection(
            desk,
            "Spread",
            [
                Asked(
                    desk,
                    "temperature",
                    "temperature",
                    "range of temperature in service, such as -20 to 60 °C",
                    read_temperatures,
                    write_temperatures,
                    "no drift",
                ),
                Chosen(desk, "distribution", "distribution", labels),
                *windows,
                Asked(desk, "samples", "samples", "number of samples", _read_count, str),
            ],
            lambda: self.request,
        )
        return (self.asked,)

    def _figure(self, width_px: int) -> PictureView[Any]:
        return PictureView(self._desk, SpreadPicture, width_px)

    def _below(self, width_px: int) -> Sequence[PictureView[Any]]:
        self.contributions = PictureView(self._desk, ContributionsPicture, width_px)
        return (self.contributions,)

    def _evaluate(self, design: Design) -> Levels:
        self.spread = self._spread_of(design, self.request)
        found = levels(design)
        self._shown = WindowedSpread(self.spread, found, self.request.upper, self.request.lower)
        return found

    def _draw(self, design: Design) -> None:
        self.figure.show(self._shown)
        self.contributions.show(self.spread)

    def _tabulated(self, found: Levels, trips: TripPoints, law: SwitchingLaw) -> tuple[Rows, str]:
        return spread_rows(self._shown, trips), self.spread.to_latex()

    def _read_window(self, trip: str, text: str) -> Window | None:
        return read_window(text, self.design.signal, trip)

    @staticmethod
    def _spread_of(design: Design, request: SpreadRequest) -> Spread:
        return spread(
            design,
            temperature=request.temperature,
            distribution=request.distribution,
            samples=request.samples,
        )


def _read_count(text: str) -> int:
    # A share of a sample is refused by the spread itself, which names what it needs.
    value = read(text, name="samples") if text.strip() else float(SAMPLES)
    return int(value) if value == int(value) else value  # type: ignore[return-value]

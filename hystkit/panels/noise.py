"""Width against noise, live: how often it switches again, what it needs, and a sample of it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import ipywidgets as widgets

from hystkit.analyses.noise.chatter import Chatter
from hystkit.analyses.noise.model import Noise
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.figures.noise import NoisePicture
from hystkit.figures.noise_sample import NoiseSamplePicture
from hystkit.numeric.trips import TripPoints
from hystkit.numeric.views import Levels
from hystkit.panels.asking import Asked, AskingPanel, Chosen, RequestSection
from hystkit.panels.base import Section
from hystkit.panels.noise_request import NoiseRequest, begun_with, hum_of, numbers_of
from hystkit.panels.noise_rows import NoiseSection, filled, noise_rows
from hystkit.panels.table import Rows, trip_rows
from hystkit.panels.view import PictureView
from hystkit.review.finding import Review
from hystkit.review.noise_scene import NoiseScene, first_noise, first_slope, noise_scene
from hystkit.review.review import review
from hystkit.review.service import PROBABILITY
from hystkit.symbolic.law import SwitchingLaw

_STATES = {"output high": "high", "output low": "low"}


class NoisePanel(AskingPanel):
    """Move parts and noise, and see switching again, the width needed and a sample follow.

    Parameters
    ----------
    design : Design
        What to begin with.
    noise : Noise, optional
        On the signal; a tenth of the width behind two poles unless given.
    hum : pair of float or str, optional
        Amplitude [V] and frequency [Hz] of hum on the signal.
    **asked : object
        Further fields of `NoiseRequest`: slope, probability, load, seed, and the numbers of the
        noise by name.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : NoiseRequest
        What is asked of it; changed with `set`, which takes noise and hum as well.
    noise : Noise
        On the signal.
    scene : NoiseScene
        What is shown of it.
    chatter : Chatter or None
        At the design's own width; None where it has no band.
    result : TripPoints
        The trip points.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> noise = Noise.two_pole(rms="50m", f1=100, f2="10k")
    >>> panel = NoisePanel(header_tank(), noise=noise, slope=0.5)
    >>> panel.set(rms="80m", hum=("30m", 100))
    >>> print(f"{panel.scene.needed:.3f} V + {panel.scene.needed_for_hum:.3f} V needed")
    0.624 V + 0.058 V needed
    >>> panel.close()
    """

    scene: NoiseScene

    def __init__(
        self,
        design: Design,
        *,
        noise: Noise | None = None,
        hum: tuple[Any, Any] | None = None,
        **asked: Any,
    ) -> None:
        if isinstance(design, Design):
            first = first_noise(design)
            given = {} if noise is None else numbers_of(noise)
            slope = first_slope(first if noise is None else noise)
            asked = {**begun_with(first), **given, "slope": slope, **hum_of(hum), **asked}
        super().__init__(design, **asked)

    @property
    def noise(self) -> Noise:
        """On the signal."""
        return self.scene.noise

    @property
    def chatter(self) -> Chatter | None:
        """What noise makes of a passage; None where the design has no band."""
        return self.scene.found

    def set(self, **changes: Any) -> None:
        """Change several values at once, of the noise, of the request and of the design.

        Parameters
        ----------
        **changes : object
            "noise", "hum", fields of the request, and whatever `Panel.set` takes.

        Raises
        ------
        HystkitError
            Naming every fault; nothing is changed then.
        """
        for name, numbers in (("noise", numbers_of), ("hum", hum_of)):
            if name in changes:
                changes = {**numbers(changes.pop(name)), **changes}
        super().set(**changes)

    def another_sample(self) -> None:
        """Draw the next sample of the same noise."""
        self.set(seed=self.request.seed + 1)

    def _first_request(self) -> NoiseRequest:
        return NoiseRequest()

    def _checked(self, design: Design, request: NoiseRequest) -> NoiseRequest:
        request = request.in_numbers()
        # What was evaluated to see whether it can be is what will be shown.
        self._run = (design, request, _found(design, request))
        return request

    def _own_sections(self) -> Sequence[Section]:
        desk = self._desk
        self.noise_section = NoiseSection(desk, lambda: self.request)
        self.sample_button: Any = desk.kit.make(
            widgets.Button,
            "chip",
            description="another sample",
            tooltip="draw another sample of the same noise",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )

        def clicked(_: Any) -> None:
            with desk.guarded("drawing another sample"):
                self.another_sample()

        self.sample_button.on_click(clicked)
        rows: list[Asked | Chosen] = [
            Asked(
                desk,
                "probability",
                "allowed share",
                "allowed probability of a further transition per passage",
                _read_probability,
                lambda value: f"{value:.9g}",
            ),
            Chosen(desk, "load", "load is on at", _STATES),
        ]
        # In a row of its own, or it would be as wide as the column.
        foot = desk.kit.make(widgets.HBox, "chips", children=[self.sample_button])
        self.asked = RequestSection(desk, "Passage", rows, lambda: self.request, [foot])
        return (self.noise_section, self.asked)

    def _figure(self, width_px: int) -> PictureView[Any]:
        return PictureView(self._desk, NoisePicture, width_px)

    def _below(self, width_px: int) -> Sequence[PictureView[Any]]:
        self.sample = PictureView(self._desk, NoiseSamplePicture, width_px)
        return (self.sample,)

    def _evaluate(self, design: Design) -> Levels:
        ran_design, ran_request, found = self._run
        if ran_design is not design or ran_request is not self.request:
            found = _found(design, self.request)
        self.scene = found
        return found.levels

    def _draw(self, design: Design) -> None:
        self.figure.show(self.scene)
        self.sample.show(self.scene)

    def _review(self, design: Design) -> Review:
        scene = self.scene
        return review(
            design,
            load=self.request.load,
            noise=scene.noise,
            slope=scene.slope,
            probability=scene.allowed,
        )

    def _tabulated(self, found: Levels, trips: TripPoints, law: SwitchingLaw) -> tuple[Rows, str]:
        rows = trip_rows(found, trips)
        rows += filled(noise_rows(self.scene), len(rows[0]))
        latex = law.latex("table", design=self.design)
        return rows, f"{latex}\n\n{self.scene.to_latex()}"


def _read_probability(text: str) -> float:
    return read(text, name="probability") if text.strip() else PROBABILITY


def _found(design: Design, request: NoiseRequest) -> NoiseScene:
    return noise_scene(
        design,
        request.noise(),
        request.slope,
        hum=request.hum,
        probability=request.probability,
        seed=request.seed,
    )

"""The trip points of a stage, live: ruler, switching loop, schematic, law and table."""

from __future__ import annotations

from typing import Any

from hystkit.circuit.design import Design
from hystkit.figures.loop import LoopPicture
from hystkit.numeric.loop import loop
from hystkit.numeric.views import Levels
from hystkit.panels.standard import StagePanel
from hystkit.panels.view import PictureView


class TripPanel(StagePanel):
    """Choose a form, move parts, and see trip points, loop, schematic and law follow.

    Parameters
    ----------
    design : Design
        What to begin with.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    result : TripPoints
        Its trip points.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = TripPanel(header_tank())
    >>> panel.set(R_F="220k")
    >>> print(f"{panel.result.width:.3f} V")
    0.358 V
    >>> panel.close()
    """

    def _figure(self, width_px: int) -> PictureView[Any]:
        self.loop = PictureView(self._desk, LoopPicture, width_px)
        return self.loop

    def _evaluate(self, design: Design) -> Levels:
        self._shown = loop(design)
        return self._shown.levels

    def _draw(self, design: Design) -> None:
        self.loop.show(self._shown)

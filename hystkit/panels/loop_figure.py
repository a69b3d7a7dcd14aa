"""Panels whose figure is the switching loop."""

from __future__ import annotations

from typing import Any

from hystkit.circuit.design import Design
from hystkit.figures.loop import LoopPicture
from hystkit.numeric.loop import loop
from hystkit.numeric.views import Levels
from hystkit.panels.standard import StagePanel
from hystkit.panels.view import PictureView


class LoopFigure(StagePanel):
    """A panel with the switching loop beside the schematic."""

    def _figure(self, width_px: int) -> PictureView[Any]:
        self.loop = PictureView(self._desk, LoopPicture, width_px)
        return self.loop

    def _evaluate(self, design: Design) -> Levels:
        self._looped = loop(design)
        return self._looped.levels

    def _draw(self, design: Design) -> None:
        self.loop.show(self._looped)

"""Live panels for notebooks: controls that propose a design, results that follow it."""

from hystkit.panels.base import Panel
from hystkit.panels.cycle import CyclePanel
from hystkit.panels.findings_panel import FindingsPanel
from hystkit.panels.noise import NoisePanel
from hystkit.panels.sizing import SizingPanel
from hystkit.panels.snapshot import Snapshot
from hystkit.panels.spread import SpreadPanel
from hystkit.panels.standard import StagePanel
from hystkit.panels.trip import TripPanel
from hystkit.panels.width import WindowPanel

__all__ = [
    "CyclePanel",
    "FindingsPanel",
    "NoisePanel",
    "Panel",
    "SizingPanel",
    "Snapshot",
    "SpreadPanel",
    "StagePanel",
    "TripPanel",
    "WindowPanel",
]

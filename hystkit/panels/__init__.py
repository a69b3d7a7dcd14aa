"""Live panels for notebooks: controls that propose a design, results that follow it."""

from hystkit.panels.base import Panel
from hystkit.panels.snapshot import Snapshot
from hystkit.panels.standard import StagePanel
from hystkit.panels.trip import TripPanel

__all__ = ["Panel", "Snapshot", "StagePanel", "TripPanel"]

"""Self-induced switching: what the load's own current does to the stage that switches it."""

from __future__ import annotations

from hystkit.analyses.load_step.hunting import Hunting
from hystkit.analyses.load_step.result import LoadStep, StepMeasurand
from hystkit.analyses.load_step.step import load_step

__all__ = ["Hunting", "LoadStep", "StepMeasurand", "load_step"]

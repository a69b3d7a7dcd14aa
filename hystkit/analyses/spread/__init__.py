"""Spread over tolerances, supply, device and temperature."""

from __future__ import annotations

from hystkit.analyses.spread.measurand import MeasurandSpread
from hystkit.analyses.spread.result import Spread
from hystkit.analyses.spread.spread import spread

__all__ = ["MeasurandSpread", "Spread", "spread"]

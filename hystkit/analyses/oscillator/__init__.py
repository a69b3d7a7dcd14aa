"""The stage as a relaxation oscillator: period, duty, and how far the frequency spreads."""

from __future__ import annotations

from hystkit.analyses.oscillator.frequency import FrequencySpread
from hystkit.analyses.oscillator.oscillate import oscillate
from hystkit.analyses.oscillator.result import Oscillation

__all__ = ["FrequencySpread", "Oscillation", "oscillate"]

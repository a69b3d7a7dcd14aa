"""Noise: how wide the hysteresis has to be for a quiet output."""

from __future__ import annotations

from hystkit.analyses.noise.chatter import Chatter, chatter
from hystkit.analyses.noise.hum import hum_width
from hystkit.analyses.noise.inverse import distance_for, width_for
from hystkit.analyses.noise.model import Noise
from hystkit.analyses.noise.rates import false_trip_rate, standing_cycles

__all__ = [
    "Chatter",
    "Noise",
    "chatter",
    "distance_for",
    "false_trip_rate",
    "hum_width",
    "standing_cycles",
    "width_for",
]

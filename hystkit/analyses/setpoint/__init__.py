"""The set point: a reference source and its divider, a trimmer and its padding resistors."""

from hystkit.analyses.setpoint.equivalent import Equivalent, as_divider, as_source
from hystkit.analyses.setpoint.padding import Padding, padding
from hystkit.analyses.setpoint.travel import Setting, Travel
from hystkit.analyses.setpoint.trim import trim
from hystkit.analyses.setpoint.trimmer import Trimmer

__all__ = [
    "Equivalent",
    "Padding",
    "Setting",
    "Travel",
    "Trimmer",
    "as_divider",
    "as_source",
    "padding",
    "trim",
]

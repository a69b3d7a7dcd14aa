"""What the output of a stage may drive: switches, loads, and clamps for coils."""

from hystkit.analyses.drive.clamps import (
    Clamp,
    ClampAtSwitch,
    Diode,
    DiodeAndResistor,
    DiodeAndZener,
)
from hystkit.analyses.drive.coil import Coil, Release
from hystkit.analyses.drive.lamps import Led, Optocoupler
from hystkit.analyses.drive.switches import Mosfet, Transistor

__all__ = [
    "Clamp",
    "ClampAtSwitch",
    "Coil",
    "Diode",
    "DiodeAndResistor",
    "DiodeAndZener",
    "Led",
    "Mosfet",
    "Optocoupler",
    "Release",
    "Transistor",
]

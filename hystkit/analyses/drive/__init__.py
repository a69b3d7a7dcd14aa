"""Drive: what the output of a stage switches, and what that does to the stage."""

from hystkit.analyses.drive.drive import drive
from hystkit.analyses.drive.led import LedDrive
from hystkit.analyses.drive.result import Drive
from hystkit.analyses.drive.switched import MosfetDrive, TransistorDrive

__all__ = [
    "Drive",
    "LedDrive",
    "MosfetDrive",
    "TransistorDrive",
    "drive",
]

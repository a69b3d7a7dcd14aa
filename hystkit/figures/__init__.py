"""Pictures: a result in, artists out; nothing about the circuit is computed here."""

from hystkit.figures.loop import LoopPicture, loop
from hystkit.figures.picture import Picture
from hystkit.figures.ruler import RulerPicture, ruler
from hystkit.figures.schematic import SchematicPicture, schematic
from hystkit.figures.theme import MARKS, THEMES, Mark, Theme
from hystkit.figures.timeline import TimelinePicture, timeline

__all__ = [
    "MARKS",
    "THEMES",
    "LoopPicture",
    "Mark",
    "Picture",
    "RulerPicture",
    "SchematicPicture",
    "Theme",
    "TimelinePicture",
    "loop",
    "ruler",
    "schematic",
    "timeline",
]

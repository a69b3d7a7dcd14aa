"""Pictures: a result in, artists out; nothing about the circuit is computed here."""

from hystkit.figures.contributions import ContributionsPicture, contributions
from hystkit.figures.cycle import CyclePicture, cycle
from hystkit.figures.hunting import HuntingPicture, hunting
from hystkit.figures.loop import LoopPicture, loop
from hystkit.figures.picture import Picture
from hystkit.figures.ruler import RulerPicture, ruler
from hystkit.figures.schematic import SchematicPicture, schematic
from hystkit.figures.spread import SpreadPicture, WindowedSpread, spread
from hystkit.figures.theme import MARKS, THEMES, Mark, Theme
from hystkit.figures.timeline import TimelinePicture, timeline

__all__ = [
    "MARKS",
    "THEMES",
    "ContributionsPicture",
    "CyclePicture",
    "HuntingPicture",
    "LoopPicture",
    "Mark",
    "Picture",
    "RulerPicture",
    "SchematicPicture",
    "SpreadPicture",
    "Theme",
    "TimelinePicture",
    "WindowedSpread",
    "contributions",
    "cycle",
    "hunting",
    "loop",
    "ruler",
    "schematic",
    "spread",
    "timeline",
]

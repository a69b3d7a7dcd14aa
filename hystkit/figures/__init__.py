"""Pictures: a result in, artists out; nothing about the circuit is computed here."""

from hystkit.figures.coil_release import CoilReleasePicture, coil_release
from hystkit.figures.contributions import ContributionsPicture, contributions
from hystkit.figures.cycle import CyclePicture, cycle
from hystkit.figures.hunting import HuntingPicture, hunting
from hystkit.figures.loop import LoopPicture, loop
from hystkit.figures.noise import NoisePicture, noise
from hystkit.figures.noise_sample import NoiseSamplePicture, noise_sample
from hystkit.figures.picture import Picture
from hystkit.figures.ruler import RulerPicture, ruler
from hystkit.figures.schematic import SchematicPicture, schematic
from hystkit.figures.spread import SpreadPicture, WindowedSpread, spread
from hystkit.figures.theme import MARKS, THEMES, Mark, Theme
from hystkit.figures.timeline import TimelinePicture, timeline
from hystkit.figures.window import WindowPicture, window

__all__ = [
    "MARKS",
    "THEMES",
    "CoilReleasePicture",
    "ContributionsPicture",
    "CyclePicture",
    "HuntingPicture",
    "LoopPicture",
    "Mark",
    "NoisePicture",
    "NoiseSamplePicture",
    "Picture",
    "RulerPicture",
    "SchematicPicture",
    "SpreadPicture",
    "Theme",
    "TimelinePicture",
    "WindowPicture",
    "WindowedSpread",
    "coil_release",
    "contributions",
    "cycle",
    "hunting",
    "loop",
    "noise",
    "noise_sample",
    "ruler",
    "schematic",
    "spread",
    "timeline",
    "window",
]

"""The width window: what the hysteresis must be at least, and what it may be at most."""

from hystkit.review.window.bound import Bound
from hystkit.review.window.window import WidthWindow, width_window

__all__ = ["Bound", "WidthWindow", "width_window"]

"""Pictures: a result in, artists out; nothing about the circuit is computed here."""

from hystkit.figures.picture import Picture
from hystkit.figures.theme import MARKS, THEMES, Theme

__all__ = ["MARKS", "THEMES", "Picture", "Theme"]

"""Text that moves: rendered once, then set as an image wherever it stands."""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Any

import numpy as np
from matplotlib.backend_bases import RendererBase
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.text import Text
from numpy.typing import NDArray

from hystkit.figures.lettering import width_px
from hystkit.figures.theme import PX_PER_INCH, LetterSize, letters

# Room around the letters [pixels], and their reach from the baseline, in heights of the font.
_EDGE = 3
_ABOVE, _BELOW = 1.1, 0.5


class Stamp(Text):
    """A text on one line, left-aligned on its baseline, that pixel pictures draw from a cache.

    Setting a text costs about 1 ms, more than all lines of a picture together, and the same few
    texts stand in several pictures and come back as a slider moves. Vector files get the text
    itself.

    Parameters
    ----------
    colour : str
        Colour.
    size : str
        Size of the letters.
    bold : bool
        Weight.
    math : bool
        Whether it is a symbol with an index.
    zorder : float
        Order of drawing.
    """

    def __init__(
        self, colour: str, size: LetterSize, bold: bool, math: bool, zorder: float
    ) -> None:
        super().__init__(
            0,
            0,
            "",
            color=colour,
            fontproperties=letters(size, bold),
            parse_math=math,
            zorder=zorder,
            va="baseline",
        )
        self._setting = (size, bold, math)

    def draw(self, renderer: RendererBase) -> None:
        """Draw the text."""
        if not isinstance(renderer, RendererAgg):
            super().draw(renderer)
            return
        if not (self.get_visible() and self.get_text()):
            return
        dpi = float(renderer.dpi)
        image, descent = _image(self.get_text(), str(self.get_color()), dpi, *self._setting)
        x, y = self.get_transform().transform(self.get_position())
        canvas: Any = renderer
        gc = canvas.new_gc()
        canvas.draw_image(gc, round(x) - _EDGE, round(y) - descent - _EDGE, image)
        gc.restore()
        self.stale = False


@lru_cache(maxsize=1024)
def _image(
    text: str, colour: str, dpi: float, size: LetterSize, bold: bool, math_text: bool
) -> tuple[NDArray[np.uint8], int]:
    """Render a text; also say how far it reaches below its baseline [pixels]."""
    font = letters(size, bold)
    height = font.get_size_in_points() * dpi / 72
    below = math.ceil(_BELOW * height)
    columns = math.ceil(width_px(text, size, bold, math_text) * dpi / PX_PER_INCH) + 2 * _EDGE
    rows = math.ceil(_ABOVE * height) + below + 2 * _EDGE
    canvas: Any = RendererAgg(columns, rows, dpi)  # type: ignore[no-untyped-call]
    gc = canvas.new_gc()
    gc.set_foreground(colour)
    canvas.draw_text(gc, _EDGE, rows - _EDGE - below, text, font, 0, math_text)
    # The renderer takes images from their lowest line upwards.
    return np.flipud(np.asarray(canvas.buffer_rgba())).copy(), below

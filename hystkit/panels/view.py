"""A picture in a panel: rendered to PNG at twice the size, with its words beside it."""

from __future__ import annotations

import html
from typing import Any, Generic, TypeVar

import ipywidgets as widgets

from hystkit.figures.picture import Picture
from hystkit.panels.desk import Desk

T = TypeVar("T")

#: Pixels of the file per px of the page, for screens of high density.
SCALE = 2
#: How small a picture may be shown; with less room than that, it scrolls.
LEAST_SCALE = 0.78


class PictureView(Generic[T]):
    """A kept picture and the widget that shows it.

    The words stand beside the picture for those who do not see it; the front end makes them the
    picture's alternative text, for which an Image has no trait.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    kind : type of Picture
        What to draw; with the theme "any", readable on light and on dark pages.
    width_px : int
        Room there is in px of the page.
    """

    def __init__(self, desk: Desk, kind: type[Picture[T]], width_px: int) -> None:
        kit = desk.kit
        self.picture = picture = kind("any", max(width_px, kind.min_width_px))
        # Scaled down where there is less room than it needs, but not until nobody can read it.
        self._layout = kit.own_layout(
            width=f"{picture.width_px}px",
            max_width="100%",
            min_width=f"{round(LEAST_SCALE * picture.min_width_px)}px",
            height="auto",
            margin="0 auto",
        )
        self.image: Any = kit.make(widgets.Image, "picture", format="png")
        self.image.layout = self._layout
        self.words: Any = kit.label("", "words")
        self.widget = kit.make(
            widgets.VBox,
            "view",
            children=[self.image, self.words],
            layout={"width": "100%"},
        )

    def show(self, data: T) -> None:
        """Show a result.

        Parameters
        ----------
        data : object
            What the picture takes.
        """
        self.picture.update(data)
        self._send()

    def fit(self, width_px: int) -> None:
        """Draw for another width; text keeps its size.

        Parameters
        ----------
        width_px : int
            Room there is in px of the page; a picture that needs more is scaled down.
        """
        width = max(width_px, self.picture.min_width_px)
        if width == self.picture.width_px:
            return
        self.picture.restyle(width_px=width)
        self._layout.width = f"{width}px"
        if self.image.value:
            self._send()

    def _send(self) -> None:
        self.image.value = self.picture.png(SCALE)
        self.words.value = html.escape(self.picture.alt)

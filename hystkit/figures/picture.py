"""A picture that is kept and updated in place."""

from __future__ import annotations

import io
from abc import ABC, abstractmethod
from collections.abc import Hashable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any, ClassVar, Generic, Self, TypeVar

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from hystkit.base.errors import Fault, InputError
from hystkit.base.files import ANOTHER_NAME, check_free, write_bytes
from hystkit.figures.png import encode
from hystkit.figures.theme import PX_PER_INCH, Theme, drawing, lettering, theme_of

T = TypeVar("T")
A = TypeVar("A", bound=Artist)

# matplotlib would write its version and the date into a file, and each run would differ.
_NO_METADATA: dict[str, dict[str, None]] = {
    ".png": {},
    ".svg": {"Date": None, "Creator": None},
    ".pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}


class Picture(ABC, Generic[T]):
    """A figure that stays, and follows its data by moving artists over a cached background.

    Subclasses say what the background depends on (`_layout_key`), draw it (`_lay_out`), set the
    artists that move (`_move`) and put the result into words (`_describe`). Whatever moves is
    registered with `_moving` and lies above everything that does not.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark", or "any" for a transparent picture that is readable on both.
    width_px : int, default 900
        Width in px of the page.

    Raises
    ------
    InputError
        If the picture cannot be drawn that narrow.
    """

    min_width_px: ClassVar[int] = 280

    def __init__(self, theme: str | Theme = "light", width_px: int = 900) -> None:
        self._theme = theme_of(theme)
        self._width_px = self._checked_width(width_px)
        self._height_px = 300
        self.figure = Figure(dpi=PX_PER_INCH)
        self._canvas: Any = FigureCanvasAgg(self.figure)
        self._movers: list[Artist] = []
        self._data: T | None = None
        self._key: Hashable = None
        self._background: Any = None
        self._alt = ""
        #: How often the background was drawn; a slider that moves must not raise it.
        self.full_redraws = 0

    @classmethod
    def of(cls, data: T, theme: str | Theme, width_px: int) -> Self:
        """Return a picture that shows `data` already.

        Parameters
        ----------
        data : object
            What the picture shows, of the kind that its class names.
        theme : str or Theme
            "light", "dark" or "any".
        width_px : int
            Width in px of the page.

        Returns
        -------
        Picture
            Of the class that it is asked of.
        """
        picture = cls(theme, width_px)
        picture.update(data)
        return picture

    # -- what a subclass says ---------------------------------------------------------------

    @abstractmethod
    def _layout_key(self, data: T) -> Hashable:
        """Everything of `data` that the background depends on."""

    @abstractmethod
    def _lay_out(self, data: T) -> None:
        """Draw the background on the empty figure and make the artists that move."""

    @abstractmethod
    def _move(self, data: T) -> None:
        """Set the artists that move."""

    @abstractmethod
    def _describe(self, data: T) -> str:
        """One sentence, with numbers, on what the picture shows."""

    # -- what a subclass uses ---------------------------------------------------------------

    def _resize(self, height_px: float) -> None:
        """Set the height; called from `_lay_out`."""
        self._height_px = round(height_px)
        self.figure.set_size_inches(self._width_px / PX_PER_INCH, self._height_px / PX_PER_INCH)

    def _page(self) -> Axes:
        """Return axes over the whole figure, in px of the page from the top left corner."""
        page = self.figure.add_axes((0.0, 0.0, 1.0, 1.0))
        page.set_xlim(0, self._width_px)
        page.set_ylim(self._height_px, 0)
        page.set_axis_off()
        return page

    def _moving(self, artist: A) -> A:
        """Register an artist that `_move` changes."""
        artist.set_animated(True)
        self._movers.append(artist)
        return artist

    # -- what everybody uses ----------------------------------------------------------------

    @property
    def theme(self) -> Theme:
        """Colours in use."""
        return self._theme

    @property
    def width_px(self) -> int:
        """Width in px of the page."""
        return self._width_px

    @property
    def height_px(self) -> int:
        """Height in px of the page; follows from the data."""
        return self._height_px

    @property
    def alt(self) -> str:
        """One sentence on what the picture shows, for readers who do not see it."""
        return self._alt

    def update(self, data: T) -> None:
        """Show `data`.

        Parameters
        ----------
        data : object
            What the picture shows, of the kind that its class names; never changed.
        """
        with lettering():
            key = (self._layout_key(data), self._theme, self._width_px)
            if key != self._key:
                self._start_afresh(data)
                self._key = key
            self._move(data)
        self._data = data
        self._alt = self._describe(data)

    def restyle(self, *, theme: str | Theme | None = None, width_px: int | None = None) -> None:
        """Change the theme or the width and show the same data again.

        Parameters
        ----------
        theme : str or Theme, optional
            New theme.
        width_px : int, optional
            New width in px of the page.
        """
        if theme is not None:
            self._theme = theme_of(theme)
        if width_px is not None:
            self._width_px = self._checked_width(width_px)
        if self._data is not None:
            self.update(self._data)

    def png(self, scale: float = 2) -> bytes:
        """Return the picture as PNG; fast when only moving artists changed.

        Parameters
        ----------
        scale : float, default 2
            Pixels of the file per px of the page.

        Returns
        -------
        bytes
        """
        self._blit(scale)
        return self._encode(scale)

    def full_png(self, scale: float = 2) -> bytes:
        """Return the same PNG without the cached background.

        Parameters
        ----------
        scale : float, default 2
            Pixels of the file per px of the page.

        Returns
        -------
        bytes
        """
        with drawing(), self._all_still():
            self.figure.set_dpi(PX_PER_INCH * scale)
            self._background = None
            self._canvas.draw()
        return self._encode(scale)

    def svg(self) -> str:
        """Return the picture as SVG; the same data gives the same text."""
        return self._written(".svg").decode("utf-8")

    def save(self, path: str | Path, *, overwrite: bool = False) -> Path:
        """Write the picture as .png (at scale 2), .svg or .pdf.

        Parameters
        ----------
        path : str or Path
            File to write; its ending says the format.
        overwrite : bool, default False
            Whether a file that is already there may be replaced.

        Returns
        -------
        Path
            The file.

        Raises
        ------
        InputError
            If the ending is none of these, or the file cannot be written.
        OutputExistsError
            If the file is there and `overwrite` is not set.
        """
        path = Path(path)
        ending = path.suffix.lower()
        if ending not in _NO_METADATA:
            raise InputError(
                f"a picture cannot be written as {path.suffix!r}.",
                asked=str(path),
                have=", ".join(_NO_METADATA),
                remedy="a file name with one of these endings",
            )
        check_free(path, ANOTHER_NAME, overwrite=overwrite)
        data = self.png() if ending == ".png" else self._written(ending)
        return write_bytes(path, data, overwrite=overwrite)

    def __repr__(self) -> str:
        """Say what it shows, for readers of the plain text of a notebook."""
        return f"<{type(self).__name__}: {self._alt or 'nothing drawn yet'}>"

    def _repr_png_(self) -> tuple[bytes, dict[str, Any]]:
        """Show the picture in a notebook at its own size."""
        return self.png(), {"width": self.width_px, "height": self.height_px, "alt": self.alt}

    # -- how it is done ---------------------------------------------------------------------

    def _start_afresh(self, data: T) -> None:
        self._key = self._background = None
        self._movers.clear()
        with drawing():
            self.figure.clear()
            self.figure.set_facecolor(self._theme.background)
            self._lay_out(data)

    def _checked_width(self, width_px: int) -> int:
        if width_px >= self.min_width_px:
            return int(width_px)
        fault = Fault(
            f"{type(self).__name__} cannot be drawn that narrow.",
            asked=f"width_px = {width_px}",
            rule=f"width_px >= {self.min_width_px}",
            remedy="a wider picture, scaled down where it is shown",
        )
        raise InputError.of("the picture", [fault])

    def _blit(self, scale: float) -> None:
        dpi = PX_PER_INCH * scale
        if self.figure.dpi != dpi:
            self.figure.set_dpi(dpi)
            self._background = None
        if self._background is None:
            with drawing():
                self._canvas.draw()
            self._background = self._canvas.copy_from_bbox(self.figure.bbox)
            self.full_redraws += 1
        else:
            self._canvas.restore_region(self._background)
        renderer = self._canvas.get_renderer()
        with lettering():
            for artist in sorted(self._movers, key=Artist.get_zorder):
                artist.draw(renderer)

    def _encode(self, scale: float) -> bytes:
        return encode(np.asarray(self._canvas.buffer_rgba()), PX_PER_INCH * scale)

    def _written(self, ending: str) -> bytes:
        file = io.BytesIO()
        dpi = self.figure.dpi
        with drawing(), self._all_still():
            self.figure.savefig(
                file, format=ending[1:], metadata=_NO_METADATA[ending], dpi=PX_PER_INCH
            )
        self.figure.set_dpi(dpi)
        return file.getvalue()

    @contextmanager
    def _all_still(self) -> Iterator[None]:
        """Draw everything in one go: matplotlib leaves artists out that are marked as moving."""
        for artist in self._movers:
            artist.set_animated(False)
        try:
            yield
        finally:
            for artist in self._movers:
                artist.set_animated(True)

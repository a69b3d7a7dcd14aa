"""Colours, marks and letters that all pictures share."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from functools import cache
from typing import Any, Literal

from matplotlib import rcParams, style
from matplotlib.font_manager import FontProperties

from hystkit.base.errors import UnknownNameError
from hystkit.base.nearest import unknown_name_fault

ThemeName = Literal["light", "dark", "any"]
LetterSize = Literal["text", "small", "title"]
Dashes = Literal["-"] | tuple[float, tuple[float, ...]]

#: Pixels of the page (CSS px) per inch at scale 1; every length of a picture is in these px.
PX_PER_INCH = 100
FONT = "DejaVu Sans"
_LETTER_PX: dict[str, float] = {"text": 12.5, "small": 11.5, "title": 13.5}

# Fixed settings for all drawing, so that nobody's own matplotlib style leaks into a picture.
_LETTERING = {
    "mathtext.fontset": "dejavusans",
    # Without hinting a text is exactly twice as wide at twice the scale: placement holds for both.
    "text.hinting": "none",
}
_DRAWING = _LETTERING | {
    "font.family": FONT,
    "svg.hashsalt": "hystkit",
    "svg.fonttype": "path",
    "pdf.fonttype": 42,
}


@dataclass(frozen=True)
class Theme:
    """Colours of a picture; every one readable on `background`.

    Attributes
    ----------
    name : str
        "light", "dark" or "any".
    background : str
        Colour of the paper, or "none" for a transparent picture.
    text, muted : str
        Main and secondary text; `muted` also draws ticks and witness lines.
    line : str
        Axes, supply rails and, in the schematic, the wiring.
    faint : str
        Guide lines that may go unseen.
    upper, lower : str
        Upper and lower trip point, and the path of the output that ends at each.
    band : str
        The band between the trips and its width; shaded with `band_alpha`.
    band_alpha : float
        Opacity of the shade.
    signal, common_mode, output, reference : str
        Signal, input range of the device, output levels, reference voltage.
    warning : str
        A margin that is too small; always beside a sign.
    """

    name: str
    background: str
    text: str
    muted: str
    line: str
    faint: str
    upper: str
    lower: str
    band: str
    band_alpha: float
    signal: str
    common_mode: str
    output: str
    reference: str
    warning: str


THEMES: dict[str, Theme] = {
    "light": Theme(
        name="light",
        background="#ffffff",
        text="#1b2430",
        muted="#5d6875",
        line="#1b2430",
        faint="#d5dae0",
        upper="#0068b0",
        lower="#b84800",
        band="#00714f",
        band_alpha=0.14,
        signal="#5b3fc4",
        common_mode="#5d6875",
        output="#1b2430",
        reference="#1b2430",
        warning="#a8173a",
    ),
    "dark": Theme(
        name="dark",
        background="#14181d",
        text="#e8ebee",
        muted="#9aa5b1",
        line="#e8ebee",
        faint="#343c46",
        upper="#5ab4f0",
        lower="#ff8f4d",
        band="#3fc79a",
        band_alpha=0.20,
        signal="#9d8cff",
        common_mode="#9aa5b1",
        output="#e8ebee",
        reference="#e8ebee",
        warning="#ff6f86",
    ),
    # Middle tones: no colour can have 4.5:1 on white and on near-black, about 4.3:1 is the most.
    "any": Theme(
        name="any",
        background="none",
        text="#7a7a7a",
        muted="#7a7a7a",
        line="#7a7a7a",
        faint="#80808066",
        upper="#1f7fc4",
        lower="#c65f1a",
        band="#15875f",
        band_alpha=0.24,
        signal="#7d68dd",
        common_mode="#7a7a7a",
        output="#7a7a7a",
        reference="#7a7a7a",
        warning="#d6456a",
    ),
}


@dataclass(frozen=True)
class Mark:
    """How one level is drawn, whatever its colour: a line style and a marker.

    Attributes
    ----------
    dashes : tuple
        matplotlib line style.
    marker : str
        matplotlib marker.
    filled : bool
        Whether the marker is solid.
    """

    dashes: Dashes
    marker: str
    filled: bool = True


MARKS: dict[str, Mark] = {
    "upper": Mark("-", "^"),
    "lower": Mark((0, (5, 2)), "v"),
    "output_high": Mark((0, (1, 2)), "D"),
    "output_low": Mark((0, (1, 2)), "D", filled=False),
    "reference": Mark((0, (6, 2, 1, 2)), "s", filled=False),
}


def theme_of(theme: str | Theme) -> Theme:
    """Return the theme of that name; a `Theme` of one's own passes through.

    Raises
    ------
    UnknownNameError
        If there is no theme of that name.
    """
    if isinstance(theme, Theme):
        return theme
    if theme in THEMES:
        return THEMES[theme]
    raise UnknownNameError.of("the theme", [unknown_name_fault("theme", theme, THEMES)])


@cache
def letters(size: LetterSize = "text", bold: bool = False) -> FontProperties:
    """Return the font of a text; sizes are in px of the page."""
    weight = "bold" if bold else "normal"
    points = _LETTER_PX[size] * 72 / PX_PER_INCH
    return FontProperties(family=FONT, weight=weight, size=points)


@cache
def symbol(name: str) -> str:
    r"""Return a name such as ``"V_OH"`` as it is set in a picture, with its index lowered.

    >>> symbol("V_OH")
    '$V_\\mathrm{OH}$'
    """
    head, underscore, index = name.partition("_")
    if not (underscore and head.isalpha() and index.replace("_", "").isalnum()):
        return name.replace("$", r"\$")
    index = index.replace("_", r"\_")
    return rf"${head}_\mathrm{{{index}}}$"


@contextmanager
def lettering() -> Iterator[None]:
    """Measure and move texts with our own settings; quicker than `drawing`, which sets all."""
    settings: Any = rcParams
    own = {name: settings[name] for name in _LETTERING}
    settings.update(_LETTERING)
    try:
        yield
    finally:
        settings.update(own)


@contextmanager
def drawing() -> Iterator[None]:
    """Draw with our own settings, whatever style the notebook uses."""
    with style.context(["default", _DRAWING]):
        yield

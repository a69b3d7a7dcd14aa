"""Marks of a picture as plain data, and their SVG: what Python bakes and the script draws alike."""

from __future__ import annotations

import html
import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from hystkit.symbolic.symbols import split_name

#: Letter sizes [px].
TEXT, SMALL = 12.5, 11.5
#: How much wider a bold text is set, at most.
BOLD = 1.13
#: Size of a lowered index, and how far it is lowered, as parts of the letter size.
INDEX, LOWERED = 0.74, 0.32
#: Between a symbol and what follows it [px].
SPACE = 4.0

#: Advance widths of the printable ASCII characters of a wide sans-serif face [1/100 of the size];
#: a reader's own face is as wide at most, so that labels placed with these do not touch.
ADVANCES = (
    32, 40, 46, 84, 64, 95, 78, 27, 39, 39, 50, 84, 32, 36, 32, 34, 64, 64, 64, 64, 64, 64, 64,
    64, 64, 64, 34, 34, 84, 84, 84, 53, 100, 68, 69, 70, 77, 63, 58, 77, 75, 29, 29, 66, 56, 86,
    75, 79, 60, 79, 69, 63, 61, 73, 68, 99, 69, 61, 69, 39, 34, 39, 84, 50, 50, 61, 63, 55, 63,
    62, 35, 63, 63, 28, 28, 58, 28, 97, 63, 61, 63, 63, 41, 52, 39, 63, 59, 82, 59, 59, 52, 64,
    34, 64, 84,
)  # fmt: skip
#: The same of some signs; every other character counts as one letter size.
SIGNS = {"−": 84, "µ": 64, "°": 50, "Ω": 76, "–": 50, "²": 40, "³": 40, "±": 84, "×": 84}

Mark = tuple[str, str, tuple[float, ...], tuple[str, ...]]


def text_width(text: str, size: float = SMALL, *, bold: bool = False) -> float:
    """Estimate how wide a text is set, rather too wide than too narrow.

    Parameters
    ----------
    text : str
        One line.
    size : float
        Letter size [px].
    bold : bool
        Whether it is set in bold.

    Returns
    -------
    float
        [px].
    """
    hundredths = 0
    for character in text:
        place = ord(character) - 32
        inside = 0 <= place < len(ADVANCES)
        hundredths += ADVANCES[place] if inside else SIGNS.get(character, 100)
    return hundredths / 100 * size * (BOLD if bold else 1.0)


def symbol_width(name: str, tail: str = "", size: float = SMALL) -> float:
    """Estimate the width of a symbol with its index lowered, and of what follows it.

    Parameters
    ----------
    name : str
        Such as "V_OH".
    tail : str
        What follows, such as "4.9 V".
    size : float
        Letter size [px].

    Returns
    -------
    float
        [px].
    """
    base, index = split_name(name)
    after = SPACE + text_width(tail, size) if tail else 0.0
    return text_width(base, size) + text_width(index, size * INDEX) + after


def cut(text: str, room: float, size: float = SMALL) -> str:
    """End a text with an ellipsis where it does not fit.

    Parameters
    ----------
    text : str
        Any text; runs of blanks become one.
    room : float
        Width that there is [px].
    size : float
        Letter size [px].

    Returns
    -------
    str
        On one line.
    """
    text = " ".join(text.split())
    if text_width(text, size) <= room:
        return text
    while text and text_width(f"{text}…", size) > room:
        text = text[:-1].rstrip()
    return f"{text}…"


def rounded(value: float) -> float:
    """Round a place to a hundredth of a pixel, halves upwards as the script does."""
    return math.floor(value * 100 + 0.5) / 100


@dataclass
class Pen:
    """Collects the marks of one picture.

    Attributes
    ----------
    width, height : float
        Of the picture [px].
    marks : list
        (kind, classes, places, texts), in the order of painting.
    """

    width: float
    height: float = 0.0
    marks: list[Mark] = field(default_factory=list)

    def line(self, look: str, x0: float, y0: float, x1: float, y1: float) -> None:
        """Draw a straight line."""
        self._add("line", look, (x0, y0, x1, y1))

    def box(self, look: str, left: float, top: float, right: float, bottom: float) -> None:
        """Draw a rectangle."""
        self._add("rect", look, (left, top, right - left, bottom - top))

    def shape(self, look: str, points: Sequence[tuple[float, float]]) -> None:
        """Draw a closed outline."""
        self._add("polygon", look, tuple(place for point in points for place in point))

    def trace(self, look: str, points: Sequence[tuple[float, float]]) -> None:
        """Draw an open polyline."""
        self._add("polyline", look, tuple(place for point in points for place in point))

    def text(self, look: str, x: float, y: float, text: str, align: str = "start") -> None:
        """Write a text on its baseline; `align` is start, middle or end."""
        if text:
            self._add("text", look, (x, y), align, text)

    def symbol(self, look: str, x: float, y: float, name: str, tail: str = "") -> None:
        """Write a symbol with its index, and what follows it, from its left end."""
        self._add("symbol", look, (x, y), *split_name(name), tail)

    def upright(self, look: str, x: float, y: float, text: str) -> None:
        """Write a text that reads upwards, centred on a place."""
        self._add("upright", look, (x, y), text)

    def _add(self, kind: str, look: str, places: tuple[float, ...], *texts: str) -> None:
        self.marks.append((kind, look, tuple(rounded(place) for place in places), texts))

    def svg(self, label: str, look: str) -> str:
        """Write the picture as an ``svg`` element.

        Parameters
        ----------
        label : str
            The picture in words.
        look : str
            Class of the element, without prefix.

        Returns
        -------
        str
            Without styles: colours come from the classes.
        """
        size = f"{_number(self.width)} {_number(self.height)}"
        body = "".join(_ELEMENTS[mark[0]](mark) for mark in self.marks)
        return (
            f'<svg class="hk-{look}" viewBox="0 0 {size}" role="img" '
            f'aria-label="{html.escape(label)}">{body}</svg>'
        )


def _number(value: float) -> str:
    return f"{value:.2f}".rstrip("0").rstrip(".")


def _looks(look: str) -> str:
    return " ".join(f"hk-{name}" for name in look.split())


def _attributes(mark: Mark, names: str) -> str:
    pairs = zip(names.split(), mark[2], strict=True)
    places = " ".join(f'{name}="{_number(place)}"' for name, place in pairs)
    return f'class="{_looks(mark[1])}" {places}'


def _line(mark: Mark) -> str:
    return f"<line {_attributes(mark, 'x1 y1 x2 y2')}/>"


def _rect(mark: Mark) -> str:
    return f"<rect {_attributes(mark, 'x y width height')}/>"


def _points(mark: Mark) -> str:
    places = " ".join(_number(place) for place in mark[2])
    return f'<{mark[0]} class="{_looks(mark[1])}" points="{places}"/>'


def _text(mark: Mark) -> str:
    align, text = mark[3]
    anchor = "" if align == "start" else f' text-anchor="{align}"'
    return f"<text {_attributes(mark, 'x y')}{anchor}>{html.escape(text)}</text>"


def _symbol(mark: Mark) -> str:
    inner = symbol_spans(*mark[3])
    return f"<text {_attributes(mark, 'x y')}>{inner}</text>"


def _upright(mark: Mark) -> str:
    x, y = (_number(place) for place in mark[2])
    return (
        f'<text class="{_looks(mark[1])}" text-anchor="middle" '
        f'transform="translate({x} {y}) rotate(-90)">{html.escape(mark[3][0])}</text>'
    )


def symbol_spans(base: str, index: str, tail: str = "") -> str:
    """Write a symbol as the content of an SVG ``text`` element.

    Parameters
    ----------
    base, index, tail : str
        Letter, its index, and what follows.

    Returns
    -------
    str
        ``tspan`` elements.
    """
    spans = f'<tspan class="hk-letter">{html.escape(base)}</tspan>'
    if index:
        spans += f'<tspan class="hk-index" dy="{LOWERED}em">{html.escape(index)}</tspan>'
    if tail:
        back = f' dy="-{_number(LOWERED * INDEX)}em"' if index else ""
        spans += f'<tspan dx="{_number(SPACE)}"{back}>{html.escape(tail)}</tspan>'
    return spans


_ELEMENTS = {
    "line": _line,
    "rect": _rect,
    "polygon": _points,
    "polyline": _points,
    "text": _text,
    "symbol": _symbol,
    "upright": _upright,
}

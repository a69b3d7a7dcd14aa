"""What the spread of both trips and of the width comes from, as bars."""

from __future__ import annotations

from collections.abc import Hashable, Mapping

from matplotlib.axes import Axes

from hystkit.analyses.spread.result import Spread
from hystkit.figures.drafting import SHADE, Ink, Tag, box, lettered, level_marker, segments, stretch
from hystkit.figures.lettering import one_line, short_unit
from hystkit.figures.picture import Picture
from hystkit.figures.ruler_plan import EDGE
from hystkit.figures.theme import Theme, symbol

KINDS = ("upper", "lower", "width")
OTHERS = "others"
#: Quantities with a row of their own; the rest stand together in one row.
MOST_ROWS = 10
_PITCH, _HEAD, _BAR = 20.0, 30.0, 11.0
_NAME_ROOM, _PERCENT_ROOM, _GAP = 92.0, 44.0, 14.0


class ContributionsPicture(Picture[Spread]):
    """Share of each quantity in the variance of upper, lower and width.

    With a signal, in the variance of what it reads there, its own parameters among the rest.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.
    """

    min_width_px = 360

    def _layout_key(self, data: Spread) -> Hashable:
        self._names, self._unit = _rows(data), _unit(data)
        return self._names, self._unit

    def _lay_out(self, data: Spread) -> None:
        page, theme = self._lay_out_page(), self._theme
        rows = len(self._names)
        muted = Ink(theme.muted, "small")
        widths = [ink.width(text) for text, ink in (_named(theme, n) for n in self._names)]
        widths.append(muted.width(self._unit))
        self._gutter = max(widths, default=0.0) + 8
        room = (self._width_px - 2 * EDGE - self._gutter) / len(KINDS)
        self._room = room - _GAP - _PERCENT_ROOM
        self._starts = {
            kind: EDGE + self._gutter + number * room for number, kind in enumerate(KINDS)
        }
        lettered(page, self._unit, (EDGE + self._gutter - 8, 17), muted, "right")
        for number, name in enumerate(self._names):
            self._name_row(page, name, _HEAD + (number + 0.5) * _PITCH + 4)
        bottom = _HEAD + max(rows, 1) * _PITCH
        for kind, x in self._starts.items():
            self._head(page, kind, x)
            segments(page, [((x, _HEAD), (x, bottom))], theme.line, 1.2)
        if not rows:
            text = "nothing is uncertain: no tolerance, drift or limits are stated"
            text = one_line(text, self._width_px - 2 * EDGE, "small")
            lettered(page, text, (EDGE, _HEAD + _PITCH + 12), muted)
        self._bars = {
            (kind, name): self._moving(
                box(page, _colour(theme, kind), 0.75, SHADE, hatch=_HATCH[kind])
            )
            for kind in KINDS
            for name in self._names
        }
        ink = [[Ink(theme.text, "small")]]
        self._tags = {key: Tag(page, ink, self._moving, "share") for key in self._bars}

    def _lay_out_page(self) -> Axes:
        rows = max(len(self._names), 2)
        self._resize(_HEAD + rows * _PITCH + EDGE)
        return self._page()

    def _name_row(self, page: Axes, name: str, baseline: float) -> None:
        text, ink = _named(self._theme, name)
        lettered(page, text, (EDGE + self._gutter - 8, baseline), ink, "right")

    def _head(self, page: Axes, kind: str, x: float) -> None:
        theme = self._theme
        colour = _colour(theme, kind)
        start = x
        if kind in ("upper", "lower"):
            mark = level_marker(page, kind, colour, theme.background, 8)
            mark.set_data([x + 5], [13])
            start = x + 14
        lettered(page, kind, (start, 17), Ink(colour, "small", bold=True))

    def _move(self, data: Spread) -> None:
        for kind in KINDS:
            shares = _shares(data, kind, self._names)
            x = self._starts[kind]
            for number, name in enumerate(self._names):
                share = shares[name]
                y = _HEAD + (number + 0.5) * _PITCH
                end = x + share * self._room
                stretch(self._bars[kind, name], x, y - _BAR / 2, end, y + _BAR / 2)
                self._tags[kind, name].write([_percent(share)])
                self._tags[kind, name].put(end + 5, y + 4)

    def _describe(self, data: Spread) -> str:
        if not self._names:
            return "Nothing is uncertain."
        parts = []
        for kind in KINDS:
            ranked = [(n, s) for n, s in _of(data, kind).items() if s >= 0.005]
            text = ", ".join(f"{name} {share:.0%}" for name, share in ranked[:4])
            parts.append(f"{kind} from {text or 'nothing'}")
        return f"Shares in the variance{self._unit and f' {self._unit}'}: {'; '.join(parts)}."


#: A pattern beside each colour.
_HATCH = {"upper": "", "lower": "////", "width": "...."}


def _colour(theme: Theme, kind: str) -> str:
    return theme.band if kind == "width" else str(getattr(theme, kind))


def _named(theme: Theme, name: str) -> tuple[str, Ink]:
    """Return a symbol with its index, or a device field in words, cut where it is too long."""
    if name[1:2] != "_":
        return one_line(name.replace("_", " "), _NAME_ROOM, "small"), Ink(theme.text, "small")
    ink = Ink(theme.text, "small", math=True)
    while ink.width(symbol(name)) > _NAME_ROOM:
        name = name[:-1].rstrip("_")
    return symbol(name), ink


def _of(data: Spread, kind: str) -> Mapping[str, float]:
    """Return the shares of a kind as a reader of the measurand sees them."""
    if data.measurand is None:
        return data.contributions[kind]
    return data.measurand.contributions[data.measurand.ends[kind]]


def _unit(data: Spread) -> str:
    """Return what the variance is in, where that is not volts."""
    unit = "" if data.measurand is None else short_unit(data.measurand.signal)
    return f"in {unit}" if unit else ""


def _rows(data: Spread) -> tuple[str, ...]:
    """Return the quantities in the order of the design, so that no bar changes its place."""
    box = data.box if data.measurand is None else data.measurand.box
    names = tuple(box.quantities)
    if len(names) <= MOST_ROWS:
        return names
    largest = {n: max(_of(data, kind).get(n, 0.0) for kind in KINDS) for n in names}
    kept = sorted(names, key=lambda n: -largest[n])[: MOST_ROWS - 1]
    return (*(name for name in names if name in kept), OTHERS)


def _shares(data: Spread, kind: str, names: tuple[str, ...]) -> dict[str, float]:
    found = _of(data, kind)
    shares = {name: found.get(name, 0.0) for name in names if name != OTHERS}
    if OTHERS in names:
        shares[OTHERS] = sum(share for name, share in found.items() if name not in shares)
    return shares


def _percent(share: float) -> str:
    if 0 < share < 0.005:
        return "< 1 %"
    return f"{100 * share:.0f} %"


def contributions(
    found: Spread, *, theme: str | Theme = "light", width_px: int = 900
) -> ContributionsPicture:
    """Return the picture of what a spread comes from.

    Parameters
    ----------
    found : Spread
        What to show.
    theme : str or Theme, default "light"
        "light", "dark" or "any".
    width_px : int, default 900
        Width in px of the page, >= 360.

    Returns
    -------
    ContributionsPicture
    """
    return ContributionsPicture.of(found, theme, width_px)

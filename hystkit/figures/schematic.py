"""The schematic of a stage, with part names and values."""

from __future__ import annotations

from collections.abc import Hashable, Iterator
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.font_manager import FontProperties

from hystkit.base.quantity import code, show
from hystkit.circuit.elements import FIXED_NODES, Resistor
from hystkit.figures.lettering import written
from hystkit.figures.picture import Picture
from hystkit.figures.schematic_custom import routed_sheet
from hystkit.figures.schematic_forms import form_sheet
from hystkit.figures.schematic_list import listed_sheet
from hystkit.figures.schematic_sheet import Sheet
from hystkit.figures.schematic_symbols import draw_sheet
from hystkit.figures.schematic_text import Fit, Lettering, Spot, fitted, is_crowded
from hystkit.figures.theme import FONT, PX_PER_INCH, Theme, symbol

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.text import Text

    from hystkit.circuit.design import Design

#: Room that is kept for values, so that moving a slider does not move the drawing.
_PART_ROOM, _LEVEL_ROOM = "88k88", "-88.88 V"
#: Distances of the rows of one's own circuit, in the order in which they are tried.
_ROW_PITCHES = (1.5, 1.8, 2.1)
_STROKE_PX = 1.5


class SchematicPicture(Picture["Design"]):
    """The circuit of a design, with IEC symbols.

    Parameters
    ----------
    theme : str or Theme, default "light"
        "light", "dark", or "any" for a transparent picture.
    width_px : int, default 520
        Width in px of the page; the height follows from the circuit.
    """

    min_width_px = 340

    def __init__(self, theme: str | Theme = "light", width_px: int = 520) -> None:
        super().__init__(theme, width_px)
        self._values: dict[str, list[Text]] = {}
        #: What the last full redraw put on paper.
        self.sheet: Sheet | None = None

    def _layout_key(self, design: Design) -> Hashable:
        texts = value_texts(design)
        rooms = tuple(len(_room(name, text, design)) for name, text in texts.items())
        stage = design.stage
        return (design.elements, stage.supply, stage.output, _quantity(design), rooms)

    def _lay_out(self, design: Design) -> None:
        lettering = Lettering(
            name_px=_between(13.0, self.width_px / 36, 15.0),
            value_px=_between(11.5, self.width_px / 40, 13.5),
            width_of=_width_px,
        )
        fit = self._fit(design, lettering)
        self._resize(fit.height_px)
        axes = self.figure.add_axes((0.0, 0.0, 1.0, 1.0))
        axes.set_axis_off()
        axes.set_xlim(fit.left, fit.left + self.width_px / fit.scale)
        axes.set_ylim(fit.top - fit.height_px / fit.scale, fit.top)
        axes.set_autoscale_on(False)
        stroke = _STROKE_PX * 72 / PX_PER_INCH
        draw_sheet(fit.sheet, axes, colour=self.theme.line, line_width=stroke)
        self._write(axes, fit)
        self.sheet = fit.sheet

    def _fit(self, design: Design, lettering: Lettering) -> Fit:
        """Choose the drawing: the first one with room for its texts."""
        for sheet in sheets_of(design):
            spots = self._spots(sheet, lettering, design)
            fit = fitted(sheet, spots, lettering, self.width_px)
            if not is_crowded(fit):
                break
        return fit

    def _write(self, axes: Axes, fit: Fit) -> None:
        self._values = {}
        for spot in fit.spots:
            x, y = fit.place(spot)
            of_signal = spot.label.key in ("V_IN", "signal")
            text = axes.text(
                x,
                y,
                spot.text,
                ha=spot.label.align,
                va="baseline",
                color=self.theme.signal if of_signal else self.theme.text,
                fontfamily=FONT,
                fontsize=spot.size_px * 72 / PX_PER_INCH,
                parse_math=spot.label.kind == "name",
                zorder=5,
            )
            if spot.label.kind == "value":
                self._values.setdefault(spot.label.key, []).append(self._moving(text))

    def _move(self, design: Design) -> None:
        texts = value_texts(design)
        for name, artists in self._values.items():
            for artist in artists:
                artist.set_text(texts[name])

    def _describe(self, design: Design) -> str:
        return "".join(_sentences(design))

    def _spots(self, sheet: Sheet, lettering: Lettering, design: Design) -> list[Spot]:
        """Measure the texts of a sheet."""
        texts = value_texts(design)
        quantity = _quantity(design)
        spots = []
        for label in sheet.labels:
            if label.kind == "name":
                spots.append(lettering.name(label, symbol(label.key)))
            elif label.kind == "value":
                text = texts[label.key]
                spots.append(lettering.value(label, text, _room(label.key, text, design)))
            elif label.kind == "word":
                spots.append(lettering.value(label, label.key, label.key))
            elif quantity:
                spots.append(lettering.value(label, quantity, quantity))
        return spots


def schematic(
    design: Design, theme: str | Theme = "light", width_px: int = 520
) -> SchematicPicture:
    """Draw the schematic of a design.

    Parameters
    ----------
    design : Design
        Any built-in form with any of its optional parts, or a circuit of one's own.
    theme : str or Theme, default "light"
        "light", "dark", or "any" for a transparent picture.
    width_px : int, default 520
        Width in px of the page.

    Returns
    -------
    SchematicPicture
        The picture; `update` it with another design.
    """
    return SchematicPicture.of(design, theme, width_px)


def sheets_of(design: Design) -> Iterator[Sheet]:
    """Lay out the circuit of a design.

    Parameters
    ----------
    design : Design
        The design.

    Yields
    ------
    Sheet
        What stands where, in drawing units. A circuit of one's own has several, from the most
        telling to the one that needs the least width.
    """
    split = design.stage.supply == "split"
    open_collector = design.stage.output == "open-collector"
    if not design.stage.is_custom:
        yield form_sheet(design.elements, split=split, open_collector=open_collector)
        return
    for pitch in _ROW_PITCHES:
        yield routed_sheet(
            design.elements, split=split, open_collector=open_collector, row_pitch=pitch
        )
    for columns in (2, 1):
        yield listed_sheet(
            design.elements, split=split, open_collector=open_collector, columns=columns
        )


def value_texts(design: Design) -> dict[str, str]:
    """Write the value of every part and voltage as it stands on the schematic.

    Parameters
    ----------
    design : Design
        The design.

    Returns
    -------
    dict
        Symbol to text: letter code of IEC 60062 for parts, volts for levels.
    """
    texts = {name: code(part.value) for name, part in design.parts.items()}
    levels = {name: written(v) for name, v in design.values.items() if name.startswith("V_")}
    return levels | texts


_WORDS = {
    "plus": "the plus input",
    "minus": "the minus input",
    "out": "the output",
    "signal": "the signal",
    "ground": "ground",
}


def _sentences(design: Design) -> Iterator[str]:
    texts = value_texts(design)

    def words(node: str) -> str:
        if node in _WORDS:
            return _WORDS[node]
        if node not in FIXED_NODES:
            return f"node {node}"
        name = FIXED_NODES[node]
        return f"{name} ({texts[name]})" if name in texts else "ground"

    yield f"Schematic, {design.stage.title}. "
    if quantity := _quantity(design):
        yield f"The signal is {quantity}. "
    for element in design.elements:
        if isinstance(element, Resistor):
            ohms = show(design.parts[element.name].value, "Ω")
            yield f"{element.name} {ohms} from {words(element.node_a)} to {words(element.node_b)}. "
        else:
            yield f"Wire from {words(element.node_a)} to {words(element.node_b)}. "
    yield f"Supply {texts['V_CC']}"
    yield f" and {texts['V_EE']}." if "V_EE" in texts else "."


# At the scale of the page, whatever the scale of the picture: both must place texts alike.
_RULE: Any = RendererAgg(1, 1, PX_PER_INCH)  # type: ignore[no-untyped-call]


@lru_cache(maxsize=4096)
def _width_px(text: str, size_px: float, is_math: bool) -> float:
    """Measure a text [px]."""
    font = FontProperties(family=FONT, size=size_px * 72 / PX_PER_INCH)
    return float(_RULE.get_text_width_height_descent(text, font, is_math)[0])


def _quantity(design: Design) -> str:
    """Return what the signal measures, on one line."""
    return " ".join(design.signal.name.split()) if design.signal else ""


def _room(name: str, text: str, design: Design) -> str:
    """Return the text whose width is kept for a value."""
    return max(_PART_ROOM if name in design.parts else _LEVEL_ROOM, text, key=len)


def _between(low: float, value: float, high: float) -> float:
    return max(low, min(value, high))

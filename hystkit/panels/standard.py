"""The grid that all panels share: controls, ruler, findings, schematic, law and table."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Sequence
from typing import Any

import ipywidgets as widgets
from traitlets import Instance

from hystkit.circuit.design import Design
from hystkit.figures.ruler import RulerPicture
from hystkit.figures.schematic import SchematicPicture
from hystkit.numeric.levels import levels
from hystkit.numeric.trips import TripPoints, trip_points
from hystkit.numeric.views import Levels
from hystkit.panels import findings, table
from hystkit.panels.base import Panel, Section, cards, flowing
from hystkit.panels.copying import CopyButton
from hystkit.panels.desk import Desk
from hystkit.panels.device import DeviceSection
from hystkit.panels.form import FormSection
from hystkit.panels.law import LawView, headed
from hystkit.panels.levels import LevelsSection
from hystkit.panels.parts import PartsSection
from hystkit.panels.snapshot import Snapshot, Still
from hystkit.panels.view import PictureView
from hystkit.review.finding import Review
from hystkit.review.review import review
from hystkit.symbolic.law import SwitchingLaw, derive

#: Room that a card takes beside its content, and that stands between two cards [px].
_FRAME, _GAP = 26, 10
#: Share of the schematic's card, and its limits [px].
_SHARE, _LEAST, _MOST = 0.44, 340, 480
_FIGURE = f"999 1 {_LEAST}px"
_SCHEMATIC = f"1 1 clamp({_LEAST}px, {100 * _SHARE:.0f}%, {_MOST}px)"
#: Room from which figure and schematic stand side by side; reported in steps of 20 px.
_TWO_COLUMNS = _LEAST + _GAP + _LEAST + 10


class StagePanel(Panel):
    """A panel with the shared grid; a subclass brings its figure, and sections of its own.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    result : TripPoints
        Its trip points.
    reviewed : Review
        Findings on it.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.
    """

    reviewed = Review(())
    result = Instance(TripPoints, allow_none=True, read_only=True)

    @abstractmethod
    def _figure(self, width_px: int) -> PictureView[Any]:
        """Make the view of the panel's own figure."""

    @abstractmethod
    def _draw(self, design: Design) -> None:
        """Show the own figure, after `_evaluate`."""

    def _below(self, width_px: int) -> Sequence[PictureView[Any]]:
        """Make views of further pictures, which stand below the figure; none by default."""
        return ()

    def _own_cards(self) -> Sequence[Any]:
        """Make cards that stand between the findings and the figure; none by default."""
        return ()

    def _review(self, design: Design) -> Review:
        """Review a design."""
        return review(design)

    def _show_review(self, found: Review) -> None:
        """Show what was found."""
        self.findings.show(found)

    def _remarks(self) -> tuple[str, ...]:
        """Give the findings that a plain output tells."""
        return findings.remarks(self.reviewed)

    def _tabulated(
        self, found: Levels, trips: TripPoints, law: SwitchingLaw
    ) -> tuple[table.Rows, str]:
        """Write the rows of the table, and LaTeX to copy."""
        return table.trip_rows(found, trips), law.latex("table", design=self.design)

    def _evaluate(self, design: Design) -> Levels:
        """Evaluate the levels, and with them whatever the own figure shows."""
        return levels(design)

    def _own_sections(self) -> Sequence[Section]:
        """Make sections that stand below those of the parts; none by default."""
        return ()

    def _sections(self) -> Sequence[Section]:
        desk = self._desk
        self.form = FormSection(desk)
        self.parts = PartsSection(desk)
        self.levels = LevelsSection(desk)
        self.device = DeviceSection(desk)
        self.export = ExportSection(desk)
        own = self._own_sections()
        return [self.form, self.parts, *own, self.levels, self.device, self.export]

    def _results(self) -> Sequence[Any]:
        desk = self._desk
        ruler, figure, schematic = _widths(self._room)
        self.ruler = PictureView(desk, RulerPicture, ruler)
        self.figure = self._figure(figure)
        self.below = tuple(self._below(figure))
        self.schematic = PictureView(desk, SchematicPicture, schematic)
        self.findings = FindingsLine(desk)
        self.law = LawView(desk)
        self.trips = TripTable(desk)
        return [
            cards(desk, (self.ruler.widget, "1 1 100%")),
            self.findings.widget,
            *self._own_cards(),
            cards(desk, (self._stacked(), _FIGURE), (self.schematic.widget, _SCHEMATIC)),
            # The table stands right of the law, and above it where there is room for one only.
            flowing(desk, [self.trips.widget, self.law.widget], "row-reverse wrap"),
        ]

    def _follow(self, design: Design) -> None:
        guarded = self._desk.guarded
        trips = trip_points(design)
        self.set_trait("result", trips)
        found = self._evaluate(design)
        with guarded("drawing the ruler"):
            self.ruler.show(found)
        with guarded("drawing the figure"):
            self._draw(design)
        with guarded("drawing the schematic"):
            self.schematic.show(design)
        with guarded("reviewing the design"):
            self.reviewed = self._review(design)
            self._show_review(self.reviewed)
        law = derive(design).for_design(design)
        with guarded("writing the table"):
            self.trips.show(*self._tabulated(found, trips, law))
        with guarded("writing the law"):
            self.law.show(law, design)

    def _fit(self, room_px: int) -> None:
        ruler, figure, schematic = _widths(room_px)
        widths = (ruler, figure, *(figure for _ in self.below), schematic)
        for view, width in zip(self._views, widths, strict=True):
            with self._desk.guarded("drawing a picture"):
                view.fit(width)

    @property
    def _views(self) -> tuple[PictureView[Any], ...]:
        return (self.ruler, self.figure, *self.below, self.schematic)

    def _stacked(self) -> Any:
        """Stack the pictures of the figure's card."""
        if not self.below:
            return self.figure.widget
        return self._desk.kit.make(
            widgets.VBox,
            "stack",
            children=[self.figure.widget, *(view.widget for view in self.below)],
            layout={"width": "100%", "margin": "0", "grid_gap": "10px"},
        )

    def snapshot(self) -> Snapshot:
        """Return what is shown as a plain output, for pages without a kernel.

        Returns
        -------
        Snapshot
            Pictures, table and formula.
        """
        design = self.design
        stills = (
            Still(view.image.value, view.picture.alt, view.picture.width_px) for view in self._views
        )
        return Snapshot(
            title=": ".join(text for text in (design.name, design.stage.title) if text),
            stills=tuple(still for still in stills if still.png),
            rows=self.trips.rows,
            latex=self.law.latex,
            remarks=self._remarks(),
        )


class FindingsLine:
    """What stands out, in one line under the ruler.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self.widget: Any = desk.kit.label("", "findings")

    def show(self, found: Review) -> None:
        """Show findings.

        Parameters
        ----------
        found : Review
            Of the design that is shown.
        """
        self.widget.value = findings.line(found)


class TripTable:
    """Trip points as a table, with a button that copies them for a report.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self.rows: table.Rows = []
        self.copy = CopyButton(desk, "copy table", "copy parts and trips as a LaTeX table")
        self.table: Any = desk.kit.label("", "table")
        self.widget = desk.kit.make(
            widgets.VBox,
            "card",
            children=[headed(desk, "Trip points", [self.copy.widget]), self.table],
            layout={"flex": "2 1 340px", "min_width": "0", "margin": "0"},
        )

    def show(self, rows: table.Rows, latex: str) -> None:
        """Show trip points.

        Parameters
        ----------
        rows : list of tuple of str
            The first one is the heading.
        latex : str
            What the button copies.
        """
        self.rows = rows
        self.table.value = table.as_html(rows)
        self.copy.show(latex)


class ExportSection:
    """What can be taken away, at the foot of the controls.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    """

    def __init__(self, desk: Desk) -> None:
        self.python = CopyButton(desk, "copy Python", "copy the design as Python")
        self.widget = desk.kit.make(
            widgets.HBox,
            "section",
            children=[self.python.widget],
            layout={"width": "100%", "margin": "0", "flex_flow": "row wrap"},
        )

    def show(self, design: Design) -> None:
        """Offer a design.

        Parameters
        ----------
        design : Design
            The model.
        """
        self.python.show(f"import hystkit as hk\n\ndesign = {design.as_code()}\n")


def _widths(room_px: int) -> tuple[int, int, int]:
    """Give the widths of ruler, figure and schematic for the room of the results [px]."""
    ruler = room_px - _FRAME
    if room_px < _TWO_COLUMNS:
        return ruler, ruler, min(ruler, _MOST)
    schematic = round(min(max(_SHARE * room_px, _LEAST), _MOST))
    return ruler, room_px - _GAP - schematic - _FRAME, schematic - _FRAME

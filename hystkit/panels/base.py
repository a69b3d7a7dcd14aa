"""What every panel is: one frozen design, controls that propose changes, results that follow."""

from __future__ import annotations

import html
import traceback
from abc import abstractmethod
from collections.abc import Iterable, Sequence
from typing import Any, Protocol

import ipywidgets as widgets
from traitlets import Instance, Unicode, observe

from hystkit.base.errors import DesignError
from hystkit.circuit.design import Design
from hystkit.circuit.record import MIME, to_record
from hystkit.panels.desk import Changes, Desk
from hystkit.panels.page import page_setup
from hystkit.panels.revise import revised
from hystkit.panels.snapshot import Snapshot

#: Width that results are drawn for until the page says how much room there is [px].
FIRST_ROOM = 780


class Section(Protocol):
    """Controls for one group of values."""

    @property
    def widget(self) -> Any:
        """What stands in the control column."""

    def show(self, design: Design) -> None:
        """Show what the design says, and no refusal any more."""


class Panel(widgets.VBox):
    """A design with controls at the left and results at the right.

    The design is the truth. A control proposes a changed copy; setting `design`, from a control
    or from code, makes every control and every result follow, once.

    Subclasses give `_sections`, `_results` and `_follow`.

    Parameters
    ----------
    design : Design
        What to begin with.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Raises
    ------
    DesignError
        If it is not given a design.
    """

    design = Instance(Design)
    error = Unicode(read_only=True)

    def __init__(self, design: Design) -> None:
        if not isinstance(design, Design):
            raise DesignError(
                "a panel shows a design.",
                asked=f"{type(self).__name__}({type(design).__name__})",
                remedy="a hystkit.Design",
            )
        self._desk = Desk(self._apply, self._restore, self._report)
        self._room = FIRST_ROOM
        layout = self._desk.kit.layout(width="100%", margin="0")
        super().__init__(_dom_classes=["hystkit-panel"], layout=layout)
        self._controls = list(self._sections())
        self._failures = self._desk.kit.label("", "error")
        self._build()
        self.design = design

    # -- what a subclass gives --------------------------------------------------------------

    @abstractmethod
    def _sections(self) -> Sequence[Section]:
        """Make the sections of the control column."""

    @abstractmethod
    def _results(self) -> Sequence[Any]:
        """Make the widgets of the results, from top to bottom."""

    @abstractmethod
    def _follow(self, design: Design) -> None:
        """Evaluate a design and show its results."""

    @abstractmethod
    def _fit(self, room_px: int) -> None:
        """Draw for another width of the results."""

    @abstractmethod
    def snapshot(self) -> Snapshot:
        """Return what is shown as a plain output, for pages without a kernel.

        Returns
        -------
        Snapshot
            Pictures, table and formula.
        """

    # -- what everybody uses ----------------------------------------------------------------

    def set(self, **changes: Any) -> None:
        """Change several values at once.

        Parameters
        ----------
        **changes : object
            Parts and levels by name ("R_F", "V_REF", ...; a bare value keeps the tolerance, None
            takes an optional part out), "V_CC", "V_EE", "supply_tol", fields of `Device`
            ("device_name" for its name), "device_class" (a name in `hystkit.device_classes`),
            "sense", "supply", "reference", "output", "name", "signal".

        Raises
        ------
        UnknownNameError
            If a name is none of these.
        DesignError
            Naming every fault; nothing is changed then.
        """
        self.design = revised(self.design, changes, self._desk.spare)

    def as_code(self) -> str:
        """Write the Python that rebuilds the design.

        Returns
        -------
        str
            One expression that needs only ``import hystkit as hk``.
        """
        return self.design.as_code()

    def close(self) -> None:
        """Close the panel with every widget that it made."""
        if self.comm is None:
            return
        super().close()
        self._desk.kit.close()
        self.unobserve_all()

    def __repr__(self) -> str:
        """Return what it is and what it shows."""
        return f"<{type(self).__name__}: {self.design.stage.title}>"

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, Any]:
        bundle: dict[str, Any] = super()._repr_mimebundle_(**kwargs) or {}
        with self._desk.guarded("writing a plain output"):
            still = self.snapshot()
            bundle |= {"text/plain": still.to_text(), "text/html": still.to_html()}
            bundle[MIME] = to_record(self.design)
        return bundle

    # -- how it is done ---------------------------------------------------------------------

    def _build(self) -> None:
        kit = self._desk.kit
        page = kit.label(page_setup(), "page")
        room = kit.make(
            widgets.Text,
            "room",
            continuous_update=False,
            tabbable=False,
            layout={"display": "none"},
        )
        self._desk.listen(room, self._read_room, lambda _: None)
        controls = kit.make(
            widgets.VBox,
            "controls",
            children=[section.widget for section in self._controls],
            layout={"flex": "1 1 350px", "min_width": "0", "margin": "0"},
        )
        results = kit.make(
            widgets.VBox,
            "results",
            children=[self._failures, *self._results()],
            layout={"flex": "999 1 520px", "min_width": "0", "margin": "0", "grid_gap": "10px"},
        )
        body = kit.make(
            widgets.Box,
            "body",
            children=[controls, results],
            layout={
                "display": "flex",
                "flex_flow": "row wrap",
                "align_items": "flex-start",
                "grid_gap": "10px",
                "width": "100%",
                "margin": "0",
            },
        )
        self.children = [page, room, body]

    @observe("design")
    def _changed(self, change: Changes) -> None:
        self.set_trait("error", "")
        with self._desk.guarded("showing the controls"):
            self._desk.spare.remember(self.design)
            self._restore()
        with self._desk.guarded("evaluating the design"):
            self._follow(self.design)
        self._failures.value = self.error

    def _apply(self, changes: Changes) -> None:
        if not changes:
            return
        before = self.design
        self.set(**changes)
        if self.design == before:
            # Nothing new, but what was typed may be written otherwise, or stand refused.
            self._restore()

    def _restore(self) -> None:
        with self._desk.silence():
            for section in self._controls:
                section.show(self.design)
        self._desk.typed = False

    def _report(self, doing: str, failure: Exception) -> None:
        lines = "".join(traceback.format_exception(failure))
        text = (
            f'<div role="alert">Error while {html.escape(doing)}: '
            f"{html.escape(type(failure).__name__)}: {html.escape(str(failure))}"
            f"<details><summary>where</summary><pre>{html.escape(lines)}</pre></details></div>"
        )
        self.set_trait("error", self.error + text)
        self._failures.value = self.error

    def _read_room(self, text: str) -> Changes:
        if text.isascii() and text.isdecimal():
            self._room = min(max(int(text), 300), 2400)
            self._fit(self._room)
        return {}


def cards(desk: Desk, *cells: tuple[Any, str]) -> Any:
    """Lay cards out side by side; they stack where there is no room.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    *cells : tuple of widget and str
        Each with its CSS flex.

    Returns
    -------
    ipywidgets.Box
        The row.
    """
    kit = desk.kit
    boxes = [
        kit.make(
            widgets.VBox,
            "card",
            children=[cell],
            layout={"flex": flex, "min_width": "0", "margin": "0"},
        )
        for cell, flex in cells
    ]
    return flowing(desk, boxes)


def flowing(desk: Desk, boxes: Iterable[Any], flow: str = "row wrap") -> Any:
    """Lay boxes out side by side; they stack where there is no room.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    boxes : iterable of ipywidgets.DOMWidget
        Each brings its CSS flex.
    flow : str, default "row wrap"
        CSS flex-flow.

    Returns
    -------
    ipywidgets.Box
        The row.
    """
    return desk.kit.make(
        widgets.Box,
        "flow",
        children=list(boxes),
        layout={
            "display": "flex",
            "flex_flow": flow,
            "align_items": "stretch",
            "grid_gap": "10px",
            "width": "100%",
            "margin": "0",
        },
    )

"""The width window in words: bounds, the trips to aim at, and what would open an empty one."""

from __future__ import annotations

import html
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import ipywidgets as widgets

from hystkit.base.fields import Field, Viewed
from hystkit.circuit.design import Design
from hystkit.figures.window_plan import bound_text, ordered, shown, unit_of, verdict
from hystkit.panels.copying import CopyButton
from hystkit.panels.desk import Desk
from hystkit.panels.law import headed
from hystkit.panels.sizing_request import SizingRequest
from hystkit.panels.table import Rows, as_html
from hystkit.review.window import WidthWindow
from hystkit.review.window.openings import Opening


class WindowCard:
    """What binds, where to switch, and changes that open the window, with a button each.

    Changes are searched when the button is pressed: each is tried by running it, which takes
    longer than a slider may.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    take : callable
        Takes the changes of an opening.
    """

    def __init__(self, desk: Desk, take: Callable[[Mapping[str, Any]], None]) -> None:
        self._desk, self._take = desk, take
        self._window: WidthWindow | None = None
        self._rows: list[_Row] = []
        self.openings: tuple[Opening, ...] = ()
        kit = desk.kit
        self.said: Any = kit.label("")
        self.copy = CopyButton(desk, "copy sizing", "copy the call that finds parts for the target")
        self.find = kit.make(
            widgets.Button,
            "chip",
            description="find changes",
            tooltip="find the smallest changes that open the window",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )
        self.find.on_click(self._clicked)
        self.table: Any = kit.label("", "table")
        for name in ("hystkit-wrapped", "hystkit-bounds"):
            self.table.add_class(name)
        self._actions = kit.make(
            widgets.HBox, "chips", children=[self.find], layout={"width": "auto", "margin": "0"}
        )
        self._nothing = kit.label("no change that was tried opens it", "quiet")
        self._list = kit.make(widgets.VBox, layout={"width": "100%", "margin": "0"})
        self.widget = kit.make(
            widgets.VBox,
            "card",
            children=[
                headed(desk, "Width window", [self._actions]), self.said, self._list, self.table,
            ],
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )  # fmt: skip

    @property
    def lines(self) -> tuple[str, ...]:
        """What the card says, as sentences for a plain output."""
        if self._window is None:
            return ()
        target = target_text(self._window)
        found = (f"would open it: {opening.text}" for opening in self.openings)
        return (_signed(self._window), *([target] if target else []), *found)

    @property
    def buttons(self) -> list[Any]:
        """Buttons of the changes that were found."""
        return [row.button for row in self._rows[: len(self.openings)]]

    def show(self, found: WidthWindow | None, message: str, design: Design, load: str) -> None:
        """Show a window.

        Parameters
        ----------
        found : WidthWindow or None
            None where there is none.
        message : str
            Why; plain text.
        design : Design
            For the call that finds parts.
        load : {"high", "low"}
            Output state in which the load is on.
        """
        self._window, self.openings = found, ()
        self._list.children = ()
        if found is None:
            self.said.value = _line("warning", f"! {message}")
            self.table.value, self._actions.children = "", ()
            return
        said = _line("pass" if found.inside else "warning", _signed(found))
        target = target_text(found)
        self.said.value = f"{said}<br>{html.escape(target)}" if target else said
        self.table.value = as_html(bound_rows(found)) if found.bounds else ""
        if found.feasible is None:
            self._actions.children = (self.find,)
            return
        self._actions.children = (self.copy.widget,)
        self.copy.show(sizing_code(found, design, load))

    def search(self) -> None:
        """Search what would open the window, and list it."""
        found = self._window
        if found is None or found.feasible is not None:
            return
        self.openings = found.openings
        while len(self._rows) < len(self.openings):
            self._rows.append(_Row(self._desk, len(self._rows), self._chosen))
        for row, opening in zip(self._rows, self.openings, strict=False):
            row.show(opening, unit_of(found))
        self._list.children = [row.widget for row in self._rows[: len(self.openings)]]
        if not self.openings:
            self._list.children = (self._nothing,)

    def _clicked(self, _: Any) -> None:
        with self._desk.guarded("finding changes"):
            self.search()

    def _chosen(self, number: int) -> None:
        self._take(self.openings[number].changes)


class _Row:
    """One change: what it is, the widths after it, and the button that makes it."""

    def __init__(self, desk: Desk, number: int, chosen: Callable[[int], None]) -> None:
        kit = desk.kit
        self._text = kit.label("")
        self.button = kit.make(
            widgets.Button,
            "chip",
            description="take",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )

        def clicked(_: Any) -> None:
            with desk.guarded("taking a change"):
                chosen(number)

        self.button.on_click(clicked)
        self.widget = kit.make(
            widgets.GridBox,
            "candidate",
            children=[self._text, self.button],
            layout={
                "grid_template_columns": "minmax(0, 1fr) 64px",
                "grid_gap": "0 12px",
                "align_items": "center",
                "width": "100%",
                "margin": "0",
            },
        )

    def show(self, opening: Opening, unit: str) -> None:
        ends = " to ".join(shown(end, unit) for end in opening.feasible)
        quiet = f'<span class="hystkit-quiet">{html.escape(f"then {ends}")}</span>'
        self._text.value = f"{html.escape(opening.text)} {quiet}"
        self.button.tooltip = f"take this change: {opening.text}"


@dataclass(frozen=True)
class BoundTable(Viewed):
    """The bounds for a report, without the changes that would open an empty window.

    Attributes
    ----------
    found : WidthWindow
        What is shown.
    """

    found: WidthWindow

    def _fields(self) -> Sequence[Field]:
        _, *rows = bound_rows(self.found)
        own = Field("width of the design", shown(self.found.width, unit_of(self.found)))
        return [*(Field(name, width, note=text) for name, text, width in rows), own]

    @property
    def _title(self) -> str:
        return verdict(self.found)


def bound_rows(found: WidthWindow) -> Rows:
    """Write the bounds as rows of text, the first of them the heading.

    Parameters
    ----------
    found : WidthWindow
        What is shown.

    Returns
    -------
    list of tuple of str
        Name, where it comes from, and width; what binds says so.
    """
    binding = (found.floor, found.ceiling)
    rows: Rows = [("bound", "from", "width")]
    for bound in ordered(found):
        name = f"{bound.name}, binds" if bound in binding else bound.name
        rows.append((name, bound.text, bound_text(bound, unit_of(found))))
    return rows


def width_rows(found: WidthWindow, columns: int) -> Rows:
    """Write the bounds as rows below trip points.

    Parameters
    ----------
    found : WidthWindow
        What is shown.
    columns : int
        Of the table; the last one is that of the measurand, where there is one.

    Returns
    -------
    list of tuple of str
        Kind and name, and the width in the last column.
    """
    empty, unit = ("",) * (columns - 2), unit_of(found)
    return [(f"{b.kind}: {b.name}", *empty, bound_text(b, unit)) for b in ordered(found)]


def target_text(found: WidthWindow) -> str:
    """Say where the load would switch at the target.

    Parameters
    ----------
    found : WidthWindow
        What is shown.

    Returns
    -------
    str
        Empty in an empty window.
    """
    if found.edges is None or found.target is None:
        return ""
    on_at, off_at = (shown(edge, unit_of(found)) for edge in found.edges)
    return f"target width {shown(found.target, unit_of(found))}: on at {on_at}, off at {off_at}"


def sizing_code(found: WidthWindow, design: Design, load: str) -> str:
    """Write the call that finds parts for the target.

    Parameters
    ----------
    found : WidthWindow
        With a target.
    design : Design
        Gives form, supply, device, levels, signal, and the parts that stay.
    load : {"high", "low"}
        Output state in which the load is on.

    Returns
    -------
    str
        Python that needs only ``import hystkit as hk``; empty in an empty window.
    """
    if found.edges is None:
        return ""
    free = SizingRequest().free_in(design)
    fixed = ", ".join(f'"{n}": design.parts["{n}"]' for n in design.parts if n not in free)
    closeness = ", ".join(f'"{n}": {design.parts[n].tol!r}' for n in free)
    lines = [
        "design.stage",
        *_wanted(found, load),
        f"free={free!r}",
        f"parts={{{fixed}}}",
        f"tol={{{closeness}}}",
        "supply=design.supply",
        "device=design.device",
        "levels=design.levels",
        "signal=design.signal",
    ]
    call = "".join(f"    {line},\n" for line in lines)
    head = f"import hystkit as hk\n\ndesign = {design.as_code()}\n\n"
    return f"{head}found = hk.size(\n{call})\nprint(found)\n"


def _wanted(found: WidthWindow, load: str) -> Sequence[str]:
    assert found.edges is not None
    on_at, off_at = (float(f"{edge:.6g}") for edge in found.edges)
    if found.asked.axis.signal is not None:
        return f"on_at={on_at!r}", f"off_at={off_at!r}", f"load={load!r}"
    lower, upper = sorted((on_at, off_at))
    return f"upper={upper!r}", f"lower={lower!r}"


def _line(severity: str, text: str) -> str:
    return f'<span class="hystkit-{severity}-line">{html.escape(text)}</span>'


def _signed(found: WidthWindow) -> str:
    sign, own = "✓" if found.inside else "!", shown(found.width, unit_of(found))
    return f"{sign} {verdict(found)}, the design has {own}"

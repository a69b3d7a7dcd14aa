"""From a requirement to parts, live: ranked candidates, and one of them into the design."""

from __future__ import annotations

import html
from collections.abc import Sequence
from typing import Any

import ipywidgets as widgets

from hystkit.analyses.sizing.candidate import Candidate, Sizing
from hystkit.analyses.sizing.limits import Limits
from hystkit.analyses.sizing.requirement import SOURCE, is_source
from hystkit.analyses.sizing.size import size
from hystkit.base.errors import HystkitError
from hystkit.base.quantity import show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.stage import Stage
from hystkit.panels.asking import AskingPanel
from hystkit.panels.base import Section
from hystkit.panels.desk import Desk, why
from hystkit.panels.law import headed
from hystkit.panels.loop_figure import LoopFigure
from hystkit.panels.revise import revised
from hystkit.panels.sizing_request import SizingRequest, SizingSection

#: Candidates that a panel lists.
LISTED = 8
# Parts, trips and verdict of a candidate stand in columns, or below each other on a narrow page.
_FLEX = ("5 1 170px", "3 1 120px", "8 1 200px")
_COLUMNS = "18px minmax(0, 1fr) 92px"


class SizingPanel(LoopFigure, AskingPanel):
    """State what is wanted, search, compare candidates, and adopt one.

    Parameters
    ----------
    design : Design
        What to begin with: form, supply, device, levels, signal and the parts that are fixed.
    **asked : object
        Fields of the request: upper, lower, on_at, off_at, load, series, tol, tempco,
        temperature, free, supply_current, output_current, input_resistance, all_forms.

    Attributes
    ----------
    design : Design
        What is shown; can be set, observed and linked.
    request : SizingRequest
        What is wanted; changed with `set`.
    found : Sizing or None
        Candidates of the last search.
    result : TripPoints
        The trip points of `design`.
    error : str
        What went wrong in the panel itself at the last change, empty where nothing did.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> panel = SizingPanel(header_tank(), on_at=(0.75, 0.85), off_at=(1.36, 1.46))
    >>> panel.search()
    >>> panel.found.fits
    True
    >>> panel.adopt(0)
    >>> panel.design.parts == panel.found[0].design.parts
    True
    >>> panel.close()
    """

    found: Sizing | None = None

    def search(self) -> None:
        """Search for parts that give what is wanted; a refusal stands in the card."""
        design, request = self.design, self.request
        free = request.free_in(design)
        fixed = self._fixed(free)
        asked = {n: getattr(request, n) for n in ("upper", "lower", "on_at", "off_at")}
        refusal = ""
        self.found = None
        try:
            self.found = size(
                None if request.all_forms else _holding(design.stage, (*fixed, *free)),
                supply=design.supply,
                **asked,
                load=request.load,
                free=None if request.all_forms else free,
                parts=fixed,
                series=request.series,
                tol=request.tol,
                tempco=request.tempco,
                temperature=request.temperature,
                device=design.device,
                levels=design.levels,
                signal=design.signal,
                limits=request.limits,
                count=LISTED,
            )
        except HystkitError as error:
            refusal = why(error)
        self.candidates.show(self.found, refusal, design)
        self.candidates.mark(design)

    def adopt(self, number: int) -> None:
        """Put a candidate of the last search into the design.

        Parameters
        ----------
        number : int
            Its place in the list, from 0; those of suggestions follow.

        Raises
        ------
        IndexError
            If there is none.
        """
        chosen = self.candidates.offered[number].design
        self.design = revised(chosen, {"name": self.design.name})

    def _fixed(self, free: tuple[str, ...]) -> dict[str, Part]:
        """Give the parts that a search leaves as they are.

        The resistance of the signal's source, adopted with a candidate, is no part: it is worked
        out anew for the quantities that are asked for.
        """
        design = self.design
        fixed = {n: part for n, part in design.parts.items() if n not in free}
        optional = SOURCE in design.stage.optional
        if self.request.in_measurand and optional and is_source(fixed.get(SOURCE), design.signal):
            del fixed[SOURCE]
        return fixed

    def _first_request(self) -> SizingRequest:
        return SizingRequest()

    def _checked(self, design: Design, request: SizingRequest) -> SizingRequest:
        Limits.of(request.limits)
        return request

    def _own_sections(self) -> Sequence[Section]:
        self.asked = SizingSection(self._desk, lambda: self.request, self.search)
        return (self.asked,)

    def _own_cards(self) -> Sequence[Any]:
        self.candidates = CandidateList(self._desk, self.adopt)
        return (self.candidates.widget,)

    def _draw(self, design: Design) -> None:
        super()._draw(design)
        self.candidates.mark(design)

    def _remarks(self) -> tuple[str, ...]:
        return (*super()._remarks(), *self.candidates.lines)


def _holding(stage: Stage, parts: Sequence[str]) -> Stage:
    """Give a stage without the optional parts that are not among these."""
    return stage.with_options(*(name for name in stage.including if name in parts))


class CandidateList:
    """Ranked candidates with a button each; what to change where nothing fits.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    adopt : callable
        Takes the place of a candidate.
    """

    def __init__(self, desk: Desk, adopt: Any) -> None:
        self._desk = desk
        self._adopt = adopt
        self._rows: list[_Row] = []
        self.offered: tuple[Candidate, ...] = ()
        self.lines: tuple[str, ...] = ()
        kit = desk.kit
        self.said: Any = kit.label("", "quiet")
        self._list = kit.make(widgets.VBox, layout={"width": "100%", "margin": "0"})
        self.widget = kit.make(
            widgets.VBox,
            "card",
            children=[headed(desk, "Candidates", []), self.said, self._list],
            layout={"width": "100%", "min_width": "0", "margin": "0"},
        )
        self.said.value = "nothing searched yet"

    @property
    def buttons(self) -> list[Any]:
        """Buttons of the candidates that are offered."""
        return [row.button for row in self._rows[: len(self.offered)]]

    def show(self, found: Sizing | None, refusal: str, design: Design) -> None:
        """Show the result of a search.

        Parameters
        ----------
        found : Sizing or None
            None where it was refused.
        refusal : str
            Why; plain text.
        design : Design
            For which it was searched; forms are named where one differs from its own.
        """
        if found is None:
            self.offered, self.lines = (), (refusal,)
            self.said.value = (
                f'<span class="hystkit-note" role="alert">{html.escape(refusal)}</span>'
            )
            self._list.children = ()
            return
        self.offered = (*found, *(tried.candidate for tried in found.suggestions))
        hints = [""] * len(found) + [tried.text for tried in found.suggestions]
        self.lines = tuple(
            f"{number} {hint or 'candidate'}: {one.values}: {one.verdict}"
            for number, (one, hint) in enumerate(zip(self.offered, hints, strict=True), 1)
        )
        searched = f"{html.escape(found.asked)}: {found.searched:,} combinations searched"
        reason = f"<br><b>! nothing fits:</b> {html.escape(found.reason)}" if found.reason else ""
        self.said.value = f"{searched}{reason}"
        while len(self._rows) < len(self.offered):
            self._rows.append(_Row(self._desk, len(self._rows), self._adopt))
        several = any(one.design.stage.title != design.stage.title for one in self.offered)
        for number, (one, hint) in enumerate(zip(self.offered, hints, strict=True)):
            self._rows[number].show(one, hint, one.design.stage.title if several else "")
        self._list.children = [row.widget for row in self._rows[: len(self.offered)]]

    def mark(self, design: Design) -> None:
        """Mark the candidate that the design is.

        Parameters
        ----------
        design : Design
            That is shown.
        """
        for row, one in zip(self._rows, self.offered, strict=False):
            same = one.design.parts == design.parts and one.design.stage == design.stage
            row.button.description = "✓ adopted" if same else "adopt"


class _Row:
    """One candidate: place, parts, trips, verdict and the button."""

    def __init__(self, desk: Desk, number: int, adopt: Any) -> None:
        kit = desk.kit
        self._texts = [
            kit.make(widgets.HTML, "label", layout={"flex": flex, "min_width": "0", "margin": "0"})
            for flex in _FLEX
        ]
        self.button = kit.make(
            widgets.Button,
            "chip",
            description="adopt",
            tooltip=f"adopt candidate {number + 1}",
            layout={"width": "auto", "height": "auto", "margin": "0"},
        )

        def clicked(_: Any) -> None:
            with desk.guarded("adopting a candidate"):
                adopt(number)

        self.button.on_click(clicked)
        texts = kit.make(
            widgets.Box,
            children=self._texts,
            layout={"flex_flow": "row wrap", "grid_gap": "0 12px", "margin": "0"},
        )
        self.widget = kit.make(
            widgets.GridBox,
            "candidate",
            children=[kit.label(f"{number + 1}"), texts, self.button],
            layout={
                "grid_template_columns": _COLUMNS,
                "grid_gap": "0 12px",
                "align_items": "center",
                "width": "100%",
                "margin": "0",
            },
        )

    def show(self, one: Candidate, hint: str, form: str) -> None:
        sign = "✓" if one.holds else "!"
        severity = "pass" if one.holds else "warning"
        trips = f"{show(float(one.trips.upper), 'V')} / {show(float(one.trips.lower), 'V')}"
        form = f'<div class="hystkit-quiet">{html.escape(form)}</div>' if form else ""
        said = f"with {html.escape(hint)}: " if hint else ""
        texts = (
            html.escape(one.values) + form,
            trips,
            f'<span class="hystkit-{severity}-line"><b aria-hidden="true">{sign}</b></span> '
            f"{said}{html.escape(one.outcome)}",
        )
        for label, text in zip(self._texts, texts, strict=True):
            label.value = text

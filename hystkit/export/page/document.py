"""The page itself: what is baked into it, and the fragment and the file made of that."""

from __future__ import annotations

import html
import json
from dataclasses import dataclass
from functools import cached_property

from hystkit import __version__
from hystkit.circuit.design import Design
from hystkit.export.cautions import CAUTIONS
from hystkit.export.page.controls import controls, symbol_html
from hystkit.export.page.loop import draw_loop, loop_words
from hystkit.export.page.model import form_data, form_key, state_data
from hystkit.export.page.ruler import draw_ruler
from hystkit.export.page.schematic import schematic_svg
from hystkit.export.page.script import digest, page_script, page_style
from hystkit.export.page.texts import TRIPS, trip_cells, value_rows
from hystkit.figures.lettering import short_unit
from hystkit.figures.ruler import describe
from hystkit.numeric.levels import levels
from hystkit.numeric.loop import loop
from hystkit.symbolic.law import SwitchingLaw, derive
from hystkit.symbolic.mathml import law_mathml

#: Widths of the baked pictures [px]; the style shows the one that fits.
WIDE, SLIM = 760.0, 344.0
LOOP_WIDE = 480.0


@dataclass(frozen=True)
class Page:
    """A live page before it is written.

    Attributes
    ----------
    design : Design
        What it shows first.
    """

    design: Design

    @cached_property
    def script(self) -> str:
        """Its one script; the same for all designs of the form."""
        return page_script(self.design.stage)

    @cached_property
    def style(self) -> str:
        """Its style sheet; the same for all pages."""
        return page_style()

    @property
    def title(self) -> str:
        """Name of the design, or of its form."""
        return self.design.name or self.design.stage.title

    def fragment(self) -> str:
        """Write the page as a fragment to paste into another one.

        Returns
        -------
        str
            One ``section`` element with style and script inside.
        """
        style = f"<style>{self.style}</style>\n"
        return self._section("h3", style, f"\n<script>{self.script}</script>")

    def document(self, policy: str, style: str, script: str) -> str:
        """Write the page as a document.

        Parameters
        ----------
        policy : str
            Content-security policy.
        style, script : str
            Elements that bring either.

        Returns
        -------
        str
            HTML.
        """
        head = [
            '<meta charset="utf-8">',
            f'<meta http-equiv="Content-Security-Policy" content="{html.escape(policy)}">',
            '<meta name="viewport" content="width=device-width, initial-scale=1">',
            '<meta name="color-scheme" content="light dark">',
            f'<meta name="generator" content="hystkit {__version__}">',
            f"<title>{html.escape(self.title)}</title>",
            style,
        ]
        body = self._section("h2", "", f"\n{script}", main=True)
        lines = ["<!DOCTYPE html>", '<html lang="en">', "<head>", *head, "</head>"]
        return "\n".join([*lines, '<body class="hk-body">', body, "</body>", "</html>", ""])

    def policy(self, script: str, style: str) -> str:
        """Give a content-security policy that allows nothing but these two sources.

        Parameters
        ----------
        script, style : str
            Source expressions, such as those of `digest`.

        Returns
        -------
        str
            For the header or the ``meta`` element.
        """
        allowed = [f"script-src {script}", f"style-src {style}", "img-src data:"]
        closed = ["default-src 'none'", *allowed, "base-uri 'none'", "form-action 'none'"]
        return "; ".join(closed)

    @property
    def script_hash(self) -> str:
        """Source expression of the inline script."""
        return digest(self.script)

    @property
    def style_hash(self) -> str:
        """Source expression of the inline style."""
        return digest(self.style)

    def _section(self, heading: str, before: str, after: str, *, main: bool = False) -> str:
        tag = "main" if main else "section"
        top = "h1" if main else "h2"
        key = form_key(self.design.stage)
        label = "" if main else f' aria-label="{html.escape(self.title)}"'
        pieces = [
            f'<{tag} class="hk-live" data-form="{key}"{label}>{before}<div class="hk-frame">',
            _header(self.design, self.title, top),
            f'<div class="hk-grid">{"".join(_cards(self.design, heading))}</div>',
            _footer(),
            "</div>",
            f'<script type="application/json" class="hk-data">{_data(self.design)}</script>',
        ]
        return "\n".join(pieces) + f"{after}\n</{tag}>"


def _header(design: Design, title: str, tag: str) -> str:
    form = f'<p class="hk-form">{html.escape(design.stage.title)}</p>' if design.name else ""
    buttons = (
        '<button type="button" data-do="link">Copy link</button>'
        '<button type="button" data-do="reset">Reset</button>'
    )
    clip = '<textarea class="hk-clip" readonly hidden aria-label="text to copy"></textarea>'
    said = '<span class="hk-said" role="status"></span>'
    return (
        f'<header class="hk-top"><div><{tag}>{html.escape(title)}</{tag}>{form}</div>'
        f'<div class="hk-actions" data-live hidden>{buttons}{said}</div>{clip}</header>'
    )


def _cards(design: Design, heading: str) -> list[str]:
    shown = levels(design)
    cells = trip_cells(shown)
    ruler = _two_widths(
        [draw_ruler(shown, w).svg(describe(shown), "picture") for w in (WIDE, SLIM)]
    )
    data = loop(design)
    curves = [draw_loop(data, w).svg(loop_words(data), "picture") for w in (LOOP_WIDE, SLIM)]
    return [
        f'<div class="hk-card hk-axis"><div class="hk-ruler">{ruler}</div></div>',
        _summary(design, cells),
        f'<div class="hk-side">{controls(design, heading)}{_value_card(design, heading)}</div>',
        f'<div class="hk-card hk-curve"><{heading}>Switching loop</{heading}>'
        f'<div class="hk-loop">{_two_widths(curves)}</div></div>',
        f'<div class="hk-card hk-circuit"><{heading}>Schematic</{heading}>'
        f"{schematic_svg(design)}</div>",
        _law_card(design, cells, heading),
        _trip_card(design, cells, heading),
    ]


def _two_widths(pictures: list[str]) -> str:
    """Bake a wide and a slim picture; the script puts one in their place."""
    wide, slim = pictures
    return f'<div class="hk-if-wide">{wide}</div><div class="hk-if-slim">{slim}</div>'


def _summary(design: Design, cells: dict[str, str]) -> str:
    """Write the trips on one line; it is said aloud, too, a little after a change."""
    shown = levels(design)
    marks = {"lower": "▼", "upper": "▲", "width": "↔"}
    parts = []
    for trip, mark in marks.items():
        measurand = (
            f'<span data-cell="{trip}.measurand">{html.escape(cells[f"{trip}.measurand"])}</span>'
        )
        if design.signal is None:
            measurand = ""
        parts.append(
            f'<span class="hk-said-{trip}"><span aria-hidden="true">{mark}</span> {trip} '
            f'<b data-cell="{trip}.volts">{cells[f"{trip}.volts"]}</b> {measurand}</span>'
        )
    fault = "" if shown.ok else f"! {html.escape(shown.message)}"
    state = "" if fault else " hidden"
    return (
        f'<div class="hk-card hk-summary">{"".join(parts)}'
        f'<span class="hk-impossible"{state}>{fault}</span>'
        '<span class="hk-aloud" aria-live="polite"></span></div>'
    )


def _trip_card(design: Design, cells: dict[str, str], heading: str) -> str:
    signal = design.signal
    measurand = f'<th scope="col">{html.escape(_quantity(design))}</th>' if signal else ""
    head = f'<tr><td></td><th scope="col">voltage</th>{measurand}</tr>'
    rows = []
    for trip in TRIPS:
        row = f'<th scope="row">{trip}</th>{_trip_cell(cells, trip, "volts", "within")}'
        row += _trip_cell(cells, trip, "measurand", "range") if signal else ""
        rows.append(f"<tr>{row}</tr>")
    return (
        f'<div class="hk-card hk-trips"><{heading}>Trip points</{heading}><table>'
        f"<thead>{head}</thead><tbody>{''.join(rows)}</tbody></table></div>"
    )


def _trip_cell(cells: dict[str, str], trip: str, value: str, within: str) -> str:
    """Write a value and, below it, its exact interval over the tolerances."""
    shown, span = (html.escape(cells[f"{trip}.{name}"]) for name in (value, within))
    below = ""
    if trip in ("upper", "lower"):
        below = f'<span class="hk-within" data-cell="{trip}.{within}">{span}</span>'
    return f'<td><span data-cell="{trip}.{value}">{shown}</span>{below}</td>'


def _quantity(design: Design) -> str:
    assert design.signal is not None
    unit = short_unit(design.signal)
    return f"{design.signal.name} / {unit}" if unit else design.signal.name


def _value_card(design: Design, heading: str) -> str:
    rows = []
    for name, value, tol, text in value_rows(design):
        hidden = "" if value else " hidden"
        rows.append(
            f'<tr data-symbol="{html.escape(name)}"{hidden}>'
            f'<th scope="row">{symbol_html(name)}</th>'
            f"<td>{value}</td><td>{tol}</td><td>{html.escape(text)}</td></tr>"
        )
    return (
        f'<div class="hk-card hk-values"><{heading}>Values</{heading}><table>'
        f"<tbody>{''.join(rows)}</tbody></table></div>"
    )


def _law_card(design: Design, cells: dict[str, str], heading: str) -> str:
    full = derive(design)
    short = full.for_design(design)
    copy = '<button type="button" data-do="latex" data-live hidden>Copy LaTeX</button>'
    latex = html.escape(short.latex())
    pieces = [
        f'<div class="hk-card-head"><{heading}>Law</{heading}>{copy}</div>',
        _equations(short, cells),
    ]
    if short != full:
        known = html.escape(" ".join(short.non_ideal))
        pieces.append(f'<p class="hk-left-out" role="status" data-knows="{known}" hidden></p>')
    pieces.append(
        "<details><summary>LaTeX</summary>"
        f'<pre class="hk-latex" tabindex="0">{latex}</pre></details>'
    )
    if short != full:
        title = "Full law, with every error of the device"
        pieces.append(f"<details><summary>{title}</summary>{_equations(full)}</details>")
    return f'<div class="hk-card hk-law">{"".join(pieces)}</div>'


def _equations(law: SwitchingLaw, cells: dict[str, str] | None = None) -> str:
    lines = []
    for name, math in law_mathml(law):
        value = ""
        if cells and name in ("V_upper", "V_lower"):
            cell = f"{name.removeprefix('V_')}.volts"
            shown = f'<span data-cell="{cell}">{cells[cell]}</span>'
            value = f' <span class="hk-result">= {shown}</span>'
        lines.append(f'<div class="hk-equation">{math}{value}</div>')
    return (
        '<div class="hk-equations" tabindex="0" role="group" aria-label="formulas">'
        f"{''.join(lines)}</div>"
    )


def _footer() -> str:
    cautions = " ".join(CAUTIONS)
    return (
        f'<footer class="hk-foot"><p>{html.escape(cautions)}</p>'
        f"<p>Made with hystkit {__version__}.</p></footer>"
    )


def _data(design: Design) -> str:
    """Write form and values as JSON that cannot end its element."""
    told = {"form": form_data(design), "state": state_data(design)}
    text = json.dumps(told, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    return text.replace("<", "\\u003c").replace("\u2028", "\\u2028").replace("\u2029", "\\u2029")

"""The controls of a page: one row for each value, hidden until the script takes them over."""

from __future__ import annotations

import html
from collections.abc import Iterable, Iterator

from hystkit.circuit.design import Design
from hystkit.export.page.model import COMMON_MODE, SLIDER_SERIES, device_fields
from hystkit.symbolic.symbols import meaning, split_name

DEVICE_LABELS = {
    "drop_high": "output high, below V_CC",
    "drop_low": "output low, above V_EE",
    "r_high": "output resistance, high",
    "r_low": "output resistance, low",
    "leakage": "output leakage, high",
    "offset": "input offset",
    "bias_plus": "bias current, plus pin",
    "bias_minus": "bias current, minus pin",
    "common_mode_low": "common mode from, above V_EE",
    "common_mode_high": "common mode to, below V_CC",
}


def controls(design: Design, heading: str) -> str:
    """Write the controls of a design.

    Parameters
    ----------
    design : Design
        Its form decides which rows there are; the script fills in the values.
    heading : str
        Tag of the headings, such as "h2".

    Returns
    -------
    str
        HTML.
    """
    stage = design.stage
    rails = ["V_CC", "V_EE"] if stage.supply == "split" else ["V_CC"]
    groups = [
        _group("Parts", heading, map(_part_row, stage.parts), _series()),
        _group("Supply and levels", heading, _voltage_rows(rails, stage.levels)),
        _device(design, heading),
    ]
    return f'<div class="hk-card hk-controls" data-live hidden>{"".join(groups)}</div>'


def symbol_html(name: str) -> str:
    """Write a symbol with its index lowered.

    Parameters
    ----------
    name : str
        Such as "R_PU".

    Returns
    -------
    str
        HTML.
    """
    base, index = (html.escape(part) for part in split_name(name))
    return f'<i class="hk-letter">{base}</i>' + (f"<sub>{index}</sub>" if index else "")


def _group(title: str, heading: str, rows: Iterable[str], beside: str = "") -> str:
    head = (
        f'<div class="hk-group-head"><{heading}>{title}</{heading}>{beside}<span>±&#8239;%</span>'
    )
    return (
        f'<div class="hk-group" role="group" aria-label="{title}">{head}</div>{"".join(rows)}</div>'
    )


def _series() -> str:
    options = "".join(
        f"<option{' selected' if name == 'E96' else ''}>{name}</option>" for name in SLIDER_SERIES
    )
    label = "preferred series of the sliders"
    return f'<select class="hk-series" aria-label="{label}" autocomplete="off">{options}</select>'


def _part_row(name: str) -> str:
    return _row(name, f"{name}, {meaning(name)[0]}", slider=True, tolerance=True)


def _voltage_rows(rails: list[str], levels: tuple[str, ...]) -> Iterator[str]:
    for name in rails:
        yield _row(name, f"{name}, {meaning(name)[0]}", slider=True, tolerance=name == "V_CC")
    for name in levels:
        label = f"{name}, {meaning(name)[0]}"
        yield _row(name, label, slider=True, tolerance=True, auto=name != "V_REF")


def _device(design: Design, heading: str) -> str:
    rows = "".join(
        _row(name, DEVICE_LABELS[name], text=DEVICE_LABELS[name], hint=_hint(name))
        for name in device_fields(design.stage)
    )
    title = design.device.title
    named = f" <span>{html.escape(title)}</span>" if title else ""
    summary = f"<summary><{heading}>Device</{heading}>{named}</summary>"
    return f'<details class="hk-group hk-device">{summary}{rows}</details>'


def _row(
    name: str,
    label: str,
    *,
    text: str = "",
    hint: str = "",
    slider: bool = False,
    tolerance: bool = False,
    auto: bool = False,
) -> str:
    """Write one row: name, slider, typed value, tolerance, and room for what is wrong."""
    spoken = html.escape(label)
    shown = _with_symbols(text) if text else symbol_html(name)
    pieces = [f'<span class="hk-label" title="{spoken}">{shown}</span>']
    if slider:
        pieces.append(f'<input type="range" aria-label="{spoken}" autocomplete="off">')
    pieces.append(_entry("hk-value", spoken if text else f"value of {name}", hint))
    if tolerance:
        pieces.append(_entry("hk-tolerance", f"tolerance of {name}, per cent"))
    if auto:
        told = f"let {name} follow again"
        pieces.append(
            f'<button type="button" data-do="auto" aria-label="{told}" title="{told}" hidden>'
            "&#8634;</button>"
        )
    pieces.append('<span class="hk-fault" role="alert" hidden></span>')
    looks = "hk-row" + ("" if slider else " hk-plain")
    return f'<div class="{looks}" data-name="{html.escape(name)}">{"".join(pieces)}</div>'


def _hint(name: str) -> str:
    return "not stated" if name in COMMON_MODE else ""


def _with_symbols(text: str) -> str:
    words = (symbol_html(w) if w.startswith("V_") else html.escape(w) for w in text.split())
    return " ".join(words)


def _entry(look: str, label: str, hint: str = "") -> str:
    shown = f' placeholder="{hint}"' if hint else ""
    return (
        f'<input type="text" class="{look}" aria-label="{label}"{shown} '
        'autocomplete="off" autocapitalize="off" spellcheck="false">'
    )

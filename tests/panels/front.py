"""A front end for tests: it talks to widgets as a browser does, and notes what they send."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import ipywidgets as widgets
from ipywidgets.widgets.widget import _instances

import hystkit as hk
from hystkit.circuit.forms import PART_ORDER
from hystkit.panels.standard import StagePanel


def send(widget: Any, **state: Any) -> None:
    """Report a new state of a widget, as its view in a browser does."""
    data = {"method": "update", "state": state, "buffer_paths": []}
    widget._handle_msg({"content": {"data": data}, "buffers": []})


def type_in(field: Any, text: str) -> None:
    """Type a text into a field and press Enter."""
    send(field, value=text)


def registered() -> int:
    """How many widgets are alive."""
    return len(_instances)


@contextmanager
def sent() -> Iterator[list[tuple[Any, str]]]:
    """Note every trait that goes to the front end, as (widget, trait)."""
    found: list[tuple[Any, str]] = []
    original = widgets.Widget._send

    def noted(self: Any, msg: dict[str, Any], buffers: Any = None) -> None:
        if msg.get("method") == "update":
            found.extend((self, name) for name in msg["state"])
        original(self, msg, buffers)

    widgets.Widget._send = noted
    try:
        yield found
    finally:
        widgets.Widget._send = original


def notes(panel: StagePanel) -> list[str]:
    """Every refusal that the panel shows."""
    rows: list[Any] = [
        panel.form,
        panel.parts,
        *panel.parts.rows.values(),
        *panel.levels.rails.values(),
        *panel.levels.levels.values(),
        panel.device.name,
        *panel.device.entries.values(),
    ]
    return [row.note.text for row in rows if row.note.text]


def clean(panel: StagePanel) -> bool:
    """Whether nothing is refused and nothing went wrong."""
    assert panel.error == ""
    assert notes(panel) == []
    return True


def design_of(stage: hk.Stage, **changes: Any) -> hk.Design:
    """A design of a form with plausible values."""
    usual = ("47k", "33k", "10k", "10k", "100k", "220k", "1k", "4k7", "47k")
    values = dict(zip(PART_ORDER, usual, strict=True))
    supply = hk.Supply(12, -12) if stage.supply == "split" else hk.Supply(5)
    given: dict[str, Any] = {
        "parts": {name: hk.Part(values[name], tol=0.01) for name in stage.parts},
        "supply": supply,
        "levels": {"V_REF": 2.5} if "V_REF" in stage.levels else {},
    }
    return hk.Design(stage, **(given | changes))


def own_circuit() -> hk.Design:
    """Six resistors with an inner node; the signal is filtered ahead of the plus input."""
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_1", "signal", "n1"),
            hk.Resistor("R_2", "n1", "plus"),
            hk.Resistor("R_3", "n1", "ground"),
            hk.Resistor("R_4", "out", "plus"),
            hk.Resistor("R_5", "cc", "minus"),
            hk.Resistor("R_6", "minus", "ee"),
        ],
        name="Tee input",
    )
    parts = {"R_1": "10k", "R_2": "22k", "R_3": "100k", "R_4": "220k", "R_5": "10k", "R_6": "10k"}
    return hk.Design(stage, parts, supply=12)

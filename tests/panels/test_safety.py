"""Foreign text, faults inside the panel, plain outputs."""

from __future__ import annotations

import re
from html.parser import HTMLParser

import pytest

import hystkit as hk
from hystkit.panels.copying import copy_button
from hystkit.panels.law import displayed
from tests.panels.conftest import MakePanel
from tests.panels.front import clean, own_circuit, send, type_in

NASTY = "<script>alert(1)</script>\"'><img src=x onerror=alert(2)> & $x$ \\n</style>"


class Tags(HTMLParser):
    """Collects what a browser would build from a text."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.found: list[tuple[str, dict[str, str | None]]] = []
        self.shown = ""
        self.feed(text)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.found.append((tag, dict(attrs)))

    def handle_data(self, data: str) -> None:
        self.shown += data


def texts(panel: hk.panels.TripPanel) -> list[str]:
    """Every HTML that the panel sends, but for its own page set-up."""
    return [
        widget.value
        for widget in panel._desk.kit._made
        if type(widget).__name__ in ("HTML", "HTMLMath")
        and "hystkit-page" not in widget._dom_classes
    ]


def test_foreign_text_never_becomes_markup(make: MakePanel) -> None:
    design = own_circuit()
    stage = hk.Stage.custom(design.stage.wiring, name=NASTY)
    signal = hk.signals.Linear(per_unit=1, span=(0, 10), unit=NASTY, name=NASTY)
    panel = make(
        hk.Design(
            stage, design.parts, supply=12, device=hk.Device(name=NASTY), signal=signal, name=NASTY
        )
    )
    type_in(panel.parts.rows["R_1"].field, NASTY)
    type_in(panel.device.entries["offset"].field, NASTY)
    seen = 0
    for text in [*texts(panel), panel.snapshot().to_html()]:
        tags = Tags(text)
        assert not {tag for tag, _ in tags.found} & {"script", "style", "iframe", "object"}
        for tag, attributes in tags.found:
            handlers = [name for name in attributes if name.startswith("on")]
            assert handlers == (["onclick"] if tag == "button" else [])
            assert tag != "img" or str(attributes["src"]).startswith("data:image/png")
        seen += NASTY in tags.shown
    assert seen >= 3
    assert panel.parts.rows["R_1"].note.text


def test_a_copy_button_holds_the_very_text(panel: hk.panels.TripPanel) -> None:
    text = 'a "quoted" \\frac{1}{2} & <tag>\n\tsecond line'
    (button, span) = Tags(copy_button("copy <it>", 'says "so"', text)).found
    assert button[1]["data-text"] == text
    assert button[1]["aria-label"] == 'says "so"'
    assert span[1]["role"] == "status"
    held = {
        name: Tags(copy.widget.value).found[0][1]["data-text"]
        for name, copy in panel.law.copies.items()
    }
    law = hk.derive(panel.design).for_design(panel.design)
    assert held["formula"] == law.latex("formula")
    assert held["derivation"] == law.latex("derivation")
    assert held["numbers"] == law.latex("numbers", design=panel.design)
    table = Tags(panel.trips.copy.widget.value).found[0][1]["data-text"]
    assert table == law.latex("table", design=panel.design)


def test_math_is_escaped_for_the_page() -> None:
    assert displayed("a &< b") == "$$a &amp;&lt; b$$"


@pytest.mark.parametrize("part", ["ruler", "loop", "schematic", "findings", "trips", "law"])
def test_a_fault_in_a_result_is_shown_and_the_others_go_on(
    part: str, panel: hk.panels.TripPanel, monkeypatch: pytest.MonkeyPatch
) -> None:
    views = {
        "ruler": panel.ruler.image,
        "loop": panel.loop.image,
        "schematic": panel.schematic.image,
        "findings": panel.findings.widget,
        "trips": panel.trips.table,
        "law": panel.law.numbers,
    }
    before = {name: view.value for name, view in views.items()}
    with monkeypatch.context() as patch:
        patch.setattr(getattr(panel, part), "show", _broken)
        panel.set(R_F="33k", common_mode_high=4.5)
    assert "RuntimeError: it &lt;b&gt;broke&lt;/b&gt;" in panel.error
    assert "RuntimeError" in panel._failures.value
    assert "_broken" in panel.error
    assert panel.design.parts["R_F"].value == 33e3
    after = {name: view.value for name, view in views.items()}
    assert [name for name in views if after[name] == before[name]] == [part]
    send(panel.parts.rows["R_F"].slider, value=3)
    assert panel._failures.value == ""
    assert clean(panel)


def test_a_fault_in_a_control_is_shown(
    panel: hk.panels.TripPanel, monkeypatch: pytest.MonkeyPatch
) -> None:
    with monkeypatch.context() as patch:
        patch.setattr("hystkit.panels.base.revised", _broken)
        send(panel.parts.rows["R_F"].slider, value=3)
    assert "RuntimeError" in panel._failures.value
    send(panel.parts.rows["R_F"].slider, value=4)
    assert clean(panel)


def test_values_that_do_not_switch_are_said_and_recovered_from(make: MakePanel) -> None:
    # The signal reaches both inputs; with these values the network feeds back negatively.
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_1", "signal", "plus"),
            hk.Resistor("R_2", "out", "plus"),
            hk.Resistor("R_3", "signal", "minus"),
            hk.Resistor("R_4", "out", "minus"),
            hk.Resistor("R_5", "plus", "ground"),
            hk.Resistor("R_6", "minus", "ground"),
        ],
        sense="non-inverting",
    )
    parts = {"R_1": "10k", "R_2": "100k", "R_3": "100k", "R_4": "10k", "R_5": "10k", "R_6": "10k"}
    panel = make(hk.Design(stage, parts, supply=5))
    if not panel.result.ok:
        assert "no trip points" in panel.findings.widget.value
    assert clean(panel)
    panel.set(R_4="10M", R_3="10M")
    assert panel.result.ok
    assert "no trip points" not in panel.findings.widget.value
    assert clean(panel)


def test_the_bundle_has_fallbacks(panel: hk.panels.TripPanel) -> None:
    bundle = panel._repr_mimebundle_()
    assert bundle["application/vnd.jupyter.widget-view+json"]["model_id"] == panel.model_id
    tags = Tags(bundle["text/html"])
    images = [attributes for tag, attributes in tags.found if tag == "img"]
    assert len(images) == 3
    assert all(image["alt"] and image["width"] for image in images)
    assert "<table>" in bundle["text/html"]
    assert "$$\\begin{aligned}" in bundle["text/html"]
    # Untrusted viewers strip these, and what stands between them.
    assert not {tag for tag, _ in tags.found} & {"script", "style", "svg", "button"}
    shown = f"{float(panel.result.upper):.3f} V"
    assert shown in bundle["text/plain"]
    assert shown in tags.shown
    assert "Header tank" in bundle["text/plain"]


def test_a_snapshot_stays_when_the_panel_moves(panel: hk.panels.TripPanel) -> None:
    snapshot = panel.snapshot()
    text, page = str(snapshot), snapshot.to_html()
    panel.set(R_F="10k")
    assert (str(snapshot), snapshot.to_html()) == (text, page)
    assert str(panel.snapshot()) != text
    assert repr(snapshot) == text
    assert snapshot._repr_mimebundle_() == {"text/plain": text, "text/html": page}


def test_pictures_have_words_and_controls_have_names(panel: hk.panels.TripPanel) -> None:
    for view in (panel.ruler, panel.loop, panel.schematic):
        assert view.image in view.widget.children
        assert view.words.value
        assert "hystkit-words" in view.words._dom_classes
        assert re.search(r"\d", view.words.value)
    for name, row in panel.parts.rows.items():
        assert name in row.slider.tooltip
        assert name in row.field.tooltip
        assert name in row.tolerance.tooltip
    for entry in panel.device.entries.values():
        assert entry.field.tooltip
    for selector in panel.form.selectors.values():
        assert len(selector.tooltips) == len(selector.options) or selector.options[-1] == "source"


def _broken(*_: object, **__: object) -> None:
    raise RuntimeError("it <b>broke</b>")

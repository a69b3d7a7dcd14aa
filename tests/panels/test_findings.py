"""Findings under the ruler and in their panel: what the review says, and nothing else."""

from __future__ import annotations

import html
import re
from collections.abc import Callable, Iterator

import pytest

import hystkit as hk
from hystkit.base.errors import UnknownNameError
from hystkit.circuit.demo import header_tank
from hystkit.panels import findings
from hystkit.review import Finding, Review, review
from tests.panels.conftest import MakePanel
from tests.panels.front import design_of, own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.FindingsPanel]


@pytest.fixture
def build() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.FindingsPanel] = []

    def one(design: hk.Design, **asked: object) -> hk.panels.FindingsPanel:
        made.append(hk.panels.FindingsPanel(design, **asked))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


def words(markup: str) -> str:
    return " ".join(html.unescape(re.sub(r"<[^>]*>", " ", markup)).split())


def test_the_line_tells_faults_and_warnings_and_counts_the_rest() -> None:
    found = Review((
        Finding("common mode", "fault", "pins beyond", -0.2, "V", "another device"),
        Finding("offset", "warning", "5 mV moves the trips"),
        Finding("reach", "note", "signal not described"),
        Finding("order", "pass", "in order"),
        Finding("loading", "pass", "small"),
    ))  # fmt: skip
    shown = words(findings.line(found))
    assert shown.startswith("✗ fault: common mode: pins beyond ! warning: offset: 5 mV moves")
    assert shown.endswith("✓ pass: 2 checks pass – note: 1 note")
    assert "not described" not in shown
    assert findings.remarks(found) == (
        "✗ fault, common mode: pins beyond (another device)",
        "! warning, offset: 5 mV moves the trips",
    )


def test_signs_stand_beside_colours() -> None:
    for severity, sign in (("fault", "✗"), ("warning", "!"), ("pass", "✓"), ("note", "–")):
        line = findings.line(Review((Finding("x", severity, "y"),)))
        assert f"hystkit-{severity}-line" in line
        assert f">{sign}</b>" in line
        assert f">{severity}: </span>" in line


def test_everything_is_escaped() -> None:
    bad = "<img src=x onerror=alert(1)>"
    found = Review((Finding(bad, "fault", bad, remedy=bad),))
    for markup in (findings.line(found), findings.findings_table(found)):
        assert "<img" not in markup
        assert markup.count("&lt;img") >= 2


def test_the_line_of_a_panel_is_what_the_review_says(make: MakePanel) -> None:
    for design in (
        header_tank(),
        header_tank().with_device(common_mode_high=3.0),
        own_circuit(),
        *(design_of(stage) for stage in hk.Stage.all()[:6]),
    ):
        panel = make(design)
        assert panel.findings.widget.value == findings.line(review(design))
        assert panel.reviewed == review(design)


def test_a_fault_is_cleared_by_what_clears_it(make: MakePanel) -> None:
    panel = make(header_tank().with_device(common_mode_high=3.0))
    line = panel.findings.widget.value
    assert "hystkit-fault-line" in line
    assert "common mode" in line
    assert line.index("common mode") < line.index("pass")
    assert any("common mode" in remark for remark in panel.snapshot().remarks)
    panel.set(common_mode_high=1.5)
    assert "common mode" not in panel.findings.widget.value
    assert panel.snapshot().remarks == findings.remarks(review(panel.design))


def test_the_table_has_a_row_for_each_finding(build: Make) -> None:
    panel = build(header_tank().with_device(common_mode_high=3.0))
    shown = panel.table.value
    assert shown.count("<tr") == len(panel.reviewed) + 1
    fault = panel.reviewed["common mode"]
    assert fault.margin < 0
    (row,) = [row for row in shown.split("<tr")[1:] if "common mode" in row]
    text = words("<" + row)
    assert findings.margin(fault) in text
    assert text.startswith("✗ fault: common mode")
    for finding in panel.reviewed:
        assert all(part in words(shown) for part in (finding.name, finding.remedy))
    assert panel.error == ""


def test_what_is_declared_reaches_the_review(build: Make) -> None:
    loop = hk.signals.CurrentLoop(150, span=(0, 2), unit="m", name="level")
    panel = build(header_tank().with_signal(loop))
    assert panel.reviewed["start-up"].severity == "note"
    send(panel.asked.rows["start"].field, index=2)
    assert panel.request.start == "low"
    assert panel.reviewed["start-up"].severity == "pass"
    send(panel.asked.rows["safe"].field, index=2)
    send(panel.asked.rows["load"].field, index=1)
    assert panel.request == type(panel.request)(load="low", safe="off", start="low")
    assert panel.reviewed == review(panel.design, load="low", safe="off", start="low")
    assert panel.reviewed["start-up"].severity == "warning"
    assert "start-up" in panel.findings.widget.value
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 5)
    assert panel.reviewed == review(panel.design, load="low", safe="off", start="low")


def test_an_unknown_choice_is_refused() -> None:
    before = registered()
    with pytest.raises(UnknownNameError, match="of"):
        hk.panels.FindingsPanel(header_tank(), safe="of")
    assert registered() == before


def test_the_snapshot_tells_all_findings(build: Make) -> None:
    panel = build(header_tank(), start="low")
    assert len(panel.snapshot().remarks) == len(panel.reviewed)
    assert any(remark.startswith("✓ pass, start-up") for remark in panel.snapshot().remarks)


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.FindingsPanel(header_tank())
    panel.set(safe="on", R_F="120k")
    panel.close()
    assert registered() == before


def test_service_is_declared_in_code_and_typed(build: Make) -> None:
    tank = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, unit="m")
    noise = hk.Noise.two_pole(rms="1m", f1=10, f2="1k")
    panel = build(header_tank(), plant=tank, noise=noise, slope="50 mV/s")
    assert panel.request.slope == 0.05
    assert panel.reviewed["noise"].severity == "pass"
    assert panel.reviewed["cycling"].severity == "note"
    assert "declared in code: noise, plant" in panel.objects.value
    type_in(panel.service.rows["starts_per_hour"].field, "2")
    assert panel.request.starts_per_hour == 2
    assert panel.reviewed["cycling"].severity == "warning"
    type_in(panel.service.rows["hum"].field, "2 V, 50 Hz")
    assert panel.reviewed["hum"].severity == "fault"
    type_in(panel.service.rows["slope"].field, "")
    assert panel.request.slope is None


def test_a_declaration_that_cannot_be_used_leaves_the_last_one(build: Make) -> None:
    panel = build(header_tank(), slope="50 mV/s", hum=("30 mV", "50 Hz"))
    before = panel.reviewed
    type_in(panel.service.rows["slope"].field, "-1")
    assert panel.request.slope == 0.05
    assert panel.reviewed == before
    assert "not above 0" in panel.service.rows["slope"].note.widget.value


def test_a_declared_load_follows_the_design(build: Make) -> None:
    rail = hk.signals.Linear(1.0, span=(0, 5), unit="V", name="rail")
    design = header_tank().with_signal(rail)
    step = hk.load_step(design, current=4, source_resistance=0.1, load="low", sigmas=0)
    panel = build(design, load="low", load_step=step)
    assert panel.reviewed["load step"].severity == "pass"
    panel.set(R_F="300k")
    narrow = hk.load_step(panel.design, current=4, source_resistance=0.1, load="low", sigmas=0)
    assert panel.reviewed["load step"].margin == pytest.approx(float(narrow.margin))
    assert panel.reviewed["load step"].severity == "fault"

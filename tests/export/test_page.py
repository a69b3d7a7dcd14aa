"""The live page as text: what is baked into it, its policy, its files."""

from __future__ import annotations

import base64
import hashlib
import json
import math
import re
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.export.page import WrittenPage, page_frame
from hystkit.export.page.document import Page
from hystkit.export.page.model import signal_data, state_data
from hystkit.export.page.writer import standalone
from hystkit.numeric.extremes import not_evaluated
from tests.circuit.custom import uncertain_chain
from tests.export.designs import AWKWARD, every_design, full, ladder, stuck
from tests.project.source import ROOT, run_python

DESIGNS = {**every_design(), "stuck": stuck(), "header tank": header_tank()}
SIZE_LIMIT = 200_000
VOID = {"meta", "input", "img", "link", "br"}


class Outline(HTMLParser):
    """Elements with their attributes, the text of each kind of element, and what stays open."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.texts: dict[str, list[str]] = {}
        self.open: list[str] = []
        self.feed(text)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open:
            self.texts.setdefault(self.open[-1], []).append(data)

    def of(self, tag: str) -> list[dict[str, str | None]]:
        return [attributes for name, attributes in self.elements if name == tag]


@pytest.fixture(scope="module")
def documents() -> dict[str, str]:
    return {name: standalone(Page(design)) for name, design in DESIGNS.items()}


@pytest.mark.parametrize("name", DESIGNS)
def test_page_is_small_whole_and_alone(documents: dict[str, str], name: str) -> None:
    text = documents[name]
    assert len(text.encode("utf-8")) < SIZE_LIMIT
    outline = Outline(text)
    assert outline.open == []
    loads = [
        (tag, key)
        for tag, attributes in outline.elements
        for key in ("src", "href", "srcset", "data", "action", "xlink:href", "poster", "style")
        if key in attributes
    ]
    assert loads == []
    assert not re.search(r"@import|url\(", text)
    assert not [key for _, a in outline.elements for key in a if key.startswith("on")]


@pytest.mark.parametrize("name", ["header tank", "stuck"])
def test_policy_names_the_one_script_and_the_one_style(
    documents: dict[str, str], name: str
) -> None:
    outline = Outline(documents[name])
    run = [a for a in outline.of("script") if a.get("type") != "application/json"]
    assert len(run) == len(outline.of("style")) == 1
    (policy,) = (a["content"] for a in outline.of("meta") if a.get("http-equiv"))
    for tag, kind in (("script", "script-src"), ("style", "style-src")):
        (found,) = (t for t in re.findall(rf"<{tag}>(.*?)</{tag}>", documents[name], re.DOTALL))
        hashed = base64.b64encode(hashlib.sha256(found.encode()).digest()).decode()
        assert f"{kind} 'sha256-{hashed}';" in str(policy)
    assert str(policy).startswith("default-src 'none';")
    assert "unsafe" not in str(policy)


def test_pages_of_one_form_share_script_and_style() -> None:
    one, other = Page(header_tank()), Page(header_tank().with_parts(R_F="1M"))
    assert one.script == other.script
    assert one.script_hash != Page(full(hk.Stage.all()[3])).script_hash
    assert one.style == Page(ladder()).style


def test_same_design_gives_the_same_bytes() -> None:
    code = f"""
import hashlib, os, sys
sys.path.insert(0, {str(ROOT)!r})
import hystkit as hk
from tests.export.designs import full
text = hk.page_fragment(full(hk.Stage.all()[13])) + hk.page_fragment(
    full(hk.Stage.all()[2]), live=False)
print(hashlib.sha256(text.encode()).hexdigest())
"""
    assert run_python(code) == run_python(code)


@pytest.mark.parametrize("name", DESIGNS)
def test_everything_has_a_name_and_nothing_an_id(documents: dict[str, str], name: str) -> None:
    outline = Outline(documents[name])
    assert not [a for _, a in outline.elements if "id" in a]
    for tag in ("input", "select", "svg", "textarea"):
        assert outline.of(tag)
        assert all(a.get("aria-label") for a in outline.of(tag))
    labels = [a["aria-label"] for a in outline.of("input")]
    assert len(labels) == len(set(labels))
    assert all(a.get("type") == "button" for a in outline.of("button"))


def test_every_value_has_its_row() -> None:
    for design in DESIGNS.values():
        outline = Outline(hk.page_fragment(design))
        rows = {a["data-name"] for a in outline.of("div") if "data-name" in a}
        rails = {"V_CC", "V_EE"} if design.stage.supply == "split" else {"V_CC"}
        assert rows >= {*design.stage.parts, *design.stage.levels, *rails, "offset", "drop_low"}
        listed = {a["data-symbol"] for a in outline.of("tr") if "data-symbol" in a}
        assert listed == set(design.values)
        sliders = [a for a in outline.of("input") if a["type"] == "range"]
        assert len(sliders) == len(design.stage.parts) + len(design.stage.levels) + len(rails)


def test_baked_state_is_the_design() -> None:
    for design in DESIGNS.values():
        text = hk.page_fragment(design)
        (told,) = re.findall(
            r'<script type="application/json"[^>]*>(.*?)</script>', text, re.DOTALL
        )
        data = json.loads(told)
        assert data["state"] == json.loads(json.dumps(state_data(design)))
        value = data["state"]["value"]
        assert {n: value[n] for n in design.parts} == {n: p.value for n, p in design.parts.items()}
        assert value["V_CC"] == design.supply.v_cc
        assert data["state"]["tol"].get("V_CC", 0.0) == design.supply.tol


def test_first_numbers_stand_in_the_page(documents: dict[str, str]) -> None:
    text = documents["header tank"]
    for shown in ("2.286 V", "1.562 V", "724.6 mV", "1.405 m", "46.4 kΩ", "±1 %"):
        assert f">{shown}<" in text
    law = hk.derive(header_tank()).for_design(header_tank())
    assert law.latex().replace("&", "&amp;") in text
    assert text.count("<math") >= 2


def test_stuck_design_says_why(documents: dict[str, str]) -> None:
    message = hk.levels(stuck()).message
    assert f"! {message}" in documents["stuck"]
    assert "NaN" not in re.sub(r"<script.*?</script>", "", documents["stuck"], flags=re.DOTALL)


@pytest.mark.parametrize("live", [True, False])
def test_user_text_is_escaped(live: bool) -> None:
    attack = "</script></style><script>hit()</script><img src=x onerror=hit()>\u2028\"'&"
    signal = hk.signals.Linear(1.2, 0.6, span=(0, 2), unit=attack, name=attack)
    device = hk.Device(name=attack)
    design = hk.Design(
        header_tank().stage, header_tank().parts, supply=5.0, device=device, signal=signal,
        name=attack,
    )  # fmt: skip
    text = hk.page_fragment(design, live=live)
    outline = Outline(text)
    assert outline.open == []
    assert "hit()</script>" not in text
    assert not [a for a in outline.of("img") if a.get("src") == "x"]
    assert len(outline.of("script")) == (2 if live else 0)
    assert "\u2028" not in text.partition('class="hk-data">')[2].partition("</script>")[0]


def test_awkward_name_survives() -> None:
    outline = Outline(hk.page_fragment(full(hk.Stage.all()[0])))
    assert "".join(outline.texts["h2"]) == AWKWARD


def test_static_fragment_is_what_strict_filters_keep() -> None:
    text = hk.page_fragment(header_tank(), live=False)
    outline = Outline(text)
    assert {tag for tag, _ in outline.elements} <= {
        "section", "h2", "h3", "p", "small", "img", "table", "tr", "th", "td", "pre", "strong",
    }  # fmt: skip
    for picture in outline.of("img"):
        head, _, data = str(picture["src"]).partition(",")
        assert head == "data:image/png;base64"
        assert base64.b64decode(data).startswith(b"\x89PNG")
        assert len(str(picture["alt"])) > 40
    assert "1.405 m" in text
    assert "46.4 kΩ" in text
    assert r"\frac{" in text
    assert len(text) < SIZE_LIMIT


def test_frame_holds_the_whole_page() -> None:
    (frame,) = Outline(page_frame(header_tank())).of("iframe")
    assert frame["sandbox"] == "allow-scripts"
    assert frame["srcdoc"] == standalone(Page(header_tank()))
    assert frame["title"] == "Header tank"


# -- files -----------------------------------------------------------------------------------


def test_written_page_tells_what_a_server_has_to_allow(tmp_path: Path) -> None:
    written = hk.write_page(header_tank(), tmp_path / "new" / "tank.html")
    assert isinstance(written, WrittenPage)
    text = Path(written).read_text(encoding="utf-8")
    assert written.size == len(text.encode("utf-8"))
    assert written.script_hash in str(written)
    assert written.policy.replace("'", "&#x27;") in text
    assert written.script_hash in written.policy
    assert written.beside == ()


def test_separate_files(tmp_path: Path) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html", separate_script=True)
    assert [file.name for file in written.beside] == ["tank.js", "tank.css"]
    assert sorted(tmp_path.iterdir()) == sorted([written.path, *written.beside])
    outline = Outline(written.path.read_text(encoding="utf-8"))
    assert outline.of("style") == []
    run = [a for a in outline.of("script") if a.get("type") != "application/json"]
    assert [a["src"] for a in run] == ["tank.js"]
    assert (tmp_path / "tank.js").read_text(encoding="utf-8") == Page(header_tank()).script
    assert "sha256" not in written.policy
    assert "'unsafe" not in written.policy


@pytest.mark.parametrize("taken", ["tank.html", "tank.js", "tank.css"])
def test_nothing_is_replaced_unasked(tmp_path: Path, taken: str) -> None:
    (tmp_path / taken).write_text("mine", encoding="utf-8")
    with pytest.raises(hk.OutputExistsError, match="exists already"):
        hk.write_page(header_tank(), tmp_path / "tank.html", separate_script=True)
    assert [file.name for file in tmp_path.iterdir()] == [taken]
    hk.write_page(header_tank(), tmp_path / "tank.html", separate_script=True, overwrite=True)
    assert (tmp_path / taken).read_text(encoding="utf-8") != "mine"


@pytest.mark.parametrize("live", [True, False])
def test_tolerances_that_are_too_many_are_not_passed_over(live: bool) -> None:
    told = f">{not_evaluated(uncertain_chain(17))}<"
    assert hk.page_fragment(uncertain_chain(17), live=live).count(told) == 2
    assert told not in hk.page_fragment(uncertain_chain(16), live=live)


def test_a_file_above_the_page_is_told(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("mine", encoding="utf-8")
    with pytest.raises(hk.InputError, match="cannot be written"):
        hk.write_page(header_tank(), tmp_path / "taken" / "tank.html", overwrite=True)


def test_another_ending_is_refused(tmp_path: Path) -> None:
    with pytest.raises(hk.InputError, match=r"\.html"):
        hk.write_page(header_tank(), tmp_path / "tank.pdf")
    assert list(tmp_path.iterdir()) == []


# -- sensors ---------------------------------------------------------------------------------


class Bent(hk.signals.Signal):
    """A sensor of one's own: bent, falling, and without a voltage beyond its reach."""

    unit, name, span = "bar", "pressure", (0.0, 10.0)

    def _volts(self, quantity: Any, values: Any) -> Any:
        return 4.5 - math.sqrt(quantity + 2) if quantity > -2 else math.nan

    def _quantity(self, volts: Any, values: Any) -> Any:
        return (4.5 - volts) ** 2 - 2


def test_bent_sensor_becomes_a_table() -> None:
    design = header_tank().with_signal(Bent())
    data = signal_data(design)
    assert data["kind"] == "table"
    assert len(data["volts"]) == len(data["quantities"]) > 300
    assert data["quantities"] == sorted(data["quantities"])
    assert data["volts"] == sorted(data["volts"], reverse=True)
    assert data["quantities"][0] >= -2
    assert data["quantities"][-1] > 10
    between = [
        sum(pair) / 2 for pair in zip(data["quantities"], data["quantities"][1:], strict=False)
    ]
    chords = [sum(pair) / 2 for pair in zip(data["volts"], data["volts"][1:], strict=False)]
    inside = [k for k, q in enumerate(between) if 0 <= q <= 10]
    errors = [abs(Bent().quantity(chords[k]) - between[k]) for k in inside]
    assert max(errors) < 1e-4 * 10
    json.dumps(data, allow_nan=False)


def test_straight_sensor_stays_a_line() -> None:
    data = signal_data(header_tank())
    assert (data["kind"], data["at_zero"], data["per_unit"]) == ("linear", 0.6, 1.2)

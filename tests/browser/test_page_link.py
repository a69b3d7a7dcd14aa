"""The address of a live page carries its design; what is copied is what is shown."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.export.page.model import form_key
from tests.browser.pages import (
    Watched,
    cell,
    entry,
    settings,
    states,
    type_in,
    until,
    watched,
)
from tests.export.designs import full

if TYPE_CHECKING:
    from playwright.sync_api import Browser

pytestmark = pytest.mark.browser

FORMS = {stage.title: full(stage) for stage in hk.Stage.all()}


def test_link_carries_the_design(tank: Watched, chromium: Browser) -> None:
    page = tank.page
    type_in(page, "R_T", "47123.456")
    type_in(page, "R_B", "2", "hk-tolerance")
    type_in(page, "V_CC", "4.75")
    type_in(page, "V_OL", "0.12")
    page.locator(".hk-device summary").click()
    type_in(page, "bias_plus", "25n")
    until(page, "location.hash.includes('bias_plus')")
    state = page.evaluate("document.querySelector('.hk-live').hystkit.state()")
    with watched(chromium, own="file://") as other:
        other.page.goto(page.url)
        read = other.page.evaluate("document.querySelector('.hk-live').hystkit.state()")
        assert {k: v for k, v in read["value"].items() if v} == {
            k: v for k, v in state["value"].items() if v
        }
        assert read["tol"] == {k: v for k, v in state["tol"].items() if v}
        assert entry(other.page, "R_T").input_value() == "47k123456"
        other.all_quiet()
    page.locator("[data-do=reset]").click()
    assert entry(page, "R_T").input_value() == "46k4"


@pytest.mark.parametrize("design", ["header tank", *list(FORMS)[::3]])
def test_link_gives_every_state_back(blank: Watched, design: str) -> None:
    first = header_tank() if design == "header tank" else FORMS[design]
    blank.page.set_content(hk.page_fragment(first))
    script = """(state) => { const h = document.querySelector('.hk-live').hystkit;
        h.put(state); return [h.told(), h.parsed(h.told())]; }"""
    for one in settings(first, 10, seed=3):
        state = states([one])[0]
        _, back = blank.page.evaluate(script, state)
        assert back["value"] == state["value"]
        tol = {name: value for name, value in state["tol"].items() if value}
        assert {k: v for k, v in back["tol"].items() if v} == tol


@pytest.mark.parametrize(
    "tail",
    ["R_T=", "R_T=0", "R_T=-5", "Q=1", "R_T=1k~2", "R_T=<script>", "%E0%A4%A", "__proto__=1",
     "V_CC=nan"],
)  # fmt: skip
def test_link_that_cannot_be_used_leaves_the_design(
    chromium: Browser, tmp_path: Path, tail: str
) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html")
    key = form_key(header_tank().stage)
    with watched(chromium, own="file://") as seen:
        seen.page.goto(f"{written.path.as_uri()}#{key}/{tail}")
        assert entry(seen.page, "R_T").input_value() == "46k4"
        assert cell(seen.page, "upper.volts") == "2.286 V"
        seen.all_quiet()


def test_link_of_another_form_is_left_alone(tank: Watched) -> None:
    tank.page.evaluate("location.hash = '#hk00000000/R_T=1k'")
    assert entry(tank.page, "R_T").input_value() == "46k4"


def test_opening_a_link_in_place_changes_the_page(tank: Watched) -> None:
    page = tank.page
    type_in(page, "R_T", "10k")
    until(page, "location.hash.includes('R_T=10k')")
    page.evaluate("location.hash = location.hash.replace('R_T=10k', 'R_T=22k')")
    until(page, "document.querySelector('[data-name=R_T] .hk-value').value === '22k'")


def test_copying(chromium: Browser, tmp_path: Path) -> None:
    written = hk.write_page(header_tank(), tmp_path / "tank.html")
    # The clipboard answers later than the click.
    said = "document.querySelector('.hk-said').textContent === '{}'"
    with watched(chromium, own="file://", permissions=["clipboard-read"]) as seen:
        page = seen.page
        page.goto(written.path.as_uri())
        page.locator("[data-do=latex]").click()
        until(page, said.format("LaTeX copied"))
        law = hk.derive(header_tank()).for_design(header_tank())
        assert page.evaluate("navigator.clipboard.readText()") == law.latex()
        type_in(page, "R_T", "47k")
        page.locator("[data-do=link]").click()
        until(page, said.format("link copied"))
        link = page.evaluate("navigator.clipboard.readText()")
        assert link.startswith(written.path.as_uri() + "#hk")
        assert "R_T=47k~0.01" in link
        seen.all_quiet()

"""The live page for everybody: keys, screen readers, narrow screens, paper."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

import hystkit as hk
from tests.browser.pages import (
    Watched,
    type_in,
    watched,
)
from tests.export.designs import full

if TYPE_CHECKING:
    from playwright.sync_api import Browser

pytestmark = pytest.mark.browser


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [1280, 360])
def test_no_serious_accessibility_fault(
    chromium: Browser, axe: str, tmp_path: Path, scheme: str, width: int
) -> None:
    design = full(hk.Stage.all()[13])
    written = hk.write_page(design, tmp_path / "page.html")
    viewport = {"width": width, "height": 900}
    with watched(
        chromium, own="file://", color_scheme=scheme, viewport=viewport, bypass_csp=True
    ) as seen:
        page = seen.page
        page.goto(written.path.as_uri())
        page.evaluate("document.querySelectorAll('details').forEach((d) => { d.open = true; })")
        type_in(page, "R_F", "4,7k")
        page.evaluate(axe)
        found = page.evaluate("axe.run(document, { resultTypes: ['violations'] })")
        told = [_fault(violation) for violation in found["violations"]]
        assert [text for text in told if text.startswith(("serious", "critical"))] == []
        assert told == []


def _fault(violation: dict[str, Any]) -> str:
    first = violation["nodes"][0]
    where = f"{first['html'][:160]} {first['failureSummary']}"
    return f"{violation['impact']} {violation['id']}: {where}"


def test_everything_is_reached_with_the_tab_key(tank: Watched) -> None:
    page = tank.page
    page.evaluate("document.querySelectorAll('details').forEach((d) => { d.open = true; })")
    wanted = page.locator(
        ".hk-live button:visible, .hk-live input:visible, .hk-live select:visible,"
        " .hk-live summary:visible"
    ).count()
    seen: set[int] = set()
    for _ in range(wanted + 8):
        page.keyboard.press("Tab")
        seen.add(
            page.evaluate(
                """() => { const e = document.activeElement, all = [...document.querySelectorAll(
                '.hk-live button, .hk-live input, .hk-live select, .hk-live summary')];
                if (e === document.body) return -1;
                return getComputedStyle(e).outlineStyle === 'none' ? -2 : all.indexOf(e); }"""
            )
        )
    assert -2 not in seen
    assert len(seen - {-1}) == wanted


@pytest.mark.parametrize("width", [320, 360, 480, 600, 680, 760, 1040, 1280, 1600])
def test_nothing_sticks_out_at_any_width(chromium: Browser, tmp_path: Path, width: int) -> None:
    written = hk.write_page(full(hk.Stage.all()[13]), tmp_path / "page.html")
    with watched(chromium, own="file://", viewport={"width": width, "height": 800}) as seen:
        seen.page.goto(written.path.as_uri())
        assert seen.page.evaluate("document.documentElement.scrollWidth") <= width
        outside = seen.page.evaluate(
            """() => [...document.querySelectorAll('.hk-picture text, .hk-schematic text')]
                .filter((t) => { const b = t.getBoundingClientRect(),
                    s = t.ownerSVGElement.getBoundingClientRect();
                    return b.left < s.left - 1 || b.right > s.right + 1
                        || b.top < s.top - 1 || b.bottom > s.bottom + 1; })
                .map((t) => t.textContent)"""
        )
        assert outside == []


def test_paper_shows_values_and_no_controls(tank: Watched) -> None:
    page = tank.page
    page.emulate_media(media="print", color_scheme="dark")
    assert page.locator(".hk-controls").is_hidden()
    assert page.locator("[data-do=link]").is_hidden()
    assert page.locator("[data-symbol=R_T]").is_visible()
    paper = page.evaluate("getComputedStyle(document.querySelector('.hk-card')).backgroundColor")
    assert paper == "rgb(255, 255, 255)"
    assert page.pdf(format="A4").startswith(b"%PDF")

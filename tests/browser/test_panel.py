"""A panel in a real JupyterLab: keys, fields, copying, names, widths and both themes."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import pytest

import hystkit as hk
from hystkit.base import quantity
from hystkit.circuit import preferred
from hystkit.circuit.demo import header_tank
from tests.browser.lab import Lab, jupyterlab
from tests.browser.pages import Watched, watched

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

pytestmark = pytest.mark.browser

CELLS = [
    "import hystkit as hk\nfrom hystkit.circuit.demo import header_tank\n"
    "panel = hk.panels.TripPanel(header_tank())\npanel",
]
PICTURES = "img.hystkit-picture"
READY = (
    f"() => document.querySelectorAll('{PICTURES}').length === 3"
    " && !!document.querySelector('.hystkit-math mjx-container')"
)


@pytest.fixture(scope="module")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    pytest.importorskip("jupyterlab", reason="JupyterLab is not installed")
    with jupyterlab(tmp_path_factory.mktemp("lab"), CELLS) as running:
        yield running


@pytest.fixture(scope="module")
def seen(lab: Lab, chromium: Browser) -> Iterator[Watched]:
    allowed = ["clipboard-read", "clipboard-write"]
    size = {"width": 1280, "height": 1900}
    with watched(chromium, own=lab.url, viewport=size, permissions=allowed) as found:
        lab.open(found.page)
        found.page.wait_for_function(READY, timeout=60_000)
        found.page.evaluate("() => window.jupyterapp.shell.collapseLeft()")
        yield found


@pytest.fixture
def page(seen: Watched) -> Page:
    return seen.page


def row(page: Page, name: str) -> Locator:
    return page.locator(".hystkit-row", has=page.locator(f"[aria-label^='{name},']"))


def sources(page: Page) -> list[str]:
    found: list[str] = page.eval_on_selector_all(PICTURES, "all => all.map(one => one.src)")
    return found


def moved(page: Page, before: list[str]) -> None:
    page.wait_for_function(
        f"before => [...document.querySelectorAll('{PICTURES}')]"
        ".every((one, n) => one.src !== before[n] && one.complete)",
        arg=before,
        timeout=20_000,
    )


def field(page: Page, name: str) -> Any:
    return row(page, name).locator(f"input[title^='{name},']")


def shows(page: Page, name: str, text: str) -> None:
    """Wait until the field of a part shows a text."""
    page.wait_for_function(
        "([name, text]) => [...document.querySelectorAll('.hystkit-field input')]"
        ".some(one => one.title.startsWith(name + ',') && one.value === text)",
        arg=[name, text],
        timeout=20_000,
    )


def at_rest(page: Page) -> None:
    """Wait until no picture has changed for a while."""
    before: list[str] = []
    while before != sources(page):
        before = sources(page)
        page.wait_for_timeout(700)


def test_keys_move_a_slider_and_everything_follows(page: Page) -> None:
    at_rest(page)
    handle = row(page, "R_F").locator(".noUi-handle")
    before, table = sources(page), page.locator(".hystkit-table").inner_text()
    handle.focus()
    page.keyboard.press("ArrowRight")
    shows(page, "R_F", "102k")
    moved(page, before)
    upper = float(hk.trip_points(header_tank().with_parts(R_F="102k")).upper)
    assert f"{upper:.3f} V" not in table
    page.locator(".hystkit-table", has_text=f"{upper:.3f} V").wait_for(timeout=20_000)


def test_the_last_of_many_keys_wins(page: Page) -> None:
    row(page, "R_T").locator(".noUi-handle").focus()
    for _ in range(25):
        page.keyboard.press("ArrowRight")
    expected = preferred.step(46400, "E96", 25)
    text = quantity.code(expected)
    shows(page, "R_T", text)
    page.wait_for_timeout(500)
    assert field(page, "R_T").input_value() == text
    assert f"R_T {quantity.show(expected, 'Ω')}" in str(
        page.locator(PICTURES).nth(2).get_attribute("alt")
    )


def test_a_typed_value_is_kept_and_a_wrong_one_explained(page: Page) -> None:
    before = sources(page)
    field(page, "R_F").fill("575k")
    field(page, "R_F").press("Enter")
    moved(page, before)
    page.wait_for_timeout(300)
    assert field(page, "R_F").input_value() == "575k"
    field(page, "R_F").fill("33,2k")
    field(page, "R_F").press("Enter")
    refusal = row(page, "R_F").locator("[role=alert]")
    refusal.wait_for(timeout=10_000)
    assert "33.2k" in refusal.inner_text()
    assert field(page, "R_F").input_value() == "33,2k"


def test_a_selector_changes_the_form(page: Page) -> None:
    before = sources(page)
    page.get_by_role("button", name="non-inverting").click()
    moved(page, before)
    row(page, "R_I").wait_for(timeout=10_000)
    page.get_by_role("button", name="inverting", exact=True).click()
    row(page, "R_I").wait_for(state="detached", timeout=10_000)
    shows(page, "R_F", "575k")
    at_rest(page)


def test_a_click_copies(page: Page) -> None:
    page.get_by_role("button", name="copy the design as Python").click()
    page.wait_for_selector(".hystkit-said:not(:empty)", timeout=5_000)
    assert page.locator(".hystkit-said:not(:empty)").inner_text() == "copied"
    scope: dict[str, Any] = {}
    exec(page.evaluate("() => navigator.clipboard.readText()"), scope)
    assert isinstance(scope["design"], hk.Design)
    page.get_by_role("button", name="copy the formula as LaTeX").click()
    page.wait_for_timeout(300)
    law = hk.derive(scope["design"]).for_design(scope["design"])
    assert page.evaluate("() => navigator.clipboard.readText()") == law.latex("formula")


def test_a_click_copies_where_the_clipboard_is_closed(page: Page) -> None:
    page.evaluate("() => Object.defineProperty(navigator, 'clipboard', {value: undefined})")
    heard = page.evaluate(
        """() => new Promise(done => {
          document.addEventListener('copy', () => done(String(document.activeElement.value)),
            {once: true});
          document.querySelector('[aria-label="copy parts and trips as a LaTeX table"]').click();
        })"""
    )
    assert heard.startswith("\\begin{tabular}")


def test_handles_and_pictures_have_names(page: Page) -> None:
    handles = page.locator(".hystkit-panel .noUi-handle")
    names = [handles.nth(n).get_attribute("aria-label") for n in range(handles.count())]
    assert [str(name).split(",")[0] for name in names] == ["R_T", "R_B", "R_F"]
    texts: list[str] = page.eval_on_selector_all(PICTURES, "all => all.map(one => one.alt)")
    assert all(len(text) > 40 for text in texts)
    inputs = page.eval_on_selector_all(
        ".hystkit-panel input, .hystkit-panel select",
        "all => all.filter(one => one.offsetParent && !one.title).length",
    )
    assert inputs == 0


@pytest.mark.parametrize("width", [1600, 1280, 900, 700])
@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_nothing_is_cut_off(width: int, theme: str, page: Page, lab: Lab) -> None:
    page.set_viewport_size({"width": width, "height": 1900})
    lab.command(page, "apputils:change-theme", theme=theme)
    page.wait_for_timeout(1500)
    panel = page.locator(".hystkit-panel").bounding_box()
    assert panel is not None
    for part in (".hystkit-card", ".hystkit-controls", PICTURES, ".hystkit-field input"):
        for n in range(page.locator(f".hystkit-panel {part}").count()):
            box = page.locator(f".hystkit-panel {part}").nth(n).bounding_box()
            if box is not None and box["width"] > 0:
                assert box["x"] >= panel["x"] - 1
                assert box["x"] + box["width"] <= panel["x"] + panel["width"] + 1
    # Pixels of the screen per pixel of the file: one half is life size.
    shrunk = page.eval_on_selector_all(
        PICTURES, "all => all.map(o => o.clientWidth / o.naturalWidth)"
    )
    assert all(0.42 <= ratio <= 0.51 for ratio in shrunk), shrunk
    wrapped = page.eval_on_selector_all(
        ".hystkit-panel .hystkit-field input",
        "all => all.filter(o => o.scrollWidth > o.clientWidth + 1).length",
    )
    assert wrapped == 0


@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
def test_the_accessibility_checker_finds_nothing(
    theme: str, page: Page, lab: Lab, axe: str
) -> None:
    lab.command(page, "apputils:change-theme", theme=theme)
    for name in ("Levels", "Device"):
        fold = page.locator(".hystkit-fold", has_text=name)
        if fold.get_attribute("aria-expanded") == "false":
            fold.click()
            page.locator(".hystkit-fold[aria-expanded=true]", has_text=name).wait_for()
    page.wait_for_timeout(1000)
    page.evaluate(axe)
    found = page.evaluate("axe.run('.hystkit-panel', { resultTypes: ['violations'] })")
    assert [(each["id"], each["nodes"][0]["html"]) for each in found["violations"]] == []


def test_nothing_was_fetched_from_outside(seen: Watched) -> None:
    assert seen.requests == []
    assert [line for line in seen.complaints if line.startswith("Error") or "hystkit" in line] == []

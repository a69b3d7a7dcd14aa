"""A published notebook in a real browser: nothing fetched, nothing missing, its panels alive."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

import nbformat
import pytest

from hystkit.export.notebook import Published, publish
from tests.browser.kept import keep, keep_notebook
from tests.browser.lab import Lab, jupyterlab
from tests.browser.pages import Watched, watched
from tests.export.designs import AWKWARD
from tests.export.notebooks import notebook
from tests.project.source import ROOT

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

pytestmark = pytest.mark.browser

NOTEBOOKS = sorted((ROOT / "notebooks").glob("*.ipynb"))

#: Words of viewers that found a widget without its kernel.
LOST = ("model not found", "Error displaying widget", "Loading widget")
SETTLED = 500


@pytest.fixture(scope="module")
def published(tmp_path_factory: pytest.TempPathFactory) -> Callable[[Path], Published]:
    """Publish a notebook, once for all tests of this file."""

    @cache
    def of(source: Path) -> Published:
        with pytest.MonkeyPatch.context() as patch:
            patch.setenv("PYTHONPATH", str(ROOT))
            return publish(source, tmp_path_factory.mktemp(source.stem))

    return of


@pytest.fixture(scope="module", params=NOTEBOOKS, ids=lambda path: path.stem)
def written(request: pytest.FixtureRequest, published: Callable[[Path], Published]) -> Published:
    """One of the notebooks, published."""
    return published(request.param)


@pytest.fixture(scope="module")
def seen(written: Published, chromium: Browser) -> Iterator[Watched]:
    """Its page, for tests that leave it as it is."""
    with watched(chromium, own=written.page.as_uri()) as found:
        opened(found, written)
        yield found


def opened(seen: Watched, written: Published) -> Page:
    seen.page.goto(written.page.as_uri())
    seen.page.wait_for_timeout(SETTLED)
    return seen.page


# -- the page --------------------------------------------------------------------------------


def test_page_is_complete_and_asks_for_nothing(written: Published, seen: Watched) -> None:
    page = seen.page
    copy = nbformat.read(written.notebook, as_version=4)
    full = [c for c in copy.cells if c.cell_type == "code" and c.outputs]
    outputs = page.locator(".outputs")
    assert outputs.count() == len(full) > 0
    for n, cell in enumerate(full):
        shown = outputs.nth(n).locator(":scope > *")
        assert shown.count() == len(cell.outputs), cell.source
        empty = shown.evaluate_all(
            "all => all.filter(e => !e.innerText.trim() && !e.querySelector('img, math, svg'))"
            ".map(e => e.outerHTML.slice(0, 200))"
        )
        assert empty == [], cell.source
    assert page.evaluate("performance.getEntriesByType('resource').length") == 0
    assert written.left_out == ()
    seen.all_quiet()


def test_pictures_load_and_are_described(seen: Watched) -> None:
    pictures = seen.page.locator("img")
    assert pictures.count() > 0
    for n in range(pictures.count()):
        one = pictures.nth(n)
        assert one.evaluate("e => e.complete && e.naturalWidth") > 100
        assert len(one.get_attribute("alt") or "") > 40


def test_formulas_are_set_and_no_latex_is_left(seen: Watched) -> None:
    text = seen.page.evaluate(
        """() => {
          const copy = document.querySelector('main').cloneNode(true);
          for (const e of copy.querySelectorAll('pre, code, textarea, script, style')) e.remove();
          return copy.textContent;
        }"""
    )
    for lost in (*LOST, "$", "\\frac", "\\begin", "\\mathrm"):
        assert lost not in text
    boxes = seen.page.locator("math:visible").evaluate_all(
        "all => all.map(e => e.getBoundingClientRect()).map(b => [b.width, b.height])"
    )
    assert boxes
    assert all(width > 5 and height > 5 for width, height in boxes)
    # A fraction that is set stands on two lines: higher than a letter.
    fraction = seen.page.locator("math mfrac:visible").first.bounding_box()
    assert fraction is not None
    assert fraction["height"] > 25


def test_panels_show_pictures_table_and_a_page_that_lives(
    written: Published, chromium: Browser
) -> None:
    with watched(chromium, own=written.page.as_uri()) as seen:
        page = opened(seen, written)
        panels = page.locator(".panel")
        assert panels.count() == written.panels > 0
        for n in range(written.panels):
            still, live = panels.nth(n).locator(".still"), panels.nth(n).locator(".hk-live")
            assert still.locator("img").count() >= 1
            assert still.locator("table").count() >= 1
            ruler, table = live.locator(".hk-ruler"), live.locator(".hk-trips")
            before = still.inner_html(), ruler.inner_html(), table.inner_text()
            slider = live.locator("input[type=range]").first
            slider.focus()
            page.keyboard.press("PageUp")
            after = still.inner_html(), ruler.inner_html(), table.inner_text()
            assert [a == b for a, b in zip(after, before, strict=True)] == [True, False, False]
        page.wait_for_timeout(SETTLED)
        seen.all_quiet()


SEVERAL = """
import hystkit as hk
from hystkit.circuit.demo import header_tank
from tests.export.designs import full, ladder
for design in (header_tank(), full(hk.Stage.all()[13]), ladder(), header_tank()):
    display(hk.panels.TripPanel(design))
"""


def test_several_panels_of_one_notebook_live_apart(chromium: Browser, tmp_path: Path) -> None:
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("PYTHONPATH", str(ROOT))
        written = publish(notebook(tmp_path / "several.ipynb", SEVERAL), tmp_path / "out")
    assert written.panels == 4
    with watched(chromium, own=written.page.as_uri()) as seen:
        page = opened(seen, written)
        rulers = page.locator(".hk-live .hk-ruler")
        for n in range(4):
            before = [rulers.nth(k).inner_html() for k in range(4)]
            slider = page.locator(".hk-live").nth(n).locator("input[type=range]").first
            slider.focus()
            page.keyboard.press("PageUp")
            after = [rulers.nth(k).inner_html() for k in range(4)]
            assert [k for k in range(4) if before[k] != after[k]] == [n]
        # The name of the second design has all that HTML and LaTeX would take for their own.
        titles = page.locator(".still strong").all_text_contents()
        assert titles[1].startswith(AWKWARD)
        page.wait_for_timeout(SETTLED)
        seen.all_quiet()


def test_without_scripts_every_panel_still_shows_its_result(
    written: Published, chromium: Browser
) -> None:
    with watched(chromium, own=written.page.as_uri(), java_script_enabled=False) as seen:
        page = opened(seen, written)
        for n in range(written.panels):
            panel = page.locator(".panel").nth(n)
            assert panel.locator(".still img").first.is_visible()
            assert panel.locator(".hk-ruler svg:visible").count() == 1
            assert panel.locator(".hk-equation").first.is_visible()
        seen.all_quiet()


@pytest.mark.parametrize(("scheme", "checked"), [("light", 360), ("dark", 1280)])
def test_page_fits_and_is_accessible(
    scheme: str, checked: int, written: Published, chromium: Browser, axe: str
) -> None:
    name = f"published-{written.page.stem}"
    with watched(chromium, own=written.page.as_uri(), color_scheme=scheme) as seen:
        page = opened(seen, written)
        for width in (1280, 700, 360):
            page.set_viewport_size({"width": width, "height": 900})
            page.wait_for_timeout(SETTLED)
            assert page.evaluate("document.documentElement.scrollWidth") <= width
            keep(page, f"{name}-{width}-{scheme}", full_page=True)
            if width == checked:
                assert serious_faults(page, axe) == []


def serious_faults(page: Page, axe: str) -> list[tuple[str, str]]:
    page.evaluate(axe)
    found = page.evaluate("axe.run({ resultTypes: ['violations'] })")
    return [
        (each["id"], each["nodes"][0]["html"][:200])
        for each in found["violations"]
        if each["impact"] in ("serious", "critical")
    ]


def test_print_shows_what_ran(written: Published, chromium: Browser) -> None:
    with watched(chromium, own=written.page.as_uri(), color_scheme="dark") as seen:
        page = opened(seen, written)
        page.emulate_media(media="print")
        assert page.locator(".still:visible").count() == written.panels
        assert page.locator(".hk-live:visible").count() == 0
        assert page.evaluate("getComputedStyle(document.body).color") == "rgb(0, 0, 0)"
        wide = page.locator("pre").evaluate_all(
            "all => all.filter(e => e.scrollWidth > e.clientWidth + 1).length"
        )
        assert wide == 0


# -- the notebook, opened in JupyterLab and not run -------------------------------------------


TRUSTED = (
    "[...window.jupyterapp.shell.currentWidget.model.cells]"
    ".filter(c => c.type === 'code').every(c => c.trusted)"
)


@pytest.fixture(scope="module")
def lab(
    published: Callable[[Path], Published], tmp_path_factory: pytest.TempPathFactory
) -> Iterator[Lab]:
    pytest.importorskip("jupyterlab", reason="JupyterLab is not installed")
    copies = [published(source).notebook for source in NOTEBOOKS]
    with jupyterlab(tmp_path_factory.mktemp("lab"), notebooks=copies) as running:
        yield running


def test_notebook_shows_its_outputs_trusted_and_untrusted(
    written: Published, lab: Lab, chromium: Browser
) -> None:
    with watched(chromium, own=lab.url, viewport={"width": 1280, "height": 1900}) as seen:
        lab.open(seen.page, written.notebook.name, run=False)
        shows_everything(seen.page, written)
        assert seen.page.evaluate(TRUSTED) is False
        keep_notebook(seen.page, f"untrusted-{written.page.stem}")
        seen.page.evaluate("() => void window.jupyterapp.commands.execute('notebook:trust')")
        seen.page.locator(".jp-Dialog .jp-mod-accept").click()
        seen.page.wait_for_function(f"({TRUSTED}) === true")
        shows_everything(seen.page, written)
        assert seen.requests == []


def shows_everything(page: Page, written: Published) -> None:
    """Look for every output of the notebook in JupyterLab."""
    copy = nbformat.read(written.notebook, as_version=4)
    wanted = [len(c.outputs) for c in copy.cells if c.cell_type == "code"]
    page.wait_for_function(
        "wanted => document.querySelectorAll('.jp-OutputArea-child').length === wanted",
        arg=sum(wanted),
        timeout=30_000,
    )
    page.wait_for_timeout(SETTLED)
    text = page.locator(".jp-Notebook").inner_text()
    for lost in LOST:
        assert lost not in text
    panels = page.locator(".jp-RenderedHTMLCommon", has=page.locator("img[alt]"))
    assert panels.count() >= written.panels
    for n in range(panels.count()):
        for picture in panels.nth(n).locator("img").all():
            assert picture.evaluate("e => e.naturalWidth") > 100
            assert len(picture.get_attribute("alt") or "") > 40
        assert panels.nth(n).locator("table").count() >= 1

"""Every notebook of the project in a real JupyterLab: all cells run, every panel moves."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.browser.kept import keep_notebook
from tests.browser.lab import Lab, jupyterlab
from tests.browser.pages import watched
from tests.project.source import ROOT

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

pytestmark = pytest.mark.browser

NOTEBOOKS = sorted((ROOT / "notebooks").glob("*.ipynb"))
PICTURES = "img.hystkit-picture"
#: All cells were run in this session, and nothing is left to do.
DONE = """count => {
  const cells = [...window.jupyterapp.shell.currentWidget.model.cells]
    .filter(cell => cell.type === 'code');
  return cells.length === count && cells.every(cell => cell.executionState === 'idle'
    && cell.executionCount !== null);
}"""


@pytest.fixture(scope="module")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    pytest.importorskip("jupyterlab", reason="JupyterLab is not installed")
    with jupyterlab(tmp_path_factory.mktemp("lab"), notebooks=NOTEBOOKS) as running:
        yield running


@pytest.mark.parametrize("source", NOTEBOOKS, ids=lambda path: path.stem)
def test_notebook_runs_and_its_panels_move(source: Path, lab: Lab, chromium: Browser) -> None:
    size = {"width": 1280, "height": 1900}
    with watched(chromium, own=lab.url, viewport=size) as seen:
        page = seen.page
        lab.open(page, source.name)
        page.wait_for_function(DONE, arg=len(code_cells(source)), timeout=120_000)
        page.evaluate("() => window.jupyterapp.shell.collapseLeft()")
        no_faults(page)
        panels = page.locator(".hystkit-panel:visible")
        assert panels.count() >= 1
        for n in range(panels.count()):
            moves(page, panels.nth(n))
        no_faults(page)
        keep_notebook(page, f"lab-{source.stem}")
        assert seen.requests == []
        assert [c for c in seen.complaints if c.startswith("Error") or "hystkit" in c] == []


def code_cells(source: Path) -> list[object]:
    cells = json.loads(source.read_text(encoding="utf-8"))["cells"]
    return [cell for cell in cells if cell["cell_type"] == "code"]


def no_faults(page: Page) -> None:
    """Assert that no cell ended in an error and no panel reports one."""
    errors = page.locator(
        ".jp-RenderedText[data-mime-type='application/vnd.jupyter.error'],"
        ".jp-RenderedText[data-mime-type='application/vnd.jupyter.stderr'],"
        ".hystkit-error:not(:empty)"
    )
    assert [text for text in errors.all_inner_texts() if text.strip()] == []
    text = page.locator(".jp-Notebook").inner_text()
    for lost in ("model not found", "Error displaying widget"):
        assert lost not in text


def moves(page: Page, panel: Locator) -> None:
    """Move the first slider of a panel by a key, and wait for another picture."""
    pictures = panel.locator(PICTURES)
    pictures.first.wait_for(timeout=20_000)
    at_rest(page, pictures)
    handle = panel.locator(".noUi-handle:visible").first
    handle.scroll_into_view_if_needed()
    for key in ("ArrowRight", "ArrowLeft"):
        before = sources(pictures)
        value = handle.get_attribute("aria-valuetext") or handle.get_attribute("aria-valuenow")
        handle.focus()
        page.keyboard.press(key)
        for _ in range(200):
            if sources(pictures) != before:
                break
            page.wait_for_timeout(100)
        else:
            raise AssertionError(f"no picture followed {key} on a slider that stood at {value}")
        at_rest(page, pictures)
        widths = pictures.evaluate_all("all => all.map(e => e.complete && e.naturalWidth)")
        assert all(width and width > 100 for width in widths)


def sources(pictures: Locator) -> list[str]:
    found: list[str] = pictures.evaluate_all("all => all.map(e => e.src)")
    return found


def at_rest(page: Page, pictures: Locator) -> None:
    """Wait until no picture has changed for a while."""
    before: list[str] = []
    while before != (now := sources(pictures)):
        before = now
        page.wait_for_timeout(500)

"""Pictures of what the browser tests saw, kept for people to look at; git ignores them."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from playwright.sync_api import Page

#: CI names a folder of its own, which outlives the clone that is tested.
FOLDER = Path(os.environ.get("HYSTKIT_SCREENSHOTS") or Path(__file__).parent / "screenshots")


#: The tallest picture of a notebook that is kept [px].
TALLEST = 16_000


def keep(page: Page, name: str, **options: bool) -> None:
    """Store a picture of a page.

    Parameters
    ----------
    page : Page
        As it stands.
    name : str
        Of the file, without ending; a later run replaces it.
    **options
        Of playwright's screenshot, such as full_page.
    """
    FOLDER.mkdir(parents=True, exist_ok=True)
    page.screenshot(path=FOLDER / f"{name}.png", **options)


def keep_notebook(page: Page, name: str) -> None:
    """Store a picture of the notebook that JupyterLab shows, from its first cell to its last.

    Parameters
    ----------
    page : Page
        JupyterLab.
    name : str
        As for `keep`.
    """
    page.evaluate("() => window.jupyterapp.shell.collapseLeft()")
    height = page.evaluate(
        """() => {
          const sheet = [...document.querySelectorAll('.jp-Notebook')].find(e => e.offsetParent);
          const outer = sheet.querySelector('.jp-WindowedPanel-outer') || sheet;
          outer.scrollTop = 0;
          const cells = [...sheet.querySelectorAll('.jp-Cell')];
          return cells[cells.length - 1].getBoundingClientRect().bottom;
        }"""
    )
    page.set_viewport_size({"width": 1280, "height": min(int(height) + 80, TALLEST)})
    page.wait_for_timeout(700)
    keep(page, name)

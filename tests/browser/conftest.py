"""One Chromium for all browser tests of a run, with the network off."""

from __future__ import annotations

import os
import shutil
import subprocess
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

import hystkit as hk
from hystkit.circuit.demo import header_tank
from tests.browser.pages import Watched, watched

if TYPE_CHECKING:
    from playwright.sync_api import Browser

FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
#: The accessibility checker, fetched once as a file of the tests.
AXE = "axe-core@4.14.1"


@pytest.fixture(scope="session")
def chromium() -> Iterator[Browser]:
    """Return Debian's Chromium, driven by playwright."""
    api = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
    path = shutil.which("chromium") or shutil.which("chromium-browser")
    if path is None:
        pytest.skip("Chromium is not installed")
    with api.sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=path, args=FLAGS)
        yield browser
        browser.close()


@pytest.fixture(scope="session")
def axe(pytestconfig: pytest.Config, tmp_path_factory: pytest.TempPathFactory) -> str:
    """Return the source of the accessibility checker, from the cache of the tests or from npm."""
    if pytestconfig.pluginmanager.hasplugin("cacheprovider"):
        folder = pytestconfig.cache.mkdir(AXE)  # type: ignore[union-attr]
    else:
        folder = tmp_path_factory.mktemp("axe")
    source = Path(folder) / "node_modules" / "axe-core" / "axe.min.js"
    if not source.exists():
        _install(AXE, Path(folder))
    return source.read_text(encoding="utf-8")


def _install(package: str, folder: Path) -> None:
    npm = shutil.which("npm")
    if npm is None:
        pytest.skip(f"npm is not installed, and {package} is not in the cache of the tests")
    command = [npm, "install", "--no-save", "--ignore-scripts", "--no-audit", "--no-fund"]
    done = subprocess.run(
        [*command, "--prefix", str(folder), package],
        env={**os.environ, "npm_config_update_notifier": "false"},
        capture_output=True,
        text=True,
        check=False,
        timeout=120,
    )
    if done.returncode:
        pytest.skip(f"npm could not fetch {package}: {done.stderr.strip()[-300:]}")


@pytest.fixture(scope="module")
def blank(chromium: Browser) -> Iterator[Watched]:
    """A page to put fragments into."""
    with watched(chromium) as seen:
        yield seen


@pytest.fixture
def tank(chromium: Browser, tmp_path: Path) -> Iterator[Watched]:
    """The page of the header tank, from a file."""
    written = hk.write_page(header_tank(), tmp_path / "tank.html")
    with watched(chromium, own="file://") as seen:
        seen.page.goto(written.path.as_uri())
        yield seen

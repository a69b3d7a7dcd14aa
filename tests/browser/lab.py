"""A JupyterLab of its own for the tests: a free port, a token, nothing of the user's settings."""

from __future__ import annotations

import json
import os
import secrets
import shutil
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING
from urllib.request import urlopen

if TYPE_CHECKING:
    from playwright.sync_api import Page

_HOME = (
    "HOME",
    "IPYTHONDIR",
    "MPLCONFIGDIR",
    "JUPYTER_CONFIG_DIR",
    "JUPYTER_DATA_DIR",
    "JUPYTER_RUNTIME_DIR",
    "JUPYTERLAB_SETTINGS_DIR",
    "JUPYTERLAB_WORKSPACES_DIR",
)
_IDLE = """() => {
  const shown = window.jupyterapp && window.jupyterapp.shell.currentWidget;
  const session = shown && shown.sessionContext && shown.sessionContext.session;
  return session && session.kernel && session.kernel.status === 'idle';
}"""


_SETTINGS: dict[str, dict[str, object]] = {
    # Cells out of sight would not be in the page, and not in a picture of it.
    "notebook-extension/tracker": {"windowingMode": "none"},
    "apputils-extension/notification": {"fetchNews": "false", "checkForUpdates": False},
}


@dataclass(frozen=True)
class Lab:
    """A running server with its notebooks."""

    url: str
    token: str

    def open(self, page: Page, name: str = "sheet.ipynb", *, run: bool = True) -> None:
        """Open a notebook, wait for its kernel and run all cells.

        Parameters
        ----------
        page : Page
            Where it is opened.
        name : str
            File name of the notebook.
        run : bool
            False to look at the stored outputs.
        """
        page.goto(f"{self.url}/lab/tree/{name}?token={self.token}&reset")
        page.wait_for_selector(".jp-CodeCell", timeout=60_000)
        if run:
            page.wait_for_function(_IDLE, timeout=60_000)
            self.command(page, "notebook:run-all-cells")

    def command(self, page: Page, name: str, **arguments: str) -> None:
        """Run a command of JupyterLab."""
        page.evaluate(
            "([name, args]) => window.jupyterapp.commands.execute(name, args)", [name, arguments]
        )


@contextmanager
def jupyterlab(
    folder: Path, cells: Sequence[str] = (), notebooks: Iterable[Path] = ()
) -> Iterator[Lab]:
    """Run JupyterLab on copies of notebooks.

    Parameters
    ----------
    folder : Path
        Empty; holds the notebooks and all settings.
    cells : sequence of str
        Code of a notebook "sheet.ipynb".
    notebooks : iterable of Path
        Further ones.
    """
    root = folder / "root"
    root.mkdir()
    if cells:
        (root / "sheet.ipynb").write_text(json.dumps(_notebook(cells)), encoding="utf-8")
    for notebook in notebooks:
        shutil.copy(notebook, root)
    homes = {name: str(folder / name.lower()) for name in _HOME}
    for home in homes.values():
        Path(home).mkdir()
    for plugin, values in _SETTINGS.items():
        path = Path(homes["JUPYTERLAB_SETTINGS_DIR"]) / "@jupyterlab" / plugin
        path.parent.mkdir(parents=True)
        path.with_suffix(".jupyterlab-settings").write_text(json.dumps(values), encoding="utf-8")
    repository = str(Path(__file__).parents[2])
    found = os.environ.get("PYTHONPATH")
    path = os.pathsep.join([repository, found] if found else [repository])
    lab = Lab(f"http://127.0.0.1:{_free_port()}", secrets.token_hex(16))
    command = [
        *(sys.executable, "-m", "jupyterlab", "--no-browser", "--allow-root", "--ip=127.0.0.1"),
        f"--port={lab.url.rpartition(':')[2]}",
        "--ServerApp.port_retries=0",
        f"--IdentityProvider.token={lab.token}",
        f"--ServerApp.root_dir={root}",
        "--expose-app-in-browser",
        "--LabApp.news_url=None",
        "--LabApp.extension_manager=readonly",
    ]
    with (folder / "log").open("wb") as log:
        server = subprocess.Popen(
            command,
            env={**os.environ, **homes, "PYTHONPATH": path},
            stdout=log,
            stderr=log,
            start_new_session=True,
        )
        try:
            _wait_for(lab, server, folder / "log")
            yield lab
        finally:
            _end(server)


def _notebook(cells: Sequence[str]) -> dict[str, object]:
    return {
        "nbformat": 4,
        "nbformat_minor": 5,
        "metadata": {"kernelspec": {"name": "python3", "display_name": "Python 3"}},
        "cells": [
            {
                "cell_type": "code",
                "id": f"cell{n}",
                "metadata": {},
                "execution_count": None,
                "outputs": [],
                "source": cell,
            }
            for n, cell in enumerate(cells)
        ],
    }


def _free_port() -> int:
    with socket.socket() as one:
        one.bind(("127.0.0.1", 0))
        return int(one.getsockname()[1])


def _wait_for(lab: Lab, server: subprocess.Popen[bytes], log: Path) -> None:
    end = time.monotonic() + 60
    while time.monotonic() < end and server.poll() is None:
        with suppress(OSError), urlopen(f"{lab.url}/api", timeout=2):
            return
        time.sleep(0.2)
    raise RuntimeError(f"JupyterLab did not start:\n{log.read_text(encoding='utf-8')[-3000:]}")


def _end(server: subprocess.Popen[bytes]) -> None:
    """End the server and its kernels, which are in its process group."""
    with suppress(ProcessLookupError):
        os.killpg(server.pid, signal.SIGTERM)
    try:
        server.wait(3)  # it would wait longer for kernels that have ended with it
    except subprocess.TimeoutExpired:
        os.killpg(server.pid, signal.SIGKILL)
        server.wait(10)

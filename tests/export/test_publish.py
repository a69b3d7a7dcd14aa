"""Publishing a notebook: executed, complete, without widgets, and refused when it is not sound."""

from __future__ import annotations

import json
import os
import re
import signal
import subprocess
import sys
import time
import warnings
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbformat.v4 import new_code_cell, new_output

import hystkit as hk
from hystkit import __main__ as command
from hystkit.circuit.demo import header_tank
from hystkit.circuit.record import MIME
from hystkit.export.notebook import Published, PublishError, publish
from hystkit.export.notebook.libraries import needed
from hystkit.symbolic.mathml import formula_mathml
from tests.export.notebooks import notebook, readable
from tests.project.source import ROOT, run_python

WIDGET = "application/vnd.jupyter.widget-view+json"
NAME = "Tank <b>$R_1$</b> & Co"

PROSE = """# Sheet with $x_1$ & more

Width $V_\\mathrm{upper} - V_\\mathrm{lower}$ for $5 and $6, code `$a$`.

![a chart](https://example.org/chart.png)
"""
LAW = """
import hystkit as hk
from hystkit.circuit.demo import header_tank
design = hk.Design(header_tank().stage, header_tank().parts, supply=5.0,
                   signal=header_tank().signal, name="Tank <b>$R_1$</b> & Co")
law = hk.derive(design).for_design(design)
law
"""
PANEL = """
panel = hk.panels.TripPanel(design)
panel
"""
RICH = """
import sys, time
from IPython.display import HTML, SVG, Javascript, Latex, Markdown, Math, display
print("one <i>", flush=True)
time.sleep(0.3)
print("two")
print("to stderr", file=sys.stderr)
display(Math(r"\\int_0^1 x\\,dx"), Latex("$$x^2$$"), Markdown("**bold** $q_1$"))
display(HTML("<p>$$z^2$$</p><script src='https://example.org/x.js'></script>"))
display(SVG('<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"></svg>'))
display(Javascript("window.intruder = 1"))
"""


@pytest.fixture(scope="module", autouse=True)
def importable() -> Iterator[None]:
    """Let kernels find this checkout."""
    with pytest.MonkeyPatch.context() as patch:
        known = os.environ.get("PYTHONPATH")
        patch.setenv("PYTHONPATH", os.pathsep.join([str(ROOT), *([known] if known else [])]))
        yield


@pytest.fixture(scope="module")
def source(tmp_path_factory: pytest.TempPathFactory) -> Path:
    stale = new_code_cell("", outputs=[new_output("stream", name="stdout", text="stale")])
    return notebook(
        tmp_path_factory.mktemp("sheets") / "sheet.ipynb",
        *(PROSE, LAW, "law.ideal", "law.upper", PANEL, RICH, "hk.figures.schematic(design)"),
        stale,
        widgets={"application/vnd.jupyter.widget-state+json": {"state": {}}},
        kernelspec={"name": "of another desk", "language": "python", "display_name": "x"},
    )


@pytest.fixture(scope="module")
def published(source: Path) -> Published:
    before = source.read_bytes()
    done = publish(source, source.parent / "deep" / "out")
    assert source.read_bytes() == before
    return done


@pytest.fixture(scope="module")
def page(published: Published) -> str:
    return published.page.read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def copy(published: Published) -> Any:
    return nbformat.read(published.notebook, as_version=4)


# -- the page --------------------------------------------------------------------------------


def test_files_are_named_after_the_notebook(published: Published) -> None:
    assert published.page.name == "sheet.html"
    assert published.notebook.name == "sheet.published.ipynb"
    assert sorted(published.page.parent.iterdir()) == sorted([published.page, published.notebook])
    assert published.panels == 1
    assert "example.org/chart.png" in str(published)


def test_page_has_a_title_and_a_policy_that_fetches_nothing(page: str) -> None:
    assert "<title>Sheet with x1 &amp; more</title>" in page
    (policy,) = re.findall(r'http-equiv="Content-Security-Policy" content="([^"]*)"', page)
    assert policy.startswith("default-src &#x27;none&#x27;; ")
    assert "http" not in policy


def test_no_formula_is_left_in_latex(page: str) -> None:
    text = readable(page)
    assert "\\" not in text
    # Money and the name of the design keep their dollars; nothing else has any.
    assert re.findall(r"\$\S+", text.replace("$R_1$", "")) == ["$5", "$6,"]
    assert page.count("<math") >= 10


def test_law_is_shown_in_its_own_mathml(page: str) -> None:
    law = hk.derive(header_tank()).for_design(header_tank())
    # Once as the result of a cell, once below the pictures of the panel.
    assert page.count(formula_mathml(law.rows)) == 2
    assert page.count(formula_mathml(law.ideal.rows)) == 1


def test_panel_shows_pictures_table_and_live_page(page: str) -> None:
    (panel,) = re.findall(r'<div class="panel">.*?class="frame">', page, re.DOTALL)
    assert len(re.findall(r'<img alt="[^"]{40,}" [^>]*src="data:image/png;base64,', panel)) == 3
    upper = f"{hk.trip_points(header_tank()).upper:.3f} V"
    assert f"<td>{upper}</td>" in panel
    assert page.count('class="hk-live"') == 1
    assert page.count('class="hk-data"') == 1


def test_name_of_a_design_stays_text(page: str) -> None:
    assert "Tank &lt;b&gt;$R_1$&lt;/b&gt; &amp; Co" in page
    assert "Tank <b>" not in page


def test_what_stands_elsewhere_is_left_out_and_told(page: str, published: Published) -> None:
    pictures = {"https://example.org/chart.png", "https://example.org/x.js"}
    assert set(published.left_out) == pictures
    assert '<a class="left-out" href="https://example.org/chart.png">a chart</a>' in page
    assert not re.search(r"\b(?:src|srcset)\s*=\s*[\"']?(?!data:)[\w/.]", _less_scripts(page))


def _less_scripts(page: str) -> str:
    return re.sub(r"<(script|pre)\b.*?</\1>", "", page, flags=re.DOTALL)


def test_each_kind_of_output_is_shown(page: str) -> None:
    assert "one &lt;i&gt;\ntwo</pre>" in page
    assert "to stderr" in page
    assert "<strong>bold</strong>" in page
    assert 'src="data:image/svg+xml;base64,' in page
    assert "A script of the notebook is left out here." in page
    assert "window.intruder" not in _less_scripts(page)
    assert 'alt="Schematic, inverting' in page


# -- the notebook ----------------------------------------------------------------------------


def test_copy_holds_no_widget(copy: Any, published: Published) -> None:
    nbformat.validate(copy)
    assert WIDGET not in published.notebook.read_text(encoding="utf-8")
    assert "widgets" not in copy.metadata
    (panel,) = [
        output.data
        for cell in copy.cells
        for output in cell.get("outputs", ())
        if MIME in output.get("data", {})
    ]
    assert panel["text/html"].count("<img alt=") == 3
    assert "<table>" in panel["text/html"]


def test_copy_was_run_and_keeps_nothing_of_earlier_runs(copy: Any) -> None:
    code = [cell for cell in copy.cells if cell.cell_type == "code" and cell.source]
    assert [cell.execution_count for cell in code] == list(range(1, len(code) + 1))
    assert "stale" not in nbformat.writes(copy)
    assert not any("execution" in cell.metadata for cell in code)
    streams = [o.name for o in code[4].outputs if o.output_type == "stream"]
    assert streams == ["stdout", "stderr"]


def test_same_notebook_gives_the_same_bytes(
    source: Path, published: Published, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PYTHONHASHSEED", "7")
    again = publish(source, tmp_path)
    assert again.page.read_bytes() == published.page.read_bytes()
    assert again.notebook.read_bytes() == published.notebook.read_bytes()


# -- refusals --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("cells", "timeout", "told"),
    [
        (["x = 1", "print('seen')\nx / 0"], 60, ["ZeroDivisionError", "cell 2: print('seen')"]),
        (["while True: pass"], 1.0, ["too long", "cell 1: while True: pass", "1 s"]),
        (["1 + 1", "import os; os._exit(3)"], 60, ["ended by itself", "cell 2: import os"]),
        (
            ["import ipywidgets", "# prose", "ipywidgets.IntSlider(3)"],
            60,
            ["leaves nothing", "cell 3"],
        ),
    ],
    ids=["error", "endless", "kernel ends", "bare widget"],
)
def test_notebook_that_does_not_run_is_refused(
    tmp_path: Path, cells: list[str], timeout: float, told: list[str]
) -> None:
    sheet = notebook(tmp_path / "sheet.ipynb", *cells)
    with pytest.raises(PublishError) as caught:
        publish(sheet, tmp_path / "out", timeout=timeout)
    for words in told:
        assert words in str(caught.value)
    assert not (tmp_path / "out").exists()


@pytest.mark.skipif(os.name != "posix", reason="signals are sent this way on POSIX systems")
def test_interrupt_ends_the_kernel_and_writes_nothing(tmp_path: Path) -> None:
    endless = (
        "import os, time\nfrom pathlib import Path\n"
        "Path('partial').write_text(str(os.getpid()))\nPath('partial').rename('started')\n"
        "time.sleep(120)"
    )
    sheet = notebook(tmp_path / "sheet.ipynb", endless)
    running = subprocess.Popen(
        [sys.executable, "-m", "hystkit", "publish", str(sheet), "--out", str(tmp_path / "out")],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    waited_for(lambda: (tmp_path / "started").exists() or running.poll() is not None)
    running.send_signal(signal.SIGINT)
    _, told = running.communicate(timeout=60)
    assert (running.returncode, told) == (130, "hystkit: interrupted.\n")
    kernel = int((tmp_path / "started").read_text())
    waited_for(lambda: not alive(kernel))
    assert not (tmp_path / "out").exists()


def waited_for(condition: Callable[[], bool]) -> None:
    for _ in range(600):
        if condition():
            return
        time.sleep(0.1)
    raise AssertionError("never came true")


def alive(process: int) -> bool:
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    return True


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (None, "cannot be read"),
        (b"", "is not a notebook"),
        (b"print(1)", "is not a notebook"),
        (b"[]", "is not a notebook"),
        (b'{"cells": 3, "nbformat": 4, "nbformat_minor": 5, "metadata": {}}', "is not a notebook"),
        (b"\x89PNG\r\n\x1a\n\xff", "is not a notebook"),
        (b"[" * 100_000, "is not a notebook"),
    ],
    ids=["gone", "empty", "code", "list", "shape", "binary", "nested"],
)
def test_file_that_is_no_notebook_is_named(
    tmp_path: Path, content: bytes | None, told: str
) -> None:
    path = tmp_path / "sheet.ipynb"
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(hk.InputError, match=told) as caught:
        publish(path, tmp_path / "out")
    assert "sheet.ipynb" in str(caught.value)
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize("name", ["sheet.html", "sheet.published.ipynb"])
def test_output_that_exists_is_kept(tmp_path: Path, name: str) -> None:
    sheet = notebook(tmp_path / "sheet.ipynb", "1 / 0")
    (tmp_path / name).write_text("mine", encoding="utf-8")
    with pytest.raises(hk.OutputExistsError, match=name):
        publish(sheet)
    assert (tmp_path / name).read_text(encoding="utf-8") == "mine"


def test_output_is_replaced_when_asked_to(tmp_path: Path) -> None:
    sheet = notebook(tmp_path / "sheet.ipynb", "# Prose", "40 + 2")
    for name in ("sheet.html", "sheet.published.ipynb"):
        (tmp_path / name).write_text("old", encoding="utf-8")
    done = publish(sheet, overwrite=True)
    assert ">42</pre>" in done.page.read_text(encoding="utf-8")
    assert "old" not in done.notebook.read_text(encoding="utf-8")


def test_kernel_of_another_language_is_named(tmp_path: Path) -> None:
    sheet = notebook(
        tmp_path / "sheet.ipynb",
        "1",
        kernelspec={"name": "zz", "language": "zz", "display_name": "z"},
    )
    with pytest.raises(PublishError, match="zz"):
        publish(sheet)


@pytest.mark.parametrize("timeout", [0, -1, float("nan"), float("inf")])
def test_time_is_checked(tmp_path: Path, timeout: float) -> None:
    with pytest.raises(hk.InputError, match="timeout"):
        publish(tmp_path / "sheet.ipynb", timeout=timeout)


def test_notebook_of_an_older_format_runs_without_a_warning(tmp_path: Path) -> None:
    cell = {"cell_type": "code", "metadata": {}, "outputs": [], "source": "6 * 7"}
    old = {
        "nbformat": 4,
        "nbformat_minor": 2,
        "metadata": {},
        "cells": [{**cell, "execution_count": None}],
    }
    sheet = tmp_path / "sheet.ipynb"
    sheet.write_text(json.dumps(old), encoding="utf-8")
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        done = publish(sheet)
    assert ">42</pre>" in done.page.read_text(encoding="utf-8")


def test_library_that_is_missing_is_named() -> None:
    with pytest.raises(hk.InputError, match=r"no_such_library.*\n(.*\n)*.*hystkit\[lab\]"):
        needed("no_such_library.part")


def test_importing_export_waits_for_nothing_that_only_publishing_needs() -> None:
    heavy = ("nbconvert", "nbformat", "nbclient", "latex2mathml", "matplotlib", "ipywidgets")
    code = f"import hystkit.export, sys; print([m for m in {heavy!r} if m in sys.modules])"
    assert run_python(code).strip() == "[]"


# -- the command -----------------------------------------------------------------------------


def test_command_names_what_it_wrote(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    sheet = notebook(tmp_path / "sheet.ipynb", "# Prose ![far](https://example.org/a.png)", "6 * 7")
    assert command.main(["publish", str(sheet), "--out", str(tmp_path / "wiki")]) == 0
    told = capsys.readouterr().out
    for words in (f"executing {sheet}", "sheet.html", "sheet.published.ipynb", "example.org/a.png"):
        assert words in told
    assert (tmp_path / "wiki" / "sheet.html").exists()
    assert command.main(["publish", str(sheet), "--out", str(tmp_path / "wiki")]) == 2
    assert "exists already" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["gone.ipynb"], "gone.ipynb cannot be read"),
        (["--timeout", "0", "gone.ipynb"], "'0' is not a time"),
        (["--timeout", "soon", "gone.ipynb"], "'soon' is not a time"),
        ([], "NOTEBOOK"),
        (["a.ipynb", "b.ipynb"], "b.ipynb"),
    ],
)
def test_command_refuses_with_exit_code_2(
    arguments: list[str],
    words: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.chdir(tmp_path)
    try:
        code = command.main(["publish", *arguments])
    except SystemExit as ended:
        code = int(ended.code or 0)
    assert code == 2
    assert words in capsys.readouterr().err


def test_command_helps(capsys: pytest.CaptureFixture[str]) -> None:
    for arguments in (["publish", "--help"], ["--help"]):
        with pytest.raises(SystemExit) as ended:
            command.main(arguments)
        assert ended.value.code == 0
        assert "python -m hystkit publish" in capsys.readouterr().out

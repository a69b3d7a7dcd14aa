"""The LaTeX fragment: complete, compiled by pdflatex, every symbol explained."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from pathlib import Path

import pytest

import hystkit as hk
from hystkit.base.quantity import show_latex
from hystkit.circuit.demo import header_tank
from hystkit.symbolic.symbols import latex_name
from tests.export.designs import AWKWARD, DEVICE, bare, every_design, full, ladder, stuck
from tests.symbolic.coupled import every_coupled

#: The two other corners of parts and device, a narrow band, and circuits of one's own.
DESIGNS = {
    **every_design(),
    **{f"{s.title}, bare, device": bare(s).with_device(**vars(DEVICE)) for s in hk.Stage.all()},
    **{
        f"{s.title}, all parts, ideal": full(s).with_device(**vars(hk.Device()))
        for s in hk.Stage.all()
    },
    **every_coupled(),
}
PAGE = r"""\documentclass[a4paper,11pt]{article}
\usepackage[margin=25mm]{geometry}
\usepackage{amsmath}
\begin{document}
%s
\end{document}
"""
SYMBOL = re.compile(r"[A-Za-z]_\{(?:\\mathrm\{\w+\}|[+-]+(?:\\mathrm\{\w+\})?)\}")
# A line of TeX's log about a box that sticks out of the text.
OVERFULL = re.compile(r"^Overfull \\[hv]box \(([0-9.]+)pt too (?:wide|high)\).*", re.MULTILINE)


@pytest.fixture(scope="module")
def fragments() -> dict[str, str]:
    return {name: hk.export.tex(design) for name, design in DESIGNS.items()}


@pytest.fixture(scope="module")
def log(fragments: dict[str, str], tmp_path_factory: pytest.TempPathFactory) -> str:
    """What pdflatex says to one document that takes in every fragment."""
    if shutil.which("pdflatex") is None:
        pytest.skip("pdflatex is not installed (Debian: texlive-latex-base)")
    folder = tmp_path_factory.mktemp("tex")
    for number, text in enumerate(fragments.values()):
        (folder / f"part{number}.tex").write_text(text, encoding="utf-8")
    inputs = "\n\\clearpage\n".join(rf"\input{{part{n}}}" for n in range(len(fragments)))
    (folder / "all.tex").write_text(PAGE % inputs, encoding="utf-8")
    command = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "-no-shell-escape"]
    done = subprocess.run(
        [*command, "all.tex"],
        cwd=folder,
        env={**os.environ, "max_print_line": "1000"},
        capture_output=True,
        check=False,
    )
    found = (folder / "all.log").read_text(encoding="utf-8", errors="replace")
    assert done.returncode == 0, found[-3000:]
    return found


@pytest.mark.tex
def test_one_document_takes_in_every_form(log: str) -> None:
    (pages,) = re.findall(r"Output written on all\.pdf \((\d+) pages", log)
    assert int(pages) >= len(DESIGNS)


@pytest.mark.tex
def test_nothing_sticks_out_of_the_text(log: str) -> None:
    assert [found[0] for found in OVERFULL.finditer(log) if float(found[1]) > 1] == []


@pytest.mark.tex
def test_log_has_no_complaint(log: str) -> None:
    assert re.findall(r"^(?:LaTeX|Package) .*Warning.*|^Missing character.*", log, re.M) == []


@pytest.mark.parametrize("name", DESIGNS)
def test_every_symbol_is_explained_and_every_explanation_is_needed(
    fragments: dict[str, str], name: str
) -> None:
    before, heading, after = fragments[name].partition(r"\textbf{Symbols}")
    assert heading
    rows = [row.split(" & ") for row in after.splitlines() if row.endswith(r"\\")]
    assert all(len(row) == 3 for row in rows)
    assert [row for row in rows if not row[1].strip() or not row[2].strip(" \\")] == []
    explained = [row[0].strip("$ ") for row in rows]
    assert len(explained) == len(set(explained))
    assert set(explained) == set(SYMBOL.findall(before))


@pytest.mark.parametrize("name", DESIGNS)
def test_braces_and_environments_are_balanced(fragments: dict[str, str], name: str) -> None:
    text = re.sub(r"^%.*|\\[{}]", "", fragments[name], flags=re.MULTILINE)
    assert text.count("{") == text.count("}")
    assert text.count(r"\left") == text.count(r"\right")
    assert re.findall(r"\\begin\{(.*?)\}", text) == re.findall(r"\\end\{(.*?)\}", text)


@pytest.mark.parametrize("name", DESIGNS)
def test_results_are_those_of_trip_points(fragments: dict[str, str], name: str) -> None:
    trips = hk.trip_points(DESIGNS[name])
    for trip in ("upper", "lower", "width", "middle"):
        shown = show_latex(float(getattr(trips, trip)), "V")
        assert f"${latex_name(f'V_{trip}')} = {shown}$" in fragments[name]


def test_defines_nothing_and_needs_no_class(fragments: dict[str, str]) -> None:
    for text in fragments.values():
        assert not re.search(r"\\(?:sub)*(?:section|paragraph|chapter)\b", text)
        assert not re.search(r"\\(?:newcommand|def|let|usepackage\{(?!amsmath))", text)


def test_names_are_escaped() -> None:
    text = hk.export.tex(full(hk.Stage("inverting")))
    assert AWKWARD.splitlines()[0] not in text
    assert r"Böhm \& Co: 50 \% of\_\{R\}\textasciicircum{}2 \textbackslash{}end" in text


def test_tolerances_and_measurand_stand_beside_the_trips() -> None:
    upper = next(line for line in hk.export.tex(header_tank()).splitlines() if "upper" in line)
    assert upper == (
        r"\noindent $V_{\mathrm{upper}} = 2.286\,\mathrm{V}$"
        r" (level 1.405 m; 2.261 V to 2.311 V over tolerances)\par"
    )


def test_cautions_stand_at_the_end() -> None:
    closing = hk.export.tex(ladder()).split(r"\textbf{Validity}")[1]
    for words in ("static", "not a protective device", "independent limiter", "licensed practice"):
        assert words in closing


def test_same_design_same_text() -> None:
    assert hk.export.tex(header_tank()) == hk.export.tex(header_tank())


def test_write_tex_keeps_what_is_there(tmp_path: Path) -> None:
    path = tmp_path / "law.tex"
    path.write_text("mine", encoding="utf-8")
    with pytest.raises(hk.OutputExistsError, match="exists already"):
        hk.export.write_tex(header_tank(), path)
    assert path.read_text(encoding="utf-8") == "mine"
    assert hk.export.write_tex(header_tank(), path, overwrite=True) == path
    assert path.read_text(encoding="utf-8") == hk.export.tex(header_tank())
    assert list(tmp_path.iterdir()) == [path]


def test_no_trip_points_no_fragment(tmp_path: Path) -> None:
    with pytest.raises(hk.DesignError, match="no hysteresis"):
        hk.export.write_tex(stuck(), tmp_path / "law.tex")
    assert list(tmp_path.iterdir()) == []

"""Text, HTML and LaTeX views of one list of fields."""

from __future__ import annotations

import html
import math
import shutil
import subprocess
from collections.abc import Sequence
from dataclasses import dataclass
from html.parser import HTMLParser
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.fields import Field, Viewed, escape_latex

SPECIAL = '\\ & % $ # _ { } ~ ^ < > | " [ * Ω µ ° ∞ √ ± ² ³ · − — –'


@dataclass(frozen=True)
class Result(Viewed):
    """Any fields under any title."""

    fields: tuple[Field, ...]
    title: str = ""

    def _fields(self) -> Sequence[Field]:
        return self.fields

    @property
    def _title(self) -> str:
        return self.title


TRIPS = Result(
    (
        Field("upper", 2.7, "V", latex=r"V_{\mathrm{upper}}"),
        Field("lower", 2.3, "V", "in the <signal>"),
        Field("interval", (2.67482, 2.724501), "V"),
        Field("tolerance", 0.01, "%"),
        Field("R_F", 576e3, "Ω", "1 % & better"),
        Field("status", "ok"),
        Field("ratiometric", True),
        Field("delay", None, "s"),
        Field("margin", math.nan, "V"),
    ),
    "Trip points of R_1 & R_2",
)


class Cells(HTMLParser):
    """Collects the text of every cell, row by row, and fails on tags that do not match."""

    def __init__(self) -> None:
        super().__init__()
        self.rows: list[list[str]] = []
        self.open: list[str] = []

    def handle_starttag(self, tag: str, attrs: object) -> None:
        self.open.append(tag)
        if tag == "tr":
            self.rows.append([])
        elif tag in ("td", "th"):
            self.rows[-1].append("")

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open[-1] in ("td", "th"):
            self.rows[-1][-1] += data


def cells(result: Viewed) -> list[list[str]]:
    parser = Cells()
    parser.feed(result._repr_html_())
    parser.close()
    assert parser.open == []
    return parser.rows


def test_text_is_aligned_and_rounded() -> None:
    assert str(TRIPS).splitlines() == [
        "Trip points of R_1 & R_2",
        "upper        2.7 V",
        "lower        2.3 V               in the <signal>",
        "interval     2.675 V to 2.725 V",
        "tolerance    1 %",
        "R_F          576 kΩ              1 % & better",
        "status       ok",
        "ratiometric  yes",
        "delay        —",
        "margin       —",
    ]


def test_a_number_gets_the_digits_that_it_asks_for() -> None:
    field = Field("upper", 2.50053, "V", digits=5)
    assert (field.shown, field.shown_latex) == ("2.5005 V", r"$2.5005\,\mathrm{V}$")


def test_ends_of_a_narrow_interval_are_told_apart() -> None:
    field = Field("upper", (2.4975, 2.5025), "V")
    assert field.shown == "2.4975 V to 2.5025 V"
    assert field.shown_latex == r"$2.4975\,\mathrm{V}$ to $2.5025\,\mathrm{V}$"
    for open_end in ((1.0, math.inf), (math.nan, math.nan), (1.0, 1.0)):
        assert " to " in Field("upper", open_end, "V").shown


def test_html_holds_the_same_cells() -> None:
    assert cells(TRIPS) == [[f.label, f.shown, f.note] for f in TRIPS.fields]
    assert html.escape(TRIPS.title) in TRIPS._repr_html_()


def test_the_column_of_notes_is_there_only_with_notes() -> None:
    plain = Result((Field("upper", 2.7, "V"),))
    assert cells(plain) == [["upper", "2.7 V"]]
    assert plain.to_latex().splitlines() == [
        r"\begin{tabular}{ll}",
        r"upper & $2.7\,\mathrm{V}$ \\",
        r"\end{tabular}",
    ]


def test_latex_uses_the_symbol_and_escapes_the_words() -> None:
    lines = TRIPS.to_latex().splitlines()
    assert lines[1] == r"\multicolumn{3}{l}{Trip points of R\_1 \& R\_2} \\"
    assert lines[3] == r"$V_{\mathrm{upper}}$ & $2.7\,\mathrm{V}$ &  \\"
    assert r"R\_F & $576\,\mathrm{k\Omega}$ & 1 \% \& better \\" in lines


def test_a_result_without_fields_has_its_title_only() -> None:
    assert Result((), "Nothing").to_text() == "Nothing"
    assert Result(()).to_text() == ""


def test_a_view_without_fields_of_its_own_cannot_be_made() -> None:
    class Bare(Viewed):
        pass

    with pytest.raises(TypeError, match="_fields"):
        Bare()  # type: ignore[abstract]


@given(st.text(), st.text(), st.text())
def test_any_words_pass_through_html_unchanged(label: str, value: str, note: str) -> None:
    words = [each.replace("\r", "\n").replace("\0", "") for each in (label, value, note)]
    shown = cells(Result((Field(words[0], words[1], note=words[2]),)))
    assert shown == [words if words[2] else words[:2]]


@given(st.text(alphabet=SPECIAL + "aZ9"))
def test_nothing_special_to_latex_is_left_bare(text: str) -> None:
    bare = escape_latex(text)
    for command in (r"\&", r"\%", r"\$", r"\#", r"\_", r"\{", r"\}"):
        bare = bare.replace(command, "")
    assert not set(bare) & set("&%$#~")
    assert bare.count("{") == bare.count("}")


@pytest.mark.tex
def test_pdflatex_sets_every_special_sign_with_amsmath_alone(tmp_path: Path) -> None:
    pdflatex = shutil.which("pdflatex")
    if pdflatex is None:
        pytest.skip("pdflatex is not installed")
    units = ("kΩ", "µA", "°C", "V/√Hz", "m³", "% RH", "a_b#c&d$e~f^g\\h{i}", "1/K")
    trying = Result(
        (
            *TRIPS.fields,
            *(Field("[unit]", 1.5e-3, unit, SPECIAL) for unit in units),
            Field("*", SPECIAL, latex="V_{+}"),
            Field("infinite", math.inf, "V"),
        ),
        SPECIAL,
    )
    source = (
        "\\documentclass{article}\n\\usepackage{amsmath}\n\\begin{document}\n"
        f"{trying.to_latex()}\n\\end{{document}}\n"
    )
    (tmp_path / "views.tex").write_text(source, encoding="utf-8")
    command = [pdflatex, "-halt-on-error", "-interaction=nonstopmode", "views.tex"]
    run = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, errors="replace")
    assert run.returncode == 0, run.stdout[-1500:]
    assert "Missing character" not in run.stdout + (tmp_path / "views.log").read_text("latin-1")

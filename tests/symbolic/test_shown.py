"""A law shows itself in a notebook as text, LaTeX and MathML."""

from __future__ import annotations

from xml.etree import ElementTree

import pytest
from IPython.core.formatters import DisplayFormatter

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.symbolic.law import TripFormulas
from hystkit.symbolic.mathml import MIME, symbol_mathml
from tests.export.designs import ladder
from tests.project.source import run_python

NAMESPACE = "{http://www.w3.org/1998/Math/MathML}"
LAWS = {stage.title: hk.derive(stage) for stage in hk.Stage.all()[::4]}
SHOWN: dict[str, hk.SwitchingLaw | TripFormulas] = {
    **LAWS,
    "ideal": hk.derive(header_tank()).ideal,
    "own circuit": hk.derive(ladder()),
}


@pytest.mark.parametrize("name", SHOWN)
def test_mathml_has_a_row_for_each_equation(name: str) -> None:
    rows = SHOWN[name].rows
    root = ElementTree.fromstring(SHOWN[name]._repr_mimebundle_()[MIME])
    (table,) = root
    assert (root.tag, table.tag) == (f"{NAMESPACE}math", f"{NAMESPACE}mtable")
    assert len(table) == len(rows)
    for found, (left, right) in zip(table, rows, strict=True):
        first, sign, body = found
        assert "".join(first.itertext()) == left.name.replace("_", "")
        assert "".join(sign.itertext()) == "="
        symbols = {"".join(one.itertext()) for one in body.iter(f"{NAMESPACE}msub")}
        assert symbols == {symbol.name.replace("_", "", 1) for symbol in right.free_symbols}


def test_notebook_gets_all_three_forms() -> None:
    law = hk.derive(header_tank()).for_design(header_tank())
    data, _ = DisplayFormatter().format(law)
    assert set(data) == {"text/plain", "text/latex", MIME}
    assert data["text/plain"] == str(law)
    assert data["text/latex"] == f"$\\displaystyle {law.latex()}$"


def test_ideal_formulas_are_written_with_their_names() -> None:
    ideal = hk.derive(header_tank()).ideal
    lines = str(ideal).splitlines()
    assert [line.partition(" = ")[0] for line in lines] == [
        "V_upper", "V_lower", "V_width", "V_middle",
    ]  # fmt: skip
    assert lines[0].endswith(str(ideal.upper))


def test_mathml_is_the_same_in_every_process() -> None:
    code = (
        "import hystkit as hk\nfrom hystkit.circuit.demo import header_tank\n"
        "from hystkit.symbolic.mathml import formula_mathml\n"
        "print(ascii(formula_mathml(hk.derive(header_tank()).rows)))"
    )
    here = ascii(hk.derive(header_tank())._repr_mimebundle_()[MIME])
    assert run_python(code).strip() == here


def test_signs_of_the_inputs_stand_in_mathml() -> None:
    assert symbol_mathml("G_plusminusH").count("<mtext>+\N{MINUS SIGN}H</mtext>") == 1
    assert "<mtext>plusX</mtext>" in symbol_mathml("R_plusX")

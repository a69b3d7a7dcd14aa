"""The law as JavaScript and as MathML, against the circuit itself and against the formulas."""

from __future__ import annotations

import math
import random
import re
from collections.abc import Callable
from typing import Any
from xml.etree import ElementTree

import pytest
import sympy as sp

import hystkit as hk
from hystkit.symbolic.javascript import law_script
from hystkit.symbolic.law import SwitchingLaw
from hystkit.symbolic.mathml import law_mathml, symbol_mathml
from tests.export.designs import every_design
from tests.numeric import nodal

DESIGNS = {name: d for name, d in every_design().items() if name.endswith("full")}
FUNCTION = re.compile(r"names: (\[.*?\]),\s+of: function \((.*?)\) \{(.*?)\n    \}", re.DOTALL)


def functions(script: str) -> dict[str, Callable[..., Any]]:
    """Run a law's script as Python: its expressions are the same in both languages."""
    found = {}
    for key, (names, arguments, body) in zip(
        ("trips", "high", "low"), FUNCTION.findall(script), strict=True
    ):
        assert eval(names) == arguments.split(", ")
        lines = [line.strip().removeprefix("const ").rstrip(";") for line in body.split("\n")]
        code = f"def of({arguments}, **_):\n" + "\n".join(f"    {x}" for x in lines if x)
        scope: dict[str, Any] = {}
        exec(code, scope)
        found[key] = scope["of"]
    return found


def drawn(design: hk.Design, rng: random.Random) -> dict[str, float]:
    """Values at random for every symbol of a design's law."""
    values = {}
    for name in design.values:
        if name.startswith("R"):
            values[name] = 10 ** rng.uniform(1.0, 5.5)
        else:
            values[name] = rng.uniform(-10, 10) if name[0] == "V" else rng.uniform(-1e-6, 1e-6)
    return values


@pytest.mark.parametrize("name", DESIGNS)
def test_script_agrees_with_the_nodes_of_the_circuit(name: str) -> None:
    design, rng = DESIGNS[name], random.Random(name)
    law = hk.derive(design)
    script = law_script(law)
    assert f'upperState: "{law.upper_state}"' in script
    run = functions(script)
    stage = design.stage
    for _ in range(20):
        values = drawn(design, rng)
        upper, lower = run["trips"](**values)
        for state, trip in ((law.upper_state, upper), (law.lower_state, lower)):
            found = nodal.trip(stage.elements, stage.output, state, values)
            assert trip == pytest.approx(float(found[0]), rel=1e-8)
            signal = rng.uniform(-10, 10)
            seen = nodal.voltages(stage.elements, stage.output, state, values, signal)
            pins = run[state](**values, V_IN=signal)
            expected = [float(seen[node][0]) for node in ("out", "plus", "minus")]
            assert pins == pytest.approx(expected, rel=1e-8, abs=1e-9)


def test_script_is_the_same_every_time() -> None:
    for design in DESIGNS.values():
        law = hk.derive(design)
        assert law_script(law) == law_script.__wrapped__(law)


def test_script_holds_names_numbers_and_operators_only() -> None:
    for design in DESIGNS.values():
        code = re.sub(r"\b(const|return|function|of|names|trips|high|low|upperState)\b", "",
                      law_script(hk.derive(design)))  # fmt: skip
        assert not re.search(r"[^\w\s+\-*/().,:;=\[\]{}\"]", code)


# -- MathML ----------------------------------------------------------------------------------


def value_of(node: ElementTree.Element, known: dict[str, sp.Expr]) -> Any:
    """Read presentation MathML back as an expression, the way a reader would."""
    kids = list(node)
    if node.tag in ("math", "mtd", "mtr") and len(kids) == 1:
        return value_of(kids[0], known)
    if node.tag in ("mi", "msub"):
        return known["".join(node.itertext())]
    if node.tag == "mn":
        return sp.Integer(node.text or "")
    if node.tag == "mfrac":
        return value_of(kids[0], known) / value_of(kids[1], known)
    if node.tag == "msup":
        return value_of(kids[0], known) ** value_of(kids[1], known)
    assert node.tag in ("mrow", "mtable"), node.tag
    return _sum(_tokens(node, known))


def _tokens(node: ElementTree.Element, known: dict[str, sp.Expr]) -> list[Any]:
    tokens: list[Any] = []
    for child in node:
        if child.tag == "mo":
            tokens.append(child.text)
        elif child.tag in ("mtr", "mtd") or (child.tag == "mrow" and node.tag == "mtd"):
            tokens += _tokens(child, known)
        else:
            tokens.append(value_of(child, known))
    if tokens[0] == "(":
        assert tokens[-1] == ")"
        tokens = tokens[1:-1]
    return tokens


def _sum(tokens: list[Any]) -> Any:
    total, sign, product = sp.Integer(0), 1, None
    for token in [*tokens, "+"]:
        if token in ("+", "\N{MINUS SIGN}"):
            if product is not None:
                total += sign * product
            product, sign = None, 1 if token == "+" else -1
        elif token != "\N{INVISIBLE TIMES}":
            product = token if product is None else product * token
    return total


def shown_names(law: SwitchingLaw) -> dict[str, sp.Expr]:
    """Symbols by the letters that they are set with."""
    symbols = {s for left, right in law.rows for s in (left, *right.free_symbols)}
    signs = {"plus": "+", "minus": "\N{MINUS SIGN}"}
    found = {}
    for symbol in symbols:
        base, _, index = symbol.name.partition("_")
        if not index and (match := re.fullmatch(r"([A-Za-z]+?)(\d+)", base)):
            base, index = match.groups()
        found[base + signs.get(index, index)] = symbol
    assert len(found) == len(symbols)
    return found


@pytest.mark.parametrize("name", every_design())
@pytest.mark.parametrize("extent", ["full", "as the design has it"])
def test_mathml_reads_back_as_the_law(name: str, extent: str) -> None:
    design = every_design()[name]
    law = hk.derive(design) if extent == "full" else hk.derive(design).for_design(design)
    known, rng = shown_names(law), random.Random(1)
    rows = law_mathml(law)
    assert [row[0] for row in rows] == [left.name for left, _ in law.rows]
    for (_, text), (left, right) in zip(rows, law.rows, strict=True):
        (row,) = ElementTree.fromstring(text)
        lhs, equals, *rhs = row
        assert value_of(lhs, known) == left
        assert equals.text == "="
        found = _sum([value_of(node, known) for node in rhs])
        at = {s: sp.Rational(rng.randint(1, 999), 7) for s in right.free_symbols}
        assert sp.simplify(found.subs(at) - right.subs(at)) == 0


def test_mathml_has_the_subset_that_browsers_set() -> None:
    tags = {
        node.tag
        for design in every_design().values()
        for law in (hk.derive(design), hk.derive(design).for_design(design))
        for _, text in law_mathml(law)
        for node in ElementTree.fromstring(text).iter()
    }
    assert tags <= {"math", "mrow", "mi", "mn", "mo", "mtext", "msub", "msup", "mfrac", "mtable",
                    "mtr", "mtd"}  # fmt: skip


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("R_PU", "<msub><mi>R</mi><mtext>PU</mtext></msub>"),
        ("V_minus", "<msub><mi>V</mi><mtext>\N{MINUS SIGN}</mtext></msub>"),
        ("R12", "<msub><mi>R</mi><mtext>12</mtext></msub>"),
        ("R", "<mi>R</mi>"),
    ],
)
def test_symbols(name: str, expected: str) -> None:
    assert symbol_mathml(name) == f"<math>{expected}</math>"


def test_long_sums_take_several_lines() -> None:
    names = [f"R_A{k}" for k in range(12)]
    wiring = [hk.Resistor(name, "plus", "cc") for name in names]
    wiring += [hk.Resistor("R_F", "out", "plus"), hk.Wire("signal", "minus")]
    law = hk.derive(hk.Stage.custom(wiring))
    texts = dict(law_mathml(law))
    assert "<mtr>" in texts["S_H"]
    known = shown_names(law)
    (row,) = ElementTree.fromstring(texts["S_H"])
    found = _sum([value_of(node, known) for node in list(row)[2:]])
    expected = dict(zip((left.name for left, _ in law.rows), (r for _, r in law.rows), strict=True))
    at = {s: sp.Rational(k + 2, 3) for k, s in enumerate(sorted(known.values(), key=str))}
    assert math.isclose(float(found.subs(at)), float(expected["S_H"].subs(at)), rel_tol=1e-12)

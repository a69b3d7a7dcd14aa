"""Symbols: one of each name, with what it stands for."""

from __future__ import annotations

import pytest

from hystkit.circuit.forms import PART_ORDER
from hystkit.symbolic.symbols import NON_IDEAL, latex_name, meaning, node_symbol, symbol


@pytest.mark.parametrize("name", PART_ORDER)
def test_resistors_are_positive(name: str) -> None:
    assert symbol(name).is_positive
    assert symbol(name) is symbol(name)
    assert meaning(name)[1] == "Ω"


def test_output_resistances_may_be_zero_and_voltages_have_either_sign() -> None:
    assert symbol("R_OH").is_nonnegative
    assert symbol("R_OH").is_positive is None
    for name in ("V_CC", "V_EE", "I_LK", "V_OS"):
        assert symbol(name).is_real
        assert symbol(name).is_positive is None


@pytest.mark.parametrize(
    "name",
    [*PART_ORDER, *NON_IDEAL, "V_CC", "V_EE", "V_REF", "V_PU", "V_L", "V_OH", "V_OL", "V_IN"],
)
def test_every_symbol_of_the_vocabulary_has_its_own_meaning(name: str) -> None:
    text, unit = meaning(name)
    assert unit == {"R": "Ω", "V": "V", "I": "A"}[name[0]]
    assert text not in ("resistor", f"voltage at the node {name[2:]}")


def test_symbols_of_custom_circuits() -> None:
    assert meaning("R_17") == ("resistor", "Ω")
    assert node_symbol("tap") == symbol("V_tap")
    assert meaning("V_tap") == ("voltage at the node tap", "V")


@pytest.mark.parametrize(
    ("name", "latex"),
    [
        ("R_PU", r"R_{\mathrm{PU}}"),
        ("R_1", r"R_{\mathrm{1}}"),
        ("R12", r"R_{\mathrm{12}}"),
        ("R", "R"),
        ("V_plus", "V_{+}"),
        ("V_minus", "V_{-}"),
        ("G_plusminus", "G_{+-}"),
        ("S_minusH", r"S_{-\mathrm{H}}"),
        ("G_plusminus2L", r"G_{+-\mathrm{2L}}"),
        ("G_tapminus", r"G_{\mathrm{tapminus}}"),
        ("R_plusX", r"R_{\mathrm{plusX}}"),
    ],
)
def test_latex_names(name: str, latex: str) -> None:
    assert latex_name(name) == latex

"""How units are looked up and set in LaTeX."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.units import latex_unit, unit_of


@pytest.mark.parametrize("symbol", ["Ω", "V", "s", "m", "K", "%", "1/K", "lx", "V/√Hz", ""])
def test_what_is_shown_can_be_read_and_means_the_same(symbol: str) -> None:
    unit = unit_of(symbol)
    assert unit.shown
    for scale, text in unit.shown.items():
        assert unit.suffixes[text] == scale


@pytest.mark.parametrize("symbol", ["m³", "mm²", "°C", "lx", "r/min", "% RH"])
def test_units_that_take_no_prefix_are_shown_as_they_are(symbol: str) -> None:
    assert unit_of(symbol).shown == {0: symbol}
    assert "k" + symbol not in unit_of(symbol).suffixes


def test_the_unit_itself_wins_over_a_prefix_of_the_same_letter() -> None:
    assert unit_of("m").suffixes["m"] == 0
    assert unit_of("m").suffixes["mm"] == -3
    assert unit_of("F").marks["F"] == 0


@given(st.integers(-40, 40))
def test_the_scale_is_the_largest_that_leaves_a_digit_before_the_point(exponent: int) -> None:
    scale = unit_of("V").scale_for(exponent)
    assert scale % 3 == 0
    if -15 <= exponent <= 14:
        assert 0 <= exponent - scale <= 2


@given(st.text())
def test_braces_of_latex_units_balance(text: str) -> None:
    bare = latex_unit(text).replace(r"\{", "").replace(r"\}", "")
    assert bare.count("{") == bare.count("}")
    assert not bare.endswith("\\}")

"""Arranged formulas are equal to what went in, and read as one writes them."""

from __future__ import annotations

import pytest
import sympy as sp
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.symbolic.arrange import LARGEST, by_source
from hystkit.symbolic.ledger import expand
from hystkit.symbolic.symbols import NON_IDEAL, symbol
from tests.circuit.custom import TAPPED
from tests.circuit.strategies import VARIANTS
from tests.numeric.circuits import random_stages

R_1, R_2, R_3 = map(symbol, ("R_1", "R_2", "R_3"))
V_1, V_2, V_3 = VOLTAGES = tuple(map(symbol, ("V_1", "V_2", "V_3")))


@given(st.lists(st.tuples(*[st.integers(-3, 3)] * 5), min_size=1, max_size=3))
def test_nothing_is_lost(rows: list[tuple[int, ...]]) -> None:
    """Each source over a denominator, with any small whole numbers as coefficients."""
    terms = [
        (a * R_1 + b * R_2) * source / (R_3 + abs(c) * R_1 + abs(d) * R_2) * sp.Rational(e, 2)
        for source, (a, b, c, d, e) in zip(VOLTAGES, rows, strict=False)
    ]
    formula = sp.Add(*terms)
    assert sp.simplify(by_source(formula, VOLTAGES) - formula) == 0


def test_one_fraction_where_it_is_one() -> None:
    formula = V_1 / (1 + R_1 / R_2) + V_2 / (1 + R_2 / R_1)
    assert by_source(formula, VOLTAGES) == (R_2 * V_1 + R_1 * V_2) / (R_1 + R_2)


def test_opposite_sources_stand_as_their_difference() -> None:
    formula = V_1 * R_1 / R_2 - V_2 * R_1 / R_2
    assert by_source(formula, VOLTAGES) == R_1 * (V_1 - V_2) / R_2


def test_equal_sources_stand_as_their_sum() -> None:
    formula = V_1 * R_1 / R_2 + V_2 * R_1 / R_2
    assert by_source(formula, VOLTAGES) == R_1 * (V_1 + V_2) / R_2


def test_numbers_stand_in_front() -> None:
    assert by_source(V_1 / 2 + V_2 / 2, VOLTAGES) == (V_1 + V_2) / 2
    assert by_source(sp.S.Zero, VOLTAGES) == 0
    assert by_source(-V_1, VOLTAGES) == -V_1


def test_built_in_forms_are_always_arranged() -> None:
    for stage in (*VARIANTS, TAPPED):
        bare = hk.derive(stage).without(NON_IDEAL)
        upper, lower = (expand(trip, bare.definitions) for trip in bare.named)
        for formula in (upper - lower, (upper + lower) / 2):
            assert formula.count_ops() * len(formula.free_symbols) < LARGEST


def test_a_dense_network_keeps_its_formula() -> None:
    """Factoring it could take minutes."""
    law = hk.derive(max(random_stages(10, seed=2), key=lambda stage: len(stage.parts)))
    bare = law.without(NON_IDEAL)
    assert law.ideal.upper == expand(bare.named[0], bare.definitions)


@pytest.mark.parametrize("kind", ["upper", "lower", "width", "middle"])
def test_arranged_ideal_laws_of_random_circuits_are_equal_to_the_law(kind: str) -> None:
    for stage in random_stages(6, seed=4, inner=1):
        law = hk.derive(stage)
        bare = law.without(NON_IDEAL).formulas
        place = {symbol(n): sp.Rational(sp.prime(k + 5), k + 2) for k, n in enumerate(bare.names)}
        assert getattr(law.ideal, kind).subs(place) == getattr(bare, kind).subs(place)

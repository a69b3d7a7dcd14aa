"""The crossing from symbols to numbers: nothing is lost, and nothing is compiled twice."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
import pytest
import sympy as sp

import hystkit as hk
from hystkit.circuit.netlist import netlist
from hystkit.numeric.compile import compiled, kernel
from hystkit.symbolic.symbols import symbol
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import VARIANTS
from tests.numeric.circuits import random_stages, random_values


@pytest.mark.parametrize("stage", [*VARIANTS[::6], TAPPED, BRIDGE], ids=lambda stage: stage.title)
def test_fractions_go_through_exactly(stage: hk.Stage) -> None:
    """So the compiled function holds no rounded constant, and is the formula itself."""
    law = hk.derive(stage)
    values = {n: Fraction(3 + 7 * k, 1 + k) for k, n in enumerate(law.formulas.names)}
    found = kernel(stage).trips(values)
    place = {symbol(n): sp.Rational(v.numerator, v.denominator) for n, v in values.items()}
    for trip, formula in zip(found, (law.upper, law.lower), strict=True):
        exact = formula.subs(place)
        assert isinstance(trip, Fraction)
        assert (trip.numerator, trip.denominator) == (exact.p, exact.q)


def test_stages_of_one_circuit_share_one_kernel() -> None:
    assert kernel(hk.Stage("inverting")) is kernel(hk.Stage("inverting"))
    assert kernel(hk.Stage("inverting")) is not kernel(hk.Stage("non-inverting"))


def test_every_free_node_and_both_inputs_have_a_voltage() -> None:
    for stage in (*VARIANTS, BRIDGE, *random_stages(5, seed=1)):
        values = random_values(stage, 1, np.random.default_rng(0))
        for state in ("high", "low"):
            found = kernel(stage).voltages(state, values, 0.0)
            assert found.keys() == netlist(stage.elements).free | {"plus", "minus"}


def test_definitions_are_evaluated_once_and_give_the_same() -> None:
    law = hk.derive(BRIDGE)
    values = random_values(BRIDGE, 5, np.random.default_rng(2))
    results = []
    for names, function in (
        compiled(law.named, law.definitions),
        compiled((law.upper, law.lower)),
    ):
        assert list(names) == sorted(names)
        results.append(function(*(values[name] for name in names)))
    for named, expanded in zip(*results, strict=True):
        np.testing.assert_allclose(named, expanded, rtol=1e-9)


def test_only_what_acts_is_an_argument() -> None:
    law = hk.derive(hk.Stage("inverting", supply="split", reference="source", including="R_L"))
    names, _ = compiled(law.named, law.definitions)
    assert set(names) == {
        *("R_R", "R_F", "R_L", "R_OH", "R_OL"),
        *("V_REF", "V_L", "V_OH", "V_OL", "V_OS", "I_BP"),
    }


@pytest.mark.parametrize("values", [(2.0, 4.0), (np.array([2.0]), np.array([[4.0], [8.0]]))])
def test_reciprocals_and_powers(values: tuple[Any, Any]) -> None:
    x, y = symbol("R_1"), symbol("R_2")
    names, function = compiled((1 / x + 1 / y**2, x**3))
    assert names == ("R_1", "R_2")
    first, second = function(*values)
    np.testing.assert_allclose(first, 1 / values[0] + 1 / values[1] ** 2)
    np.testing.assert_allclose(second, values[0] ** 3)


def test_a_constant_needs_no_argument() -> None:
    names, function = compiled((sp.S.Zero,))
    assert (names, list(function())) == ((), [0])

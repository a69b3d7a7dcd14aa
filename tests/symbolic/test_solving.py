"""The formulas turned round: parts from wanted trips."""

from __future__ import annotations

from itertools import combinations, product

import pytest
import sympy as sp

import hystkit as hk
from hystkit.symbolic.solving import normalised, solve_pair
from hystkit.symbolic.symbols import symbol
from tests.circuit.custom import TAPPED
from tests.circuit.test_stage import by_title

#: Pairs of parts of which only the ratio counts, so that they cannot set two trips.
RATIOS = {
    "source": {("R_R", "R_F"), ("R_I", "R_F")},
    "ground": {("R_B", "R_F"), ("R_I", "R_F")},
    "divider": {("R_I", "R_F")},
}


def given(law: hk.SwitchingLaw) -> dict[sp.Symbol, sp.Rational]:
    """Values with the output levels apart, for a stage that switches."""
    names = [name for name in law.ideal.names if name.startswith("R")]
    values = {name: sp.Rational(1000 + 370 * n**2, 1 + n % 3) for n, name in enumerate(names)}
    for name, value in {"V_CC": 12, "V_EE": -9, "V_REF": 2, "V_PU": 11, "V_OH": 10}.items():
        values[name] = sp.Rational(value)
    return {symbol(name): value for name, value in {**values, "V_OL": sp.Rational(-8, 3)}.items()}


def only_ratio_counts(stage: hk.Stage, pair: tuple[str, str]) -> bool:
    """Where width and middle follow from one ratio alone."""
    if pair == ("R_T", "R_B"):
        return stage.sense == "non-inverting"
    return stage.output == "push-pull" and pair in RATIOS[str(stage.reference)]


# The forms on a single supply are these with V_EE zero.
@pytest.mark.parametrize("stage", [s for s in hk.Stage.all() if s.supply == "split"], ids=by_title)
def test_any_two_parts_are_found_from_the_trips_they_give(stage: hk.Stage) -> None:
    law = hk.derive(stage)
    values = given(law)
    wanted = {
        symbol(f"V_{kind}"): getattr(law.ideal, kind).subs(values) for kind in ("upper", "lower")
    }
    for pair in combinations(stage.required, 2):
        if only_ratio_counts(stage, pair):
            with pytest.raises(hk.InfeasibleError, match="do not set both trip points"):
                law.solve_for(*pair)
            continue
        known = {s: v for s, v in values.items() if s.name not in pair} | wanted
        found = [
            {symbol(name): formula.evalf(30, subs=known) for name, formula in each.items()}
            for each in law.solve_for(*pair)
        ]
        assert any(all(abs(v / values[s] - 1) < 1e-20 for s, v in each.items()) for each in found)
        # Each of them gives the trips, whatever its sign.
        for each, kind in product(found, ("upper", "lower")):
            trip = getattr(law.ideal, kind).evalf(30, subs={**values, **each})
            assert abs(trip - wanted[symbol(f"V_{kind}")]) < 1e-20, (pair, kind)


def test_a_level_can_be_sought_too() -> None:
    law = hk.derive(hk.Stage("inverting", reference="source"))
    (found,) = law.solve_for("V_REF", "R_R")
    upper, lower, high, low, r_f = map(symbol, ("V_upper", "V_lower", "V_OH", "V_OL", "R_F"))
    width, swing = upper - lower, high - low
    assert sp.simplify(found["R_R"] - r_f * width / (swing - width)) == 0
    assert sp.simplify(found["V_REF"] - (upper * swing - high * width) / (swing - width)) == 0


def test_the_full_law_is_solved_by_its_formulas() -> None:
    law = hk.derive(hk.Stage("inverting"))
    assert len(law.formulas.solve_for("R_B", "R_F")) == 2  # unequal output resistances: a quadratic
    equal = law.without(["R_OH", "R_OL"])
    (found,) = equal.formulas.solve_for("R_B", "R_F")
    assert {"V_OS", "I_BP"} <= {s.name for s in found["R_B"].free_symbols}
    put_back = {symbol(name): formula for name, formula in found.items()}
    assert sp.simplify(equal.upper.subs(put_back) - symbol("V_upper")) == 0


def test_a_custom_circuit_is_solved_like_any_other() -> None:
    law = hk.derive(TAPPED)
    values = {s: sp.Rational(n + 2) for n, s in enumerate(map(symbol, law.ideal.names))}
    wanted = {symbol(f"V_{k}"): getattr(law.ideal, k).subs(values) for k in ("upper", "lower")}
    solutions = law.solve_for("R_3", "R_1")
    known = {s: v for s, v in values.items() if s.name not in ("R_3", "R_1")} | wanted
    assert [{n: f.subs(known) for n, f in each.items()} for each in solutions] == [
        {"R_3": values[symbol("R_3")], "R_1": values[symbol("R_1")]}
    ]


def test_a_part_that_does_not_act_sets_nothing() -> None:
    upper, lower = symbol("V_CC") + symbol("R_1"), symbol("V_CC") - symbol("R_1")
    assert solve_pair(upper, upper, symbol("R_1"), symbol("V_CC")) == ()
    (found,) = solve_pair(upper, lower, symbol("R_1"), symbol("V_CC"))
    assert sp.expand(found["R_1"] - (symbol("V_upper") - symbol("V_lower")) / 2) == 0


def test_solutions_at_which_the_formulas_have_no_value_are_left_out() -> None:
    """A divider of a negative resistance would short the supply; it is no design."""
    law = hk.derive(hk.Stage("non-inverting"))
    (found,) = law.solve_for("R_T", "R_I")
    assert found["R_T"] != -symbol("R_B")


def test_normalised_derivative() -> None:
    x, y = symbol("R_1"), symbol("R_2")
    assert normalised(x**3 * y, x) == 3
    assert normalised(x / (x + y), x) == y / (x + y)


def test_differences_stand_in_their_natural_order() -> None:
    law = hk.derive(hk.Stage("non-inverting", reference="source"))
    r_i, upper, lower, high, low = map(symbol, ("R_I", "V_upper", "V_lower", "V_OH", "V_OL"))
    (found,) = law.solve_for("R_F", "V_REF")
    assert found["R_F"].args == (r_i * (high - low) / (upper - lower)).args
    turned = ((low - high, "-V_OH + V_OL"), (lower - upper, "-V_upper + V_lower"))
    shunted = hk.Stage("non-inverting", reference="source", including=("R_G",))
    for stage in (*hk.Stage.all(), shunted):
        for pair in combinations(stage.parts, 2):
            if stage.output != "push-pull" or (stage != shunted and only_ratio_counts(stage, pair)):
                continue
            for formula in (f for each in hk.derive(stage).solve_for(*pair) for f in each.values()):
                sums = {factor.as_base_exp()[0] for factor in formula.as_ordered_factors()}
                assert not [text for wrong, text in turned if wrong in sums], formula
                assert not formula.as_coeff_Mul()[0].is_negative, formula

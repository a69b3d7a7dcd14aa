"""The laws as formulas: pinned against their closed forms, consistent, and always the same."""

from __future__ import annotations

import os
import pickle
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
import sympy as sp

import hystkit as hk
from hystkit.symbolic.ledger import HIGH, LOW, expand
from hystkit.symbolic.symbols import NON_IDEAL, symbol
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import VARIANTS
from tests.circuit.test_stage import by_title

ROOT = Path(__file__).parents[2]
ZERO = sp.S.Zero
#: The forms on a single supply are these with V_EE zero.
SPLIT = [stage for stage in hk.Stage.all() if stage.supply == "split"]


class Closed:
    """The closed form of a built-in form, written out by hand with conductances.

    A part that is not fitted has conductance zero, or resistance zero in series.
    """

    def __init__(self, stage: hk.Stage, ideal: bool) -> None:
        self.stage = stage
        self.gone = {*NON_IDEAL} if ideal else set()
        self.fitted = {*stage.parts}

    def __getitem__(self, name: str) -> Any:
        if name in self.gone or (name == "V_EE" and self.stage.supply == "single"):
            return ZERO
        return symbol(name)

    def r(self, name: str) -> Any:
        return symbol(name) if name in self.fitted else ZERO

    def g(self, name: str) -> Any:
        return 1 / symbol(name) if name in self.fitted else ZERO

    def output(self, state: str) -> tuple[Any, Any]:
        """Thevenin voltage and resistance of the output."""
        driven = self.stage.output == "push-pull" or state == LOW
        level, resistance = ("V_OH", "R_OH") if state == HIGH else ("V_OL", "R_OL")
        pulled = self.g("R_PU") * self["V_PU"] + self.g("R_L") * self["V_L"]
        total = self.g("R_PU") + self.g("R_L")
        if not driven:
            return (pulled - self["I_LK"]) / total, 1 / total
        if self[resistance] == 0:
            return self[level], ZERO
        z = 1 / (total + 1 / self[resistance])
        return z * (self[level] / self[resistance] + pulled), z

    def trip(self, state: str) -> Any:
        e, z = self.output(state)
        f = 1 / (symbol("R_F") + z)
        return self.inverting(e, f) if self.stage.sense == "inverting" else self.other(e, f)

    def inverting(self, e: Any, f: Any) -> Any:
        to_ground = self.g("R_B") if self.stage.reference == "ground" else ZERO
        g_b = ZERO if self.stage.reference == "ground" else self.g("R_B")
        driven = self["V_CC"] * self.g("R_T") + self["V_EE"] * g_b + self["V_REF"] * self.g("R_R")
        total = self.g("R_T") + g_b + to_ground + self.g("R_R") + f
        plus = (driven + e * f - self["I_BP"]) / total
        return plus - self["V_OS"] + self["I_BN"] * self.r("R_S")

    def other(self, e: Any, f: Any) -> Any:
        if self.stage.reference == "divider":
            total = self.g("R_T") + self.g("R_B")
            x = (self["V_CC"] * self.g("R_T") + self["V_EE"] * self.g("R_B") - self["I_BN"]) / total
        else:
            held = self["V_REF"] if self.stage.reference == "source" else ZERO
            x = held - self["I_BN"] * self.r("R_R")
        x += self["V_OS"]
        r1 = self.r("R_S") + self.r("R_I")
        return r1 * (x * (1 / r1 + self.g("R_G") + f) - e * f + self["I_BP"])


def trips(stage: hk.Stage, *, ideal: bool) -> tuple[Any, Any]:
    closed = Closed(stage, ideal)
    states = (HIGH, LOW) if stage.sense == "inverting" else (LOW, HIGH)
    upper, lower = map(closed.trip, states)
    return upper, lower


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=by_title)
def test_ideal_forms(stage: hk.Stage) -> None:
    ideal = hk.derive(stage).ideal
    upper, lower = trips(stage, ideal=True)
    assert sp.simplify(ideal.upper - upper) == 0
    assert sp.simplify(ideal.lower - lower) == 0
    assert sp.simplify(ideal.width - (upper - lower)) == 0
    assert sp.simplify(ideal.middle - (upper + lower) / 2) == 0


@pytest.mark.parametrize("ideal", [True, False], ids=["ideal", "full"])
def test_every_form_with_every_set_of_optional_parts(ideal: bool) -> None:
    for stage in VARIANTS:
        law = hk.derive(stage)
        found = law.without(NON_IDEAL).formulas if ideal else law.formulas
        for formula, closed in zip(
            (found.upper, found.lower), trips(stage, ideal=ideal), strict=True
        ):
            assert sp.cancel(sp.together(formula - closed)) == 0, by_title(stage)


V_OH, V_OL, V_REF = map(symbol, ("V_OH", "V_OL", "V_REF"))
R_R, R_F, R_I, R_G = map(symbol, ("R_R", "R_F", "R_I", "R_G"))


def test_inverting_with_a_source_is_one_fraction_and_its_width_factored() -> None:
    ideal = hk.derive(hk.Stage("inverting", reference="source")).ideal
    assert ideal.upper == (R_F * V_REF + R_R * V_OH) / (R_F + R_R)
    assert ideal.lower == (R_F * V_REF + R_R * V_OL) / (R_F + R_R)
    assert ideal.width == R_R * (V_OH - V_OL) / (R_F + R_R)


def test_a_shunt_adds_the_same_to_both_trips() -> None:
    stage = hk.Stage("non-inverting", reference="source")
    bare, shunted = hk.derive(stage).ideal, hk.derive(stage.with_options("R_G")).ideal
    assert bare.width == shunted.width == R_I * (V_OH - V_OL) / R_F
    for kind in ("upper", "lower"):
        added = getattr(shunted, kind) - getattr(bare, kind)
        assert sp.simplify(added - V_REF * R_I / R_G) == 0


def test_push_pull_widths_are_one_factored_product() -> None:
    for stage in hk.Stage.all():
        if stage.output == "push-pull":
            width = hk.derive(stage).ideal.width
            assert width.is_Mul
            assert V_OH - V_OL in width.args


def test_an_absent_part_does_not_stand_in_any_formula() -> None:
    for stage in VARIANTS:
        names = {*hk.derive(stage).formulas.names}
        parts = {n for n in names if n.startswith("R") and n not in NON_IDEAL}
        assert parts == {*stage.parts}
        assert ("V_EE" in names) == (stage.supply == "split" and stage.reference == "divider")


@pytest.mark.parametrize("stage", [*hk.Stage.all(), TAPPED], ids=by_title)
def test_ideal_is_the_full_law_with_every_non_ideality_zero(stage: hk.Stage) -> None:
    law = hk.derive(stage)
    assert {*NON_IDEAL}.isdisjoint(law.ideal.names)
    zeros = {symbol(name): 0 for name in law.non_ideal if not name.startswith("R")}
    for kind in ("upper", "lower"):
        limit = getattr(law, kind).subs(zeros)
        for name in ("R_OH", "R_OL"):
            limit = sp.cancel(sp.together(limit)).subs(symbol(name), 0)
        assert sp.cancel(sp.together(limit - getattr(law.ideal, kind))) == 0


def test_without_takes_out_one_by_one_and_leaves_others_alone() -> None:
    law = hk.derive(hk.Stage("inverting", output="open-collector"))
    assert law.non_ideal == ("R_OL", "I_LK", "V_OS", "I_BP")
    assert law.without(["I_BN", "R_OH"]) is law
    less = law.without(["I_LK", "V_OS"])
    assert less.non_ideal == ("R_OL", "I_BP")
    assert sp.simplify(less.upper - law.upper.subs({"I_LK": 0})) != 0  # a name is not the symbol
    zeros = {symbol("I_LK"): 0, symbol("V_OS"): 0}
    assert sp.simplify(less.upper - law.upper.subs(zeros)) == 0
    assert less.without(["R_OL", "I_BP"]) == law.without(NON_IDEAL)
    assert law.without(NON_IDEAL).is_ideal
    assert not law.is_ideal


def test_for_design_keeps_what_the_design_has() -> None:
    design = hk.Design(
        hk.Stage("inverting"),
        {"R_T": "10k", "R_B": "10k", "R_F": "100k"},
        supply=5,
        device=hk.Device(offset=1e-3, r_low=20),
    )
    assert hk.derive(design).for_design(design).non_ideal == ("R_OL", "V_OS")


def test_designs_of_one_circuit_share_one_law() -> None:
    stage = hk.Stage("inverting")
    design = hk.Design(stage, {"R_T": "10k", "R_B": "10k", "R_F": "100k"}, supply=5)
    assert hk.derive(design) is hk.derive(stage) is hk.derive(design.with_parts(R_F="1M"))


@pytest.mark.parametrize("stage", [*hk.Stage.all(), TAPPED, BRIDGE], ids=by_title)
def test_width_and_middle_belong_to_upper_and_lower(stage: hk.Stage) -> None:
    law = hk.derive(stage)
    assert law.width == law.upper - law.lower
    assert law.middle == (law.upper + law.lower) / 2
    named = [expand(trip, law.definitions) for trip in law.named]
    assert named == [law.upper, law.lower]


@pytest.mark.parametrize("stage", [*hk.Stage.all(), TAPPED, BRIDGE], ids=by_title)
def test_every_symbol_has_a_meaning_and_a_unit(stage: hk.Stage) -> None:
    law = hk.derive(stage)
    used = {s.name for _, formula in law.rows for s in formula.free_symbols}
    assert used <= law.symbols.keys()
    units = {
        "R": "Ω",
        "Z": "Ω",
        "V": "V",
        "E": "V",
        "I": "A",
        "G": "S",
        "S": "S",
        "K": "1",
        "k": "1",
    }
    for name, (meaning, unit) in law.symbols.items():
        assert meaning
        assert unit == units[name[0]], name


@pytest.mark.parametrize("stage", SPLIT, ids=by_title)
def test_sensitivity_is_the_normalised_derivative(stage: hk.Stage) -> None:
    ideal = hk.derive(stage).ideal
    values = {symbol(n): sp.Rational(7 + 5 * i, 3) for i, n in enumerate(ideal.names)}
    step = sp.Rational(1, 10**8)
    for name in stage.parts:
        x = symbol(name)
        found = ideal.sensitivity(name)
        for kind in ("upper", "lower", "width"):
            formula = getattr(ideal, kind)
            at, beside = (formula.subs({**values, x: values[x] * k}) for k in (1, 1 + step))
            if at == 0:
                continue
            measured = (beside / at - 1) / step
            assert abs(measured - getattr(found, kind).subs(values)) < 1e-6


def test_trips_are_proportional_to_all_voltages_and_know_only_ratios_of_resistors() -> None:
    """So the sensitivities to all voltages sum to one, those to all resistors to zero."""
    for stage in SPLIT:
        ideal = hk.derive(stage).ideal
        values = {symbol(n): sp.Rational(7 + 5 * i, 3) for i, n in enumerate(ideal.names)}
        found = {name: ideal.sensitivity(name) for name in ideal.names}
        for kind in ("upper", "lower", "width"):
            at = {n: getattr(each, kind).subs(values) for n, each in found.items()}
            assert sum(share for n, share in at.items() if n.startswith("V")) == 1
            assert sum(share for n, share in at.items() if n.startswith("R")) == 0


def test_a_name_that_the_law_does_not_know() -> None:
    law = hk.derive(hk.Stage("inverting"))
    with pytest.raises(hk.UnknownNameError) as caught:
        law.sensitivity("R_FF")
    assert caught.value.faults[0].remedy == "R_F"
    with pytest.raises(hk.UnknownNameError) as caught:
        law.solve_for("R_X", "R_Y")
    assert [fault.asked for fault in caught.value.faults] == ["R_X", "R_Y"]


def test_the_senses_leave_opposite_states() -> None:
    inverting, other = (hk.derive(hk.Stage(sense)) for sense in ("inverting", "non-inverting"))
    assert (inverting.upper_state, inverting.lower_state) == (HIGH, LOW)
    assert (other.upper_state, other.lower_state) == (LOW, HIGH)


def test_a_law_can_be_pickled() -> None:
    for stage in (hk.Stage("inverting", output="open-collector"), BRIDGE):
        law = hk.derive(stage)
        twin = pickle.loads(pickle.dumps(law))
        assert twin == law
        assert (twin.upper, twin.lower) == (law.upper, law.lower)


SCRIPT = """
import hystkit as hk
from tests.circuit.custom import BRIDGE, TAPPED
from tests.numeric.circuits import random_stages
optional = [stage.with_options(*stage.optional) for stage in hk.Stage.all()]
for stage in (*hk.Stage.all(), *optional, TAPPED, BRIDGE, *random_stages(5, seed=3)):
    law = hk.derive(stage)
    print(stage.title, law, law.upper, law.lower, law.definitions, law.states, sep="\\n")
    if not stage.is_custom and not stage.including:
        print(law.ideal, law.latex(), sep="\\n")
"""


def test_formulas_do_not_depend_on_the_order_of_hashes() -> None:
    started = [
        subprocess.Popen(
            [sys.executable, "-c", SCRIPT],
            cwd=ROOT,
            env={**os.environ, "PYTHONHASHSEED": seed, "PYTHONIOENCODING": "utf-8"},
            stdout=subprocess.PIPE,
        )
        for seed in ("1", "2")
    ]
    first, second = (process.communicate()[0] for process in started)
    assert all(process.returncode == 0 for process in started)
    assert first == second
    assert first.count(b"\n") > 200


@pytest.mark.parametrize("subject", ["x", None, ["inverting"]])
def test_only_a_stage_or_a_design_has_a_law(subject: Any) -> None:
    with pytest.raises(hk.InputError, match="subject is not a Stage or a Design"):
        hk.derive(subject)

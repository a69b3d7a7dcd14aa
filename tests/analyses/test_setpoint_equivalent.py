"""A reference source and the divider that is its Thevenin equivalent."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.preferred import values

REAL = hk.Device(drop_high=0.2, drop_low=0.3, r_high=50.0, r_low=80.0, leakage=1e-7, offset=2e-3,
                 bias_plus=5e-8, bias_minus=-4e-8)  # fmt: skip


def source(sense: str, supply: str, output: str, v_ref: float, **parts: Any) -> hk.Design:
    stage = hk.Stage(sense, supply=supply, reference="source", output=output)
    parts = {"R_R": "8k2", "R_F": "120k"} | parts
    parts |= {"R_I": "10k"} if sense == "non-inverting" else {}
    parts |= {"R_PU": "4k7"} if output == "open-collector" else {}
    rails = hk.Supply(5.0) if supply == "single" else hk.Supply(12.0, -9.0)
    return hk.Design(stage, parts, supply=rails, device=REAL, levels={"V_REF": v_ref})


def same_trips(one: hk.Design, other: hk.Design) -> None:
    a, b = hk.trip_points(one), hk.trip_points(other)
    assert float(a.upper) == pytest.approx(float(b.upper), rel=1e-12, abs=1e-12)
    assert float(a.lower) == pytest.approx(float(b.lower), rel=1e-12, abs=1e-12)


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
@pytest.mark.parametrize("supply", ["single", "split"])
@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
@settings(max_examples=20)
@given(share=st.floats(0.02, 0.98))
def test_there_and_back(sense: str, supply: str, output: str, share: float) -> None:
    low, high = (0.0, 5.0) if supply == "single" else (-9.0, 12.0)
    given_ = source(sense, supply, output, low + share * (high - low))
    there = hk.as_divider(given_).exact
    assert there.stage.reference == "divider"
    assert "V_REF" not in there.levels
    same_trips(given_, there)
    back = hk.as_source(there).exact
    same_trips(given_, back)
    assert back.parts["R_R"].value == pytest.approx(8200.0, rel=1e-12)
    assert back.levels["V_REF"].value == pytest.approx(given_.levels["V_REF"].value, abs=1e-12)
    assert back.stage == given_.stage


def test_ground_becomes_a_divider_and_a_source() -> None:
    stage = hk.Stage("inverting", supply="split", reference="ground")
    ground = hk.Design(stage, {"R_B": "4k7", "R_F": "120k"}, supply=hk.Supply(15, -15), device=REAL)
    divider = hk.as_divider(ground)
    same_trips(ground, divider.exact)
    assert divider.exact.parts["R_T"].value == pytest.approx(9400.0)
    zero = hk.as_source(ground)
    same_trips(ground, zero.exact)
    assert zero.exact.levels["V_REF"].value == 0.0


def test_reference_wired_to_its_input_needs_a_resistance() -> None:
    stage = hk.Stage("non-inverting", reference="source")
    wired = hk.Design(stage, {"R_I": "10k", "R_F": "100k"}, supply=5.0, levels={"V_REF": 2.0})
    with pytest.raises(hk.InputError) as caught:
        hk.as_divider(wired)
    assert caught.value.faults[0].remedy == 'resistance="10k", or fit R_R first'
    found = hk.as_divider(wired, resistance="10k")
    same_trips(wired, found.exact)
    parallel = 1 / sum(1 / found.exact.parts[n].value for n in ("R_T", "R_B"))
    assert parallel == pytest.approx(10e3)
    # Bias current in the minus pin makes a difference, which is told.
    biased = wired.with_device(bias_minus=1e-6)
    assert hk.as_divider(biased, resistance="10k").shift["upper"] == pytest.approx(-11e-3)


@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_real_divider_is_the_best_of_all_pairs(sense: str) -> None:
    given_ = source(sense, "single", "open-collector", 1.9)
    found = hk.as_divider(given_, series="E24")
    exact = found.exact.parts
    r_t, r_b = np.meshgrid(*(
        np.array(values("E24", exact[n].value / 10, exact[n].value * 10)) for n in ("R_T", "R_B")
    ))  # fmt: skip
    wanted, trips = hk.trip_points(given_), hk.trip_points(found.exact, R_T=r_t, R_B=r_b)
    moved = np.maximum(abs(trips.upper - wanted.upper), abs(trips.lower - wanted.lower))
    assert max(abs(v) for v in found.shift.values()) == pytest.approx(moved.min(), abs=1e-12)
    assert {p.value for n, p in found.design.parts.items() if n in ("R_T", "R_B")} <= set(
        values("E24", 1.0, 1e7)
    )


def test_real_source_of_the_voltages_at_hand() -> None:
    tank = hk.Design(hk.Stage("inverting"), {"R_T": "20k", "R_B": "21k", "R_F": "100k"}, supply=5.0)
    found = hk.as_source(
        tank, series="E96", references=["1.25 V", "2.5 V", 3.0], reference_tol=0.01
    )
    assert found.design.levels["V_REF"] == hk.Part(2.5, tol=0.01)
    assert found.design.parts["R_R"].value in values("E96", 1e3, 1e5)
    after, before = hk.trip_points(found.design), hk.trip_points(tank)
    assert found.shift["upper"] == pytest.approx(float(after.upper - before.upper))
    assert 0.01 < abs(found.shift["upper"]) < 0.1
    assert "2.5 V" in found.to_text()
    exact = hk.as_source(tank, series="E96")
    assert max(map(abs, exact.shift.values())) < max(map(abs, found.shift.values()))


def test_tolerances_move_along() -> None:
    given_ = source("inverting", "single", "push-pull", 2.5, R_R=hk.Part("8k2", 0.02, 50e-6))
    divider = hk.as_divider(given_).design
    assert divider.parts["R_T"].tol == divider.parts["R_B"].tol == 0.02
    assert divider.parts["R_T"].tempco == 50e-6
    assert hk.as_divider(given_, tol="1 %").design.parts["R_T"].tol == 0.01
    assert hk.as_source(divider).design.parts["R_R"].tol == 0.02


def test_supply_dependence_is_told() -> None:
    given_ = source("inverting", "single", "push-pull", 2.5)
    found = hk.as_divider(given_)
    before, after = found.per_volt["upper"]
    up, down = (hk.trip_points(d.with_supply(v_cc=5.0 + s), **{}) for d, s in
                ((found.design, 1e-3), (found.design, -1e-3)))  # fmt: skip
    assert after == pytest.approx(float(up.upper - down.upper) / 2e-3, rel=1e-6)
    assert before < 0.2 * after


@pytest.mark.parametrize(
    ("call", "error", "text"),
    [
        (lambda d: hk.as_divider(d.with_levels(V_REF=5.5)), hk.InfeasibleError,
         "no divider of the supply gives this reference."),
        (lambda d: hk.as_source(d), hk.InputError, "as_source has no reference to replace here."),
        (lambda d: hk.as_divider(hk.as_divider(d).exact), hk.InputError,
         "as_divider has no reference to replace here."),
        (lambda d: hk.as_divider(d, resistance="1k"), hk.InputError,
         "the resistance is that of R_R already."),
        (lambda d: hk.as_source(hk.as_divider(d).exact, references=[]), hk.InputError,
         "no reference is at hand."),
        (lambda d: hk.as_source(hk.as_divider(d).exact, references=["x"]), hk.InputError,
         "references is not a number."),
        (lambda d: hk.as_divider(d, series="E95"), hk.UnknownNameError,
         "there is no preferred series 'E95' here."),
    ],
)  # fmt: skip
def test_refusals(call: Any, error: type[Exception], text: str) -> None:
    with pytest.raises(error) as caught:
        call(source("inverting", "single", "push-pull", 2.5))
    assert str(caught.value).splitlines()[0] == text


def test_own_circuits_have_no_reference_to_replace() -> None:
    stage = hk.Stage.custom(
        [hk.Resistor("R_T", "cc", "plus"), hk.Resistor("R_B", "plus", "ground"),
         hk.Resistor("R_F", "out", "plus"), hk.Wire("signal", "minus")]
    )  # fmt: skip
    own = hk.Design(stage, {"R_T": "10k", "R_B": "10k", "R_F": "100k"}, supply=5.0)
    with pytest.raises(hk.InputError, match="an own circuit"):
        hk.as_source(own)

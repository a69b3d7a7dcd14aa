"""The relaxation oscillator: closed forms, an independent integration, and what does not run."""

from __future__ import annotations

from math import exp, log
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

import hystkit as hk
from hystkit.analyses.oscillator.swing import Oscillates
from tests.circuit.strategies import VARIANTS
from tests.numeric import nodal

INVERTING = [stage for stage in VARIANTS if stage.sense == "inverting"]
OTHERS = [stage for stage in hk.Stage.all() if stage.sense == "non-inverting"]
#: Every non-ideality at once, larger than in any device, so that nothing of it can hide.
REAL = hk.Device(
    drop_high=0.2, drop_low=0.3, r_high=150.0, r_low=80.0, leakage=2e-6,
    offset=5e-3, bias_plus=2e-7, bias_minus=-3e-7,
)  # fmt: skip
PARTS = {"R_T": "68k", "R_B": "47k", "R_R": "33k", "R_I": "22k", "R_F": "120k", "R_S": "27k",
         "R_PU": "10k", "R_L": "150k", "R_G": "82k"}  # fmt: skip


def a_design(stage: hk.Stage, device: hk.Device = REAL, **parts: Any) -> hk.Design:
    """A design whose pull-up and load are heavy, so that loading by R_X counts."""
    values = {name: PARTS[name] for name in stage.parts} | parts
    rails = hk.Supply(12, -9) if stage.supply == "split" else hk.Supply(9.0)
    levels = {"V_REF": 3.1} if "V_REF" in stage.levels else {}
    return hk.Design(stage, values, supply=rails, device=device, levels=levels)


def pulser(**device: Any) -> hk.Design:
    """Scenario of our own: a dosing pulser, all divider parts alike and a pull-up of 4k7."""
    parts = dict.fromkeys(("R_T", "R_B", "R_F"), "100k") | {"R_PU": "4k7"}
    stage = hk.Stage("inverting", output="open-collector")
    return hk.Design(stage, parts, supply=5.0, device=hk.Device(drop_low=0.1, **device))


def integrated(design: hk.Design, ohms: float, farads: float, delay: float) -> tuple[float, float]:
    """Time high and time low, by numerical integration of the node equations.

    Shares nothing with the package but the declared elements: the current into the capacitor and
    the voltage between the inputs come from modified nodal analysis at every step.
    """
    elements = (*design.elements, hk.Resistor("R_X", "out", "signal"))
    values = {**design.values, "R_X": ohms}

    def solved(state: str, volts: float) -> dict[Any, Any]:
        return nodal.unknowns(elements, design.stage.output, state, values, volts)

    def slope(_: float, volts: Any, state: str) -> list[float]:
        # The held node's current flows into the circuit; the capacitor gives it.
        return [-float(solved(state, volts[0])[("held", "signal")][0]) / farads]

    def between(_: float, volts: Any, state: str) -> float:
        found = solved(state, volts[0])
        return float((found["plus"] - found["minus"])[0] - values["V_OS"])

    between.terminal = True  # type: ignore[attr-defined]
    close = {"rtol": 1e-9, "atol": 1e-10, "method": "DOP853"}
    far = 100 * (ohms + 1e5) * farads
    volts, times = [0.0], {"high": 0.0, "low": 0.0}
    # The second round is periodic: after one switching the start no longer counts.
    for state in ("high", "low", "high", "low"):
        way = solve_ivp(slope, (0, far), volts, events=between, args=(state,), **close)
        assert way.status == 1, f"never leaves {state}"
        volts, times[state] = list(way.y[:, -1]), way.t[-1] + delay
        if delay:
            volts = list(solve_ivp(slope, (0, delay), volts, args=(state,), **close).y[:, -1])
    return times["high"], times["low"]


@pytest.mark.parametrize("delay", [0.0, 2e-3])
@pytest.mark.parametrize("stage", INVERTING, ids=lambda s: f"{s.title} {' '.join(s.including)}")
def test_against_an_integration_of_the_node_equations(stage: hk.Stage, delay: float) -> None:
    design = a_design(stage).with_device(delay=delay)
    ohms, farads = 56e3, 220e-9
    found = hk.oscillate(design, ohms, farads)
    assert found.ok, found.message
    high, low = integrated(design, ohms, farads, delay)
    assert found.high_time == pytest.approx(high, rel=1e-6)
    assert found.low_time == pytest.approx(low, rel=1e-6)
    assert found.period == pytest.approx(high + low, rel=1e-6)
    assert found.duty == pytest.approx(high / (high + low), rel=1e-6)


def test_dosing_pulser() -> None:
    """Scenario of our own, computed by hand from the Thevenin source: 325 ms and 327 ms."""
    found = hk.oscillate(pulser(), "1M", "0.47u")
    assert found.high_time == pytest.approx(0.325, abs=5e-4)
    assert found.low_time == pytest.approx(0.327, abs=5e-4)


@given(ohms=st.floats(1e3, 1e7), farads=st.floats(1e-10, 1e-4), volts=st.floats(3, 15))
def test_symmetric_form_takes_two_time_constants_and_ln_3(
    ohms: float, farads: float, volts: float
) -> None:
    """Feedback of one half: T = 2 R C ln 3, common practice."""
    stage = hk.Stage("inverting", supply="split", reference="ground")
    design = hk.Design(stage, {"R_B": "10k", "R_F": "10k"}, supply=hk.Supply(volts, -volts))
    found = hk.oscillate(design, ohms, farads)
    assert found.period == pytest.approx(2 * ohms * farads * log(3), rel=1e-11)
    assert found.duty == pytest.approx(0.5, rel=1e-11)


@given(
    r_t=st.floats(1e4, 1e6), r_b=st.floats(1e4, 1e6), r_f=st.floats(1e4, 1e6),
    v_oh=st.floats(3.5, 5), v_ol=st.floats(0, 0.5),
)  # fmt: skip
def test_textbook_formula_with_a_stiff_output(
    r_t: float, r_b: float, r_f: float, v_oh: float, v_ol: float
) -> None:
    """T = R C (ln((E_H - V_L)/(E_H - V_U)) + ln((V_U - E_L)/(V_L - E_L))), common practice."""
    parts = {"R_T": r_t, "R_B": r_b, "R_F": r_f}
    levels = {"V_OH": v_oh, "V_OL": v_ol}
    design = hk.Design(hk.Stage("inverting"), parts, supply=5.0, levels=levels)
    trips = hk.trip_points(design)
    found = hk.oscillate(design, "100k", "10n")
    if trips.upper >= v_oh or trips.lower <= v_ol:
        assert not found.ok
        return
    high = 1e-3 * log((v_oh - trips.lower) / (v_oh - trips.upper))
    low = 1e-3 * log((trips.upper - v_ol) / (trips.lower - v_ol))
    assert found.high_time == pytest.approx(high, rel=1e-9)
    assert found.low_time == pytest.approx(low, rel=1e-9)
    # A stiff output is not loaded by the timing resistor.
    assert found.upper == pytest.approx(float(trips.upper), rel=1e-12)


def test_the_timing_resistor_loads_a_pull_up() -> None:
    heavy, light = (hk.oscillate(pulser(), ohms, "1u") for ohms in ("10k", "100M"))
    free = hk.trip_points(pulser())
    assert light.upper == pytest.approx(float(free.upper), rel=1e-4)
    assert heavy.upper < light.upper - 0.05
    # It charges through R_PU as well, and discharges through R_X alone.
    assert heavy.high_time / heavy.low_time > 1.2 * light.high_time / light.low_time


def test_delay_adds_to_each_half_and_carries_past_the_trip() -> None:
    """Symmetric form: the overshoot is E (1 - e^-u) / 2 beyond the trip E / 2, u = t_d / RC."""
    stage = hk.Stage("inverting", supply="split", reference="ground")
    device = hk.Device(delay=3e-3)
    parts = {"R_B": "10k", "R_F": "10k"}
    design = hk.Design(stage, parts, supply=hk.Supply(10, -10), device=device)
    found = hk.oscillate(design, "100k", "100n")
    peak = 10 - 5 * exp(-0.3)
    assert found.peak == pytest.approx(peak, rel=1e-12)
    assert found.valley == pytest.approx(-peak, rel=1e-12)
    half = 10e-3 * log((10 + peak) / 5) + 3e-3
    assert found.period == pytest.approx(2 * half, rel=1e-12)


@pytest.mark.parametrize("stage", OTHERS, ids=lambda s: s.title)
def test_non_inverting_forms_stay(stage: hk.Stage) -> None:
    found = hk.oscillate(a_design(stage, hk.Device()), "100k", "1u")
    assert not found.ok
    assert np.isnan(found.period)
    assert found.message.startswith("the output stays")
    assert found.settles_high > found.settles_low


@pytest.mark.parametrize(("v_ref", "status", "word"), [
    (8.0, Oscillates.STAYS_HIGH, "high at 5 V with the upper trip"),
    (-3.0, Oscillates.STAYS_LOW, "low at 0 V with the lower trip"),
])  # fmt: skip
def test_a_capacitor_that_settles_short_of_a_trip(
    v_ref: float, status: Oscillates, word: str
) -> None:
    stage = hk.Stage("inverting", reference="source")
    parts = {"R_R": "10k", "R_F": "100k"}
    design = hk.Design(stage, parts, supply=5.0, levels={"V_REF": v_ref})
    found = hk.oscillate(design, "1M", "1u")
    assert found.status == status
    assert word in found.message
    assert word in found.to_text()


def test_arrays_are_scalars_side_by_side() -> None:
    ohms, farads = np.array([1e5, 1e6, 3e6]), np.array([[1e-7], [1e-6]])
    found = hk.oscillate(pulser(), ohms, farads, R_F=[5e4, 1e5, 2e5])
    assert found.period.shape == found.status.shape == (2, 3)
    for row, c in enumerate(farads[:, 0]):
        for column, (r, r_f) in enumerate(zip(ohms, (5e4, 1e5, 2e5), strict=True)):
            one = hk.oscillate(pulser().with_parts(R_F=r_f), r, c)
            assert found.period[row, column] == pytest.approx(one.period, rel=1e-12)
            assert found.duty[row, column] == pytest.approx(one.duty, rel=1e-12)


def test_arrays_of_text() -> None:
    found = hk.oscillate(pulser(), ["100k", "1M"], "470n")
    assert found.period == pytest.approx(hk.oscillate(pulser(), [1e5, 1e6], 470e-9).period)


def test_what_is_not_finite_does_not_stop_the_others() -> None:
    found = hk.oscillate(
        pulser(), [1e6, np.nan, np.inf, 1e6, 1e6], [1e-6, 1e-6, 1e-6, np.nan, np.inf]
    )
    assert list(np.isfinite(found.period)) == [True, False, False, False, False]
    assert list(found.status[3:]) == [Oscillates.NOT_POSITIVE] * 2


def test_impossible_elements_do_not_stop_the_others() -> None:
    found = hk.oscillate(pulser(), [1e6, -1.0, 1e6], [1e-6, 1e-6, 0.0])
    expected = [Oscillates.OK, Oscillates.NO_TRIPS, Oscillates.NOT_POSITIVE]
    assert list(found.status) == expected
    assert list(np.isfinite(found.period)) == [True, False, False]
    assert "2 of 3 do not" in found.to_text()


def test_a_part_of_the_same_name_keeps_it() -> None:
    stage = hk.Stage.custom([
        hk.Resistor("R_X", "cc", "plus"), hk.Resistor("R_B", "plus", "ground"),
        hk.Resistor("R_F", "out", "plus"), hk.Wire("signal", "minus"),
    ])  # fmt: skip
    equal = dict.fromkeys(stage.parts, "100k")
    found = hk.oscillate(hk.Design(stage, equal, supply=5.0), "1M", "470n")
    assert set(found.design.parts) == {"R_X", "R_B", "R_F", "R_XX"}
    assert found.period == pytest.approx(2 * 0.47 * log(2), rel=1e-12)


@settings(max_examples=30)
@given(scale=st.floats(0.01, 100))
def test_time_scales_with_the_capacitor_alone(scale: float) -> None:
    one, other = (hk.oscillate(pulser(), "33k", 1e-7 * s) for s in (1.0, scale))
    assert other.period == pytest.approx(one.period * scale, rel=1e-12)
    assert other.duty == pytest.approx(one.duty, rel=1e-12)


@pytest.mark.parametrize(
    ("r", "c", "problems"),
    [
        (0, "470 nV", ["r is not positive.", "c is not in F."]),
        ([], "470n", ["r is not positive."]),
        ("1M", [0.0, -1e-9], ["c is not positive."]),
        ("1M", ["470n", "x"], ["c is not a number."]),
        ([np.nan, np.inf], "470n", ["r is not positive."]),
        (hk.Part("2.5 V"), None, ["r is not a part in Ω.", "c is not a single number."]),
    ],
)
def test_refusals(r: Any, c: Any, problems: list[str]) -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.oscillate(pulser(), r, c)
    assert [fault.problem for fault in caught.value.faults] == problems


def test_shapes_and_kinds_are_refused() -> None:
    with pytest.raises(hk.InputError, match="these arrays do not broadcast"):
        hk.oscillate(pulser(), [1e5, 1e6], [1e-6, 1e-6, 1e-6])
    with pytest.raises(hk.InputError, match="design is not a Design"):
        hk.oscillate("pulser", "1M", "1u")  # type: ignore[arg-type]
    with pytest.raises(hk.UnknownNameError):
        hk.oscillate(pulser(), "1M", "1u", R_Q=1e3)

"""First-order spread in the measurand against another implementation of error propagation."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
import sympy as sp
from uncertainties import ufloat, umath

import hystkit as hk
from hystkit.numeric.fractions import gains
from tests.analyses.sensed_designs import COEFFICIENTS, SIGNALS, sensing

ENDS = ("low", "high", "width")
SIGMAS = 3
T_25 = 298.15


def of_line(v: Any, p: Any) -> Any:
    return (v - p["zero"]) / p["slope"]


def of_loop(v: Any, p: Any) -> Any:
    return 2 * ((v / p["R_X"] - 4e-3) / 16e-3 - p["loop_error"])


def of_attenuator(v: Any, p: Any) -> Any:
    return v * (1 + p["R_XT"] / p["R_XB"])


def of_track(v: Any, p: Any) -> Any:
    return 100 * (v / p.get("V_X", p["V_CC"]) - p["track_error"])


def beta(ohms: Any, p: Any) -> Any:
    return 1 / (umath.log(ohms / p["R_25"]) / p["B"] + 1 / T_25) - 273.15


def below(v: Any, p: Any) -> Any:
    share = v / p.get("V_X", p["V_CC"])
    return p["R_X"] * share / (1 - share)


def above(v: Any, p: Any) -> Any:
    share = v / p["V_CC"]
    return p["R_X"] * (1 - share) / share


def of_coefficients(v: Any, p: Any) -> Any:
    log = umath.log(below(v, p) / p["R_factor"])
    one = COEFFICIENTS
    return 1 / (one.a + one.b * log + one.c * log**3) - 273.15


def of_platinum(v: Any, p: Any) -> Any:
    # Above 0 °C the curve is a parabola; class B is 0.3 °C and 0.5 %.
    a, b = 3.9083e-3, -5.775e-7
    shifted = (umath.sqrt(a**2 - 4 * b * (1 - v / p["I_X"] / 1000)) - a) / (2 * b)
    return (shifted - 0.3 * p["class_position"]) / (1 + 0.005 * p["class_position"])


#: The signals once more, each as the formula for what it reads.
FORMULAS: dict[str, Callable[[Any, Any], Any]] = {
    "linear": of_line,
    "falling line": of_line,
    "loop": of_loop,
    "attenuator": of_attenuator,
    "track": of_track,
    "track of its own": of_track,
    "NTC below": lambda v, p: beta(below(v, p), p),
    "NTC above": lambda v, p: beta(above(v, p), p),
    "NTC of its own": lambda v, p: beta(below(v, p), p),
    "NTC driven": lambda v, p: beta(v / p["I_X"], p),
    "coefficients": of_coefficients,
    "platinum driven": of_platinum,
}


def propagated(found: hk.Spread, formula: Callable[[Any, Any], Any]) -> dict[str, Any]:
    """Low, high and width with numbers that carry their uncertainty from the law to the end."""
    design, box = found.design, found.measurand.box.quantities
    numbers = {n: ufloat(q.nominal, q.half / SIGMAS, tag=n) for n, q in box.items()}
    values: dict[str, Any] = dict(design.values)
    for name in found.box.quantities:
        for symbol, gain in gains(design, name).items():
            values[symbol] = values[symbol] + gain * (numbers[name] - numbers[name].nominal_value)
    stated = {name: limits.nominal for name, limits in design.signal.parameters.items()}
    own = {**stated, "V_CC": values["V_CC"], **{n: v for n, v in numbers.items() if n in stated}}
    law = hk.derive(design)
    symbols = sorted(law.upper.free_symbols | law.lower.free_symbols, key=str)
    function = sp.lambdify(symbols, (law.upper, law.lower), modules="math")
    ends = [formula(trip, own) for trip in function(*(values[s.name] for s in symbols))]
    low, high = sorted(ends, key=lambda end: end.nominal_value)
    return {"low": low, "high": high, "width": high - low}


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
@pytest.mark.parametrize("name", FORMULAS)
def test_rss_and_shares_agree_with_uncertainties(name: str, output: str) -> None:
    design = sensing(SIGNALS[name], output)
    found = hk.spread(design, temperature=(-10, 60), sigmas=SIGMAS)
    nominal = hk.trip_points(design).measurand
    for end, expected in propagated(found, FORMULAS[name]).items():
        assert expected.nominal_value == pytest.approx(getattr(nominal, end), rel=1e-9)
        assert found.measurand.rss[end] == pytest.approx(SIGMAS * expected.std_dev, rel=1e-9)
        shares = found.measurand.contributions[end]
        variances = {v.tag: e**2 for v, e in expected.error_components().items()}
        for tag, variance in variances.items():
            assert shares[tag] == pytest.approx(variance / expected.std_dev**2, rel=1e-6, abs=1e-12)


@pytest.mark.parametrize("end", ENDS)
@pytest.mark.parametrize("name", SIGNALS)
def test_contributions_sum_to_one_and_list_the_signal(name: str, end: str) -> None:
    found = hk.spread(sensing(SIGNALS[name]), temperature=(-10, 60))
    shares = found.measurand.contributions[end]
    assert sum(shares.values()) == pytest.approx(1, rel=1e-12)
    assert list(shares.values()) == sorted(shares.values(), reverse=True)
    uncertain = {n for n, one in SIGNALS[name].parameters.items() if one.low < one.high}
    assert set(shares) == {*found.box.quantities, *uncertain}


def test_a_zero_error_moves_both_ends_alike() -> None:
    shares = hk.spread(sensing(SIGNALS["linear"])).measurand.contributions
    assert shares["width"]["zero"] < 1e-15 < shares["low"]["zero"]
    assert shares["width"]["slope"] > 0


def test_a_trip_point_at_ground_has_a_slope() -> None:
    # The lower trip point stands at 0 V, where no step in proportion to it exists.
    parts = {"R_R": hk.Part("10k", tol=0.01), "R_F": hk.Part("90k", tol=0.01)}
    signal = hk.signals.Linear(0.5, span=(-2, 4), slope_tol=0.01)
    design = hk.Design(
        hk.Stage("inverting", supply="split", reference="source"),
        parts,
        supply=hk.Supply(5, -5),
        levels={"V_REF": hk.Part(5 / 9, tol=0.01)},
        signal=signal,
    )
    found = hk.spread(design)
    assert abs(hk.trip_points(design).lower) < 1e-12
    assert found.measurand.rss["low"] == pytest.approx(2 * found.rss["lower"], rel=1e-9)

"""What a candidate tells: yield, bill of materials, views; and what can be done with a list."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.circuit.signals import Linear, Ntc, SensorDivider

STAGE = hk.Stage("inverting", output="open-collector")
DEVICE = hk.Device(drop_low=0.2, limits={"drop_low": (0.1, 0.4)}, name="open-collector class")
WINDOWS: dict[str, Any] = {"upper": (2.66, 2.74), "lower": (2.26, 2.34)}


def sized(**more: Any) -> hk.Sizing:
    request: dict[str, Any] = {"supply": 5.0, "parts": {"R_PU": "4k7"}, "device": DEVICE,
                               "tol": 0.02, "count": 3, "suggest": False}  # fmt: skip
    return hk.size(STAGE, **(request | WINDOWS | more))


def test_yield_is_that_of_the_spread_of_the_same_design() -> None:
    best = sized()[0]
    assert not best.holds
    own = best.expected_yield
    assert own is not None
    spread = hk.spread(best.design).yield_within(**WINDOWS)
    assert own.samples == 65536
    assert own.value == pytest.approx(spread.value, abs=1e-12)
    assert 0.5 < own.value < 1.0
    assert own.low < own.value < own.high
    uniform = best.sampled_yield(samples=20_000, distribution="uniform")
    assert uniform.value < own.value


def test_what_holds_in_the_worst_case_has_full_yield() -> None:
    for candidate in sized(tol=0.001):
        assert candidate.holds
        assert candidate.sampled_yield(10_000, distribution="uniform").value == 1.0


def test_yield_with_drift() -> None:
    still = sized()[0]
    warm = sized(tempco=200e-6, temperature=(-20, 85))[0]
    spread = hk.spread(warm.design, temperature=(-35, 85)).yield_within(**WINDOWS)
    assert warm.expected_yield.value == pytest.approx(spread.value, abs=1e-12)
    assert warm.expected_yield.value < still.expected_yield.value


def test_without_tolerance_all_units_are_alike() -> None:
    exact = hk.size(hk.Stage("inverting"), supply=5.0, tol=0.0, **WINDOWS, count=1)[0]
    assert exact.sampled_yield(20_000).passed == 20_000


def test_yield_in_the_measurand_takes_the_sensor_along() -> None:
    windows: dict[str, Any] = {"on_at": (0.75, 0.85), "off_at": (1.35, 1.45)}
    found = []
    for slope_tol in (0.0, 0.1):
        signal = Linear(1.2, 0.6, span=(0, 2), unit="m", slope_tol=slope_tol)
        best = hk.size(hk.Stage("inverting"), supply=5.0, signal=Linear(1.2, 0.6, span=(0, 2)),
                       **windows, count=1)[0]  # fmt: skip
        best = type(best)(best.design.with_signal(signal), best.requirement, best.target)
        found.append(best.sampled_yield(distribution="uniform"))
        # By hand, from independent random numbers.
        rng = np.random.default_rng(1)
        units = {n: rng.uniform(p.value * (1 - p.tol), p.value * (1 + p.tol), 200_000)
                 for n, p in best.design.parts.items()}  # fmt: skip
        trips = hk.trip_points(best.design, **units)
        slope = 1.2 * rng.uniform(1 - slope_tol, 1 + slope_tol, 200_000)
        on, off = (trips.lower - 0.6) / slope, (trips.upper - 0.6) / slope
        inside = (on >= 0.75) & (on <= 0.85) & (off >= 1.35) & (off <= 1.45)
        assert found[-1].value == pytest.approx(inside.mean(), abs=5e-3)
    assert found[1].value < found[0].value == 1.0


def test_ratiometric_yield_shares_the_supply() -> None:
    windows: dict[str, Any] = {"on_at": (27.0, 29.0), "off_at": (21.0, 23.0)}
    signal = SensorDivider(Ntc("10k", 3950), "10k", span=(-20, 60))
    best = hk.size(hk.Stage("inverting"), supply=hk.Supply(5.0, tol=0.2), signal=signal, **windows,
                   tol=0.001, count=1)[0]  # fmt: skip
    assert best.holds
    assert best.sampled_yield(distribution="uniform").value == 1.0


def test_no_yield_without_windows() -> None:
    best = hk.size(hk.Stage("inverting"), supply=5.0, upper=2.7, lower=2.3, count=1)[0]
    assert best.expected_yield is None
    assert np.isnan(best.margin)
    with pytest.raises(hk.InputError, match="without windows there is no yield"):
        best.sampled_yield()


def test_bill_of_materials() -> None:
    best = sized(tempco=100e-6)[0]
    lines = {line.reference: line for line in best.bill}
    assert [*lines] == ["R_T", "R_B", "R_F", "R_PU", "U"]
    assert lines["R_PU"].value == "4k7"
    assert lines["R_PU"].rating == ""
    assert lines["R_T"].ohms == best.design.parts["R_T"].value
    assert lines["R_T"].rating == "± 2 %, 100 ppm/K"
    assert lines["U"].value == "open-collector class"


def test_drawer() -> None:
    drawer = ["10k", "22k", "33k", "47k", "100k", "123.4k", "470k"]
    found = sized(series={"R_T": drawer, "R_B": drawer, "R_F": "E24"}, count=20)
    assert found.searched == 7 * 7 * 73
    used = {c.design.parts[n].value for c in found for n in ("R_T", "R_B")}
    assert used <= {10e3, 22e3, 33e3, 47e3, 100e3, 123.4e3, 470e3}


def test_a_list_is_a_sequence() -> None:
    found = sized()
    assert len(found) == 3
    assert found[0] is next(iter(found))
    assert found[:2] == found.candidates[:2]
    assert found[-1] in found


def test_views() -> None:
    found = sized()
    for text in (found.to_text(), found._repr_html_(), found.to_latex()):
        assert "R\\_T" in text or "R_T" in text
        assert "combinations searched" in text
    one = found[0].to_text()
    for label in ("R_T", "± 2 %", "upper, worst case", "yield", "verdict", "leaves a window"):
        assert label in one


def test_a_candidate_can_be_taken_on() -> None:
    best = sized()[0]
    rebuilt = eval(best.design.as_code(), {"hk": hk})
    assert rebuilt == best.design
    assert float(hk.trip_points(rebuilt).upper) == float(best.trips.upper)


def test_given_parts_keep_their_tolerance() -> None:
    best = sized(parts={"R_PU": hk.Part("4k7", tol=0.05, tempco=1e-4)})[0]
    assert best.design.parts["R_PU"] == hk.Part("4k7", tol=0.05, tempco=1e-4)
    assert best.design.parts["R_T"].tol == 0.02


def test_forms_that_cannot_are_told_with_their_reason() -> None:
    found = hk.size(supply=5.0, upper=5.2, lower=0.1, count=3)
    assert {c.design.stage.sense for c in found} == {"non-inverting"}
    assert "inverting, single supply, divider reference, push-pull" in found.refused
    assert "no resistor ratio" in next(iter(found.refused.values()))


def test_levels_choose_the_forms() -> None:
    found = hk.size(supply=5.0, upper=2.7, lower=2.3, levels={"V_REF": 2.5}, count=5)
    assert {c.design.stage.reference for c in found} == {"source"}
    split = hk.size(supply=hk.Supply(12, -12), upper=1.0, lower=-1.0, count=40, series="E12")
    assert {c.design.stage.supply for c in split} == {"split"}
    assert "ground" in {c.design.stage.reference for c in split}

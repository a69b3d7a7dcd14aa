"""Extremes in the measurand against random points, dense sampling and what sizing finds."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.spread.signal_box import signal_quantities
from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.base import Limits
from hystkit.numeric.sampling import Plan
from tests.analyses.sensed_designs import (
    DEVICE,
    IN_PARTS,
    NTC,
    SIGNALS,
    S,
    interior,
    read,
    sensing,
)

ENDS = ("low", "high", "width")
STRAIGHT = ("linear", "falling line", "loop", "attenuator", "track", "track of its own")


def assert_holds(design: hk.Design, count: int, seed: int = 0, **asked: Any) -> hk.Spread:
    """No point leaves the extremes, and these are attained within the stated gap."""
    found = hk.spread(design, **asked)
    drawn = interior(found, count, seed)
    for end in ENDS:
        bound, values = found.measurand.bounds[end], drawn[end]
        low, high = bound.interval
        room = 1e-9 * max(abs(low), abs(high))
        assert np.all(np.isfinite(values))
        assert low - room <= values.min()
        assert values.max() <= high + room
        for at, extreme in ((bound.at_lowest, low), (bound.at_highest, high)):
            assert at.keys() == found.measurand.box.quantities.keys()
            assert abs(float(read(found, at)[end]) - extreme) <= bound.gap + room
    return found


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
@pytest.mark.parametrize("name", SIGNALS)
def test_no_point_leaves_the_extremes(name: str, output: str) -> None:
    found = assert_holds(sensing(SIGNALS[name], output), 20_000, temperature=(-10, 60))
    sensed = found.measurand
    assert sensed.proof["low"] == sensed.proof["high"] == "corners"
    assert sensed.gap["low"] == sensed.gap["high"] == 0
    if name in STRAIGHT:
        assert sensed.proof["width"] == found.proof["width"]
        assert sensed.gap["width"] == 0
    else:
        low, high = sensed.extremes["width"]
        assert sensed.proof["width"] == "cells"
        assert 0 < sensed.gap["width"] < (0.25 if name in IN_PARTS else 0.2) * (high - low)


@pytest.mark.parametrize("name", ["NTC below", "linear"])
def test_no_point_of_a_million_leaves_the_extremes(name: str) -> None:
    design = sensing(SIGNALS[name], "open-collector", tol=0.05)
    for seed in range(10):
        assert_holds(design, 100_000, seed)


def wide(signal: str, tol: float) -> Any:
    """Signals with tolerances far beyond those of real parts."""
    part = hk.Part("10k", tol=tol)
    sensor = S.Ntc("10k", 3950, r25_tol=tol, b_tol=tol / 4)
    return {
        "line": S.Linear(1.0, 0.2, span=(0, 9), slope_tol=tol, zero_error=0.3),
        "divider": S.Attenuator(part, part, span=(0, 30)),
        "NTC": S.SensorDivider(sensor, part, span=(-40, 120)),
        "NTC of its own": S.SensorDivider(
            sensor, part, "top", excitation=hk.Part(12, tol=tol / 4), span=(-40, 120)
        ),
        "driven": S.DrivenSensor(sensor, 250e-6, tol, span=(-40, 120)),
        "table": S.SensorDivider(
            S.ResistanceTable([-60, -20, 20, 60, 140], [9e5, 97e3, 12.5e3, 2.5e3, 200], tol / 2),
            hk.Part("10k", tol=tol / 2),
            span=(-50, 130),
        ),
    }[signal]


@settings(max_examples=40)
@given(
    name=st.sampled_from(["line", "divider", "NTC", "NTC of its own", "driven", "table"]),
    tol=st.floats(0.1, 0.5),
    stage_tol=st.floats(0.01, 0.3),
    output=st.sampled_from(["push-pull", "open-collector"]),
    seed=st.integers(0, 999),
)
def test_any_wide_box_holds_its_points(
    name: str, tol: float, stage_tol: float, output: str, seed: int
) -> None:
    design = sensing(wide(name, tol), output, tol=stage_tol, device=hk.Device(drop_low=0.2))
    if np.isfinite(hk.spread(design).measurand.extremes["width"][0]):
        assert_holds(design, 4000, seed)


@pytest.mark.parametrize("name", ["NTC below", "platinum driven", "loop", "track"])
def test_ends_are_those_of_every_corner(name: str) -> None:
    found = hk.spread(sensing(SIGNALS[name]))
    box = found.measurand.box.intervals
    grid = np.array(list(product(*box.values()))).T
    corners = read(found, dict(zip(box, grid, strict=True)))
    for end in ("low", "high"):
        expected = (corners[end].min(), corners[end].max())
        assert found.measurand.extremes[end] == pytest.approx(expected, rel=1e-12)


def test_a_dense_search_comes_close_to_the_bounds_of_the_width() -> None:
    # Over V_CC and the parameters alone, where a grid of points can be dense.
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    design = sensing(SIGNALS["NTC of its own"]).with_parts(**{n: hk.Part(v) for n, v in
                                                              parts.items()})  # fmt: skip
    design = design.with_device(limits=None)
    found = hk.spread(design)
    box = found.measurand.box.intervals
    assert len(box) == 5
    axes = np.meshgrid(*(np.linspace(*ends, 9) for ends in box.values()))
    dense = read(found, {n: a.ravel() for n, a in zip(box, axes, strict=True)})["width"]
    low, high = found.measurand.extremes["width"]
    gap = found.measurand.gap["width"]
    assert low <= dense.min() <= low + gap
    assert high - gap <= dense.max() <= high


# -- what is shared cancels ------------------------------------------------------------------


@pytest.mark.parametrize("name", ["NTC below", "NTC above", "track"])
def test_a_shared_supply_cancels(name: str) -> None:
    still, loose = (
        hk.spread(sensing(SIGNALS[name], supply_tol=tol, device=hk.Device())).measurand
        for tol in (0.0, 0.2)
    )
    for end in ENDS:
        assert loose.extremes[end] == pytest.approx(still.extremes[end], rel=1e-9)
        assert loose.contributions[end]["V_CC"] < 1e-20
        assert loose.rss[end] == pytest.approx(still.rss[end], rel=1e-12)
    # A supply of its own for the sensor, and the same stage does mind.
    apart = hk.spread(sensing(SIGNALS["NTC of its own"], device=hk.Device())).measurand
    assert apart.contributions["low"]["V_CC"] > 0.5


def test_samples_share_the_supply() -> None:
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    exact = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-20, 60))
    design = hk.Design(
        hk.Stage("inverting"), parts, supply=hk.Supply(5.0, tol=0.2), signal=exact
    )  # fmt: skip
    found = hk.spread(design, samples=10_000)
    assert np.ptp(found.samples["upper"]) > 0.5
    nominal = hk.trip_points(design).measurand
    for end in ENDS:
        drawn = found.measurand.samples[end]
        assert drawn == pytest.approx(np.full(10_000, getattr(nominal, end)), rel=1e-9)


def test_what_does_not_follow_the_supply_stays() -> None:
    # A low level that is held, so that half of the band does not follow V_CC.
    design = sensing(SIGNALS["NTC below"]).with_levels(V_OL=0.8)
    found = assert_holds(design, 50_000)
    assert found.measurand.contributions["width"]["V_CC"] > 0.1


# -- samples, yield and sizing ---------------------------------------------------------------


@pytest.mark.parametrize("name", SIGNALS)
def test_samples_lie_within_and_spread_as_the_root_sum_square(name: str) -> None:
    found = hk.spread(sensing(SIGNALS[name]), samples=1 << 14).measurand
    for end in ENDS:
        low, high = found.extremes[end]
        drawn = found.samples[end]
        room = 1e-9 * max(abs(low), abs(high))
        assert low - room <= drawn.min()
        assert drawn.max() <= high + room
        if name != "platinum about 0 °C":  # the tolerance class turns round there
            assert drawn.std() == pytest.approx(found.rss[end] / 3, rel=0.05)


@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
@pytest.mark.parametrize("ratiometric", [True, False])
def test_a_candidate_of_sizing_has_the_same_extremes_and_yield(
    sense: str, ratiometric: bool
) -> None:
    sensor = S.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    signal = S.SensorDivider(
        sensor,
        hk.Part("10k", tol=0.01),
        excitation=None if ratiometric else hk.Part(5.0, tol=0.002),
        span=(-20, 60),
    )
    warm, cold = (27.4, 28.6), (21.4, 22.6)
    on, off = (warm, cold) if sense == "inverting" else (cold, warm)
    best = hk.size(
        hk.Stage(sense), supply=hk.Supply(5.0, tol=0.01), signal=signal, on_at=on, off_at=off,
        tol=0.005, count=1, device=DEVICE, suggest=False,
        parts={} if sense == "inverting" else {"R_B": "33k"},
    )[0]  # fmt: skip
    found = hk.spread(best.design).measurand
    edges = best.requirement.edges(sense)
    for edge, trip in edges.items():
        assert found.extremes[found.ends[trip]] == pytest.approx(best.switching[edge], rel=1e-9)
    windows = {found.ends[trip]: {"on_at": on, "off_at": off}[e] for e, trip in edges.items()}
    # Both draw the same points: not one unit may be judged otherwise.
    assert found.yield_within(**windows) == best.expected_yield
    assert 0.5 < best.expected_yield.value < 1


def test_volts_do_not_change_with_the_signal() -> None:
    blunt = sensing(SIGNALS["NTC below"])
    one, other = (hk.spread(d, samples=5000) for d in (blunt, blunt.with_signal(None)))
    assert one.extremes == other.extremes
    assert one.rss == other.rss
    assert np.array_equal(one.samples["upper"], other.samples["upper"])


def test_without_parameters_the_samples_are_those_in_volts() -> None:
    found = hk.spread(sensing(S.Linear(0.5, span=(0, 10))), samples=9000)
    assert not found.measurand.adds
    assert found.measurand.samples["low"] == pytest.approx(found.samples["lower"] / 0.5, rel=1e-12)


@pytest.mark.parametrize("name", ["linear", "falling line", "NTC below"])
def test_windows_in_volts_stand_for_quantities(name: str) -> None:
    design = sensing(SIGNALS[name])
    found, nominal = hk.spread(design, samples=20_000).measurand, hk.trip_points(design)
    at = float(nominal.upper)
    window = (at - 0.02, at + 0.03)
    ends = sorted(float(design.signal.quantity(v)) for v in window)
    expected = found.yield_within(**{found.ends["upper"]: tuple(ends)})
    assert found.yield_at(upper=window) == expected
    assert 0 < expected.passed < 20_000
    half = found.yield_at(upper=(at, None))
    assert half.value == pytest.approx(0.5, abs=0.05)
    # Beyond what the sensor can give lies nothing.
    assert found.yield_at(upper=(None, 1e3), lower=(-1e3, None)).value == 1


def test_binned_and_uniform_reach_the_signal() -> None:
    found = {
        kind: hk.spread(sensing(SIGNALS["linear"]), samples=8192, distribution=kind).measurand
        for kind in ("normal", "uniform")
    }
    spread = {kind: one.samples["low"].std() for kind, one in found.items()}
    assert spread["uniform"] > 1.5 * spread["normal"]


# -- drift, names, and signals of one's own --------------------------------------------------


def test_parts_of_the_signal_drift_with_temperature() -> None:
    signal = S.SensorDivider(NTC, hk.Part("10k", tol=0.01, tempco=100e-6), span=(-20, 60))
    found = hk.spread(sensing(signal), temperature=(-15, 60)).measurand
    one = found.box.quantities["R_X"]
    # 40 K below 25 °C is the farthest: 10 k (1 ± 1 %) (1 ± 0.4 %).
    assert one.low == pytest.approx(10e3 * 0.99 * 0.996)
    assert one.high == pytest.approx(10e3 * 1.01 * 1.004)
    assert hk.spread(sensing(signal)).measurand.box.quantities["R_X"].high == 10.1e3
    low, high = found.extremes["low"]
    still = hk.spread(sensing(signal)).measurand.extremes["low"]
    assert low < still[0] < still[1] < high


def test_a_part_of_the_signal_that_drifts_to_zero_is_refused() -> None:
    signal = S.CurrentLoop(hk.Part(150, tempco=0.05), span=(0, 2))
    with pytest.raises(hk.DesignError, match="burden of the signal would drift to zero"):
        hk.spread(sensing(signal), temperature=(0, 50))
    assert signal_quantities(signal) == {}


def test_equal_names_are_told_apart() -> None:
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_X", "ref", "plus"),
            hk.Resistor("R_F", "out", "plus"),
            hk.Wire("signal", "minus"),
        ]
    )
    parts = {"R_X": hk.Part("10k", tol=0.01), "R_F": hk.Part("90k", tol=0.01)}
    signal = S.CurrentLoop(hk.Part(150, tol=0.02), span=(0, 2))
    design = hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.0}, signal=signal)
    found = hk.spread(design, samples=1000).measurand
    assert list(found.box.quantities) == ["R_X", "R_F", "signal R_X"]
    assert found.contributions["low"]["signal R_X"] > 0.5
    assert found.bounds["low"].at_lowest["signal R_X"] == pytest.approx(153)
    assert found.samples["low"].std() > 0


@dataclass(frozen=True)
class Turning(Signal):
    """A signal of one's own, whose reading is farthest inside the range of its parameter."""

    unit: str = "bar"
    name: str = "pressure"
    span: tuple[float, float] = (0.0, 10.0)

    @property
    def parameters(self) -> dict[str, Limits]:
        return {"shape": Limits(-1.0, 0.5, 1.0)}

    def _volts(self, quantity: Any, values: Any) -> Any:
        return 0.5 * quantity * (1 + 0.1 * values["shape"] ** 2)

    def _quantity(self, volts: Any, values: Any) -> Any:
        return np.asarray(volts) / (0.5 * (1 + 0.1 * values["shape"] ** 2))


def test_a_signal_of_ones_own_is_searched_on_a_grid_and_says_so() -> None:
    found = hk.spread(sensing(Turning()), samples=4096)
    assert set(found.measurand.proof.values()) == {"grid"}
    assert "grid" in found.to_text()
    top = 2 * found.extremes["upper"][1]
    # The farthest is at shape 0, half way: corners alone would miss a tenth.
    assert found.measurand.extremes["high"][1] == pytest.approx(top, rel=1e-5)
    assert found.measurand.samples["high"].max() <= top


def test_where_the_stage_or_the_sensor_fails_nothing_is_claimed() -> None:
    lost = sensing(SIGNALS["NTC below"]).with_levels(V_OL=hk.Part(4.0, tol=0.4))
    beyond = sensing(S.MeasuredTable([0, 50], [2.4, 2.0], error=0.01))
    for design in (lost, beyond):
        found = hk.spread(design, samples=500).measurand
        assert np.all(np.isnan([found.extremes[end] for end in ENDS]))
        assert found.bounds["low"].at_lowest == {}


def test_nothing_uncertain_is_a_point() -> None:
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    signal = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-20, 60))
    design = hk.Design(hk.Stage("inverting"), parts, supply=5.0, signal=signal)
    found, nominal = hk.spread(design, samples=9000).measurand, hk.trip_points(design).measurand
    for end in ENDS:
        at = getattr(nominal, end)
        assert found.extremes[end] == pytest.approx((at, at), rel=1e-9)
        assert found.rss[end] == 0
        assert found.samples[end] == pytest.approx(np.full(9000, at), rel=1e-12)


@pytest.mark.parametrize("supply_tol", [0.0, 0.05])
@pytest.mark.parametrize("name", SIGNALS)
def test_a_stage_that_is_exact_leaves_what_the_signal_does(name: str, supply_tol: float) -> None:
    parts = {"R_T": hk.Part("22k1"), "R_B": hk.Part("21k"), "R_F": hk.Part("220k")}
    design = sensing(SIGNALS[name], supply_tol=supply_tol, device=hk.Device()).with_parts(**parts)
    assert set(hk.spread(design).box.quantities) == ({"V_CC"} if supply_tol else set())
    assert_holds(design, 4000)


def test_the_text_lists_the_signal_beside_the_parts() -> None:
    text = hk.spread(sensing(SIGNALS["NTC below"])).to_text()
    for word in ("temperature, width depends on", "R_25", "R_X", "cells, within"):
        assert word in text


def test_the_plan_is_that_of_the_spread() -> None:
    found = hk.spread(sensing(SIGNALS["linear"]), samples=3000, seed=7)
    assert found.plan == Plan(3000, 7, "normal", 3.0)
    other = hk.spread(sensing(SIGNALS["linear"]), samples=3000, seed=8)
    assert found.measurand.samples["low"].shape == (3000,)
    assert not np.array_equal(found.measurand.samples["low"], other.measurand.samples["low"])

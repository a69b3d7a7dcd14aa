"""Trip points against an independent nodal solution, and against what physics demands of them."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

import hystkit as hk
from hystkit.circuit.elements import Element
from hystkit.numeric.compile import kernel
from hystkit.numeric.status import Status
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import VARIANTS
from tests.numeric import nodal
from tests.numeric.circuits import a_design, random_stages, random_values, symbol_names

Array = NDArray[np.float64]
SAMPLES = 40
#: Relative deviation allowed from the oracle; below 1 mV the deviation is taken from 1 mV.
AGREEMENT = 1e-9
KINDS = ("upper", "lower", "width", "middle")


def deviation(found: Any, oracle: Any) -> float:
    return float(np.max(np.abs(found - oracle) / np.maximum(np.abs(oracle), 1e-3)))


def oracle_trips(stage: hk.Stage, values: dict[str, Array]) -> tuple[Array, Array]:
    high, low = (nodal.trip(stage.elements, stage.output, s, values) for s in ("high", "low"))
    return (high, low) if stage.sense == "inverting" else (low, high)


def signal_gain(stage: hk.Stage, state: str, values: dict[str, Array]) -> Array:
    """How far v(plus) - v(minus) rises as the signal rises by 1 V."""
    at_0, at_1 = (
        nodal.voltages(stage.elements, stage.output, state, values, signal) for signal in (0.0, 1.0)
    )
    return (at_1["plus"] - at_1["minus"]) - (at_0["plus"] - at_0["minus"])


def test_thousands_of_random_circuits_of_every_form() -> None:
    random = np.random.default_rng(20)
    switching = 0
    for stage in VARIANTS:
        values = random_values(stage, SAMPLES, random)
        found = hk.trip_points(a_design(stage), **values)
        upper, lower = oracle_trips(stage, values)
        assert np.array_equal(found.status == Status.OK, upper > lower), stage.title
        assert np.array_equal(np.isnan(found.upper), ~found.ok)
        keep = found.ok
        assert deviation(found.upper[keep], upper[keep]) < AGREEMENT
        assert deviation(found.lower[keep], lower[keep]) < AGREEMENT
        np.testing.assert_array_equal(found.width, found.upper - found.lower)
        np.testing.assert_array_equal(found.middle, (found.upper + found.lower) / 2)
        switching += int(np.count_nonzero(keep))
    assert len(VARIANTS) * SAMPLES > 5000
    assert switching > 5000


def test_node_voltages_in_both_states() -> None:
    random = np.random.default_rng(21)
    for stage in VARIANTS:
        values, signal = random_values(stage, SAMPLES, random), random.uniform(-20, 20, SAMPLES)
        for state in ("high", "low"):
            oracle = nodal.voltages(stage.elements, stage.output, state, values, signal)
            found = kernel(stage).voltages(state, values, signal)
            assert {"out", "plus", "minus"} <= found.keys()
            for node, voltage in found.items():
                assert deviation(voltage, oracle[node]) < AGREEMENT, (stage.title, state, node)


def test_random_networks_with_inner_nodes_meshes_and_coupled_inputs() -> None:
    random = np.random.default_rng(22)
    compared = 0
    for stage in (TAPPED, BRIDGE, *random_stages(20, seed=11)):
        values = random_values(stage, SAMPLES, random)
        gains = [np.abs(signal_gain(stage, state, values)) for state in ("high", "low")]
        # Where the signal hardly acts on the difference of the inputs, both lose digits.
        well = np.minimum(*gains) > 0.01
        for found, oracle in zip(
            kernel(stage).trips(values), oracle_trips(stage, values), strict=True
        ):
            assert deviation(found[well], oracle[well]) < AGREEMENT
        compared += int(np.count_nonzero(well))
    assert compared > 500


def test_the_sense_of_a_custom_circuit_is_judged_sample_by_sample() -> None:
    """One bridge that the signal drives either way, as its resistors say."""
    random = np.random.default_rng(23)
    values = random_values(BRIDGE, 500, random)
    found = hk.trip_points(a_design(BRIDGE), **values)
    rises = np.full(500, True)
    for state in ("high", "low"):
        rises &= signal_gain(BRIDGE, state, values) > 0
    apart = np.greater(*oracle_trips(BRIDGE, values))
    assert np.array_equal(found.status == Status.SENSE, ~rises)
    assert np.array_equal(found.ok, rises & apart)
    assert {Status.OK, Status.SENSE} <= {*found.status}


@pytest.mark.parametrize("stage", [*VARIANTS[::9], TAPPED], ids=lambda stage: stage.title)
def test_scalars_and_any_shape_agree(stage: hk.Stage) -> None:
    values = random_values(stage, 6, np.random.default_rng(5))
    design = a_design(stage)
    flat = hk.trip_points(design, **values)
    square = hk.trip_points(design, **{n: v.reshape(2, 3) for n, v in values.items()})
    assert square.upper.shape == square.status.shape == (2, 3)
    for place in range(6):
        one = hk.trip_points(design, **{n: v[place] for n, v in values.items()})
        assert np.ndim(one.upper) == np.ndim(one.status) == 0
        for kind in (*KINDS, "status"):
            alone, among = getattr(one, kind), getattr(flat, kind)[place]
            assert alone == among or (np.isnan(alone) and np.isnan(among))
            assert among == square.__getattribute__(kind).flat[place] or np.isnan(among)


# Invariants: what a change of all voltages, or of all resistances, does to the trips.

seeds = st.integers(0, 2**32 - 1)


def drawn(stage: hk.Stage, seed: int) -> dict[str, Array]:
    return random_values(stage, 8, np.random.default_rng(seed))


def ideal_currents(values: dict[str, Array]) -> dict[str, Any]:
    return {**values, **{name: 0.0 for name in ("I_LK", "I_BP", "I_BN") if name in values}}


def assert_close(found: tuple[Any, Any], wanted: tuple[Any, Any], scale: Any) -> None:
    for one, other in zip(found, wanted, strict=True):
        assert np.all(np.abs(one - other) <= 1e-9 * (np.abs(other) + scale))


def lifted(stage: hk.Stage) -> tuple[hk.Stage, str]:
    """The same circuit on a split supply, its ground moved to a node whose voltage can move."""
    alias = "ee" if "V_REF" in stage.levels else "ref"
    moved: list[Element] = []
    for element in stage.elements:
        nodes = [alias if node == "ground" else node for node in element.nodes]
        named = [element.name] if isinstance(element, hk.Resistor) else []
        moved.append(type(element)(*named, *nodes))
    custom = hk.Stage.custom(moved, supply="split", output=stage.output, sense=stage.sense)
    return custom, {"ee": "V_EE", "ref": "V_REF"}[alias]


@given(st.sampled_from(VARIANTS), seeds, st.floats(-50, 50))
def test_shifting_every_voltage_shifts_the_trips(stage: hk.Stage, seed: int, by: float) -> None:
    values = drawn(stage, seed)
    stage_up, ground = lifted(stage)
    known: dict[str, Any] = {"V_EE": 0.0, **values, ground: 0.0}
    at_rest = {name: known[name] for name in symbol_names(stage_up) if name in known}
    still = kernel(stage_up).trips(at_rest)
    shifted = {n: v + by if n.startswith("V") and n != "V_OS" else v for n, v in at_rest.items()}
    moved = kernel(stage_up).trips(shifted)
    scale = 100 * (1 + np.abs(still[0]))
    assert_close(still, kernel(stage).trips(values), scale)
    assert_close(moved, (still[0] + by, still[1] + by), scale)


@given(st.sampled_from((*VARIANTS, TAPPED, BRIDGE)), seeds, st.floats(1e-3, 1e3))
def test_scaling_every_resistance_changes_nothing(stage: hk.Stage, seed: int, by: float) -> None:
    """Without currents into the pins, only ratios count."""
    values = ideal_currents(drawn(stage, seed))
    scaled = {n: v * by if n.startswith("R") else v for n, v in values.items()}
    trips = kernel(stage).trips(values)
    assert_close(kernel(stage).trips(scaled), trips, np.abs(trips[0]))


@given(st.sampled_from((*VARIANTS, TAPPED)), seeds, st.floats(0.1, 10))
def test_trips_are_proportional_to_all_voltages_and_currents(
    stage: hk.Stage, seed: int, by: float
) -> None:
    values = drawn(stage, seed)
    scaled = {n: v if n.startswith("R") else v * by for n, v in values.items()}
    upper, lower = kernel(stage).trips(values)
    assert_close(kernel(stage).trips(scaled), (upper * by, lower * by), np.abs(upper))


@given(st.sampled_from((*VARIANTS, TAPPED)), seeds)
def test_without_feedback_there_is_no_width(stage: hk.Stage, seed: int) -> None:
    """As R_F grows the trips meet, as one over R_F in the end."""
    values = drawn(stage, seed)
    widths = []
    for r_f in (1e15, 1e16):
        upper, lower = kernel(stage).trips({**values, "R_F": r_f})
        widths.append(upper - lower)
        assert np.all(np.abs(upper - lower) < 1e-3 * np.abs(upper) + 1e-5)
    noise = 1e-12 * np.abs(kernel(stage).trips({**values, "R_F": 1e16})[0]) + 1e-12
    assert np.all(np.abs(widths[1] - widths[0] / 10) <= 1e-3 * np.abs(widths[0]) + noise)


PUSH_PULL = [stage for stage in VARIANTS if stage.output == "push-pull"]


@given(st.sampled_from(PUSH_PULL), seeds)
def test_exchanging_the_output_states_exchanges_the_trips(stage: hk.Stage, seed: int) -> None:
    values = drawn(stage, seed)
    pairs = {"V_OH": "V_OL", "V_OL": "V_OH", "R_OH": "R_OL", "R_OL": "R_OH"}
    exchanged = {name: values[pairs.get(name, name)] for name in values}
    upper, lower = kernel(stage).trips(values)
    assert_close(kernel(stage).trips(exchanged), (lower, upper), np.abs(upper))


@pytest.mark.parametrize(
    "stage",
    [s for s in hk.Stage.all() if s.reference == "divider" and s.supply == "single"],
    ids=lambda stage: stage.title,
)
def test_a_ratiometric_stage_keeps_its_share_of_the_supply(stage: hk.Stage) -> None:
    supplies = [3.0, 5.0, 12.0, 30.0]
    design = a_design(stage).with_parts(R_T="33k", R_F="68k")
    trips = hk.trip_points(design, V_CC=supplies)
    for kind in KINDS:
        shares = getattr(trips, kind) / supplies
        np.testing.assert_allclose(shares, shares[0], rtol=1e-12)
    headroom = hk.trip_points(design.with_device(drop_low=0.2), V_CC=supplies)
    assert np.ptp(headroom.width / supplies) > 1e-3


# Overrides.


def tank(**more: Any) -> hk.Design:
    parts = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
    return hk.Design(hk.Stage("inverting"), parts, supply=5.0, **more)


def test_an_override_is_the_same_as_a_changed_design() -> None:
    device = hk.Device(drop_high=0.1, drop_low=0.2, r_low=30)
    design = tank(device=device)
    for overridden, changed in (
        (hk.trip_points(design, R_F="120k"), design.with_parts(R_F="120k")),
        (hk.trip_points(design, V_CC="6 V"), design.with_supply(v_cc=6)),
        (hk.trip_points(design, V_OH=4), design.with_levels(V_OH=4)),
        (hk.trip_points(design, R_OL=50), design.with_device(r_low=50)),
        (hk.trip_points(design, r_low="50 Ω"), design.with_device(r_low=50)),
        (hk.trip_points(design, V_OS="2 mV"), design.with_device(offset=2e-3)),
        (hk.trip_points(design, drop_high=0.3), design.with_device(drop_high=0.3)),
    ):
        assert overridden == hk.trip_points(changed)


def test_levels_follow_an_overridden_rail_unless_they_are_given() -> None:
    following = hk.trip_points(tank(device=hk.Device(drop_high=0.1)), V_CC=6.0)
    assert following == hk.trip_points(tank(levels={"V_OH": 5.9}), V_CC=6.0)
    fixed = tank(levels={"V_OH": 4.9})
    assert hk.trip_points(fixed, V_CC=6.0) != following
    stage = hk.Stage("inverting", output="open-collector")
    parts = {"R_T": "10k", "R_B": "10k", "R_F": "100k", "R_PU": "1k"}
    pulled = hk.Design(stage, parts, supply=5)
    assert hk.trip_points(pulled, V_CC=6.0) == hk.trip_points(pulled, V_CC=6.0, V_PU=6.0)
    assert hk.trip_points(pulled.with_levels(V_PU=5), V_CC=6.0) == hk.trip_points(
        pulled, V_CC=6.0, V_PU=5.0
    )


def test_unknown_overrides_are_reported_together() -> None:
    with pytest.raises(hk.UnknownNameError) as caught:
        hk.trip_points(tank(), R_FF=1, VCC=5, V_REF=2.5)
    assert [fault.asked for fault in caught.value.faults] == ["R_FF", "VCC", "V_REF"]
    assert [fault.remedy for fault in caught.value.faults][:2] == ["R_F", "V_CC"]


def test_the_signal_is_no_override() -> None:
    with pytest.raises(hk.UnknownNameError, match="V_IN is the signal"):
        hk.trip_points(tank(), V_IN=2.0)


@pytest.mark.parametrize(
    ("design", "overrides", "problems"),
    [
        (tank(), {"R_OH": 100, "r_high": 50}, ["R_OH and r_high are given together."]),
        (tank(), {"V_OH": 4.5, "drop_high": 1}, ["V_OH and drop_high are given together."]),
        (tank(), {"leakage": 1}, ["leakage does not act in this design."]),
        (
            tank(levels={"V_OL": 0.1}),
            {"drop_low": 0.2, "leakage": [0, 1], "offset": 0, "V_OS": 0},
            [
                "drop_low does not act in this design.",
                "leakage does not act in this design.",
                "V_OS and offset are given together.",
            ],
        ),
    ],
)
def test_overrides_that_do_not_go_with_the_design(
    design: hk.Design, overrides: dict[str, Any], problems: list[str]
) -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.trip_points(design, **overrides)
    assert [fault.problem for fault in caught.value.faults] == problems


@pytest.mark.parametrize("value", [True, np.True_, [True, False]])
def test_yes_and_no_are_no_resistances(value: Any) -> None:
    with pytest.raises(hk.QuantityError, match="R_F is not an array of numbers"):
        hk.trip_points(tank(), R_F=value)


@pytest.mark.parametrize("design", [hk.Stage("inverting"), "x", None])
def test_only_a_design_has_trip_points(design: Any) -> None:
    with pytest.raises(hk.InputError, match="design is not a Design"):
        hk.trip_points(design)


def test_overrides_that_are_no_numbers_are_reported_together() -> None:
    bad: dict[str, Any] = {"R_T": "4,7k", "R_B": ["4k7", "5k"], "R_F": [[1, 2], [3]], "V_CC": None}
    with pytest.raises(hk.QuantityError) as caught:
        hk.trip_points(tank(), **bad, V_OH=object())  # type: ignore[arg-type]
    assert [fault.problem.split()[0] for fault in caught.value.faults] == [*bad, "V_OH"]


def test_shapes_that_do_not_go_together() -> None:
    with pytest.raises(hk.InputError, match="do not broadcast") as caught:
        hk.trip_points(tank(), R_T=[1e3, 2e3], R_B=[1e3, 2e3, 3e3])
    assert caught.value.faults[0].have == "R_T of shape (2,), R_B of shape (3,)"
    assert hk.trip_points(tank(), R_T=np.ones((2, 1)), R_B=np.ones(3)).upper.shape == (2, 3)
    assert hk.trip_points(tank(), R_T=[]).upper.shape == (0,)


# What is shown.


def test_the_measurand_is_ordered_by_the_quantity() -> None:
    rising = tank(signal=hk.signals.Linear(1.2, "0.6", span=(0, 2), unit="m", name="level"))
    level = hk.trip_points(rising).measurand
    assert level is not None
    assert (level.low, level.high) == (
        pytest.approx(0.80, abs=0.005),
        pytest.approx(1.41, abs=0.005),
    )
    assert (level.low_is, level.unit, level.name) == ("lower", "m", "level")
    falling = tank(signal=hk.signals.Linear(-0.5, 5, span=(0, 10)))
    quantity = hk.trip_points(falling, R_F=[100e3, 200e3]).measurand
    assert quantity is not None
    assert quantity.low_is == "upper"
    assert np.all(quantity.low < quantity.high)
    np.testing.assert_allclose(quantity.width, quantity.high - quantity.low)
    assert hk.trip_points(tank()).measurand is None


def test_text_gives_the_range_of_arrays_and_the_impossible_ones() -> None:
    shown = hk.trip_points(tank(), R_F=[100e3, -1, 200e3]).to_text()
    assert "1 of 3" in shown
    assert "a resistance is not positive" in shown
    assert "upper" in str(hk.trip_points(tank()))

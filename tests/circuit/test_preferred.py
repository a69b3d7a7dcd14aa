"""Preferred numbers: ranges, the nearest value and steps, by property."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.errors import QuantityError, UnknownNameError
from hystkit.base.quantity import code, read
from hystkit.circuit.preferred import SERIES, nearest, series, step, values

NAMES = st.sampled_from(list(SERIES))
OHMS = st.floats(1e-6, 1e12)


@given(NAMES, OHMS, st.floats(1, 1e4))
def test_a_range_holds_exactly_the_values_between_its_ends(
    name: str, low: float, ratio: float
) -> None:
    found = values(name, low, low * ratio)
    assert list(found) == sorted(set(found))
    assert all(low * (1 - 1e-8) <= value <= low * ratio * (1 + 1e-8) for value in found)
    assert all(nearest(value, name) == value for value in found)
    decades = math.log10(ratio)
    assert abs(len(found) - decades * len(series(name))) <= 1 + 0.1 * len(series(name))


def test_both_ends_belong_to_the_range() -> None:
    assert values("E6", 1e3, 1e4) == (1000.0, 1500.0, 2200.0, 3300.0, 4700.0, 6800.0, 10000.0)
    assert values("E6", 1001.0, 1499.0) == ()


@pytest.mark.parametrize("name", SERIES)
def test_values_are_the_floats_that_their_text_reads_as(name: str) -> None:
    assert all(read(code(value), unit="Ω") == value for value in values(name, 0.1, 1e8))


@given(NAMES, OHMS)
def test_no_value_is_nearer_by_ratio_than_the_nearest(name: str, value: float) -> None:
    found = nearest(value, name)
    distance = abs(math.log(found / value))
    for other in (step(found, name, 1), step(found, name, -1)):
        assert distance <= abs(math.log(other / value)) * (1 + 1e-6)


@given(NAMES, OHMS, st.integers(1, 400))
def test_steps_count_the_values_passed_on_the_way(name: str, value: float, n: int) -> None:
    above, below = step(value, name, n), step(value, name, -n)
    assert below < value < above
    between = [v for v in values(name, below, above) if not math.isclose(v, value, rel_tol=1e-9)]
    assert len(between) == 2 * n


@given(NAMES, OHMS, st.integers(-400, 400))
def test_steps_from_a_preferred_value_lead_back(name: str, value: float, n: int) -> None:
    start = nearest(value, name)
    assert step(step(start, name, n), name, -n) == start
    assert step(value, name, 0) == start


@given(NAMES, OHMS)
def test_an_error_of_rounding_is_no_step(name: str, value: float) -> None:
    exact = nearest(value, name)
    for near in (math.nextafter(exact, 0), math.nextafter(exact, math.inf), exact * 3 / 3):
        assert nearest(near, name) == exact
        assert step(near, name, 1) == step(exact, name, 1)
        assert step(near, name, -1) == step(exact, name, -1)


@given(NAMES, OHMS)
def test_a_decade_is_one_round_of_the_series(name: str, value: float) -> None:
    start = nearest(value, name)
    assert step(start, name, len(series(name))) == pytest.approx(10 * start, rel=1e-12)


@pytest.mark.parametrize("name", ["E95", "e96", "", None, ["E96"]])
def test_an_unknown_series_is_refused_with_those_that_exist(name: str) -> None:
    for call in (series, lambda n: nearest(1.0, n), lambda n: values(n, 1, 10)):
        with pytest.raises(UnknownNameError) as caught:
            call(name)
        assert caught.value.faults[0].have == "E3, E6, E12, E24, E48, E96, E192"


def test_a_slip_in_the_name_of_a_series_is_recognised() -> None:
    with pytest.raises(UnknownNameError) as caught:
        series("e 96")
    assert caught.value.faults[0].remedy == "E96"


@pytest.mark.parametrize("value", [0.0, -1.0, math.nan, math.inf])
def test_values_that_no_part_can_have_are_refused(value: float) -> None:
    for call in (
        lambda v: nearest(v, "E24"),
        lambda v: step(v, "E24", 1),
        lambda v: values("E24", v, 10.0),
        lambda v: values("E24", 1.0, v),
    ):
        with pytest.raises(QuantityError, match="positive and finite"):
            call(value)


def test_a_range_the_wrong_way_round_is_refused() -> None:
    with pytest.raises(QuantityError, match="from 1000 to 10000"):
        values("E24", 1e4, 1e3)

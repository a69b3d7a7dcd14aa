"""Parts and supplies: how they are read, and every reason to refuse one."""

from __future__ import annotations

import copy
import pickle

import pytest

import hystkit as hk
from hystkit.base.quantity import parse_percent


@pytest.mark.parametrize(
    ("text", "value"),
    [("26k7", 26700.0), (26.7e3, 26700.0), ("2.5 V", 2.5), ("2V5", 2.5), ("1M", 1e6), (5, 5.0)],
)
def test_a_value_is_read(text: float | str, value: float) -> None:
    part = hk.Part(text)
    assert part.value == value
    assert isinstance(part.value, float)


@pytest.mark.parametrize("tol", [0.01, "1 %", "F", "10000 ppm"])
def test_a_tolerance_is_a_fraction_however_it_is_written(tol: float | str) -> None:
    assert hk.Part("10k", tol=tol) == hk.Part(10e3, tol=0.01)


@pytest.mark.parametrize("tol", [1, 1.5, -0.01, "100 %"])
def test_a_tolerance_below_zero_or_of_everything_is_refused(tol: float | str) -> None:
    with pytest.raises(hk.DesignError, match="tolerance of a part is outside its range"):
        hk.Part("10k", tol=tol)


def test_every_fault_of_a_part_is_reported_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Part("4,7k", tol="five", tempco="x")
    assert len(caught.value.faults) == 3
    assert caught.value.faults[0].remedy == "4.7k"


@pytest.mark.parametrize("value", ["nan", float("inf"), True, None, [1.0], "", "4k7 A", "10kF"])
def test_what_is_no_value_is_refused(value: object) -> None:
    with pytest.raises(hk.DesignError):
        hk.Part(value)  # type: ignore[arg-type]


def test_with_value_keeps_the_rest() -> None:
    part = hk.Part("10k", tol="1 %", tempco=50e-6)
    assert part.with_value("12k") == hk.Part(12e3, 0.01, 50e-6)


def test_a_supply_is_split_where_it_has_a_negative_rail() -> None:
    assert not hk.Supply("5 V").split
    assert hk.Supply(5).low_rail == 0.0
    both = hk.Supply(15, -12, tol="5 %")
    assert both.split
    assert (both.v_cc, both.v_ee, both.low_rail, both.tol) == (15.0, -12.0, -12.0, 0.05)
    assert hk.Supply(5, 0).split


@pytest.mark.parametrize("rails", [(5, 5), (5, 6), (-12, 12)])
def test_rails_the_wrong_way_round(rails: tuple[float, ...]) -> None:
    with pytest.raises(hk.DesignError, match="wrong way round") as caught:
        hk.Supply(*rails)
    assert caught.value.faults[0].remedy == "exchange the two rails"


@pytest.mark.parametrize("v_cc", [0, -5])
def test_a_single_supply_has_no_rails_to_exchange(v_cc: float) -> None:
    with pytest.raises(hk.DesignError, match="V_CC is not above 0 V") as caught:
        hk.Supply(v_cc)
    assert "V_EE" not in str(caught.value)
    assert "exchange" not in str(caught.value)


@pytest.mark.parametrize(
    ("text", "unit"),
    [
        *[(text, "V") for text in ("2.5 V", "2V5", "4 mV")],
        *[(text, "Ω") for text in ("4.7 kΩ", "2kohm", "1R5", "47R")],
        *[(text, "") for text in ("4k7", "2.5", 2.5)],
    ],
)
def test_the_unit_of_a_text_is_remembered(text: str | float, unit: str) -> None:
    part = hk.Part(text)
    assert pickle.loads(pickle.dumps(part)).unit == part.unit == unit
    assert part == hk.Part(part.value)
    assert repr(part) == repr(hk.Part(part.value))


@pytest.mark.parametrize("tempco", ["100 ppm/K", "100ppm/°C", "0.01 %/K", 1e-4, "1e-4"])
def test_a_temperature_coefficient_however_it_is_written(tempco: float | str) -> None:
    assert hk.Part("1k", tempco=tempco).tempco == pytest.approx(1e-4)


@pytest.mark.parametrize("tempco", [100, -0.11, "20 %/K"])
def test_a_temperature_coefficient_that_was_meant_in_ppm(tempco: float | str) -> None:
    with pytest.raises(hk.DesignError, match="temperature coefficient") as caught:
        hk.Part("1k", tempco=tempco)
    assert hk.Part("1k", tempco=caught.value.faults[0].remedy).tempco == pytest.approx(1e-4)


def test_what_to_try_in_place_of_a_tolerance_is_right_under_a_heading_in_per_cent() -> None:
    for make in (lambda: hk.Part("1k", tol=1.2), lambda: hk.Supply(5, tol=1.2)):
        with pytest.raises(hk.DesignError) as caught:
            make()
        remedy = caught.value.faults[0].remedy
        assert parse_percent(remedy) == parse_percent(remedy, bare=True) < 0.1


def test_every_fault_of_a_supply_is_reported_at_once() -> None:
    with pytest.raises(hk.DesignError) as caught:
        hk.Supply("five", "4k7 Ω", tol="nan")
    assert len(caught.value.faults) == 3
    with pytest.raises(hk.DesignError) as caught:
        hk.Supply(-5, tol=2)
    assert len(caught.value.faults) == 2


@pytest.mark.parametrize("value", [hk.Part("10k", tol=0.05), hk.Supply(5), hk.Supply(5, -5, 0.1)])
def test_parts_and_supplies_are_values(value: object) -> None:
    for twin in (pickle.loads(pickle.dumps(value)), copy.copy(value), copy.deepcopy(value)):
        assert twin == value
        assert hash(twin) == hash(value)
    assert eval(repr(value), {"Part": hk.Part, "Supply": hk.Supply}) == value

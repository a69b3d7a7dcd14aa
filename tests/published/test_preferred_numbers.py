"""Preferred numbers and tolerance letters against the standards that publish them."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from hystkit.base.quantity import TOLERANCE_LETTERS, parse_percent
from hystkit.circuit.preferred import SERIES, series

PUBLISHED: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)["preferred_numbers"]


def test_the_source_stands_beside_the_values() -> None:
    assert PUBLISHED["source"].startswith("IEC 60063")
    assert PUBLISHED["letters_source"].startswith("IEC 60062")


def test_e24_is_the_published_list() -> None:
    assert list(series("E24")) == PUBLISHED["E24"]


def test_e24_departs_from_rounding_exactly_where_published() -> None:
    rounded = [round(10 ** (1 + i / 24)) for i in range(24)]
    departs = {str(e): r for e, r in zip(series("E24"), rounded, strict=True) if e != r}
    assert departs == PUBLISHED["E24_differs_from_rounding"]


@pytest.mark.parametrize(("name", "total"), PUBLISHED["sums"].items())
def test_sums_of_a_decade(name: str, total: int) -> None:
    assert sum(series(name)) == total


def test_e192_departs_from_rounding_only_at_920() -> None:
    rounded = [round(10 ** (2 + i / 192)) for i in range(192)]
    departs = {i: e for i, (e, r) in enumerate(zip(series("E192"), rounded, strict=True)) if e != r}
    assert departs == {185: 920}
    assert PUBLISHED["E192_exception"] == "index 185 is 920, not 919"


@pytest.mark.parametrize("name", SERIES)
def test_a_series_has_as_many_values_as_its_name_says(name: str) -> None:
    assert len(series(name)) == int(name.removeprefix("E"))


@pytest.mark.parametrize(
    ("coarse", "fine"),
    [("E3", "E6"), ("E6", "E12"), ("E12", "E24"), ("E48", "E96"), ("E96", "E192")],
)
def test_each_series_is_every_other_value_of_the_next(coarse: str, fine: str) -> None:
    assert series(coarse) == series(fine)[::2]


def test_tolerance_letters() -> None:
    published = {letter: p / 100 for letter, p in PUBLISHED["letters_percent"].items()}
    assert pytest.approx(published) == dict(TOLERANCE_LETTERS)
    for letter, percent in PUBLISHED["letters_percent"].items():
        assert parse_percent(letter) == parse_percent(f"{percent} %")

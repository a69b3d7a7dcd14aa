"""Trip points as they are written: the width shows in them, whatever its size."""

from __future__ import annotations

import pytest
from hypothesis import given

import hystkit as hk
from hystkit.base.quantity import read
from hystkit.circuit.trip_texts import TripTexts
from hystkit.export.summary import Summary
from hystkit.numeric.trips import trip_points
from hystkit.panels import table
from tests.circuit.strategies import within

LEVEL = hk.signals.Linear(0.5, 0.1, span=(0, 8), unit="m", name="level")
#: 2.5 V with a band of about 2.5 mV: with four digits its trips were 2.501 V and 2.499 V.
NARROW = hk.Design(
    hk.Stage("inverting"), {"R_T": "10k", "R_B": "10k", "R_F": "10M"}, supply=5.0, signal=LEVEL
)


def gap(trips: TripTexts, unit: str) -> float:
    write = trips.shown if unit else trips.number
    upper, lower = (read(write(name), unit=unit) for name in ("upper", "lower"))
    return abs(upper - lower)


@given(within(-30, 30), within(-4, 1))
def test_what_is_written_differs_by_the_width(lower: float, decades: float) -> None:
    # Seven digits at most: a band below a 10 000th of its trips is left to the width's own line.
    width = max(abs(lower), 1e-3) * 10**decades
    trips = TripTexts(lower + width, lower, LEVEL)
    assert gap(trips, "V") == pytest.approx(trips.volts["width"], rel=0.11)
    # The sensor's offset of 0.1 V may leave a quantity of more digits than the voltage has.
    if abs(trips.quantities["lower"]) < 1e4 * trips.quantities["width"]:
        assert gap(trips, "") == pytest.approx(trips.quantities["width"], rel=0.11)


def test_without_a_signal_there_is_no_quantity() -> None:
    trips = TripTexts(2.0, 1.0)
    assert trips.quantities == {}
    assert trips.number("upper") == trips.quantity("upper") == ""


def test_the_same_digits_stand_everywhere() -> None:
    found = trip_points(NARROW)
    texts = TripTexts(float(found.upper), float(found.lower), LEVEL)
    assert texts.digits("upper") == texts.digits("lower") == 5
    rows = table.trip_rows(hk.levels(NARROW), found)
    assert [row[1] for row in rows[1:]] == [texts.shown(row[0]) for row in rows[1:]]
    assert [row[2] for row in rows[1:]] == [texts.number(row[0]) for row in rows[1:]]
    fields = {field.label: field for field in Summary(NARROW)._fields()}
    parts = hk.derive(NARROW).latex("table", design=NARROW)
    for name in ("upper", "lower"):
        assert fields[name].shown == texts.shown(name)
        assert fields[name].note == texts.quantity(name)
        assert fields[name].shown_latex in parts
        assert fields[name].shown_latex.strip("$") in hk.export.tex(NARROW)

"""The oracle itself, against circuits that are solved by hand."""

from __future__ import annotations

import numpy as np
import pytest

import hystkit as hk
from tests.numeric import nodal

R, W = hk.Resistor, hk.Wire
IDEAL = {"R_OH": 0.0, "R_OL": 0.0, "I_LK": 0.0, "V_OS": 0.0, "I_BP": 0.0, "I_BN": 0.0}
#: Equal resistors from a reference and from the output: plus stands half-way between them.
HALVES = (R("R_1", "ref", "plus"), R("R_2", "plus", "out"), W("signal", "minus"))
HALF_VALUES = {**IDEAL, "R_1": 1e3, "R_2": 1e3, "V_REF": 2.0, "V_OH": 5.0, "V_OL": 0.0}


@pytest.mark.parametrize(
    ("changes", "high", "low"),
    [
        ({}, 3.5, 1.0),
        ({"V_OS": 0.1}, 3.4, 0.9),
        # 1 mA into the plus pin drops 0.5 V over the 500 Ohm that it sees.
        ({"I_BP": 1e-3}, 3.0, 0.5),
        # Wired to the source, the minus pin takes its current without a drop.
        ({"I_BN": 1e-3}, 3.5, 1.0),
        # A third of the difference instead of a half.
        ({"R_OH": 1e3, "R_OL": 1e3}, 3.0, 4 / 3),
    ],
)
def test_two_equal_resistors(changes: dict[str, float], high: float, low: float) -> None:
    values = {**HALF_VALUES, **changes}
    for state, trip in (("high", high), ("low", low)):
        assert nodal.trip(HALVES, "push-pull", state, values) == pytest.approx(trip)


def test_an_open_collector_is_pulled_up_through_its_own_resistor() -> None:
    elements = (*HALVES, R("R_PU", "pu", "out"))
    values = {**HALF_VALUES, "R_PU": 2e3, "V_PU": 10.0}
    # High: 8 V across 4 kOhm, 2 mA; low: the output is held at 0 V.
    found = nodal.voltages(elements, "open-collector", "high", values, 0.0)
    assert [found["plus"].item(), found["out"].item()] == pytest.approx([4.0, 6.0])
    assert nodal.trip(elements, "open-collector", "low", values) == pytest.approx(1.0)
    # 1 mA of leakage divides between 2 kOhm on either side: 1 V less at the output.
    leaky = nodal.voltages(elements, "open-collector", "high", {**values, "I_LK": 1e-3}, 0.0)
    assert leaky["out"] == pytest.approx(5.0)


def test_arrays_are_solved_at_once() -> None:
    values = {**HALF_VALUES, "V_REF": np.array([2.0, 3.0, 4.0])}
    np.testing.assert_allclose(nodal.trip(HALVES, "push-pull", "low", values), [1.0, 1.5, 2.0])

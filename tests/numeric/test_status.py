"""Why an element has no trip points: one code for each, and the others are not disturbed."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.numeric.status import Status, status_of

DESIGN = hk.Design(
    hk.Stage("inverting", supply="split", output="open-collector", including="R_L"),
    {"R_T": "33k", "R_B": "47k", "R_F": "220k", "R_PU": "4k7", "R_L": "100k"},
    supply=hk.Supply(12, -12),
)

CASES: list[tuple[dict[str, Any], Status]] = [
    ({}, Status.OK),
    ({"R_T": 0}, Status.NOT_POSITIVE),
    ({"R_L": -1e3}, Status.NOT_POSITIVE),
    ({"R_OL": -1}, Status.NEGATIVE),
    ({"R_OL": 0}, Status.OK),
    ({"R_F": np.inf}, Status.NOT_FINITE),
    ({"V_OS": np.nan}, Status.NOT_FINITE),
    ({"R_T": 0, "V_OS": np.nan}, Status.NOT_FINITE),
    ({"V_CC": -12}, Status.RAILS),
    ({"V_CC": -13, "V_PU": -20}, Status.RAILS),
    ({"V_PU": -12}, Status.OUTPUT_LEVELS),
    ({"V_OL": 12}, Status.OUTPUT_LEVELS),
    # A load on the negative rail drags the high level under the low one.
    ({"V_L": -24, "R_L": 1e3, "V_OL": -11}, Status.NO_HYSTERESIS),
]


@pytest.mark.parametrize(("overrides", "status"), CASES)
def test_the_first_reason_that_applies(overrides: dict[str, Any], status: Status) -> None:
    trips = hk.trip_points(DESIGN, **overrides)
    assert trips.status == status
    for kind in ("upper", "lower", "width", "middle"):
        assert np.isfinite(getattr(trips, kind)) == (status is Status.OK)


def test_one_impossible_element_does_not_stop_the_others() -> None:
    names = sorted({name for overrides, _ in CASES for name in overrides})
    columns = {
        name: np.array([overrides.get(name, DESIGN.values[name]) for overrides, _ in CASES], float)
        for name in names
    }
    # V_PU follows V_CC where it is not overridden.
    follows = [("V_CC" in each and "V_PU" not in each) for each, _ in CASES]
    columns["V_PU"] = np.where(follows, columns["V_CC"], columns["V_PU"])
    trips = hk.trip_points(DESIGN, **columns)
    assert trips.status.dtype == np.int8
    assert [Status(code) for code in trips.status] == [status for _, status in CASES]
    sound = trips.upper[trips.ok]
    assert np.all(sound == hk.trip_points(DESIGN).upper)
    assert np.all(np.isnan(trips.upper[~trips.ok]))


def test_a_single_supply_has_no_negative_rail_to_speak_of() -> None:
    parts = {"R_T": "33k", "R_B": "47k", "R_F": "220k"}
    design = hk.Design(hk.Stage("inverting"), parts, supply=5)
    trips = hk.trip_points(design, V_CC=[5.0, 0.0, -1.0], V_OH=1.0)
    assert trips.status.tolist() == [Status.OK, Status.RAIL, Status.RAIL]
    assert "V_EE" not in Status.RAIL.message
    assert hk.trip_points(design, r_high=-1).status == Status.NEGATIVE


def test_every_status_says_what_is_wrong() -> None:
    assert len({status.message for status in Status}) == len(Status)
    assert all(status.message for status in Status)
    assert Status(0) is Status.OK


def test_a_sense_that_the_values_turn() -> None:
    values = {"R_1": 1.0, "V_CC": 5.0, "V_OL": 0.0, "V_OH": 5.0}
    assert status_of(values, ("R_1",), np.array([2.0, 1.0]), 1.5, True).tolist() == [5, 5]
    assert status_of(values, ("R_1",), np.array([2.0, 1.0]), 1.5, False).tolist() == [0, 6]


def test_numbers_at_the_end_of_the_range_do_not_warn() -> None:
    """Warnings raised from this package fail the tests."""
    huge = hk.trip_points(DESIGN, V_CC=[1e308, 12.0], V_EE=[-1e308, -12.0], R_F=[1e-308, 1e5])
    assert huge.status[1] == Status.OK

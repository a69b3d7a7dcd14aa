"""Sensor models against published tables."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import hystkit as hk

S = hk.signals
PUBLISHED: dict[str, Any] = json.loads(
    Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
)
RTD, NTC = PUBLISHED["rtd"], PUBLISHED["ntc"]


def table(entry: dict[str, Any]) -> tuple[np.ndarray, np.ndarray]:
    """Temperatures [°C] and resistances [Ohm] of a published table."""
    pairs = sorted((float(t), float(r)) for t, r in entry["table_ohm"].items())
    return np.array([t for t, _ in pairs]), np.array([r for _, r in pairs])


TEMPERATURES, OHMS = table(RTD)
COEFFICIENTS = S.NtcCoefficients(*NTC["ntc_a"]["steinhart_hart"])


def test_the_sources_stand_beside_the_values() -> None:
    assert RTD["source"].startswith("IEC 60751")
    assert NTC["ntc_a"]["source"]
    assert NTC["ntc_b"]["source"]


def test_platinum_resistance_over_temperature() -> None:
    found = S.Rtd().resistance(TEMPERATURES)
    np.testing.assert_allclose(found, OHMS, rtol=0, atol=RTD["abs_tol_ohm"])


def test_platinum_temperature_over_resistance() -> None:
    # Half a unit of the table's last digit, over the least slope of the curve.
    # At -200 °C, where the curve begins, the rounded resistance lies just below it.
    inner = TEMPERATURES > -200
    found = S.Rtd().quantity(OHMS[inner])
    np.testing.assert_allclose(found, TEMPERATURES[inner], rtol=0, atol=0.03)


def test_a_thousand_ohm_element_is_ten_times_a_hundred_ohm_element() -> None:
    np.testing.assert_allclose(
        S.Rtd(1000).resistance(TEMPERATURES), 10 * S.Rtd().resistance(TEMPERATURES), rtol=1e-14
    )


@pytest.mark.parametrize(("name", "widths"), RTD["tolerance_class_C"].items())
@pytest.mark.parametrize("end", [-1.0, 1.0])
def test_tolerance_classes(name: str, widths: list[float], end: float) -> None:
    first, second = widths
    sensor = S.Rtd(tolerance_class=name)
    assert sensor.parameters["class_position"] == (-1.0, 0.0, 1.0)
    # A thermometer at the end of its class shows a temperature that is off by the tolerance.
    inner = TEMPERATURES[TEMPERATURES > -200]
    shown = S.Rtd().quantity(sensor.resistance(inner, {"class_position": end}))
    np.testing.assert_allclose(
        shown - inner, end * (first + second * np.abs(inner)), rtol=0, atol=1e-9
    )


def test_tolerance_in_ohm_at_0_and_100_degrees() -> None:
    # Class B at 0 °C is 0.12 Ohm, a figure that is printed with the class.
    high = S.Rtd(tolerance_class="B").resistance(0.0, {"class_position": 1.0})
    assert round(float(high) - 100, 2) == 0.12


def test_three_coefficients_fit_the_table_they_were_published_with() -> None:
    celsius, ohms = table(NTC["ntc_a"])
    found = COEFFICIENTS.quantity(ohms)
    np.testing.assert_allclose(found, celsius, rtol=0, atol=NTC["ntc_a"]["abs_tol_C"])
    # The other way round goes through the cubic's root: not by the same formula.
    slope = 0.06  # no NTC here is steeper than 6 % per K
    np.testing.assert_allclose(
        COEFFICIENTS.resistance(celsius), ohms, rtol=slope * NTC["ntc_a"]["abs_tol_C"]
    )


def test_three_coefficients_fit_the_other_table() -> None:
    celsius, ohms = table(NTC["ntc_b"])
    np.testing.assert_allclose(COEFFICIENTS.quantity(ohms), celsius, rtol=0, atol=0.08)


def test_one_b_value_is_off_by_up_to_eight_tenths_of_a_degree() -> None:
    celsius, ohms = table(NTC["ntc_b"])
    sensor = S.Ntc(NTC["ntc_b"]["r25"], NTC["ntc_b"]["b25_85"])
    worst = float(np.max(np.abs(sensor.quantity(ohms) - celsius)))
    assert 0.5 < worst < 0.85
    assert float(sensor.quantity(10_000.0)) == pytest.approx(25.0, abs=1e-9)


def test_a_table_passes_through_its_points_and_close_to_the_curve_between() -> None:
    celsius, ohms = table(NTC["ntc_b"])
    sensor = S.ResistanceTable(celsius, ohms)
    np.testing.assert_allclose(sensor.quantity(ohms), celsius, rtol=0, atol=1e-6)
    between = np.linspace(0, 60, 121)
    shown = COEFFICIENTS.quantity(sensor.resistance(between))
    np.testing.assert_allclose(shown, between, rtol=0, atol=0.15)

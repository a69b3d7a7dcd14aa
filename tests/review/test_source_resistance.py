"""The finding on the source resistance of the sensor: what provokes it and what clears it."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.review.evidence import Evidence

S = hk.signals
SENSOR = S.SensorDivider(S.Ntc("10k", 3950), "10k", span=(-20, 60))


def vent(r_i: str = "10k", signal: Any = SENSOR, **parts: str) -> hk.Design:
    """A non-inverting stage, whose input resistor the sensor stands in series with."""
    values = {"R_T": "22k1", "R_B": "21k", "R_F": "220k", "R_I": r_i, **parts}
    return hk.Design(hk.Stage("non-inverting"), values, supply=5.0, signal=signal)


def found(design: hk.Design) -> hk.Finding:
    (one,) = [f for f in hk.review(design) if f.name == "source resistance"]
    return one


def move(design: hk.Design) -> float:
    """By letting volts and resistance follow each other."""
    moves = []
    for trip in ("upper", "lower"):
        start = volts = float(getattr(hk.trip_points(design), trip))
        for _ in range(100):
            ohms = float(SENSOR.at(5.0).source_resistance(SENSOR.at(5.0).quantity(volts)))
            volts = float(getattr(hk.trip_points(design.with_parts(R_S=ohms)), trip))
        moves.append(abs(volts - start))
    return max(moves)


def test_a_sensor_in_series_with_a_small_input_resistor_is_a_warning() -> None:
    design = vent()
    finding = found(design)
    width = float(hk.trip_points(design).width)
    assert finding.severity == "warning"
    assert finding.unit == "V"
    # A tenth of the width may go.
    assert finding.margin == pytest.approx(0.1 * width - move(design), rel=1e-9)
    assert "kΩ at the trips" in finding.text
    for remedy in ("R_S=4k8", "buffer", "larger R_I"):
        assert remedy in finding.remedy


def test_a_sensor_as_large_as_the_input_resistor_is_a_fault() -> None:
    finding = found(vent("4k7", S.SensorDivider(S.Ntc("100k", 3950), "100k", span=(-20, 60))))
    assert finding.severity == "fault"
    assert finding.margin < 0


def test_each_remedy_clears_it() -> None:
    design = vent()
    stated = found(design).remedy.split("R_S=")[1].split(" ")[0]
    cleared = {
        "fitted": design.with_parts(R_S=stated),
        "buffer": design.with_signal(S.Linear(-0.05, 3.7, span=(-20, 60))),
        "larger": vent("100k", R_F="2M2"),
    }
    for design in cleared.values():
        finding = found(design)
        assert finding.severity == "pass"
        assert not finding.remedy
    assert f"from where {stated} puts them" in found(cleared["fitted"]).text
    assert np.isnan(found(cleared["buffer"]).margin)


def test_an_inverting_stage_minds_its_bias_current_only() -> None:
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    ideal = hk.Design(hk.Stage("inverting"), parts, supply=5.0, signal=SENSOR)
    width = float(hk.trip_points(ideal).width)
    assert found(ideal).severity == "pass"
    assert found(ideal).margin == pytest.approx(0.1 * width, rel=1e-9)
    thirsty = ideal.with_device(bias_minus=10e-6)
    finding = found(thirsty)
    assert finding.severity == "warning"
    assert "larger R_I" not in finding.remedy
    # 10 µA in some 5 kΩ.
    ohms = Evidence(thirsty).source_ohms()
    assert finding.margin == pytest.approx(0.1 * width - 10e-6 * max(ohms), rel=1e-9)


def test_without_a_signal_there_is_nothing_to_find() -> None:
    assert "source resistance" not in hk.review(vent().with_signal(None)).names


def test_a_sensor_that_takes_the_hysteresis_is_a_fault(monkeypatch: pytest.MonkeyPatch) -> None:
    nothing = replace(hk.trip_points(vent()), upper=np.nan, lower=np.nan, status=6)
    monkeypatch.setattr(Evidence, "at_source", nothing)
    finding = found(vent())
    assert finding.severity == "fault"
    assert finding.remedy == "a buffer behind the source, or a larger R_I"

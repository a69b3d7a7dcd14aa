"""Scenarios of our own, with numbers worked by hand from the node equations before.

Greenhouse vent: tests/circuit/signals/test_ratiometric.py. Dosing pulser, battery cut-out under
load, light beam and the vaccine fridge's full cycle stand beside their analyses.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

import hystkit as hk
from hystkit.circuit.demo import header_tank


def switching(design: hk.Design) -> tuple[float, float]:
    """Give where the load switches on and off, which is on while the output is high."""
    measurand = hk.trip_points(design).measurand
    assert measurand is not None
    on_at, off_at = measurand.switching()
    return float(on_at), float(off_at)


def test_header_tank() -> None:
    """A 4-20 mA loop over 2 m in 150 Ohm: pump on at 0.80 m, off at 1.41 m."""
    conductance = 1 / 46.4 + 1 / 26.7 + 1 / 100
    volts = [(5 / 46.4 + out / 100) / conductance for out in (0.0, 5.0)]
    by_hand = [(v / 150 - 4e-3) / 16e-3 * 2 for v in volts]
    assert by_hand == pytest.approx([0.80, 1.41], abs=5e-3)
    assert switching(header_tank()) == pytest.approx(by_hand, rel=1e-12)


def test_battery_cut_out() -> None:
    """Opens at 11.44 V and recloses at 12.65 V."""
    stage = hk.Stage("non-inverting", reference="source")
    parts = {"R_I": "220k", "R_G": "57k6", "R_F": "909k"}
    found = hk.trip_points(hk.Design(stage, parts, supply=5.0, levels={"V_REF": 2.5}))
    by_hand = [220 * (2.5 * (1 / 220 + 1 / 57.6 + 1 / 909) - out / 909) for out in (5.0, 0.0)]
    assert by_hand == pytest.approx([11.44, 12.65], abs=5e-3)
    assert (found.lower, found.upper) == pytest.approx(by_hand, rel=1e-12)


def test_pottery_kiln() -> None:
    """5 mV/°C against 4.997 V behind 1k, with 301k from an output that swings by 12 V."""
    design = hk.Design(
        hk.Stage("inverting", reference="source"),
        {"R_R": "1k", "R_F": "301k"},
        supply=12.0,
        levels={"V_REF": "4.997"},
        signal=hk.signals.Linear("5m", span=(0, 1300), unit="°C", name="kiln"),
    )
    by_hand = [(301 * 4.997 + out) / 302 / 5e-3 for out in (0.0, 12.0)]
    assert by_hand == pytest.approx([996.1, 1004.0], abs=0.05)
    # The kiln heats while the output is high.
    assert switching(design) == pytest.approx(by_hand, rel=1e-12)


def test_conveyor_over_current() -> None:
    """5 mOhm and a gain of 50: trips at 9.97 A and comes back at 5.97 A."""
    stage = hk.Stage("inverting", output="open-collector")
    design = hk.Design(
        stage,
        {"R_T": "34k", "R_B": "20k", "R_F": "47k", "R_PU": "2k2"},
        supply=5.0,
        device=hk.Device(drop_low=0.15),
        signal=hk.signals.Linear("250m", span=(0, 20), unit="A", name="motor"),
    )
    divider = 1 / 34 + 1 / 20
    high = (5 / 34 + 5 / 49.2) / (divider + 1 / 49.2)
    low = (5 / 34 + 0.15 / 47) / (divider + 1 / 47)
    assert (low / 0.25, high / 0.25) == pytest.approx((5.97, 9.97), abs=5e-3)
    # The output is high, and the motor may run, below the trip.
    assert switching(design) == pytest.approx((low / 0.25, high / 0.25), rel=1e-12)


def test_vaccine_fridge_at_its_stage() -> None:
    """On at 6 °C and off at 4 °C through an NTC: what the stage makes of the plant, and back."""
    plant = hk.TwoLag(7200, 240, on_level=-14, off_level=25, dead_time=30, unit="°C")
    probe = hk.signals.SensorDivider(
        hk.signals.Ntc("10k", 3950), "22k", span=(-10, 40), name="probe"
    )
    volts = [float(probe.volts(at, V_CC=5.0)) for at in (4.0, 6.0)]
    # A reference behind a resistor: middle and width follow from both voltages.
    share = abs(volts[0] - volts[1]) / 5.0
    reference = (sum(volts) / 2 - share * 2.5) / (1 - share)
    design = hk.Design(
        hk.Stage("inverting", reference="source"),
        {"R_R": 1e3, "R_F": 1e3 * (1 - share) / share},
        supply=5.0,
        levels={"V_REF": reference},
        signal=probe,
    )
    measurand = hk.trip_points(design).measurand
    assert measurand is not None
    assert (measurand.low, measurand.high) == pytest.approx((4.0, 6.0), abs=1e-9)
    load = "high" if measurand.high_at == "high" else "low"
    cycle = hk.steady_cycle(plant, *measurand.switching(load))
    assert (cycle.on_time, cycle.off_time) == pytest.approx((1278, 1216), abs=0.5)
    assert (cycle.low, cycle.high) == pytest.approx((3.3, 6.7), abs=0.05)


def test_light_beam_on_a_fast_ramp() -> None:
    """Ripple of 60 mV peak to peak at 100 Hz is outrun at 2 pi f A = 18.85 V/s."""
    outrun = 2 * np.pi * 100 * 30e-3
    assert hk.hum_width("30m", 100, outrun * 1.001) == 0
    # Just below: the least width for which a crest and the trough behind it are one transition.
    slope = 0.9 * outrun

    def fall(time: float) -> float:
        return float(30e-3 * np.sin(2 * np.pi * 100 * time) + slope * time)

    quarter = np.arccos(-0.9) / (2 * np.pi * 100)
    trough = brentq(
        lambda t: 30e-3 * 2 * np.pi * 100 * np.cos(2 * np.pi * 100 * t) + slope,
        0.5e-2,
        0.75e-2,
    )
    assert hk.hum_width("30m", 100, slope) == pytest.approx(fall(quarter) - fall(trough), rel=1e-9)

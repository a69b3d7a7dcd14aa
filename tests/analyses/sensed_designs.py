"""Designs whose signals have tolerances of every kind, for the tests of spread in the measurand."""

from __future__ import annotations

from typing import Any

import numpy as np

import hystkit as hk

S = hk.signals
ONE = {"tol": 0.01, "tempco": 5e-5}
NTC = S.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
TABLE = S.ResistanceTable(
    [-20, 0, 20, 25, 40, 60], [97e3, 32.6e3, 12.5e3, 10e3, 5.3e3, 2.5e3], tol=0.02
)
COEFFICIENTS = S.NtcCoefficients(1.129e-3, 2.341e-4, 8.775e-8, tol=0.02)
TEN = hk.Part("10k", **ONE)
EXCITED = hk.Part(5.0, tol=0.02)

#: Every signal of the package that has parameters.
SIGNALS: dict[str, Any] = {
    "linear": S.Linear(1.2, 0.1, span=(0, 5), unit="m", slope_tol=0.02, zero_error=5e-3),
    "falling line": S.Linear(-1.2, 4.5, span=(0, 5), unit="m", slope_tol=0.02, zero_error=5e-3),
    "loop": S.CurrentLoop(hk.Part(150, **ONE), span=(0, 2), unit="m", error=0.005),
    "attenuator": S.Attenuator(hk.Part("100k", **ONE), hk.Part("57k6", **ONE), span=(0, 20)),
    "track": S.Potentiometer("10k", span=(0, 100), linearity=0.01),
    "track of its own": S.Potentiometer("10k", EXCITED, span=(0, 100), linearity=0.01),
    "NTC below": S.SensorDivider(NTC, TEN, span=(-20, 60)),
    "NTC above": S.SensorDivider(NTC, TEN, "top", span=(-20, 60)),
    "NTC of its own": S.SensorDivider(NTC, TEN, excitation=EXCITED, span=(-20, 60)),
    "NTC driven": S.DrivenSensor(NTC, 250e-6, current_tol=0.01, span=(-20, 60)),
    "coefficients": S.SensorDivider(COEFFICIENTS, TEN, span=(-20, 60)),
    "table of ohms": S.SensorDivider(TABLE, TEN, span=(-15, 55)),
    "platinum driven": S.DrivenSensor(S.Rtd(1000, "B"), 2e-3, 0.01, span=(-50, 400)),
    "platinum about 0 °C": S.SensorDivider(
        S.Rtd(1000, "B"), hk.Part("1k", **ONE), span=(-190, 800)
    ),
    "table of volts": S.MeasuredTable(
        [0, 10, 20, 30, 40, 50], [4.5, 4.1, 3.2, 2.2, 1.4, 0.5], error=0.02
    ),
}
#: Of these the width is bounded in parts of the parameters' ranges.
IN_PARTS = ("table of ohms", "platinum about 0 °C")

DEVICE = hk.Device(drop_low=0.2, limits={"drop_low": (0.1, 0.4), "offset": (-3e-3, 3e-3)})


def sensing(
    signal: Any,
    output: str = "push-pull",
    tol: float = 0.01,
    supply_tol: float = 0.05,
    device: hk.Device = DEVICE,
) -> hk.Design:
    """An inverting stage with trips about 2.5 V on a 5 V supply."""
    values = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    values |= {"R_PU": "4k7"} if output == "open-collector" else {}
    return hk.Design(
        hk.Stage("inverting", output=output),
        {name: hk.Part(value, tol=tol, tempco=5e-5) for name, value in values.items()},
        supply=hk.Supply(5.0, tol=supply_tol),
        device=device,
        signal=signal,
    )


def read(found: hk.Spread, values: dict[str, Any]) -> dict[str, Any]:
    """Both readings and their distance at points of the joint box, one by one from the trips."""
    signal, names = found.design.signal, found.box.quantities
    own = {name: value for name, value in values.items() if name not in names}
    trips = hk.trip_points(found.design, **{n: values[n] for n in names})
    shared = {"V_CC": trips.v_cc} if signal.ratiometric else {}
    ends = np.array([signal.quantity(t, **own, **shared) for t in (trips.upper, trips.lower)])
    low, high = ends.min(axis=0), ends.max(axis=0)
    return {"low": low, "high": high, "width": high - low}


def interior(found: hk.Spread, count: int, seed: int = 0) -> dict[str, Any]:
    """Readings at random places all over the joint box, and in random corners of it."""
    random = np.random.default_rng(seed)
    box = found.measurand.box.intervals
    values = {name: random.uniform(*ends, count) for name, ends in box.items()}
    half = count // 2
    for name, ends in box.items():
        values[name][:half] = random.choice(ends, half)
    return read(found, values)

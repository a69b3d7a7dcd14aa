"""What a slider move in WindowPanel costs, against its pictures drawn afresh by savefig."""

from __future__ import annotations

from typing import Any

import hystkit as hk
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating
from tests.benchmarks.slider import saved

#: A fridge: settles at -14 °C and 25 °C, with a probe that lags.
PLANT = hk.TwoLag(tau=7200, sensor_tau=240, on_level=-14, off_level=25, dead_time=30, unit="°C")
NOISE = hk.Noise.two_pole(rms="0.5m", f1=10, f2="100k")
ASKED: dict[str, Any] = {
    "load": "low",
    "plant": PLANT,
    "starts_per_hour": 2,
    "min_on": 300,
    "min_off": 600,
    "swing": 5,
    "accuracy": 1.6,
}


def fridge() -> hk.Design:
    """A vaccine fridge on a thermistor that shares the supply, everything with tolerances."""
    sensor = hk.signals.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    other = hk.Part("10k", tol=0.001)
    parts = {"R_T": "11k5", "R_B": "4k32", "R_F": "140k"}
    return hk.Design(
        hk.Stage("inverting", output="open-collector"),
        {name: hk.Part(value, tol=0.001) for name, value in parts.items()}
        | {"R_PU": hk.Part("4k7", tol=0.01)},
        supply=hk.Supply(5.0, tol=0.05),
        device=hk.Device(drop_low=0.15, limits={"offset": (-5e-3, 5e-3)}),
        signal=hk.signals.SensorDivider(sensor, other, sensor_at="top", span=(-20, 40)),
    )


def comparisons() -> list[Comparison]:
    return [
        compared("slider move in WindowPanel, no disturbance", ASKED),
        compared("... with noise, the slope from the plant", {**ASKED, "noise": NOISE}),
        compared("... with noise and hum", {**ASKED, "noise": NOISE, "hum": (1e-3, 50)}),
    ]


def compared(subject: str, asked: dict[str, Any]) -> Comparison:
    """Move the slider of R_F, and draw the same things afresh, through values of their own."""
    start = fridge()
    panel = hk.panels.WindowPanel(start, **asked)
    views = (panel.ruler, panel.figure, panel.schematic)

    def changed(steps: int) -> hk.Design:
        return start.with_parts(R_F=step(start.parts["R_F"].value, "E96", steps))

    def move(turn: int) -> None:
        panel.design = changed(2 * turn)

    def afresh(turn: int) -> None:
        design = changed(2 * turn + 1)
        found = hk.levels(design), hk.width_window(design, **asked), design
        for view, data in zip(views, found, strict=True):
            picture: Any = type(view.picture)("any", view.picture.width_px)
            picture.update(data)
            saved(picture)

    moved, by_savefig = alternating(move, afresh)
    assert not panel.error, panel.error
    panel.close()
    return Comparison(
        subject, moved, "window and pictures afresh, by savefig", by_savefig, limit=0.100
    )

"""Designs with everything uncertain, for the tests of spread."""

from __future__ import annotations

import hystkit as hk

VALUES = {
    "R_T": 46.4e3,
    "R_B": 26.7e3,
    "R_R": 10e3,
    "R_I": 15e3,
    "R_G": 180e3,
    "R_F": 100e3,
    "R_S": 1e3,
    "R_PU": 4.7e3,
    "R_L": 82e3,
}

#: Every non-ideality of the law, with the limits a datasheet may state.
REAL = hk.Device(
    drop_high=0.1,
    drop_low=0.2,
    r_high=50,
    r_low=30,
    leakage=1e-7,
    offset=1e-3,
    bias_plus=4e-8,
    bias_minus=3e-8,
    offset_drift=8e-6,
    limits={
        "drop_high": (0.05, 0.3),
        "drop_low": (0.1, 0.4),
        "r_high": (20, 90),
        "r_low": (10, 80),
        "leakage": (0, 1e-6),
        "offset": (-4e-3, 4e-3),
        "bias_plus": (0, 2e-7),
        "bias_minus": (0, 2e-7),
    },
)


def full(stage: hk.Stage) -> hk.Stage:
    """A form with every optional part fitted."""
    return stage.with_options(*stage.optional)


def uncertain_design(stage: hk.Stage, tol: float = 0.02, device: hk.Device = REAL) -> hk.Design:
    """A design of a form with a tolerance on every part, level and rail."""
    voltages = {"V_REF": 2.2, "V_PU": 5.2, "V_L": 0.7}
    split = stage.supply == "split"
    return hk.Design(
        stage,
        {name: hk.Part(VALUES[name], tol=tol, tempco=1e-4) for name in stage.parts},
        supply=hk.Supply(5.0, -5.0, tol=0.03) if split else hk.Supply(5.0, tol=0.03),
        levels={n: hk.Part(v, tol=0.01) for n, v in voltages.items() if n in stage.levels},
        device=device,
    )


def wide(value: float) -> hk.Part:
    """A part that may have from half to twice its value."""
    return hk.Part(1.25 * value, tol=0.6)


def interior_width() -> hk.Design:
    """An inverting stage near ground, whose width is largest for an R_F inside its range."""
    stage = hk.Stage("inverting", reference="divider", output="open-collector")
    return hk.Design(
        stage,
        {"R_T": "100k", "R_B": "1k", "R_PU": "10k", "R_F": wide(10e3)},
        supply=5.0,
        device=hk.Device(drop_low=0.7),
        levels={"V_PU": 2.5},
    )


def bridge(tol: float) -> hk.Design:
    """A circuit of one's own, in which the signal reaches both inputs."""
    stage = hk.Stage.custom(
        [
            hk.Resistor("R_1", "signal", "plus"),
            hk.Resistor("R_2", "out", "plus"),
            hk.Resistor("R_3", "signal", "minus"),
            hk.Resistor("R_4", "minus", "ref"),
            hk.Resistor("R_5", "plus", "ground"),
        ],
        sense="non-inverting",
    )
    values = {"R_1": 10e3, "R_2": 100e3, "R_3": 30e3, "R_4": 20e3, "R_5": 68e3}
    return hk.Design(
        stage,
        {name: hk.Part(value, tol=tol) for name, value in values.items()},
        supply=5.0,
        levels={"V_REF": hk.Part(2.5, tol=0.01)},
    )

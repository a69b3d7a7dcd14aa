"""Designs that the tests of the export run over: every form, bare and with everything in it."""

from __future__ import annotations

import hystkit as hk

VALUES = {
    "R_T": "46k4", "R_B": "26k7", "R_R": "10k", "R_I": "22k1", "R_G": "57k6",
    "R_F": "909k", "R_S": "1k2", "R_PU": "4k7", "R_L": "100k",
}  # fmt: skip
DEVICE = hk.Device(
    drop_high=0.12,
    drop_low=0.23,
    r_high=55,
    r_low=33,
    leakage=130e-9,
    offset=2.7e-3,
    bias_plus=-25e-9,
    bias_minus=-27e-9,
)
#: Everything that LaTeX would take for a command, in the name of a design.
AWKWARD = 'Böhm & Co: 50 % of_{R}^2 \\end~#[1]* $x$ <|>\n3 µm "100 Ω"'


def bare(stage: hk.Stage) -> hk.Design:
    """An ideal device, required parts only."""
    levels = {"V_REF": 2.5} if "V_REF" in stage.levels else {}
    parts = {name: VALUES[name] for name in stage.required}
    return hk.Design(stage, parts, supply=_supply(stage), levels=levels)


def full(stage: hk.Stage) -> hk.Design:
    """Every optional part, every non-ideality, tolerances, a falling sensor, an awkward name."""
    stage = stage.with_options(*stage.optional)
    given = {"V_REF": hk.Part(2.495, 0.004), "V_PU": hk.Part(3.3), "V_L": hk.Part(0.7)}
    return hk.Design(
        stage,
        {name: hk.Part(VALUES[name], 0.01) for name in stage.parts},
        supply=_supply(stage, tol=0.02),
        device=DEVICE,
        levels={name: level for name, level in given.items() if name in stage.levels},
        signal=hk.signals.Linear(-13.7e-3, 2.9, span=(-20, 85), unit="°C", name="vent air"),
        name=AWKWARD,
    )


def ladder(device: hk.Device | None = None) -> hk.Design:
    """A circuit of its own: six resistors, with an internal node in front of the minus input."""
    wiring = [
        hk.Resistor("R_1", "signal", "tap"),
        hk.Resistor("R_2", "tap", "minus"),
        hk.Resistor("R_3", "tap", "ground"),
        hk.Resistor("R_4", "cc", "plus"),
        hk.Resistor("R_5", "plus", "ground"),
        hk.Resistor("R_6", "out", "plus"),
    ]
    values = dict(zip(("R_1", "R_2", "R_3", "R_4", "R_5", "R_6"), _LADDER, strict=True))
    stage = hk.Stage.custom(wiring, name="divided signal")
    return hk.Design(stage, values, supply=5.0, device=device)


def stuck() -> hk.Design:
    """A design without trip points: its load drags the high level below the low one."""
    stage = hk.Stage("inverting", output="open-collector", including=("R_L",))
    parts = {"R_T": "10k", "R_B": "10k", "R_F": "100k", "R_PU": "100k", "R_L": "1k"}
    return hk.Design(stage, parts, supply=5.0, levels={"V_L": -12.0})


def every_design() -> dict[str, hk.Design]:
    """All of them but the stuck one, by a name for the test report."""
    found = {}
    for stage in hk.Stage.all():
        found[f"{stage.title}, bare"] = bare(stage)
        found[f"{stage.title}, full"] = full(stage)
    return {**found, "own circuit, bare": ladder(), "own circuit, full": ladder(DEVICE)}


def _supply(stage: hk.Stage, tol: float = 0.0) -> hk.Supply:
    return hk.Supply(12.5, -12.5, tol=tol) if stage.supply == "split" else hk.Supply(5.0, tol=tol)


_LADDER = ("10k", "22k", "47k", "33k", "18k", "120k")

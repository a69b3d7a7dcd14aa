"""Designs whose inputs are coupled by resistors, for the tests of what is written down."""

from __future__ import annotations

from collections.abc import Sequence

import hystkit as hk
from tests.export.designs import DEVICE

#: One resistor of six leads from input to input.
SIX = hk.Stage.custom(
    [
        hk.Resistor("R_1", "signal", "plus"),
        hk.Resistor("R_2", "plus", "minus"),
        hk.Resistor("R_3", "cc", "minus"),
        hk.Resistor("R_4", "minus", "ground"),
        hk.Resistor("R_5", "plus", "ground"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="non-inverting",
    name="coupled inputs",
)
#: The tap of one divider feeds both inputs.
SHARED = hk.Stage.custom(
    [
        hk.Resistor("R_T", "cc", "tap"),
        hk.Resistor("R_B", "tap", "ground"),
        hk.Resistor("R_1", "tap", "plus"),
        hk.Resistor("R_2", "tap", "minus"),
        hk.Resistor("R_I", "signal", "minus"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="inverting",
    name="shared reference divider",
)
#: Ten resistors, two inner nodes that join four of them each.
TEN = hk.Stage.custom(
    [
        hk.Resistor("R_1", "cc", "near"),
        hk.Resistor("R_2", "near", "far"),
        hk.Resistor("R_3", "far", "ground"),
        hk.Resistor("R_4", "near", "plus"),
        hk.Resistor("R_5", "near", "minus"),
        hk.Resistor("R_6", "far", "plus"),
        hk.Resistor("R_7", "far", "minus"),
        hk.Resistor("R_8", "signal", "minus"),
        hk.Resistor("R_9", "minus", "ref"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="inverting",
    name="lattice",
)
COUPLED = (SIX, SHARED, TEN)

_VALUES = ("10k", "33k2", "47k5", "22k1", "68k1", "15k", "39k2", "12k1", "120k", "274k")


def coupled(stage: hk.Stage, device: hk.Device | None = None) -> hk.Design:
    """A design of one of them, on 5 V."""
    values: Sequence[str] = _VALUES[: len(stage.required) - 1] + _VALUES[-1:]
    levels = {"V_REF": 2.5} if "V_REF" in stage.levels else {}
    parts = dict(zip(stage.required, values, strict=True))
    return hk.Design(stage, parts, supply=5.0, device=device, levels=levels)


def every_coupled() -> dict[str, hk.Design]:
    """All of them, with an ideal device and with a real one."""
    found = {}
    for stage in COUPLED:
        found[f"{stage.name}, ideal"] = coupled(stage)
        found[f"{stage.name}, device"] = coupled(stage, DEVICE)
    return found

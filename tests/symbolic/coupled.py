"""Designs whose inputs are coupled by resistors, for the tests of what is written down."""

from __future__ import annotations

from collections.abc import Sequence

import hystkit as hk
from tests.circuit.custom import COUPLED
from tests.export.designs import DEVICE

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

"""Stages that drive something, and what an independent nodal solution says of them."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import product
from typing import Any

import numpy as np

import hystkit as hk
from tests.numeric import nodal

#: A relay of a common size: 12 V, 360 Ohm, under a henry; values from memory, typical of the trade.
RELAY = hk.drives.Coil("360", inductance="0.7", voltage=hk.Part(12, tol=0.1))
NPN = hk.drives.Transistor(beta=100, v_be=hk.Part(0.7, tol=0.1), v_ce_max=60)


def stage(
    sense: str = "inverting", output: str = "push-pull", supply: str = "single", tol: float = 0.01
) -> hk.Design:
    """A stage with every non-ideality at its output."""
    parts: dict[str, Any] = {"R_T": "47k", "R_B": "39k", "R_F": "100k"}
    parts |= {"R_I": "22k"} if sense == "non-inverting" else {}
    parts |= {"R_PU": "560"} if output == "open-collector" else {}
    return hk.Design(
        hk.Stage(sense, output=output, supply=supply),
        {name: hk.Part(value, tol=tol) for name, value in parts.items()},
        supply=hk.Supply(5.0, -5.0 if supply == "split" else None, tol=2 * tol),
        device=hk.Device(drop_high=0.2, drop_low=0.15, r_high=30, r_low=10, leakage="1u",
                         bias_plus="20n"),
    )  # fmt: skip


def trip_by_nodes(
    design: hk.Design, state: str, values: Mapping[str, Any], loaded: bool
) -> tuple[Any, dict[Any, Any]]:
    """Trip that leaves a state, and everything there, with R_L added to the declared circuit."""
    added = [hk.Resistor("R_L", "out", "load")] if loaded else []
    elements = (*design.elements, *added)
    output = design.stage.output
    signal = nodal.trip(elements, output, state, values)
    return signal, nodal.unknowns(elements, output, state, values, signal)


def corners(design: hk.Design, more: Mapping[str, tuple[float, float]]) -> dict[str, Any]:
    """Values in all corners of the tolerances, written out: parts, V_CC, and what follows it."""
    box = {n: (p.value * (1 - p.tol), p.value * (1 + p.tol)) for n, p in design.parts.items()}
    tol = design.supply.tol
    box["V_CC"] = (design.supply.v_cc * (1 - tol), design.supply.v_cc * (1 + tol))
    box |= more
    grid = dict(zip(box, np.array(list(product(*box.values()))).T, strict=True))
    values = {**design.values, **grid}
    if "V_OH" in values:
        values["V_OH"] = grid["V_CC"] - design.device.drop_high
    if "V_PU" in values:
        values["V_PU"] = grid["V_CC"]
    return values

"""Stages and designs for property tests: every form with every set of optional parts."""

from __future__ import annotations

from itertools import combinations
from typing import Any

from hypothesis import strategies as st

import hystkit as hk
from tests.circuit.custom import BRIDGE, TAPPED

#: The twenty forms with every subset of their optional parts.
VARIANTS = tuple(
    stage.with_options(*fitted)
    for stage in hk.Stage.all()
    for count in range(len(stage.optional) + 1)
    for fitted in combinations(stage.optional, count)
)

stages = st.sampled_from((*VARIANTS, TAPPED, BRIDGE))


def within(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False, allow_infinity=False)


def resistances() -> st.SearchStrategy[float]:
    """From 10 Ohm to 10 MOhm, as likely in one decade as in another."""
    return within(1.0, 7.0).map(lambda power: float(10**power))


def toleranced(values: st.SearchStrategy[float]) -> st.SearchStrategy[hk.Part]:
    return st.builds(hk.Part, values, tol=within(0, 0.2), tempco=within(-1e-3, 1e-3))


def devices() -> st.SearchStrategy[hk.Device]:
    return st.builds(
        hk.Device,
        drop_high=within(0, 0.5),
        drop_low=within(0, 0.5),
        r_high=st.just(0.0) | within(0, 300),
        r_low=st.just(0.0) | within(0, 300),
        leakage=st.just(0.0) | within(-1e-6, 1e-6),
        offset=st.just(0.0) | within(-0.01, 0.01),
        bias_plus=st.just(0.0) | within(-1e-7, 1e-7),
        bias_minus=st.just(0.0) | within(-1e-7, 1e-7),
        delay=within(0, 1e-3),
        common_mode_low=st.none() | within(-0.5, 1),
        common_mode_high=st.none() | within(-0.5, 2),
        limits=st.just({}) | st.just({"offset": (-0.02, 0.02), "bias_plus": (-1e-6, 1e-6)}),
        name=st.text(max_size=20),
        typical=st.just(()) | st.just(("gain", "offset")),
    )


def signals() -> st.SearchStrategy[hk.signals.Linear]:
    return st.builds(
        hk.signals.Linear,
        per_unit=within(1e-3, 10) | within(-10, -1e-3),
        at_zero=within(-5, 5),
        span=st.tuples(within(-100, 0), within(1, 100)),
        unit=st.sampled_from(("", "m", "°C", "A")),
        name=st.text(max_size=20),
    )


@st.composite
def designs(draw: st.DrawFn, of: st.SearchStrategy[hk.Stage] = stages) -> hk.Design:
    """A sound design of any stage, with everything that a design may carry."""
    stage = draw(of)
    v_cc = draw(within(3, 30))
    rails: dict[str, Any] = {"v_cc": v_cc, "tol": draw(within(0, 0.1))}
    if stage.supply == "split":
        rails["v_ee"] = -draw(within(3, 30))
    offered = {"V_REF": within(-5, 5), "V_PU": within(2, 30), "V_L": within(-5, 5)}
    levels = {
        name: draw(toleranced(values))
        for name, values in offered.items()
        if name in stage.levels and (name == "V_REF" or draw(st.booleans()))
    }
    return hk.Design(
        stage,
        {name: draw(toleranced(resistances())) for name in stage.parts},
        supply=hk.Supply(**rails),
        device=draw(devices()),
        levels=levels,
        signal=draw(st.none() | signals()),
        name=draw(st.text(max_size=20)),
    )

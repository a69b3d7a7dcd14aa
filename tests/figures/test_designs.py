"""Pictures of real designs: what is computed is what is drawn, for every form."""

from __future__ import annotations

import pytest

import hystkit as hk
from hystkit.figures import LoopPicture, RulerPicture, loop, ruler, timeline
from hystkit.numeric.response import sweep
from tests.figures.seen import faults, lines, pixels, texts

VALUES = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k", "R_R": "10k", "R_I": "10k", "R_PU": "4k7"}


def design_of(stage: hk.Stage, tol: float = 0.01) -> hk.Design:
    """A design of any form with toleranced parts."""
    parts = {name: hk.Part(VALUES[name], tol=tol) for name in stage.required}
    split = stage.supply == "split"
    return hk.Design(
        stage,
        parts=parts,
        supply=hk.Supply(12, -12) if split else hk.Supply(5.0),
        levels={"V_REF": 2.5} if "V_REF" in stage.levels else {},
        device=hk.Device(drop_low=0.2, common_mode_low=0.0, common_mode_high=1.5),
        signal=hk.signals.Linear(1.2, 0.6, span=(0, 2), unit="m", name="level"),
    )


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=str)
def test_every_form_is_drawn_without_a_fault(stage: hk.Stage) -> None:
    design = design_of(stage)
    found = hk.levels(design)
    assert found.ok
    for width in (700, 1400):
        assert faults(ruler(found, width_px=width), "rail", "trip", "axis") == []
        assert faults(loop(hk.loop(design), width_px=width)) == []
        data = hk.response(design, *sweep(design))
        assert faults(timeline(data, width_px=width)) == []


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=str)
def test_trips_are_drawn_where_they_are_computed(stage: hk.Stage) -> None:
    found = hk.levels(design_of(stage))
    picture = ruler(found)
    rails = sorted({round(box[0], 6) for box in lines(picture, "rail")})
    per_volt = (rails[1] - rails[0]) / (found.v_cc - found.v_ee)
    drawn = [found.v_ee + (box[0] - rails[0]) / per_volt for box in lines(picture, "trip")]
    assert sorted(drawn) == pytest.approx([found.lower, found.upper], abs=1e-4)


def test_a_header_tank_reads_in_metres() -> None:
    """Pump on at 0.80 m and off at 1.41 m, from 4-20 mA over 2 m across 150 Ohm."""
    tank = hk.Design(
        hk.Stage("inverting"),
        parts={"R_T": "46k4", "R_B": "26k7", "R_F": "100k"},
        supply=5.0,
        signal=hk.signals.Linear(1.2, 0.6, span=(0, 2), unit="m", name="level"),
    )
    shown = {text for text, _ in texts(ruler(hk.levels(tank)))}
    assert {"0.801 m", "1.405 m", "lower  1.562 V", "upper  2.286 V", "width 725 mV"} <= shown


def test_one_picture_follows_a_part_and_then_another_form() -> None:
    design = design_of(hk.Stage("inverting"))
    kept, kept_loop = RulerPicture("any", 700), LoopPicture("any", 700)
    for value in ("82k", "100k", "120k", "150k"):
        changed = design.with_parts(R_F=value)
        kept.update(hk.levels(changed))
        kept_loop.update(hk.loop(changed))
        kept.png()
        kept_loop.png()
    assert (kept.full_redraws, kept_loop.full_redraws) == (1, 1)
    other = design_of(hk.Stage("non-inverting", supply="split", reference="ground"))
    kept.update(hk.levels(other))
    new = ruler(hk.levels(other), theme="any", width_px=700)
    assert (pixels(kept.png()) == pixels(new.full_png())).all()

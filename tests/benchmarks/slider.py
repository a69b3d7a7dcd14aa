"""What a slider move costs in the kernel, against drawing the same pictures afresh."""

from __future__ import annotations

import hystkit as hk
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating


def design() -> hk.Design:
    """A greenhouse vent with a 10 kΩ NTC in its divider."""
    stage = hk.Stage("inverting", supply="single", reference="divider", output="open-collector")
    return hk.Design(
        stage,
        parts={"R_T": "22k1", "R_B": "21k0", "R_F": "220k", "R_PU": "4k7"},
        supply=hk.Supply(5.0),
        device=hk.Device(drop_low=0.2),
    )


def comparisons() -> list[Comparison]:
    start = design()
    panel = hk.panels.TripPanel(start)

    def value(turn: int) -> float:
        return step(start.parts["R_F"].value, "E96", turn % 12 - 6)

    def moved(turn: int) -> None:
        panel.design = panel.design.with_parts(R_F=value(turn))

    def afresh(turn: int) -> None:
        changed = start.with_parts(R_F=value(turn))
        levels = hk.levels(changed)
        hk.figures.ruler(levels, theme="any").png()
        hk.figures.loop(hk.loop(changed), theme="any").png()
        hk.figures.schematic(changed, theme="any").png()

    move, fresh = alternating(moved, afresh)
    panel.close()
    return [
        Comparison("slider move in TripPanel", move, "its pictures afresh", fresh, at_least=4.0)
    ]

"""What a slider move costs in CyclePanel, against drawing its pictures afresh."""

from __future__ import annotations

from typing import Any

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating
from tests.benchmarks.slider import saved

LIMIT = 0.100


def plant(tau: float = 600.0) -> hk.Plant:
    """A tank whose level is felt through a stilling well."""
    return hk.TwoLag(tau, 60, on_level=4, off_level=-1.5, dead_time=20)


def comparisons() -> list[Comparison]:
    start = header_tank()

    def other_part(panel: hk.panels.CyclePanel, steps: int) -> None:
        panel.design = start.with_parts(R_F=step(start.parts["R_F"].value, "E96", steps))

    def other_plant(panel: hk.panels.CyclePanel, steps: int) -> None:
        panel.set(tau=step(600.0, "E96", steps))

    return [
        compared("slider of a part in CyclePanel, all of it", other_part),
        compared("slider of the plant in CyclePanel, all of it", other_plant),
    ]


def compared(subject: str, change: Any) -> Comparison:
    """A slider move, against the pictures that it moves drawn afresh and saved."""
    panel = hk.panels.CyclePanel(header_tank(), plant=plant(), starts_per_hour=6, operations=1e5)
    views = (panel.ruler, panel.figure, panel.schematic)

    # Each goes through values of its own, so that none finds what another has drawn.
    def move(turn: int) -> None:
        change(panel, 2 * turn)

    def save_afresh(turn: int) -> None:
        tau = step(600.0, "E96", 2 * turn + 1)
        found = hk.cycling(header_tank(), plant(tau))
        shown = (found.levels, found, header_tank())
        for view, data in zip(views, shown, strict=True):
            picture = type(view.picture)("any", view.picture.width_px)
            picture.update(data)
            saved(picture)

    moved, by_savefig = alternating(move, save_afresh)
    assert not panel.error, panel.error
    panel.close()
    return Comparison(subject, moved, "its pictures afresh, by savefig", by_savefig, limit=LIMIT)

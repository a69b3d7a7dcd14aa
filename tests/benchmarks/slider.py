"""What a slider move costs in the kernel, against drawing the same pictures afresh."""

from __future__ import annotations

import io
from typing import Any

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating

SCALE = 2


def saved(picture: Any) -> bytes:
    """The picture as matplotlib writes it by itself: everything drawn, its own PNG writer."""
    for artist in picture.figure.findobj():
        artist.set_animated(False)
    file = io.BytesIO()
    picture.figure.savefig(file, format="png", dpi=SCALE * picture.figure.dpi)
    return file.getvalue()


def comparisons() -> list[Comparison]:
    start = header_tank()
    panel = hk.panels.TripPanel(start)
    views = (panel.ruler, panel.figure, panel.schematic)

    # Each goes through values of its own, so that none finds what another has drawn.
    def changed(steps: int) -> hk.Design:
        return start.with_parts(R_F=step(start.parts["R_F"].value, "E96", steps))

    def move(turn: int) -> None:
        panel.design = changed(3 * turn)

    def pictures(design: hk.Design) -> list[Any]:
        shown = hk.loop(design)
        made = [type(view.picture)("any", view.picture.width_px) for view in views]
        for picture, data in zip(made, (shown.levels, shown, design), strict=True):
            picture.update(data)
        return made

    def save_afresh(turn: int) -> None:
        for picture in pictures(changed(3 * turn + 1)):
            saved(picture)

    def encode_afresh(turn: int) -> None:
        for picture in pictures(changed(3 * turn + 2)):
            picture.png(SCALE)

    moved, by_savefig, by_png = alternating(move, save_afresh, encode_afresh)
    assert not panel.error, panel.error
    panel.close()
    subject = "slider move in TripPanel, all of it"
    return [
        Comparison(subject, moved, "its pictures afresh, by savefig", by_savefig, at_least=4.0),
        Comparison(subject, moved, "its pictures afresh, own PNG writer", by_png),
    ]

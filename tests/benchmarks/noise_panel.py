"""A slider move in NoisePanel, of a part and of the noise, against its pictures drawn afresh."""

from __future__ import annotations

from typing import Any

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.circuit.preferred import step
from tests.benchmarks.measure import Comparison, alternating
from tests.benchmarks.slider import saved

LIMIT = 0.100
#: A passage with a few thousand crossings of the noise, and one with more than are sampled.
PASSAGES = {
    "": (hk.Noise.two_pole(rms="50m", f1=100, f2="10k"), 0.5),
    ", slow": (hk.Noise.two_pole(rms="1m", f1="1k", f2="100k"), 1e-3),
}


def comparisons() -> list[Comparison]:
    return [
        compared(f"slider move in NoisePanel, {what}{which}", *passage, moves)
        for which, passage in PASSAGES.items()
        for what, moves in (("a part", part), ("the rms", rms))
    ]


def part(turn: int) -> dict[str, Any]:
    return {"R_F": step(100e3, "E96", turn)}


def rms(turn: int) -> dict[str, Any]:
    return {"rms": step(1.0, "E24", turn % 20)}


def compared(subject: str, noise: hk.Noise, slope: float, moves: Any) -> Comparison:
    """Everything that a move does, against its pictures by savefig."""
    panel = hk.panels.NoisePanel(header_tank(), noise=noise, slope=slope, hum=("10m", 50))
    views = (panel.ruler, panel.figure, panel.sample, panel.schematic)

    def changed(turn: int) -> dict[str, Any]:
        found = moves(turn)
        return {n: value * noise.rms if n == "rms" else value for n, value in found.items()}

    def move(turn: int) -> None:
        panel.set(**changed(turn))

    def afresh(turn: int) -> None:
        scene = panel.scene
        shown = (scene.levels, scene, scene, panel.design)
        for view, data in zip(views, shown, strict=True):
            saved(type(view.picture).of(data, "any", view.picture.width_px))

    moved, by_savefig = alternating(move, afresh)
    assert not panel.error, panel.error
    panel.close()
    return Comparison(subject, moved, "its pictures afresh, by savefig", by_savefig, LIMIT)

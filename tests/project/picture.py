"""Draw the picture of README.md again: ``python -m tests.project.picture``."""

from __future__ import annotations

from pathlib import Path

import hystkit as hk
from tests.project.source import ROOT

PICTURE = ROOT / "notebooks" / "ruler.png"


def tank() -> hk.Design:
    """The design of the README's example, with tolerances and a stated input range."""
    stage = hk.Stage("inverting", supply="single", reference="divider", output="push-pull")
    parts = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
    return hk.Design(
        stage,
        parts={name: hk.Part(value, tol=0.01) for name, value in parts.items()},
        supply=hk.Supply(5.0),
        device=hk.Device(common_mode_low=0.0, common_mode_high=1.5),
        signal=hk.signals.Linear(per_unit=1.2, at_zero=0.6, span=(0, 2), unit="m", name="level"),
    )


def draw(path: Path) -> None:
    """Write the ruler of the tank as PNG."""
    path.write_bytes(hk.figures.ruler(hk.levels(tank()), theme="light").png())


if __name__ == "__main__":
    draw(PICTURE)

"""Draw the picture of README.md again: ``python -m tests.project.picture``."""

from __future__ import annotations

import hystkit as hk
from hystkit.circuit.demo import header_tank
from tests.project.source import ROOT

PICTURE = ROOT / "notebooks" / "ruler.png"


def drawn() -> bytes:
    """The ruler of the demo design, as PNG."""
    picture: bytes = hk.figures.ruler(hk.levels(header_tank()), theme="light").png()
    return picture


if __name__ == "__main__":
    PICTURE.write_bytes(drawn())

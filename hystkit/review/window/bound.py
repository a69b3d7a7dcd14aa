"""One bound on the width of the hysteresis."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

Kind = Literal["floor", "ceiling"]


@dataclass(frozen=True)
class Bound:
    """What one requirement says about the width.

    Attributes
    ----------
    name : str
        Of the requirement, such as "noise".
    kind : {"floor", "ceiling"}
        Whether the width must be at least or at most this.
    width : float
        In the unit of the window: infinite for a floor that no width meets, zero for a ceiling
        that none keeps.
    text : str
        Where it comes from, with numbers.
    """

    name: str
    kind: Kind
    width: float
    text: str

    @property
    def hopeless(self) -> bool:
        """Whether no width at all meets the requirement."""
        return math.isinf(self.width) if self.kind == "floor" else self.width <= 0

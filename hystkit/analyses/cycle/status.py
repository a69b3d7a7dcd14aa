"""What becomes of a plant between its trips: one code for each element of a result."""

from __future__ import annotations

from enum import IntEnum


class CycleStatus(IntEnum):
    """What became of one element of a steady cycle."""

    CYCLES = 0
    STAYS_ON = 1
    STAYS_OFF = 2
    STAYS = 3
    WRONG_WAY = 4
    CHATTERS = 5
    UNPROVED = 6
    NOT_FINITE = 7

    @property
    def message(self) -> str:
        """One line that says what it means."""
        return _MESSAGES[self]


_MESSAGES = {
    CycleStatus.CYCLES: "cycles",
    CycleStatus.STAYS_ON: "stays on: never reaches the off trip",
    CycleStatus.STAYS_OFF: "stays off: never reaches the on trip",
    CycleStatus.STAYS: "stays as it is: on, never reaches the off trip; off, never the on trip",
    CycleStatus.WRONG_WAY: "trips the wrong way round for what the load does: no feedback",
    CycleStatus.CHATTERS: "switches without pause: no width, no dead time, no minimum time",
    CycleStatus.UNPROVED: "no steady cycle could be proved: simulate it",
    CycleStatus.NOT_FINITE: "a trip is not finite",
}

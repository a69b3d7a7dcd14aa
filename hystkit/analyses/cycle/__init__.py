"""The on-off cycle of a plant: the steady one in closed form, and every one from event to event."""

from __future__ import annotations

from hystkit.analyses.cycle.follow import Event, Outcome
from hystkit.analyses.cycle.plants import FirstOrder, Integrating, Plant, StateSpace, TwoLag
from hystkit.analyses.cycle.result import Cycle
from hystkit.analyses.cycle.run import Run
from hystkit.analyses.cycle.simulate import simulate
from hystkit.analyses.cycle.status import CycleStatus
from hystkit.analyses.cycle.steady import steady_cycle

__all__ = [
    "Cycle",
    "CycleStatus",
    "Event",
    "FirstOrder",
    "Integrating",
    "Outcome",
    "Plant",
    "Run",
    "StateSpace",
    "TwoLag",
    "simulate",
    "steady_cycle",
]

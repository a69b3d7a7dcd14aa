"""Circuits of one's own, for the tests of every layer."""

from __future__ import annotations

from itertools import pairwise

import hystkit as hk

#: Six resistors and an inner node: the divider's tap drives plus through a resistor of its own.
TAPPED = hk.Stage.custom(
    [
        hk.Resistor("R_1", "cc", "tap"),
        hk.Resistor("R_2", "tap", "ee"),
        hk.Resistor("R_3", "tap", "plus"),
        hk.Resistor("R_F", "out", "plus"),
        hk.Resistor("R_4", "signal", "minus"),
        hk.Resistor("R_5", "minus", "ee"),
    ],
    name="tapped divider",
)

#: The signal reaches both inputs, and an inner node joins more than two resistors.
BRIDGE = hk.Stage.custom(
    [
        hk.Resistor("R_1", "signal", "plus"),
        hk.Resistor("R_2", "signal", "star"),
        hk.Resistor("R_3", "star", "minus"),
        hk.Resistor("R_4", "star", "ref"),
        hk.Resistor("R_5", "plus", "minus"),
        hk.Resistor("R_6", "minus", "ground"),
        hk.Resistor("R_F", "out", "plus"),
        hk.Resistor("R_PU", "pu", "out"),
        hk.Resistor("R_L", "out", "load"),
    ],
    supply="split",
    output="open-collector",
    sense="non-inverting",
)

#: One resistor of six leads from input to input.
SIX = hk.Stage.custom(
    [
        hk.Resistor("R_1", "signal", "plus"),
        hk.Resistor("R_2", "plus", "minus"),
        hk.Resistor("R_3", "cc", "minus"),
        hk.Resistor("R_4", "minus", "ground"),
        hk.Resistor("R_5", "plus", "ground"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="non-inverting",
    name="coupled inputs",
)
#: The tap of one divider feeds both inputs.
SHARED = hk.Stage.custom(
    [
        hk.Resistor("R_T", "cc", "tap"),
        hk.Resistor("R_B", "tap", "ground"),
        hk.Resistor("R_1", "tap", "plus"),
        hk.Resistor("R_2", "tap", "minus"),
        hk.Resistor("R_I", "signal", "minus"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="inverting",
    name="shared reference divider",
)
#: Ten resistors, two inner nodes that join four of them each.
TEN = hk.Stage.custom(
    [
        hk.Resistor("R_1", "cc", "near"),
        hk.Resistor("R_2", "near", "far"),
        hk.Resistor("R_3", "far", "ground"),
        hk.Resistor("R_4", "near", "plus"),
        hk.Resistor("R_5", "near", "minus"),
        hk.Resistor("R_6", "far", "plus"),
        hk.Resistor("R_7", "far", "minus"),
        hk.Resistor("R_8", "signal", "minus"),
        hk.Resistor("R_9", "minus", "ref"),
        hk.Resistor("R_F", "out", "plus"),
    ],
    sense="inverting",
    name="lattice",
)
#: The inputs of all of these are coupled by resistors.
COUPLED = (SIX, SHARED, TEN)


def uncertain_chain(count: int) -> hk.Design:
    """So many resistors of 10 kOhm, 1 %: one to the supply, the others in series as feedback."""
    nodes = ["out", *(f"n{number}" for number in range(2, count)), "plus"]
    feedback = [hk.Resistor(f"R_{n}", *pair) for n, pair in enumerate(pairwise(nodes), 1)]
    divider = hk.Resistor("R_T", "plus", "cc")
    stage = hk.Stage.custom([*feedback, divider, hk.Wire("signal", "minus")])
    return hk.Design(stage, dict.fromkeys(stage.parts, hk.Part("10k", tol=0.01)), supply=5)

"""Random values for any stage, and random resistive networks that can switch."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray

import hystkit as hk
from hystkit.circuit.checks import circuit_faults, infer_sense
from hystkit.circuit.elements import Element

Array = NDArray[np.float64]

#: Largest value of each non-ideality; those of the device's inputs and leakage take either sign.
NON_IDEAL = {"R_OH": 300.0, "R_OL": 300.0, "I_LK": 1e-6, "V_OS": 0.01, "I_BP": 1e-7, "I_BN": 1e-7}


def symbol_names(stage: hk.Stage) -> tuple[str, ...]:
    """Every symbol that a design of this stage gives a value to."""
    rails = ("V_CC", "V_EE") if stage.supply == "split" else ("V_CC",)
    absent = "I_LK" if stage.output == "push-pull" else "R_OH"
    return (*stage.parts, *rails, *stage.levels, *(n for n in NON_IDEAL if n != absent))


def random_values(stage: hk.Stage, count: int, random: np.random.Generator) -> dict[str, Array]:
    """Values of every symbol; each non-ideality is zero in half of the samples."""
    low = -random.uniform(3, 15, count) if stage.supply == "split" else np.zeros(count)
    high = random.uniform(3, 15, count)
    offered = {
        "V_CC": high,
        "V_EE": low,
        "V_OH": high - random.uniform(0, 1, count),
        "V_OL": low + random.uniform(0, 1, count),
        "V_REF": random.uniform(low, high),
        "V_PU": random.uniform(low + 1, high),
        "V_L": random.uniform(low, high),
    }
    for name, largest in NON_IDEAL.items():
        smallest = 0.0 if name.startswith("R") else -largest
        offered[name] = (random.random(count) < 0.5) * random.uniform(smallest, largest, count)
    offered |= {name: 10 ** random.uniform(1, 7, count) for name in stage.parts}
    return {name: offered[name] for name in symbol_names(stage)}


def a_design(stage: hk.Stage, **more: Any) -> hk.Design:
    """Some sound design of a stage, for overriding its values."""
    return hk.Design(
        stage,
        dict.fromkeys(stage.parts, "10k"),
        supply=hk.Supply(12, -12 if stage.supply == "split" else None),
        levels={"V_REF": 1.0} if "V_REF" in stage.levels else {},
        **more,
    )


def random_stages(count: int, seed: int, inner: int = 3) -> Iterator[hk.Stage]:
    """Custom stages on random networks with up to `inner` inner nodes, meshes included."""
    random = np.random.default_rng(seed)
    found = 0
    while found < count:
        supply = "split" if random.random() < 0.5 else "single"
        output = "push-pull" if random.random() < 0.5 else "open-collector"
        elements = _network(random, int(random.integers(0, inner + 1)), output)
        if circuit_faults(elements, output):
            continue
        sense = infer_sense(elements) or "inverting"
        yield hk.Stage.custom(elements, supply=supply, output=output, sense=sense)
        found += 1


def _network(random: np.random.Generator, inner: int, output: str) -> list[Element]:
    """Resistors between random nodes, sometimes an input wired to a source or a node to another."""
    free = ["plus", "minus", "out", *(f"n{number}" for number in range(inner))]
    held = ["cc", "ee", "ground", "ref", "pu", "load", "signal"]
    inside, outside = random.uniform(0.3, 1.0), random.uniform(0.1, 0.35)
    pairs = [pair for pair in combinations(free, 2) if random.random() < inside]
    pairs += [(node, fixed) for node in free for fixed in held if random.random() < outside]
    if output == "open-collector":
        pairs.append(("pu", "out"))
    elements: list[Element] = [hk.Resistor(f"R_{n}", *pair) for n, pair in enumerate(pairs, 1)]
    if (source := ("signal", "ref", None, None)[random.integers(4)]) is not None:
        elements.append(hk.Wire("minus", source))
    if inner and random.random() < 0.3:
        elements.append(hk.Wire("tap", "n0"))
    return [elements[place] for place in random.permutation(len(elements))]

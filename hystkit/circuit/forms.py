"""The built-in forms: which elements each combination of choices is wired from."""

from __future__ import annotations

from collections.abc import Iterator

from hystkit.circuit.elements import Element, Resistor, Wire

#: The four choices that name a form, in the order in which they are asked for.
CHOICES: dict[str, tuple[str, ...]] = {
    "sense": ("inverting", "non-inverting"),
    "supply": ("single", "split"),
    "reference": ("divider", "source", "ground"),
    "output": ("push-pull", "open-collector"),
}

#: Order in which parts are listed everywhere.
PART_ORDER = ("R_T", "R_B", "R_R", "R_I", "R_G", "R_F", "R_S", "R_PU", "R_L")


def optional_parts(sense: str, reference: str) -> tuple[str, ...]:
    """Parts that a form may have or not.

    Parameters
    ----------
    sense, reference : str
        Two of the choices in `CHOICES`.

    Returns
    -------
    tuple of str
        Names, in the order of `PART_ORDER`.
    """
    names = {"R_S", "R_L"}
    if sense == "non-inverting":
        names.add("R_G")
        if reference != "divider":
            names.add("R_R")
    return tuple(name for name in PART_ORDER if name in names)


def form_elements(
    sense: str, reference: str, output: str, including: frozenset[str]
) -> tuple[Element, ...]:
    """Wire one built-in form.

    Parameters
    ----------
    sense, reference, output : str
        Choices in `CHOICES`.
    including : frozenset of str
        Optional parts that are fitted.

    Returns
    -------
    tuple of Resistor and Wire
        Resistors in the order of `PART_ORDER`, then the wires.
    """
    wired = [
        *_reference(sense, reference, including),
        *_signal(sense, including),
        *_output(output, including),
    ]
    resistors = [element for element in wired if isinstance(element, Resistor)]
    wires = [element for element in wired if isinstance(element, Wire)]
    return (*sorted(resistors, key=lambda r: PART_ORDER.index(r.name)), *wires)


def _reference(sense: str, reference: str, including: frozenset[str]) -> Iterator[Element]:
    pin = "plus" if sense == "inverting" else "minus"
    if reference == "divider":
        yield Resistor("R_T", pin, "cc")
        yield Resistor("R_B", pin, "ee")
    elif sense == "inverting":
        yield (
            Resistor("R_R", "ref", pin) if reference == "source" else Resistor("R_B", pin, "ground")
        )
    else:
        node = "ref" if reference == "source" else "ground"
        yield _fitted("R_R", node, pin, including)


def _signal(sense: str, including: frozenset[str]) -> Iterator[Element]:
    if sense == "inverting":
        yield _fitted("R_S", "signal", "minus", including)
        return
    yield _fitted("R_S", "signal", "in", including)
    yield Resistor("R_I", "in", "plus")
    if "R_G" in including:
        yield Resistor("R_G", "plus", "ground")


def _output(output: str, including: frozenset[str]) -> Iterator[Element]:
    yield Resistor("R_F", "out", "plus")
    if output == "open-collector":
        yield Resistor("R_PU", "pu", "out")
    if "R_L" in including:
        yield Resistor("R_L", "out", "load")


def _fitted(name: str, node_a: str, node_b: str, including: frozenset[str]) -> Element:
    """Give the optional part where it is fitted, else the wire in its place."""
    return Resistor(name, node_a, node_b) if name in including else Wire(node_a, node_b)

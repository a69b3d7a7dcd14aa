"""Can this circuit switch? Every reason why a declared circuit cannot, found in one pass."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Iterator

from hystkit.base.errors import Fault
from hystkit.base.nearest import nearest_name
from hystkit.circuit.elements import FIXED_NODES, INPUT_NODES, OUTPUT_NODE, Element, Resistor, Wire
from hystkit.circuit.netlist import Netlist, netlist
from hystkit.circuit.reading import wrong_kind

#: Symbols that a resistor must not take: the output resistances of the device.
RESERVED = ("R_OH", "R_OL")
#: What follows V_ in the symbols of a law that are no node's voltage.
SUFFIXES = frozenset(
    ("IN", "OH", "OL", "CC", "EE", "REF", "PU", "L", "OS", "upper", "lower", "width", "middle")
)
_NAME = re.compile(r"R[A-Za-z0-9]*(_[A-Za-z0-9]+)?")
_NODE = re.compile(r"[A-Za-z][A-Za-z0-9]*")
_NEEDED = (*INPUT_NODES, OUTPUT_NODE, "signal")


def circuit_faults(
    elements: Iterable[Element], output: str, supply: str = "split"
) -> tuple[Fault, ...]:
    """Find everything that keeps a circuit from being a switching stage.

    Parameters
    ----------
    elements : iterable of Resistor or Wire
        The declared circuit.
    output : str
        "push-pull" or "open-collector".
    supply : str, default "split"
        "single" or "split"; in a single supply ee and ground are one potential.

    Returns
    -------
    tuple of Fault
        Empty when the circuit can switch.
    """
    elements = tuple(elements)
    if strangers := [*_kind_faults(elements)]:
        return tuple(strangers)
    faults = [*_element_faults(elements), *_node_faults(elements)]
    net = netlist(elements)
    missing = [node for node in _NEEDED if node not in net.merged]
    faults += [_missing_node(node, net) for node in missing]
    if not missing:
        shorts = [*_short_faults(net, supply)]
        faults += shorts or [
            *_path_faults(net),
            *_floating_faults(net),
            *_drive_faults(net, output),
        ]
    return tuple(faults)


def infer_sense(elements: Iterable[Element]) -> str | None:
    """Tell from the wiring alone which way the signal drives the inputs.

    Parameters
    ----------
    elements : iterable of Resistor or Wire
        A circuit without faults.

    Returns
    -------
    str or None
        "inverting" or "non-inverting"; None where the signal reaches both inputs on ways of
        their own, so that the part values decide.
    """
    at_plus, at_minus = _signal_at_inputs(netlist(elements))
    if at_plus and at_minus:
        return None
    return "non-inverting" if at_plus else "inverting"


def _signal_at_inputs(net: Netlist, *around: str) -> tuple[bool, bool]:
    """Whether the signal reaches plus, and minus, by a way around the other one and `around`.

    Behind the other input the signal can only be weaker than at that input.
    """
    plus, minus = (net.merged[pin] for pin in INPUT_NODES)
    held = FIXED_NODES.keys() - {"signal"}
    return (
        plus in net.reach("signal", minus, *around) - held,
        minus in net.reach("signal", plus, *around) - held,
    )


def _element_faults(elements: tuple[Element, ...]) -> Iterator[Fault]:
    names = Counter(e.name for e in elements if isinstance(e, Resistor))
    for name, count in names.items():
        if count > 1:
            yield Fault(
                f"{name} stands {count} times in the circuit.",
                asked=f"{count} resistors with the name {name}",
                rule="each resistor has a name of its own",
                remedy=f"rename one, such as {name}{count}",
            )
        if not _NAME.fullmatch(name) or name in RESERVED:
            yield Fault(
                f"{name!r} cannot name a resistor.",
                asked=f"a resistor {name!r}",
                rule="R, then letters and digits with one optional underscore; R_OH and R_OL are"
                " the device's",
                remedy="a name such as R_1 or R_F2",
            )
    for element in elements:
        if element.node_a == element.node_b:
            label = element.name if isinstance(element, Resistor) else "a wire"
            yield Fault(
                f"{label} has both ends on one node.",
                asked=f"{label} from {element.node_a} to {element.node_b}",
                remedy="give the node of its other end, or leave it out",
            )


def _kind_faults(elements: tuple[object, ...]) -> Iterator[Fault]:
    """Find what is neither a resistor nor a wire between named nodes."""
    example = 'Resistor("R_F", "out", "plus") or Wire("signal", "minus")'
    for number, element in enumerate(elements, 1):
        if not isinstance(element, Resistor | Wire):
            yield wrong_kind(f"element {number}", element, "a Resistor or a Wire", example)
            continue
        texts = (*element.nodes, *((element.name,) if isinstance(element, Resistor) else ()))
        if not all(isinstance(text, str) for text in texts):
            yield wrong_kind(f"element {number}", element, "named by texts alone", example)


def _node_faults(elements: tuple[Element, ...]) -> Iterator[Fault]:
    fixed = {name.casefold(): name for name in (*FIXED_NODES, *_NEEDED)}
    for node in sorted({node for element in elements for node in element.nodes}):
        known = fixed.get(node.casefold(), node)
        rule, remedy = "", "a name such as n1 or tap"
        if not _NODE.fullmatch(node):
            rule = "a letter, then letters and digits"
        elif node in SUFFIXES:
            rule = f"the voltage of a node is V_ and its name, and V_{node} is another quantity"
        elif known != node:
            rule = f"a node is told from {known} by more than capitals"
            remedy = f"{known}, or a name such as n1"
        if rule:
            yield Fault(
                f"{node!r} cannot name a node.", asked=f"a node {node!r}", rule=rule, remedy=remedy
            )


def _missing_node(node: str, net: Netlist) -> Fault:
    near = nearest_name(node, [name for name in net.merged if name not in FIXED_NODES])
    return Fault(
        f"nothing is connected to the node {node!r}.",
        have="nodes " + ", ".join(sorted(net.merged)),
        rule="a stage has the nodes plus, minus, out and signal",
        remedy=f"connect {node!r}" + (f" (is {near!r} meant?)" if near else ""),
    )


def _short_faults(net: Netlist, supply: str) -> Iterator[Fault]:
    """Find wires that join what must stay apart."""
    for group in net.groups:
        held = sorted(group & FIXED_NODES.keys())
        pins = sorted(group & {*INPUT_NODES, OUTPUT_NODE})
        # Both are 0 V there: a wire between them shorts nothing.
        one = supply == "single" and held == ["ee", "ground"]
        if len(held) > 1 and not one:
            yield Fault(
                f"a wire shorts {' and '.join(held)}.",
                asked=f"{', '.join(sorted(group))} on one node",
                rule="each of these nodes is held at a voltage of its own",
                remedy="put a resistor between them, or leave the wire out",
            )
        if len(pins) > 1:
            yield Fault(
                f"a wire joins {' and '.join(pins)}.",
                asked=f"{', '.join(sorted(group))} on one node",
                rule="plus, minus and out are three different nodes",
                remedy="put a resistor in place of the wire",
            )
        if held and OUTPUT_NODE in pins:
            yield Fault(
                f"the output is wired to {held[0]}.",
                asked=f"{', '.join(sorted(group))} on one node",
                rule="the device moves the output",
                remedy="put a resistor in place of the wire",
            )


def _path_faults(net: Netlist) -> Iterator[Fault]:
    plus, minus = (net.merged[pin] for pin in INPUT_NODES)
    if plus in FIXED_NODES or plus not in net.reach(OUTPUT_NODE, minus):
        past = " except through minus" if plus in net.reach(OUTPUT_NODE) else ""
        yield Fault(
            "no positive feedback.",
            have=f"plus is held by {plus}"
            if plus in FIXED_NODES
            else f"no path from out to plus{past}",
            rule="a resistor path leads from out to plus",
            remedy='add a feedback resistor such as Resistor("R_F", "out", "plus")',
        )
    # An ideal output holds its voltage, so that the signal does not pass through it.
    if not any(_signal_at_inputs(net, OUTPUT_NODE)):
        past = " except through the output" if net.free & {plus} & net.reach("signal") else ""
        yield Fault(
            "the signal does not reach the inputs.",
            have=f"no path from signal to plus or minus{past}",
            rule="a wire or a resistor path leads from signal to an input",
            remedy='add Wire("signal", "minus") or Resistor("R_I", "signal", "plus")',
        )


def _floating_faults(net: Netlist) -> Iterator[Fault]:
    for node in sorted(net.free):
        touching = net.at(node)
        inner = node not in (*INPUT_NODES, OUTPUT_NODE)
        # An input that hangs on the other one alone would follow it and never differ from it.
        around = () if inner else tuple(net.merged[pin] for pin in INPUT_NODES)
        driven = node == OUTPUT_NODE or any(
            other in FIXED_NODES or other == OUTPUT_NODE
            for other in net.reach(node, *around) - {node}
        )
        if driven and not (inner and len(touching) == 1):
            continue
        near = nearest_name(node, [name for name in net.merged if name != node])
        names = ", ".join(r.name for r in touching) or "wires only"
        yield Fault(
            f"the node {node!r} floats.",
            have=f"touched by {names}",
            rule="each node has a resistor path to a supply, reference, signal or output",
            remedy=f"complete its path, or leave it out (is {near!r} meant?)"
            if near
            else "complete its path, or leave it out",
        )


def _drive_faults(net: Netlist, output: str) -> Iterator[Fault]:
    if output != "open-collector":
        return
    inputs = (net.merged[pin] for pin in INPUT_NODES)
    if not FIXED_NODES.keys() - {"ground", "ee"} & net.reach(OUTPUT_NODE, *inputs):
        yield Fault(
            "the open-collector output has no pull-up.",
            have="no resistor path from out to a supply",
            rule="an open collector only pulls down; a resistor makes the high level",
            remedy='add Resistor("R_PU", "pu", "out")',
        )

"""Node by node to the law: exact elimination, with names for what recurs.

A stage in one output state is a linear circuit. Its inner nodes are taken out one after the
other: sources at a node become one Thevenin source, a node between two others becomes a series
resistor, any other node a mesh. What remains are the two inputs, where the switching condition
v(plus) - v(minus) = V_OS is solved for the signal voltage.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import NamedTuple

import sympy as sp

from hystkit.circuit.elements import FIXED_NODES, OUTPUT_NODE
from hystkit.circuit.netlist import netlist
from hystkit.circuit.stage import Stage
from hystkit.symbolic.ledger import HIGH, LOW, Ledger
from hystkit.symbolic.symbols import symbol


class StateLaw(NamedTuple):
    """What holds in one output state, in terms of the law's definitions."""

    trip: sp.Expr
    potentials: dict[str, sp.Expr]


class Potential(NamedTuple):
    """A voltage that is affine in the signal: ``constant + gain * V_IN``."""

    constant: sp.Expr
    gain: sp.Expr = sp.S.Zero

    @property
    def value(self) -> sp.Expr:
        """The voltage as one expression."""
        return self.constant + self.gain * symbol("V_IN")


class Branch(NamedTuple):
    """A resistance, or a conductance where that may be zero, towards a source or a node."""

    r: sp.Expr | None
    g: sp.Expr

    @classmethod
    def resistor(cls, r: sp.Expr) -> Branch:
        """Take a resistance."""
        return cls(r, 1 / r if r != 0 else sp.zoo)

    def in_series(self, z: sp.Expr) -> Branch:
        """Add a resistance in series."""
        if self.r is None:
            return Branch(None, self.g / (1 + self.g * z))
        return Branch.resistor(self.r + z)


class Source(NamedTuple):
    """A branch from a node to a voltage."""

    branch: Branch
    potential: Potential


class Link(NamedTuple):
    """A branch between two free nodes."""

    node_a: str
    node_b: str
    branch: Branch

    def other(self, node: str) -> str:
        """Give the end that is not `node`."""
        return self.node_b if node == self.node_a else self.node_a


class Eliminated(NamedTuple):
    """How to get the voltage of a node that was taken out from those of its neighbours."""

    node: str
    source: tuple[Potential, sp.Expr] | None
    links: tuple[tuple[str, Branch], ...]
    injection: sp.Expr


@dataclass
class Reduction:
    """The circuit of one output state while its inner nodes are taken out."""

    state: str
    ledger: Ledger
    sources: dict[str, list[Source]] = field(default_factory=dict)
    links: list[Link] = field(default_factory=list)
    injections: dict[str, sp.Expr] = field(default_factory=dict)
    eliminated: list[Eliminated] = field(default_factory=list)

    def define(self, base: str, expression: sp.Expr, meaning: str, unit: str) -> sp.Expr:
        """Name an expression, unless it is a bare symbol or number already."""
        return self.ledger.define(base, self.state, expression, meaning, unit)

    def thevenin(self, node: str) -> tuple[Potential, sp.Expr] | None:
        """Combine all sources at a node into one; None where there is none."""
        sources = self.sources.get(node, [])
        injection = self.injections.get(node, sp.S.Zero)
        if not sources:
            return None
        if len(sources) == 1:
            branch, potential = sources[0]
            z = branch.r if branch.r is not None else 1 / branch.g
            return Potential(potential.constant - z * injection, potential.gain), z
        # Multiplied through by the resistances, so that an ideal output (0 Ohm) needs no limit.
        product = sp.Mul(*(s.branch.r for s in sources if s.branch.r is not None))
        weights = [_weight(index, sources) for index in range(len(sources))]
        total = sp.Add(*weights)
        constant = sp.Add(
            *(w * s.potential.constant for w, s in zip(weights, sources, strict=True))
        )
        gain = sp.Add(*(w * s.potential.gain for w, s in zip(weights, sources, strict=True)))
        return Potential((constant - product * injection) / total, gain / total), product / total

    def eliminate(self, node: str) -> None:
        """Take a node out of the circuit."""
        links = self._links_of(node)
        found = self.thevenin(node)
        source = self._named(node, found) if found else None
        injection = self.injections.pop(node, sp.S.Zero)
        self.eliminated.append(Eliminated(node, source, links, sp.S.Zero if source else injection))
        self.sources.pop(node, None)
        self.links = [link for link in self.links if node not in link[:2]]
        if source:
            self._spread_source(node, source, links)
        elif links:
            self._spread_inner(node, links, injection)

    def _named(self, node: str, found: tuple[Potential, sp.Expr]) -> tuple[Potential, sp.Expr]:
        potential, z = found
        tag = _tag(node)
        place = "of the output" if node == OUTPUT_NODE else f"at the node {node}"
        constant = self.define(f"E_{tag}", potential.constant, f"Thevenin voltage {place}", "V")
        gain = self.define(f"k_{tag}", potential.gain, f"share of the signal {place}", "1")
        return Potential(constant, gain), self.define(
            f"Z_{tag}", z, f"Thevenin resistance {place}", "Ω"
        )

    def _spread_source(
        self, node: str, source: tuple[Potential, sp.Expr], links: tuple[tuple[str, Branch], ...]
    ) -> None:
        potential, z = source
        if len(links) == 1:
            ((other, branch),) = links
            self.sources.setdefault(other, []).append(Source(branch.in_series(z), potential))
            return
        loading = 1 + z * sp.Add(*(branch.g for _, branch in links))
        k = self.define(f"K_{_tag(node)}", loading, f"loading factor of the node {node}", "1")
        for other, branch in links:
            scaled = (
                Branch.resistor(branch.r * k)
                if branch.r is not None
                else Branch(None, branch.g / k)
            )
            self.sources.setdefault(other, []).append(Source(scaled, potential))
        self._mesh(node, links, lambda a, b: a.g * b.g * z / k)

    def _spread_inner(
        self, node: str, links: tuple[tuple[str, Branch], ...], injection: sp.Expr
    ) -> None:
        total = sp.Add(*(branch.g for _, branch in links))
        if len(links) == 2 and injection == 0 and links[1][1].r is not None:
            (one, first), (two, second) = links
            self.links.append(Link(one, two, first.in_series(second.r)))
            return
        if len(links) > 1:
            total = self.define(
                f"S_{_tag(node)}", total, f"sum of conductances at the node {node}", "S"
            )
        for other, branch in links:
            if injection != 0:
                share = injection * branch.g / total
                self.injections[other] = self.injections.get(other, sp.S.Zero) + share
        self._mesh(node, links, lambda a, b: a.g * b.g / total)

    def _mesh(self, node: str, links: tuple[tuple[str, Branch], ...], conductance: object) -> None:
        for index, (one, first) in enumerate(links):
            for two, second in links[index + 1 :]:
                g = conductance(first, second)  # type: ignore[operator]
                g = self.define(f"G_{one}{two}", g, f"conductance between {one} and {two}", "S")
                self.links.append(Link(one, two, Branch(None, g)))

    def _links_of(self, node: str) -> tuple[tuple[str, Branch], ...]:
        """Neighbours of a node, parallel branches combined."""
        found: dict[str, Branch] = {}
        for link in self.links:
            if node in link[:2]:
                other = link.other(node)
                found[other] = (
                    _parallel(found[other], link.branch) if other in found else link.branch
                )
        return tuple(found.items())

    def back_substitute(self, known: dict[str, sp.Expr]) -> dict[str, sp.Expr]:
        """Give the voltage of every node from those of the inputs."""
        for node, source, links, injection in reversed(self.eliminated):
            pulled = sp.Add(*(branch.g * known[other] for other, branch in links))
            total = sp.Add(*(branch.g for _, branch in links))
            if source is None:
                known[node] = (pulled - injection) / total
            else:
                potential, z = source
                known[node] = (potential.value + z * pulled) / (1 + z * total)
        return known


def _tag(node: str) -> str:
    return "" if node == OUTPUT_NODE else node


def _weight(index: int, sources: list[Source]) -> sp.Expr:
    """Conductance of one source, multiplied by the product of all resistances."""
    own = sources[index].branch
    others = [s.branch.r for i, s in enumerate(sources) if i != index and s.branch.r is not None]
    return sp.Mul(*others) if own.r is not None else own.g * sp.Mul(*others)


def _parallel(one: Branch, two: Branch) -> Branch:
    if one.r is None or two.r is None:
        return Branch(None, one.g + two.g)
    return Branch.resistor(one.r * two.r / (one.r + two.r))


def set_up(stage: Stage, state: str, ledger: Ledger) -> Reduction:
    """Write a stage down as branches, with its output in one state.

    Parameters
    ----------
    stage : Stage
        The declared circuit.
    state : {"high", "low"}
        Output state.
    ledger : Ledger
        Where named quantities are collected, shared by both states.

    Returns
    -------
    Reduction
        Nothing taken out yet.
    """
    net = netlist(stage.elements)
    work = Reduction(state, ledger)
    for resistor in net.resistors:
        branch = Branch.resistor(symbol(resistor.name))
        held = [node for node in resistor.nodes if node in FIXED_NODES]
        free = [node for node in resistor.nodes if node not in FIXED_NODES]
        if len(held) == 1:
            work.sources.setdefault(free[0], []).append(Source(branch, fixed(held[0], stage)))
        elif not held and free[0] != free[1]:
            work.links.append(Link(free[0], free[1], branch))
    for node, name in _pin_currents(stage, state):
        if net.merged[node] in net.free:
            work.injections[net.merged[node]] = symbol(name)
    driver = device_source(stage, state)
    if driver:
        work.sources.setdefault(OUTPUT_NODE, []).insert(0, driver)
    return work


def fixed(node: str, stage: Stage) -> Potential:
    """Give the voltage of a fixed node.

    Parameters
    ----------
    node : str
        One of `FIXED_NODES`.
    stage : Stage
        Tells whether the negative rail is 0 V.

    Returns
    -------
    Potential
        Its symbol, 0 for ground and for the negative rail of a single supply.
    """
    if node == "signal":
        return Potential(sp.S.Zero, sp.S.One)
    if node == "ground" or (node == "ee" and stage.supply == "single"):
        return Potential(sp.S.Zero)
    return Potential(symbol(FIXED_NODES[node]))


def device_source(stage: Stage, state: str) -> Source | None:
    """Give what the device drives its output with.

    Parameters
    ----------
    stage : Stage
        Tells the kind of output.
    state : {"high", "low"}
        Output state.

    Returns
    -------
    Source or None
        None for an open collector that is off.
    """
    if state == LOW:
        return Source(Branch.resistor(symbol("R_OL")), Potential(symbol("V_OL")))
    if stage.output == "push-pull":
        return Source(Branch.resistor(symbol("R_OH")), Potential(symbol("V_OH")))
    return None


def _pin_currents(stage: Stage, state: str) -> Iterable[tuple[str, str]]:
    yield "plus", "I_BP"
    yield "minus", "I_BN"
    if state == HIGH and stage.output == "open-collector":
        yield OUTPUT_NODE, "I_LK"


def solve_state(stage: Stage, state: str, ledger: Ledger) -> StateLaw:
    """Solve the switching condition with the output in one state.

    Parameters
    ----------
    stage : Stage
        The declared circuit.
    state : {"high", "low"}
        The state that the output is about to leave.
    ledger : Ledger
        Where named quantities are collected.

    Returns
    -------
    StateLaw
        The trip point at the signal, and every node's voltage over V_IN.
    """
    work = set_up(stage, state, ledger)
    net = netlist(stage.elements)
    minus = net.merged["minus"]
    inner = net.free - {"plus", minus}
    while inner:
        node = min(inner, key=lambda n: (len(work._links_of(n)), n != OUTPUT_NODE, n))
        work.eliminate(node)
        inner -= {node}
    if work.links:
        return _solve_coupled(work)
    held = minus in FIXED_NODES
    return _solve_apart(work, fixed(minus, stage) if held else _minus_potential(work))


def _minus_potential(work: Reduction) -> Potential:
    found = work.thevenin("minus")
    assert found is not None, "a floating input is refused before"
    potential, _ = found
    if potential.gain == 0 and len(work.sources["minus"]) > 1:
        return Potential(
            work.ledger.define(
                "V_minus", None, potential.constant, "voltage at the minus input", "V"
            )
        )
    return potential


def _conductance_sum(work: Reduction, node: str) -> tuple[sp.Expr, sp.Expr, sp.Expr]:
    """Conductance sum at an input, the current driven into it, and that current per V_IN."""
    sources = work.sources.get(node, [])
    total = sp.Add(*(s.branch.g for s in sources))
    driven = sp.Add(*(s.potential.constant * s.branch.g for s in sources))
    per_signal = sp.Add(*(s.potential.gain * s.branch.g for s in sources))
    named = work.define("S_", total, f"sum of conductances at the {node} input", "S")
    return named, driven - work.injections.get(node, sp.S.Zero), per_signal


def _solve_apart(work: Reduction, minus: Potential) -> StateLaw:
    """Solve where no resistor path couples the inputs."""
    total, driven, per_signal = _conductance_sum(work, "plus")
    offset = symbol("V_OS")
    if per_signal == 0:
        trip = (driven / total - offset - minus.constant) / minus.gain
    elif minus.gain == 0:
        trip = ((minus.constant + offset) * total - driven) / per_signal
    else:
        trip = ((minus.constant + offset) * total - driven) / (per_signal - total * minus.gain)
    plus = (driven + per_signal * symbol("V_IN")) / total
    return StateLaw(trip, work.back_substitute({"plus": plus, "minus": minus.value}))


def _solve_coupled(work: Reduction) -> StateLaw:
    """Solve where a resistor path leads from one input to the other.

    Without that path each input is a Thevenin source; V_OS drives a current through it.
    """
    g = sp.Add(*(link.branch.g for link in work.links))
    g = work.define("G_plusminus", g, "conductance between plus and minus", "S")
    sum_p, alone_p = _uncoupled(work, "plus")
    sum_n, alone_n = _uncoupled(work, "minus")
    loading = work.define(
        "K_plusminus", 1 + g / sum_p + g / sum_n, "loading factor between the inputs", "1"
    )
    trip = (symbol("V_OS") * loading - alone_p.constant + alone_n.constant) / (
        alone_p.gain - alone_n.gain
    )
    current = g * (alone_p.value - alone_n.value) / loading
    inputs = {"plus": alone_p.value - current / sum_p, "minus": alone_n.value + current / sum_n}
    return StateLaw(trip, work.back_substitute(inputs))


def _uncoupled(work: Reduction, node: str) -> tuple[sp.Expr, Potential]:
    """Conductance sum at an input, and its voltage, without the path to the other input."""
    sources = work.sources.get(node, [])
    total = sp.Add(*(s.branch.g for s in sources))
    driven = sp.Add(*(s.potential.constant * s.branch.g for s in sources))
    driven -= work.injections.get(node, sp.S.Zero)
    per_signal = sp.Add(*(s.potential.gain * s.branch.g for s in sources))
    place = f"at the {node} input, taken alone"
    total = work.define(f"S_{node}", total, f"sum of conductances {place}", "S")
    constant = work.define(f"E_{node}", driven / total, f"voltage {place}, signal at 0 V", "V")
    gain = work.define(f"k_{node}", per_signal / total, f"share of the signal {place}", "1")
    return total, Potential(constant, gain)

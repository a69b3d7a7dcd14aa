"""The circuit form: one of the twenty built in, or any resistive network of the user's own."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from itertools import product

from hystkit.base.errors import DesignError, Fault
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.checks import circuit_faults, infer_sense
from hystkit.circuit.elements import FIXED_NODES, Element, Resistor
from hystkit.circuit.forms import CHOICES, form_elements, optional_parts
from hystkit.circuit.reading import is_kind, wrong_kind


@dataclass(frozen=True)
class Stage:
    """A switching stage: what is wired with what, without values.

    Parameters
    ----------
    sense : {"inverting", "non-inverting"}
        Whether a rising signal drives the output low or high.
    supply : {"single", "split"}, default "single"
        A single supply has its negative rail at 0 V.
    reference : {"divider", "source", "ground"}, default "divider"
        What the signal is compared with; "ground" needs a split supply.
    output : {"push-pull", "open-collector"}, default "push-pull"
        How the device drives its output.
    including : iterable of str, default ()
        Optional parts that are fitted: R_S, R_L, and R_G and R_R where the form has them.

    Raises
    ------
    DesignError
        Naming every choice that does not exist or does not go with the others.

    See Also
    --------
    Stage.custom : any resistive network.

    Examples
    --------
    >>> Stage("inverting", reference="source").required
    ('R_R', 'R_F')
    """

    sense: str
    supply: str = "single"
    reference: str | None = "divider"
    output: str = "push-pull"
    including: tuple[str, ...] = ()
    wiring: tuple[Element, ...] = ()
    name: str = ""

    def __init__(
        self,
        sense: str,
        *,
        supply: str = "single",
        reference: str = "divider",
        output: str = "push-pull",
        including: Iterable[str] = (),
    ) -> None:
        chosen = {"sense": sense, "supply": supply, "reference": reference, "output": output}
        faults = _choice_faults(chosen)
        fitted = frozenset((including,) if isinstance(including, str) else including)
        optional = () if faults else optional_parts(sense, reference)
        if not faults:
            faults = [
                unknown_name_fault("optional part", n, optional)
                for n in sorted(fitted - {*optional})
            ]
        if faults:
            raise DesignError.of("this stage", faults)
        self._fill(**chosen, including=tuple(name for name in optional if name in fitted))

    @classmethod
    def custom(
        cls,
        elements: Iterable[Element],
        *,
        supply: str = "single",
        output: str = "push-pull",
        sense: str | None = None,
        name: str = "",
    ) -> Stage:
        """Take any resistive network as a stage.

        Parameters
        ----------
        elements : iterable of Resistor or Wire
            Between the nodes signal, plus, minus, out, cc, ee, ground, ref, pu, load and any
            internal ones.
        supply, output : str
            As for a built-in form.
        sense : {"inverting", "non-inverting"}, optional
            Needed only where the signal reaches both inputs.
        name : str, default ""
            What to call the circuit.

        Returns
        -------
        Stage
            A stage that everything downstream treats like a built-in one.

        Raises
        ------
        DesignError
            Naming everything that keeps the circuit from switching.
        """
        if is_kind(elements, str) or not is_kind(elements, Iterable):
            example = '[Resistor("R_F", "out", "plus"), Wire("signal", "minus"), ...]'
            told = wrong_kind("elements", elements, "a list of resistors and wires", example)
            raise DesignError.of("this circuit", [told])
        wiring = tuple(elements)
        chosen = {"supply": supply, "output": output} | ({"sense": sense} if sense else {})
        faults = [] if is_kind(name, str) else [wrong_kind("name", name, "text", f"'{name}'")]
        faults += [*_choice_faults(chosen), *circuit_faults(wiring, output, supply)]
        if not faults:
            found = infer_sense(wiring)
            faults = _sense_faults(sense, found)
            sense = sense or found
        if faults:
            raise DesignError.of("this circuit", faults)
        stage = object.__new__(cls)
        stage._fill(
            sense=sense, supply=supply, output=output, reference=None, wiring=wiring, name=name
        )
        return stage

    @staticmethod
    def all() -> tuple[Stage, ...]:
        """Give the twenty built-in forms, without optional parts.

        Returns
        -------
        tuple of Stage
            In the order of the choices sense, supply, reference, output.
        """
        return tuple(
            Stage(sense, supply=supply, reference=reference, output=output)
            for sense, supply, reference, output in product(*CHOICES.values())
            if supply == "split" or reference != "ground"
        )

    @property
    def is_custom(self) -> bool:
        """Whether the network is the user's own."""
        return bool(self.wiring)

    @cached_property
    def elements(self) -> tuple[Element, ...]:
        """The declared circuit."""
        if self.is_custom:
            return self.wiring
        assert self.reference is not None
        return form_elements(self.sense, self.reference, self.output, frozenset(self.including))

    @cached_property
    def parts(self) -> tuple[str, ...]:
        """Names of all resistors of the circuit."""
        return tuple(e.name for e in self.elements if isinstance(e, Resistor))

    @property
    def required(self) -> tuple[str, ...]:
        """Names of the parts that a design must give."""
        optional = self.optional
        return tuple(name for name in self.parts if name not in optional)

    @property
    def optional(self) -> tuple[str, ...]:
        """Names of the parts that a design may give."""
        return () if self.is_custom else optional_parts(self.sense, str(self.reference))

    @cached_property
    def sources(self) -> tuple[str, ...]:
        """Nodes held at a voltage that the circuit touches, without the signal."""
        used = {node for element in self.elements for node in element.nodes}
        return tuple(node for node in FIXED_NODES if node in used and node != "signal")

    @property
    def levels(self) -> tuple[str, ...]:
        """Voltages beside the rails that a design gives or that have a default."""
        outer = [FIXED_NODES[node] for node in self.sources if node in ("ref", "pu", "load")]
        driven = ["V_OH", "V_OL"] if self.output == "push-pull" else ["V_OL"]
        return (*outer, *driven)

    def with_options(self, *names: str) -> Stage:
        """Give the same form with exactly these optional parts fitted.

        Parameters
        ----------
        *names : str
            Optional parts of the form.

        Returns
        -------
        Stage
            This very stage where nothing changes.
        """
        if self.is_custom or set(names) == set(self.including):
            return self
        return Stage(
            self.sense,
            supply=self.supply,
            reference=str(self.reference),
            output=self.output,
            including=names,
        )

    @property
    def title(self) -> str:
        """One line that names the form."""
        if self.is_custom:
            return self.name or f"{self.sense} circuit of {len(self.parts)} resistors"
        return f"{self.sense}, {self.supply} supply, {self.reference} reference, {self.output}"

    def _fill(self, **values: object) -> None:
        for field in ("sense", "supply", "reference", "output"):
            object.__setattr__(self, field, values[field])
        for field, default in (("including", ()), ("wiring", ()), ("name", "")):
            object.__setattr__(self, field, values.get(field, default))


def _choice_faults(chosen: dict[str, str]) -> list[Fault]:
    faults = [
        unknown_name_fault(choice, value, CHOICES[choice])
        for choice, value in chosen.items()
        if value not in CHOICES[choice]
    ]
    if chosen.get("reference") == "ground" and chosen["supply"] == "single":
        faults.append(
            Fault(
                "a ground reference cannot work in a single supply.",
                asked='reference "ground", supply "single"',
                rule="the output must swing to both sides of the reference",
                remedy='supply="split", or reference="divider" or "source"',
            )
        )
    return faults


def _sense_faults(given: str | None, found: str | None) -> list[Fault]:
    if given is None and found is None:
        return [
            Fault(
                "the signal reaches both inputs, so the wiring does not tell the sense.",
                have="a path from signal to plus and one to minus",
                rule="the part values decide whether a rising signal drives the output high",
                remedy='sense="inverting" or sense="non-inverting"',
            )
        ]
    if given and found and given != found:
        return [
            Fault(
                f"the wiring is {found}.",
                asked=f'sense="{given}"',
                have=f"the signal reaches the {'plus' if found == 'non-inverting' else 'minus'}"
                " input only",
                remedy=f'sense="{found}", or leave it out',
            )
        ]
    return []

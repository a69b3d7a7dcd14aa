r"""A reference source behind its resistor, and the divider that is the same to the stage.

.. math:: V_{REF} = \frac{V_{CC}/R_T + V_{EE}/R_B}{1/R_T + 1/R_B}, \qquad R_R = R_T \parallel R_B

References
----------
L. Thévenin, Extension de la loi d'Ohm aux circuits électromoteurs complexes, Annales
télégraphiques 10 (1883), 222-224.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, InfeasibleError, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.quantity import code, read, show
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.preferred import values as preferred_values
from hystkit.circuit.reading import Quantity, collect
from hystkit.circuit.stage import Stage
from hystkit.numeric.fractions import slopes
from hystkit.numeric.trips import trip_points

#: Preferred values are looked for within this ratio of the exact ones.
_REACH = 10.0


@dataclass(frozen=True)
class Equivalent(Viewed):
    """The same stage with another kind of reference.

    Attributes
    ----------
    given : Design
        As it was.
    exact : Design
        With the exact Thevenin equivalent.
    design : Design
        With real values; the exact one where none were asked for.
    """

    given: Design
    exact: Design
    design: Design

    @property
    def shift(self) -> dict[str, float]:
        """How far real values move either trip, "upper" and "lower" [V]."""
        before, after = trip_points(self.given), trip_points(self.design)
        return {n: float(getattr(after, n) - getattr(before, n)) for n in ("upper", "lower")}

    @property
    def per_volt(self) -> dict[str, tuple[float, float]]:
        """Derivative of either trip by V_CC, before and after [V/V].

        The two references are equal at the stated supply only.
        """
        before, after = (slopes(one, ["V_CC"]) for one in (self.given, self.design))
        return {n: (before[n]["V_CC"], after[n]["V_CC"]) for n in ("upper", "lower")}

    @property
    def _title(self) -> str:
        return f"{self.given.stage.title}, with a {self.design.stage.reference} as reference"

    def _fields(self) -> Sequence[Field]:
        rows = []
        for name in ("R_T", "R_B", "R_R"):
            if name in self.design.parts:
                exact = show(self.exact.parts[name].value, "Ω", 6)
                value = code(self.design.parts[name].value, 6)
                rows.append(Field(name, value, "", f"exactly {exact}"))
        if "V_REF" in self.design.levels:
            exact = show(self.exact.levels["V_REF"].value, "V", 6)
            value = show(self.design.levels["V_REF"].value, "V", 6)
            rows.append(Field("V_REF", value, "", f"exactly {exact}"))
        rows += [Field(f"{n} moves by", moved, "V") for n, moved in self.shift.items()]
        for name, (before, after) in self.per_volt.items():
            note = f"{show(before, 'V/V')} before"
            rows.append(Field(f"{name} per volt of V_CC", after, "V/V", note))
        return rows


def as_divider(
    design: Design,
    *,
    series: str | None = None,
    resistance: Quantity | None = None,
    tol: Quantity | None = None,
) -> Equivalent:
    """Replace a reference source, or a ground reference, by a divider of the supply.

    Parameters
    ----------
    design : Design
        With the reference "source" or "ground".
    series : str, optional
        Preferred series of real values; the exact ones when left out.
    resistance : float or str, optional
        Resistance of the divider where the reference is wired to its input without a resistor
        [Ohm].
    tol : float or str, optional
        Tolerance of the two resistors; that of the resistor they replace when left out.

    Returns
    -------
    Equivalent
        Trips are the same at the stated supply. They follow V_CC from then on. Of real values
        those within a decade of the exact ones that move the trips least, and among equals those
        of the nearest resistance.

    Raises
    ------
    InputError
        If there is no such reference to replace, or its resistance is neither there nor given.
    InfeasibleError
        If the reference voltage is not between the rails.

    Examples
    --------
    >>> stage = Stage("inverting", reference="source")
    >>> source = Design(stage, {"R_R": "10k", "R_F": "90k"}, supply=5.0, levels={"V_REF": 2.5})
    >>> found = as_divider(source)
    >>> found.exact.parts["R_T"].value, found.exact.parts["R_B"].value
    (20000.0, 20000.0)
    """
    reference = _reference(design, ("source", "ground"), "as_divider")
    level, resistor = _source(design, reference, resistance)
    high, low = design.supply.v_cc, design.supply.low_rail
    if not low < level.value < high:
        raise InfeasibleError(
            "no divider of the supply gives this reference.",
            asked=f"V_REF = {show(level.value, 'V')}",
            have=f"rails {show(low, 'V')} and {show(high, 'V')}",
            rule="a divider gives voltages between the rails",
            remedy="a reference between the rails, or another supply",
        )
    across = resistor.value * (high - low)
    exact = {"R_T": across / (level.value - low), "R_B": across / (high - level.value)}
    share = resistor.tol if tol is None else _tolerance(tol)

    def built(values: dict[str, float]) -> Design:
        parts = {n: Part(value, share, resistor.tempco) for n, value in values.items()}
        return _changed(design, "divider", parts, {})

    whole = built(exact)
    if series is None:
        return Equivalent(design, whole, whole)
    return Equivalent(design, whole, built(_nearest(design, whole, exact, {}, series)))


def as_source(
    design: Design,
    *,
    series: str | None = None,
    references: Sequence[Quantity] | None = None,
    tol: Quantity | None = None,
    reference_tol: Quantity = 0.0,
) -> Equivalent:
    """Replace a divider, or a ground reference, by a source behind a resistor.

    Parameters
    ----------
    design : Design
        With the reference "divider" or "ground".
    series : str, optional
        Preferred series of real values of R_R; the exact one when left out.
    references : sequence of float or str, optional
        Voltages that sources at hand have [V]; the exact one when left out.
    tol : float or str, optional
        Tolerance of R_R; the larger one of the resistors it replaces when left out.
    reference_tol : float or str, default 0
        Tolerance of the source.

    Returns
    -------
    Equivalent
        Trips are the same at the stated supply. The reference does not follow V_CC from then on.

    Raises
    ------
    InputError
        If there is no such reference to replace, or a voltage cannot be read.

    Examples
    --------
    >>> tank = Design(Stage("inverting"), {"R_T": "20k", "R_B": "20k", "R_F": "90k"}, supply=5.0)
    >>> found = as_source(tank)
    >>> found.exact.parts["R_R"].value, found.exact.levels["V_REF"].value
    (10000.0, 2.5)
    """
    reference = _reference(design, ("divider", "ground"), "as_source")
    if reference == "ground":
        level, resistor = _source(design, reference, None)
    else:
        level, resistor = _thevenin(design)
    share = resistor.tol if tol is None else _tolerance(tol)
    volts = _read_references(references)
    exact = {"R_R": resistor.value, "V_REF": level.value}

    def built(values: dict[str, float]) -> Design:
        parts = {"R_R": Part(values["R_R"], share, resistor.tempco)}
        level = Part(values["V_REF"], _tolerance(reference_tol))
        return _changed(design, "source", parts, {"V_REF": level})

    whole = built(exact)
    if series is None and volts is None:
        return Equivalent(design, whole, whole)
    ohms = {"R_R": resistor.value}
    levels = {"V_REF": np.array(volts or [level.value])}
    return Equivalent(design, whole, built(_nearest(design, whole, ohms, levels, series)))


def _reference(design: Design, known: tuple[str, ...], name: str) -> str:
    reference = None if design.stage.is_custom else design.stage.reference
    if reference not in known:
        raise InputError(
            f"{name} has no reference to replace here.",
            asked=design.stage.title,
            have="an own circuit" if reference is None else f"the reference {reference!r}",
            rule=f"a built-in form with the reference {' or '.join(map(repr, known))}",
        )
    return reference


def _source(design: Design, reference: str, resistance: Quantity | None) -> tuple[Part, Part]:
    """Voltage of a source or of ground, and what stands between it and its input."""
    level = design.levels["V_REF"] if reference == "source" else Part(0.0)
    name = "R_B" if reference == "ground" and design.stage.sense == "inverting" else "R_R"
    if name in design.parts:
        if resistance is not None:
            raise InputError(
                f"the resistance is that of {name} already.",
                asked=f"resistance={resistance!r}",
                have=f"{name} = {show(design.parts[name].value, 'Ω')}",
                remedy="leave resistance out",
            )
        return level, design.parts[name]
    if resistance is None:
        raise InputError(
            "the reference is wired to its input, and a divider has a resistance.",
            asked="a divider",
            have=f"no {name}",
            rule="a bias current moves the trips by its voltage across the divider's resistance",
            remedy='resistance="10k", or fit R_R first',
        )
    return level, Part(read(resistance, unit="Ω", name="resistance"))


def _thevenin(design: Design) -> tuple[Part, Part]:
    """Open-circuit voltage and resistance of the divider."""
    top, bottom = design.parts["R_T"], design.parts["R_B"]
    both = 1 / top.value + 1 / bottom.value
    volts = design.supply.v_cc / top.value + design.supply.low_rail / bottom.value
    tol, tempco = max(top.tol, bottom.tol), max(abs(top.tempco), abs(bottom.tempco))
    return Part(volts / both), Part(1 / both, tol, tempco)


def _changed(
    design: Design, reference: str, parts: dict[str, Part], levels: dict[str, Part]
) -> Design:
    """Build the same design with another reference."""
    stage = design.stage
    other = Stage(
        stage.sense,
        supply=stage.supply,
        reference=reference,
        output=stage.output,
        including=[name for name in stage.including if name != "R_R"],
    )
    kept = {n: part for n, part in design.parts.items() if n not in ("R_T", "R_B", "R_R")}
    others = {n: level for n, level in design.levels.items() if n != "V_REF"}
    if reference == "source" and stage.sense == "non-inverting":
        other = other.with_options(*other.including, "R_R")
    return Design(
        other,
        {**kept, **parts},
        supply=design.supply,
        device=design.device,
        levels={**others, **levels},
        signal=design.signal,
        name=design.name,
    )


def _nearest(
    given: Design,
    exact: Design,
    ohms: dict[str, float],
    levels: dict[str, Any],
    series: str | None,
) -> dict[str, float]:
    """Choose the real values that move the trips least."""
    axes = {
        name: np.array([value] if series is None
                       else preferred_values(series, value / _REACH, value * _REACH))
        for name, value in ohms.items()
    }  # fmt: skip
    axes |= levels
    grid = dict(zip(axes, map(np.ravel, np.meshgrid(*axes.values())), strict=True))
    wanted, trips = trip_points(given), trip_points(exact, **grid)
    moved = np.maximum(abs(trips.upper - wanted.upper), abs(trips.lower - wanted.lower))
    # Where only the ratio matters, the resistance decides among equals.
    far = np.sum([np.abs(np.log(grid[name] / value)) for name, value in ohms.items()], axis=0)
    best = int(np.lexsort((far, np.round(np.nan_to_num(moved, nan=np.inf), 12)))[0])
    return {name: float(values[best]) for name, values in grid.items()}


def _read_references(references: Sequence[Quantity] | None) -> list[float] | None:
    if references is None:
        return None
    faults: list[Fault] = []
    found = [collect(faults, partial(read, v, unit="V", name="references")) for v in references]
    if not found:
        faults.append(Fault("no reference is at hand.", asked="references=()",
                            remedy='references=("1.25 V", "2.5 V")'))  # fmt: skip
    if faults:
        raise InputError.of("these references", faults)
    return found


def _tolerance(tol: Quantity) -> float:
    return Part(1.0, tol).tol

"""Size and judge what a stage drives: a coil behind a switch, an LED, an optocoupler."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypedDict, Unpack, overload

from hystkit.analyses.drive.choice import largest_resistor
from hystkit.analyses.drive.coil import Coil
from hystkit.analyses.drive.lamps import Led, Optocoupler
from hystkit.analyses.drive.led import LedDrive
from hystkit.analyses.drive.port import Loaded, Port
from hystkit.analyses.drive.result import Drive
from hystkit.analyses.drive.switched import MosfetDrive, TransistorDrive
from hystkit.analyses.drive.switches import Mosfet, Transistor
from hystkit.base.errors import Fault, InputError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import parse_percent, read
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.preferred import SERIES
from hystkit.circuit.reading import Quantity, collect, is_kind, wrong_kind

#: Where the other end of an LED may be.
ENDS = ("ground", "supply")
#: Stands for the resistance of a wire and of the junction itself [Ohm].
WIRE = 1.0


class _Choices(TypedDict, total=False):
    """What may be chosen by name."""

    resistor: Quantity | None
    series: str
    tol: Quantity
    to: str


@dataclass(frozen=True)
class _Resistor:
    """How the resistor of a junction is found."""

    value: float | None
    tol: float
    series: str


@overload
def drive(
    design: Design, switch: Transistor, load: Coil, **more: Unpack[_Choices]
) -> TransistorDrive: ...
@overload
def drive(design: Design, switch: Mosfet, load: Coil, **more: Unpack[_Choices]) -> MosfetDrive: ...
@overload
def drive(
    design: Design,
    switch: None = None,
    *,
    load: Led | Optocoupler,
    **more: Unpack[_Choices],
) -> LedDrive: ...
@overload
def drive(
    design: Design,
    switch: Transistor | Mosfet | None = None,
    load: Coil | Led | Optocoupler | None = None,
    **more: Unpack[_Choices],
) -> Drive: ...
def drive(
    design: Design,
    switch: Transistor | Mosfet | None = None,
    load: Coil | Led | Optocoupler | None = None,
    *,
    resistor: Quantity | None = None,
    series: str = "E24",
    tol: Quantity = 0.05,
    to: str = "ground",
) -> Drive:
    """Find what a stage needs to drive a load, and what the load does to the stage.

    Parameters
    ----------
    design : Design
        Without R_L.
    switch : Transistor or Mosfet, optional
        Low-side switch for a coil, its emitter or source at ground; left out for an LED, which
        hangs at the output itself.
    load : Coil, Led or Optocoupler
        What is driven; see `drives`.
    resistor : float or str, optional
        Between the output and a base or an LED [Ohm]; 0 for none at all. Chosen when left out.
    series : str, default "E24"
        Preferred series that it is chosen from.
    tol : float or str, default 0.05
        Its tolerance, and that of the resistors at a gate.
    to : {"ground", "supply"}, default "ground"
        Where the other end of an LED is: lit while the output is high, or low.

    Returns
    -------
    Drive
        With the resistor, currents, heat, the loaded design and its trip points. The resistor is
        the largest of its series with which the load gets its current over all tolerances of the
        design, of the resistor and of the junction.

    Raises
    ------
    InputError
        Naming everything that does not go together.
    InfeasibleError
        If no resistor gives the load its current; names a pull-up with which one does.

    Notes
    -----
    Static, with junctions of constant voltage. The stage is solved with the load in place: behind
    a pull-up the current of a base comes through R_PU, and a base holds the output down. Each
    state is looked at where the stage leaves it, at its trip.

    Examples
    --------
    >>> from hystkit.circuit.demo import header_tank
    >>> from hystkit.analyses.drive import drives
    >>> relay = drives.Coil("360", inductance="0.7", voltage=12)
    >>> found = drive(header_tank(), drives.Transistor(beta=100), relay)
    >>> found.resistor.value
    1200.0
    """
    faults: list[Fault] = [*_kind_faults(design, switch, load), *_pair_faults(switch, load, to)]
    if to not in ENDS:
        faults.append(unknown_name_fault("end of an LED", to, ENDS))
    if isinstance(switch, Mosfet) and resistor is not None:
        told = Fault(
            "the gate resistor is part of the MOSFET's description.",
            asked=f"resistor={resistor!r}",
            remedy=f"hk.drives.Mosfet(..., gate_resistor={resistor!r})",
        )
        faults.append(told)
    fitted = _read_resistor(faults, resistor, tol, series)
    if faults:
        raise InputError.of("this drive", faults)
    if isinstance(load, Coil):
        if isinstance(switch, Transistor):
            return _transistor_drive(design, switch, load, fitted)
        assert isinstance(switch, Mosfet)
        return _mosfet_drive(design, switch, load, fitted.tol)
    assert load is not None
    port = Port(Part(WIRE, fitted.tol), load.v_f, below_supply=to == "supply")
    loaded, direct = _with_resistor(Loaded(design, port), load.current, fitted)
    return LedDrive(loaded=loaded, direct=direct, load=load)


def _transistor_drive(
    design: Design, switch: Transistor, load: Coil, fitted: _Resistor
) -> TransistorDrive:
    # The least base-emitter resistor takes the most from the base.
    shunt = 0.0 if switch.base_emitter is None else 1 / (switch.base_emitter * (1 - fitted.tol))
    port = Port(Part(WIRE, fitted.tol), switch.v_be, shunt=shunt)
    needed = load.largest_current / switch.forced_beta
    loaded, direct = _with_resistor(Loaded(design, port), needed, fitted)
    return TransistorDrive(loaded=loaded, direct=direct, switch=switch, load=load)


def _mosfet_drive(design: Design, switch: Mosfet, load: Coil, tol: float) -> MosfetDrive:
    port = None
    if switch.pull_down is not None:
        port = Port(Part(switch.gate_resistor + switch.pull_down, tol))
    loaded = Loaded(design, port)
    return MosfetDrive(loaded=loaded, direct=False, switch=switch, load=load, tol=tol)


def _with_resistor(loaded: Loaded, needed: float, fitted: _Resistor) -> tuple[Loaded, bool]:
    """Give the load its resistor, and tell whether it has none."""
    if fitted.value is None:
        return largest_resistor(loaded, needed, fitted.series), False
    return loaded.with_resistance(fitted.value or WIRE), fitted.value == 0


def _kind_faults(design: Any, switch: Any, load: Any) -> list[Fault]:
    wanted = [
        ("design", design, Design, "a Design", "hk.Design(stage, parts, supply=5.0)"),
        (
            "switch",
            switch,
            Transistor | Mosfet | None,
            "a switch",
            "hk.drives.Transistor(beta=100)",
        ),
        (
            "load",
            load,
            Coil | Led | Optocoupler,
            "a load",
            'hk.drives.Coil("360", inductance="0.7", voltage=12)',
        ),
    ]
    return [
        wrong_kind(name, given, title, remedy)
        for name, given, kind, title, remedy in wanted
        if not is_kind(given, kind)
    ]


def _pair_faults(switch: Any, load: Any, to: str) -> list[Fault]:
    if isinstance(load, Coil) and switch is None:
        return [
            Fault(
                "a coil needs a switch.",
                asked="a coil at the output itself",
                rule="an output neither carries the current of a coil nor takes its kick-back",
                remedy="hk.drives.Transistor(beta=100), or hk.drives.Mosfet",
            )
        ]
    if isinstance(load, Led | Optocoupler) and switch is not None:
        return [
            Fault(
                "an LED hangs at the output itself here.",
                asked=f"an LED behind a {type(switch).__name__}",
                remedy="leave switch out",
            )
        ]
    if isinstance(load, Coil) and to == "supply":
        return [
            Fault(
                "a low-side switch is driven to ground.",
                asked='to="supply"',
                rule='to="supply" is for an LED',
                remedy="leave to out",
            )
        ]
    return []


def _read_resistor(
    faults: list[Fault], resistor: Quantity | None, tol: Quantity, series: str
) -> _Resistor:
    value = None
    if resistor is not None:
        value = collect(faults, lambda: read(resistor, unit="Ω", name="resistor"))
        if value < 0:
            faults.append(
                Fault(
                    "the resistor is negative.",
                    asked=f"resistor={resistor!r}",
                    rule="resistor >= 0 [Ω]",
                    remedy="leave it out to have it chosen",
                )
            )
    share = collect(faults, lambda: parse_percent(tol, name="tol"))
    # What could not be read is NaN here, and a fault already.
    if share < 0 or share >= 1:
        faults.append(
            Fault("tol is outside its range.", asked=f"tol={tol!r}", rule="0 <= tol < 1",
                  remedy='"5 %"')
        )  # fmt: skip
    if series not in SERIES:
        faults.append(unknown_name_fault("preferred series", series, SERIES))
    return _Resistor(value, share, series)

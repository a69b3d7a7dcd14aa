"""What a stage is in service for, as far as it is declared: noise, plant, load, what it drives."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields
from typing import Any

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.drive.result import Drive
from hystkit.analyses.load_step.result import LoadStep
from hystkit.analyses.load_step.step import load_step
from hystkit.analyses.noise.model import Noise
from hystkit.base.errors import Fault, InputError, UnknownNameError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity, collect, is_kind, wrong_kind

#: Probability of a further transition per passage that is asked for unless another is given.
PROBABILITY = 1e-3


_KINDS: dict[str, tuple[Any, str]] = {
    "noise": (Noise, 'hk.Noise.two_pole(rms="2m", f1="1k", f2="1M")'),
    "plant": (Plant, "hk.FirstOrder(tau=600, on_level=40, off_level=10)"),
    "drive": (Drive, "hk.drive(design, switch, load)"),
    "load_step": (LoadStep, "hk.load_step(design, current=9, source_resistance=0.035)"),
}
_UNITS = {
    "slope": "V/s",
    "probability": "",
    "starts_per_hour": "",
    "min_on": "s",
    "min_off": "s",
}


def _read(faults: list[Fault], name: str, value: Any) -> Any:
    if value is None:
        return None
    if name == "hum":
        return read_hum(faults, value)
    if name in _KINDS:
        kind, example = _KINDS[name]
        if not is_kind(value, kind):
            faults.append(wrong_kind(name, value, f"a {kind.__name__}", f"{name}={example}"))
        elif name == "plant" and value.shape:
            faults.append(
                Fault(
                    "a review is for one plant.",
                    have=f"plants of shape {value.shape}",
                    remedy="one value of each, or hk.steady_cycle for all of them",
                )
            )
        return value
    number = collect(faults, lambda: read(value, unit=_UNITS[name], name=name))
    share = name == "probability"
    if number <= 0 or (share and number >= 1):
        faults.append(out_of_range(name, number, share))
    return number


def out_of_range(name: str, number: float, share: bool) -> Fault:
    """Give the fault of a number that has to be positive, and below 1 where it is a share.

    Parameters
    ----------
    name : str
        Of the argument.
    number : float
        As it was given.
    share : bool
        Whether it is a share.

    Returns
    -------
    Fault
        To be reported.
    """
    return Fault(
        f"{name} is not {'between 0 and 1' if share else 'above 0'}.",
        asked=f"{name} = {number:g}",
        rule=f"0 < {name} < 1" if share else f"{name} > 0",
        remedy="leave it out for the usual value" if share else "its magnitude, or leave it out",
    )


def read_hum(faults: list[Fault], value: Any) -> tuple[float, float] | None:
    """Read amplitude and frequency of hum.

    Parameters
    ----------
    faults : list of Fault
        Where what cannot be used is added.
    value : pair of float or str
        Amplitude [V] and frequency [Hz].

    Returns
    -------
    tuple of float or None
        None where it is no pair.
    """
    if isinstance(value, str) or not hasattr(value, "__len__") or len(value) != 2:
        faults.append(wrong_kind("hum", value, "a pair", 'hum=("30 mV", "100 Hz")'))
        return None
    amplitude = collect(faults, lambda: read(value[0], unit="V", name="hum amplitude"))
    frequency = collect(faults, lambda: read(value[1], unit="Hz", name="hum frequency"))
    if amplitude <= 0 or frequency <= 0:
        faults.append(
            Fault(
                "amplitude and frequency of hum are not both above 0.",
                asked=f"hum = {value!r}",
                rule="amplitude and frequency > 0",
                remedy='hum=("30 mV", "100 Hz"), or leave it out',
            )
        )
    return amplitude, frequency


@dataclass(frozen=True)
class Service:
    """What is declared about service; a check without what it needs does not apply.

    Parameters
    ----------
    noise : Noise, optional
        On the signal [V].
    slope : float or str, optional
        Of the signal at the trips [V/s]; from the plant's cycle where left out.
    probability : float, default 1e-3
        Allowed probability of a further transition per passage.
    hum : pair of float or str, optional
        Amplitude [V] and frequency [Hz] of hum on the signal.
    plant : Plant, optional
        What the load acts on, in the unit of the signal.
    starts_per_hour : float or str, optional
        At most.
    min_on, min_off : float or str, optional
        Shortest time on and off that the load stands [s].
    drive : Drive, optional
        What the output drives, as `hk.drive` found it.
    load_step : LoadStep, optional
        What the load's current does to the stage, as `hk.load_step` found it; for another design
        it is found again.

    Raises
    ------
    InputError
        Naming everything that cannot be used.
    """

    noise: Noise | None = None
    slope: float | None = None
    probability: float = PROBABILITY
    hum: tuple[float, float] | None = None
    plant: Plant | None = None
    starts_per_hour: float | None = None
    min_on: float | None = None
    min_off: float | None = None
    drive: Drive | None = None
    load_step: LoadStep | None = None

    def __init__(
        self,
        noise: Noise | None = None,
        slope: Quantity | None = None,
        probability: Quantity = PROBABILITY,
        hum: tuple[Quantity, Quantity] | None = None,
        plant: Plant | None = None,
        starts_per_hour: Quantity | None = None,
        min_on: Quantity | None = None,
        min_off: Quantity | None = None,
        drive: Drive | None = None,
        load_step: LoadStep | None = None,
    ) -> None:
        given = locals()
        faults: list[Fault] = []
        for field in fields(self):
            object.__setattr__(self, field.name, _read(faults, field.name, given[field.name]))
        if faults:
            raise InputError.of("this service", faults)


def at(step: LoadStep, design: Design) -> LoadStep:
    """Give the same load at a design.

    Parameters
    ----------
    step : LoadStep
        Of this design, or of another one.
    design : Design
        That switches it.

    Returns
    -------
    LoadStep
        As `load_step` finds it there.
    """
    return step if step.design == design or not step.asked else load_step(design, **step.asked)


#: A stage of whose service nothing is known.
NOTHING_DECLARED = Service()


def service_of(given: Mapping[str, Any]) -> Service:
    """Read declarations by name.

    Parameters
    ----------
    given : mapping of str to object
        Arguments of `Service`.

    Returns
    -------
    Service
        With what was declared.

    Raises
    ------
    UnknownNameError
        Naming every declaration that does not exist.
    """
    known = [field.name for field in fields(Service)]
    faults = [unknown_name_fault("declaration", n, known) for n in given if n not in known]
    if faults:
        raise UnknownNameError.of("this review", faults)
    return Service(**given)

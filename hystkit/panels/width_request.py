"""What a width panel asks, and how its fields are read and written."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace
from functools import partial
from typing import Any

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.load_step.result import LoadStep
from hystkit.analyses.noise.model import Noise
from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read
from hystkit.circuit.design import Design
from hystkit.circuit.reading import Quantity
from hystkit.panels.cycle_request import NUMBERS, CycleRequest, begun_with, numbers_of
from hystkit.panels.cycle_rows import write_level
from hystkit.panels.texts import amount
from hystkit.panels.windows import read_temperatures, write_temperatures
from hystkit.review.cycling import first_plant
from hystkit.review.window.conditions import read_conditions

#: Changes that `WindowPanel.set` takes for the plant and the noise of the request.
PLANT_NUMBERS = frozenset({"kind", "dead_time"}.union(*NUMBERS.values()))
NOISE_RMS = "noise_rms"
#: What a review takes of a request.
_DECLARED = ("noise", "slope", "probability", "plant", "starts_per_hour", "min_on", "min_off")
_APART = ","
_DIGITS = 4


@dataclass(frozen=True)
class WindowRequest:
    """What a `WindowPanel` asks; None stands for what is not asked for.

    Attributes
    ----------
    load : {"high", "low"}
        Output state in which the load is on.
    noise : Noise or None
        On the signal [V].
    probability : float or None
        Allowed probability of a further transition per passage; None for 1e-3.
    slope : float or None
        Of the signal at the trips [V/s]; None for that of the plant's cycle.
    hum : pair of float or None
        Amplitude [V] and frequency [Hz] of hum on the signal.
    load_step : LoadStep, float or None
        What the load's own step takes of the width [V].
    plant : Plant or None
        What the load acts on, in the unit of the signal.
    starts_per_hour : float or None
        At most [1/h].
    min_on, min_off : float or None
        Shortest time on and off [s].
    swing : float or None
        Largest swing of the process value, in the unit of the signal.
    accuracy : float or None
        Largest distance of either trip from the middle, in the unit of the signal.
    uncertainty : float or None
        How far either trip may lie off, in the unit of the signal; None for the tolerances.
    error_share : float or None
        Share of the width that offset and bias currents may take; None for a tenth.
    temperature : tuple of float, or None
        Range in service [°C]; None leaves drift out.
    """

    load: str = "high"
    noise: Noise | None = None
    probability: Quantity | None = None
    slope: Quantity | None = None
    hum: tuple[Quantity, Quantity] | None = None
    load_step: LoadStep | Quantity | None = None
    plant: Plant | None = None
    starts_per_hour: Quantity | None = None
    min_on: Quantity | None = None
    min_off: Quantity | None = None
    swing: Quantity | None = None
    accuracy: Quantity | None = None
    uncertainty: Quantity | None = None
    error_share: Quantity | None = None
    temperature: tuple[float, float] | None = None

    @property
    def noise_rms(self) -> float | None:
        """Strength of the noise [V]."""
        return None if self.noise is None else self.noise.rms

    def asked(self) -> dict[str, Any]:
        """Give what is asked for.

        Returns
        -------
        dict
            Arguments of `width_window`.
        """
        return {f.name: getattr(self, f.name) for f in fields(self)}

    def declared(self) -> dict[str, Any]:
        """Give what a review takes of it.

        Returns
        -------
        dict
            Declarations that are made. The load's step is none of them: what it takes belongs to
            the design that it was found for.
        """
        given = {name: getattr(self, name) for name in _DECLARED}
        return {name: value for name, value in given.items() if value is not None}

    def in_numbers(self, unit: str) -> WindowRequest:
        """Give the same with every text read.

        Parameters
        ----------
        unit : str
            Of the measurand.

        Returns
        -------
        WindowRequest
            With numbers in SI units, or in `unit`; what a `LoadStep` takes to four digits, as its
            field shows it.

        Raises
        ------
        InputError
            Naming everything that cannot be used, or is missing for what is asked.
        """
        numbers = read_conditions(self.asked(), unit)
        if isinstance(self.load_step, LoadStep):
            numbers["load_step"] = float(f"{numbers['load_step']:.{_DIGITS}g}")
        return replace(self, **{n: v for n, v in numbers.items() if v is not None})


def plant_request(plant: Plant) -> CycleRequest:
    """Give a plant by its numbers, as its rows show it.

    Parameters
    ----------
    plant : Plant
        A single one.

    Returns
    -------
    CycleRequest
        With its kind and its numbers.
    """
    return CycleRequest(**numbers_of(plant))


def edited_plant(
    kept: Mapping[str, Any], numbers: Mapping[str, Any], design: Design, load: str
) -> Plant:
    """Give a plant with other numbers, or of another kind.

    Parameters
    ----------
    kept : mapping
        Fields of a `CycleRequest` to begin with, as `numbers_of` gives them; empty for a lag that
        suits the band.
    numbers : mapping
        Of `PLANT_NUMBERS`.
    design : Design
        Gives the unit, and the numbers that are not kept.
    load : {"high", "low"}
        Output state in which the load is on.

    Returns
    -------
    Plant
        A single one.

    Raises
    ------
    PlantError
        Naming everything that cannot be used.
    """
    first = begun_with(first_plant(design, load))
    request = CycleRequest(**{**first, **kept, **numbers})
    return request.plant(unit_of(design))


def edited_noise(noise: Noise | None, rms: Quantity | None) -> Noise | None:
    """Give noise of another strength.

    Parameters
    ----------
    noise : Noise or None
        To begin with.
    rms : float, str or None
        [V]; None for no noise.

    Returns
    -------
    Noise or None
        Of the same kind.

    Raises
    ------
    InputError
        If there is no noise to begin with, or the strength cannot be used.
    """
    if rms is None:
        return None
    strength = read(rms, unit="V", name="noise rms")
    if not strength > 0:
        fault = Fault("noise rms is out of range.", f"{strength:g} V", rule="noise rms > 0")
        raise InputError.of("this entry", [fault])
    if noise is None:
        fault = Fault(
            "nothing tells the spectrum of the noise.",
            remedy='panel.set(noise=hk.Noise.two_pole(rms="1m", f1=10, f2="100k"))',
        )
        raise InputError.of("this entry", [fault])
    # The product of the quotient may be a last digit off what was typed.
    return replace(noise.scaled(strength / noise.rms), rms=strength)


def unit_of(design: Design) -> str:
    """Give the unit of the measurand.

    Parameters
    ----------
    design : Design
        With a signal or without.

    Returns
    -------
    str
        "V" without a signal.
    """
    return "V" if design.signal is None else design.signal.unit


@dataclass(frozen=True)
class Entry:
    """A field of the request as it stands in the control column.

    Attributes
    ----------
    name, label, says : str
        Of the field, before it, and its accessible name.
    placeholder : str
        What it shows while it is empty.
    read, write : callable
        Text to value and back; empty for None.
    """

    name: str
    label: str
    says: str
    placeholder: str
    read: Callable[[str], Any]
    write: Callable[[Any], str]


def disturbance_entries() -> list[Entry]:
    """Give the fields for what disturbs the signal.

    Returns
    -------
    list of Entry
        From top to bottom.
    """
    return [
        _number(NOISE_RMS, "noise, rms", "rms of the noise on the signal [V]", "V"),
        _number("probability", "allowed share",
                "allowed probability of a further transition per passage", "", "0.001"),
        _number("slope", "slope", "slope of the signal at the trips [V/s]", "V/s", "by the plant"),
        Entry("hum", "hum", "amplitude and frequency of hum, such as 30 mV, 100 Hz",
              _NOT_ASKED, _read_hum, _write_hum),
        _number("load_step", "load step", "what the load's own step takes of the width [V]", "V"),
    ]  # fmt: skip


def requirement_entries(unit: Callable[[], str]) -> list[Entry]:
    """Give the fields for what plant and load ask.

    Parameters
    ----------
    unit : callable
        Gives the unit of the measurand.

    Returns
    -------
    list of Entry
        From top to bottom.
    """

    def quantity(name: str, label: str, says: str, placeholder: str = _NOT_ASKED) -> Entry:
        def written(value: float | None) -> str:
            return "" if value is None else write_level(value, unit())

        return Entry(
            name, label, says, placeholder, lambda text: _read(label, unit(), text), written
        )

    return [
        _number("starts_per_hour", "starts per h",
                "starts per hour that the load stands at most", ""),
        _number("min_on", "on at least", "shortest time that the load stays on [s]", "s"),
        _number("min_off", "off at least", "shortest time that the load stays off [s]", "s"),
        quantity("swing", "swing", "largest swing of the process value"),
        quantity("accuracy", "accuracy", "largest distance of either trip from the middle"),
        quantity("uncertainty", "trips within", "how far either trip may lie off",
                 "by tolerances"),
        _number("error_share", "offset share",
                "share of the width that offset and bias currents may take", "%", "10 %"),
        Entry("temperature", "temperature", "range of temperature in service, such as -20 to 60 °C",
              "no drift", read_temperatures, write_temperatures),
    ]  # fmt: skip


_NOT_ASKED = "not asked"


def _number(name: str, label: str, says: str, unit: str, placeholder: str = _NOT_ASKED) -> Entry:
    return Entry(name, label, says, placeholder, partial(_read, label, unit), partial(_write, unit))


def _read(name: str, unit: str, text: str) -> float | None:
    return read(text, unit=unit, name=name) if text.strip() else None


def _write(unit: str, value: float | None) -> str:
    return "" if value is None else amount(value, unit)


def _read_hum(text: str) -> tuple[float, float] | None:
    if not text.strip():
        return None
    pieces = text.split(_APART)
    if len(pieces) != 2:
        fault = Fault("hum has an amplitude and a frequency.", text, remedy="30 mV, 100 Hz")
        raise InputError.of("this entry", [fault])
    amplitude, frequency = pieces
    return read(amplitude, unit="V", name="hum"), read(frequency, unit="Hz", name="hum")


def _write_hum(value: tuple[float, float] | None) -> str:
    if value is None:
        return ""
    return f"{amount(value[0], 'V')}{_APART} {amount(value[1], 'Hz')}"

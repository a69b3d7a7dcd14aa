"""What a noise panel asks: the noise by its numbers, the passage, and which sample is shown."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from hystkit.analyses.noise.model import Noise
from hystkit.analyses.noise.spectrum import Table, TwoPole
from hystkit.base.errors import Fault, InputError
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read
from hystkit.circuit.reading import Quantity, collect, is_kind, wrong_kind
from hystkit.review.service import PROBABILITY

#: Kinds of noise whose numbers can be edited, with the fields of the request that each takes.
NUMBERS: Mapping[str, tuple[str, ...]] = {
    "two poles": ("rms", "f1", "f2"),
    "brick wall": ("rms", "bandwidth"),
}
#: Noise of one's own, as measured or from a table of densities, taken as it is.
OWN = "own"
KINDS = (*NUMBERS, OWN)
_UNITS = {
    "rms": "V",
    "f1": "Hz",
    "f2": "Hz",
    "bandwidth": "Hz",
    "slope": "V/s",
    "hum_amplitude": "V",
    "hum_frequency": "Hz",
    "probability": "",
}


@dataclass(frozen=True)
class NoiseRequest:
    """What a `NoisePanel` asks.

    Numbers that the kind of noise has no use for are kept, so that they are there again when it is
    chosen.

    Attributes
    ----------
    kind : {"two poles", "brick wall", "own"}
        Of the noise.
    rms : float
        [V].
    f1, f2 : float
        Both poles [Hz].
    bandwidth : float
        Of the brick wall [Hz].
    own : Noise or None
        Noise of one's own; its numbers are not edited here.
    slope : float
        Of the signal at the trips [V/s].
    hum_amplitude : float
        [V]; 0 for no hum.
    hum_frequency : float
        [Hz].
    probability : float
        Allowed for more than one transition on a passage [1].
    load : {"high", "low"}
        Output state in which the load is on.
    seed : int
        Of the sample.
    """

    kind: str = "two poles"
    rms: Quantity = 1e-3
    f1: Quantity = 100.0
    f2: Quantity | None = 10e3
    bandwidth: Quantity = 10e3
    own: Noise | None = None
    slope: Quantity = 10e-3
    hum_amplitude: Quantity = 0.0
    hum_frequency: Quantity = 50.0
    probability: Quantity = PROBABILITY
    load: str = "high"
    seed: int = 0

    def noise(self) -> Noise:
        """Build the noise.

        Returns
        -------
        Noise
            Of this kind.

        Raises
        ------
        NoiseModelError
            Behind a single pole.
        InputError
            Naming everything that cannot be used.
        """
        if self.kind not in KINDS:
            raise InputError.of("this noise", [unknown_name_fault("kind", self.kind, KINDS)])
        if self.kind == "two poles":
            return Noise.two_pole(rms=self.rms, f1=self.f1, f2=self.f2)
        if self.kind == "brick wall":
            return Noise.brick_wall(rms=self.rms, bandwidth=self.bandwidth)
        if self.own is None:
            raise InputError.of("this noise", [_NONE_GIVEN])
        return self.own

    @property
    def hum(self) -> tuple[Any, Any] | None:
        """Amplitude and frequency of the hum; None without."""
        return (self.hum_amplitude, self.hum_frequency) if self.hum_amplitude else None

    def in_numbers(self) -> NoiseRequest:
        """Give the same with every text read.

        Returns
        -------
        NoiseRequest
            In SI units.

        Raises
        ------
        InputError
            Naming every text that is no number.
        """
        faults: list[Fault] = []
        numbers: dict[str, Any] = {}
        for name, unit in _UNITS.items():
            value = getattr(self, name)
            if is_kind(value, str):
                numbers[name] = _read(faults, name, value, unit)
        if faults:
            raise InputError.of("this panel", faults)
        return replace(self, **numbers)


def begun_with(noise: Noise) -> dict[str, Any]:
    """Give every number of a request, those of the other kind in keeping with the noise.

    Parameters
    ----------
    noise : Noise
        Behind two poles.

    Returns
    -------
    dict of str to object
        Fields of `NoiseRequest`.
    """
    numbers = numbers_of(noise)
    return {**numbers, "bandwidth": numbers["f2"]}


def numbers_of(noise: Any) -> dict[str, Any]:
    """Give the fields of a request that stand for noise.

    Parameters
    ----------
    noise : Noise
        Any.

    Returns
    -------
    dict of str to object
        Fields of `NoiseRequest`.

    Raises
    ------
    InputError
        If it is no noise.
    """
    if not is_kind(noise, Noise):
        example = 'hk.Noise.two_pole(rms="1m", f1="1k", f2="1M")'
        raise InputError.of("this panel", [wrong_kind("noise", noise, "a Noise", example)])
    spectrum = noise.spectrum
    if is_kind(spectrum, TwoPole):
        return {"kind": "two poles", "rms": noise.rms, "f1": spectrum.f1, "f2": spectrum.f2}
    if is_kind(spectrum, Table) and _is_brick_wall(noise, spectrum):
        return {"kind": "brick wall", "rms": noise.rms, "bandwidth": spectrum.frequency[-1]}
    return {"kind": OWN, "own": noise}


def hum_of(hum: Any) -> dict[str, Any]:
    """Give the fields of a request that stand for hum.

    Parameters
    ----------
    hum : pair of float or str, or None
        Amplitude [V] and frequency [Hz]; None for no hum.

    Returns
    -------
    dict of str to object
        Fields of `NoiseRequest`.

    Raises
    ------
    InputError
        If it is no pair.
    """
    if hum is None:
        return {"hum_amplitude": 0.0}
    if not (is_kind(hum, (tuple, list)) and len(hum) == 2):
        fault = wrong_kind("hum", hum, "a pair", 'hum=("30 mV", "100 Hz")')
        raise InputError.of("this panel", [fault])
    return {"hum_amplitude": hum[0], "hum_frequency": hum[1]}


def _is_brick_wall(noise: Noise, spectrum: Table) -> bool:
    flat = len(spectrum.frequency) == 2 and spectrum.frequency[0] == 0
    # What was counted in a record is kept as it is.
    made = Noise.brick_wall(rms=noise.rms, bandwidth=spectrum.frequency[-1]) if flat else None
    return made is not None and made.origin == noise.origin


def _read(faults: list[Fault], name: str, value: str, unit: str) -> float:
    return collect(faults, lambda: read(value, unit=unit, name=name.replace("_", " ")))


_NONE_GIVEN = Fault(
    "no noise of your own is there.",
    remedy="panel.set(noise=hk.Noise.from_samples(samples, rate))",
)

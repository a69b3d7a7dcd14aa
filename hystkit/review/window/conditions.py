"""What a width window is asked for, read and checked."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

from hystkit.analyses.cycle.plants import Plant
from hystkit.analyses.load_step.result import LoadStep
from hystkit.analyses.noise.model import Noise
from hystkit.base.errors import Fault, InputError
from hystkit.base.quantity import read, read_own, show_own
from hystkit.circuit.design import Design
from hystkit.circuit.reading import collect, is_kind, wrong_kind
from hystkit.review.axis import Axis, unit_faults
from hystkit.review.service import PROBABILITY, out_of_range, read_hum
from hystkit.review.trip_checks import SMALL_SHARE


@dataclass(frozen=True)
class Conditions:
    """Requirements on the width; None stands for one that is not asked for.

    Attributes
    ----------
    design : Design
        What the window is for.
    axis : Axis
        Its middle, in the unit of everything below.
    noise : Noise or None
        On the signal [V].
    probability : float
        Allowed probability of a further transition per passage.
    slope : float or None
        Of the signal at the trips [V/s]; from the plant where None.
    hum : pair of float or None
        Amplitude [V] and frequency [Hz].
    load_step : float or None
        Width that the load's own step takes [V].
    plant : Plant or None
        What the load acts on.
    starts_per_hour, swing, accuracy : float or None
        At most; swing and accuracy in the unit of the axis.
    min_on, min_off : float or None
        At least [s].
    uncertainty : float
        Of either trip, in the unit of the axis.
    error : float
        Move of the trips by offset and bias currents [V].
    error_share : float
        Share of the width that this may take.
    """

    design: Design
    axis: Axis
    noise: Noise | None = None
    probability: float = PROBABILITY
    slope: float | None = None
    hum: tuple[float, float] | None = None
    load_step: float | None = None
    plant: Plant | None = None
    starts_per_hour: float | None = None
    min_on: float | None = None
    min_off: float | None = None
    swing: float | None = None
    accuracy: float | None = None
    uncertainty: float = 0.0
    error: float = 0.0
    error_share: float = SMALL_SHARE

    @property
    def spread_text(self) -> str:
        """What is to be said about the uncertainty of the trips; empty where there is none."""
        if not self.uncertainty:
            return ""
        return f", with trips within ± {show_own(self.uncertainty, self.axis.unit, 3)}"

    def changed(self, **changes: Any) -> Conditions:
        """Give changed conditions.

        Parameters
        ----------
        **changes : object
            New values of fields.
        """
        return replace(self, **changes)


def read_conditions(given: dict[str, Any], unit: str) -> dict[str, Any]:
    """Read the requirements that were given.

    Parameters
    ----------
    given : dict
        Fields of `Conditions` as the user wrote them.
    unit : str
        Of the axis.

    Returns
    -------
    dict
        The same as numbers.

    Raises
    ------
    InputError
        Naming everything that cannot be used.
    """
    faults: list[Fault] = []
    found: dict[str, Any] = {name: _number(faults, name, given[name], unit) for name in _UNITS}
    found["hum"] = None if given["hum"] is None else read_hum(faults, given["hum"])
    found["load_step"] = _load_step(faults, given["load_step"])
    for name, kind in (("noise", Noise), ("plant", Plant)):
        if not is_kind(given[name], kind | None):
            example = f"{name}=hk.{'Noise.two_pole(...)' if kind is Noise else 'FirstOrder(...)'}"
            faults.append(wrong_kind(name, given[name], kind.__name__, example))
        found[name] = given[name]
    faults += _missing(found, unit)
    if faults:
        raise InputError.of("this width window", faults)
    return found


#: Numbers of the request with their units; "" for none, None for the unit of the axis.
_UNITS: dict[str, str | None] = {
    "probability": "",
    "slope": "V/s",
    "starts_per_hour": "",
    "min_on": "s",
    "min_off": "s",
    "swing": None,
    "accuracy": None,
    "uncertainty": None,
    "error_share": "",
}
_NEED_A_PLANT = ("starts_per_hour", "min_on", "min_off", "swing")


def _number(faults: list[Fault], name: str, value: Any, unit: str) -> float | None:
    if value is None:
        return None
    own = _UNITS[name]
    number = collect(faults, lambda: read_own(value, unit=unit if own is None else own, name=name))
    share = name in ("probability", "error_share")
    if number < 0 or (number == 0 and name != "uncertainty") or (share and number >= 1):
        faults.append(out_of_range(name, number, share))
    return number


def _load_step(faults: list[Fault], value: Any) -> float | None:
    if isinstance(value, LoadStep):
        return max(float(value.width - value.margin - value.noise), 0.0)
    if value is None:
        return None
    volts = collect(faults, lambda: read(value, unit="V", name="load_step"))
    return None if math.isnan(volts) else abs(volts)


def _missing(found: dict[str, Any], unit: str) -> list[Fault]:
    faults = []
    plant = found["plant"]
    asked = [name for name in _NEED_A_PLANT if found[name] is not None]
    if asked and plant is None:
        faults.append(
            Fault(
                "there is no plant to cycle.",
                asked=", ".join(asked),
                remedy="plant=hk.FirstOrder(...), hk.TwoLag(...) or hk.Integrating(...)",
            )
        )
    if isinstance(plant, Plant):
        if plant.shape:
            faults.append(
                Fault("a window is for one plant.", have=f"plants of shape {plant.shape}")
            )
        faults += unit_faults(plant, unit)
    disturbed = found["noise"] is not None or found["hum"] is not None
    if disturbed and found["slope"] is None and plant is None:
        faults.append(
            Fault(
                "nothing tells how fast the signal passes the trips.",
                asked="a width for " + ("noise" if found["noise"] is not None else "hum"),
                rule="the slower the passage, the wider the band has to be",
                remedy='slope="0.2 V/s", or plant=...',
            )
        )
    return faults

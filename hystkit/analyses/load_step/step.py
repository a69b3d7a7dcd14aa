"""Examine what a load does to the stage that switches it."""

from __future__ import annotations

from typing import Any

from numpy.typing import ArrayLike

from hystkit.analyses.load_step.effect import SENSOR_GROUNDS, effect_of
from hystkit.analyses.load_step.result import LoadStep
from hystkit.base.errors import Fault, InputError
from hystkit.base.frozen import Named
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.arrays import read_array, read_positives, together
from hystkit.circuit.design import Design
from hystkit.circuit.reading import is_kind, wrong_kind
from hystkit.numeric.measurand import LOADS
from hystkit.numeric.trips import trip_points

_UNITS = {
    "current": "A",
    "supply_resistance": "Ω",
    "ground_resistance": "Ω",
    "source_resistance": "Ω",
    "relaxation": "V",
    "noise_rms": "V",
    "sigmas": "",
}
#: What may be below zero: a charger raises the voltage of a battery.
_SIGNED = ("current", "relaxation")


def load_step(
    design: Design,
    current: ArrayLike | str,
    *,
    supply_resistance: ArrayLike | str = 0.0,
    ground_resistance: ArrayLike | str = 0.0,
    source_resistance: ArrayLike | str = 0.0,
    relaxation: ArrayLike | str = 0.0,
    noise_rms: ArrayLike | str = 0.0,
    sigmas: ArrayLike | str = 6.0,
    load: str = "high",
    sensor_ground: str = "stage",
) -> LoadStep:
    """Examine whether a load turns back the stage that switches it.

    Parameters
    ----------
    design : Design
        The stage.
    current : float, str or array_like
        Of the load while it is on, from V_CC to ground [A]; negative for a charger.
    supply_resistance : float, str or array_like, default 0
        Of the lead that load and stage share on the V_CC side [Ohm].
    ground_resistance : float, str or array_like, default 0
        Of the lead that they share on the ground side [Ohm].
    source_resistance : float, str or array_like, default 0
        Of the source that is measured and feeds the load, such as a battery [Ohm].
    relaxation : float, str or array_like, default 0
        By which the voltage of that source falls in the long run on top [V].
    noise_rms : float, str or array_like, default 0
        At the signal [V].
    sigmas : float, str or array_like, default 6
        How many times `noise_rms` is kept free.
    load : {"high", "low"}, default "high"
        Output state in which the load is on.
    sensor_ground : {"stage", "load"}, default "stage"
        What the sensor's voltage is referred to: the ground of the stage, which rises with it, or
        the point where `ground_resistance` ends.

    Returns
    -------
    LoadStep
        Shifts and margins; arrays broadcast.

    Raises
    ------
    InputError
        Naming everything that cannot be used.

    Notes
    -----
    Exact for the declared circuit: V_CC falls by the current times both resistances of the leads,
    V_EE of a split supply by that of the ground, both seen from the stage's ground, and all that
    follows the rails moves along; levels that the design gives stay. A ratiometric signal keeps
    its share of V_CC. The fall of the source counts at the signal; where the signal is a
    `signals.Linear` or `signals.Attenuator` of a voltage in V, it counts ahead of it.

    A functional switch is not a protective device: a battery keeps its own protection against
    over-discharge and short circuit, and a heater or pump its independent limiter.

    Examples
    --------
    A cut-out that disconnects a battery of 35 mOhm while it delivers 9 A:

    >>> from hystkit.circuit.stage import Stage
    >>> cutout = Design(
    ...     Stage("non-inverting", reference="source"),
    ...     {"R_I": "220k", "R_G": "57k6", "R_F": "909k"},
    ...     supply=5.0,
    ...     levels={"V_REF": 2.5},
    ... )
    >>> found = load_step(cutout, 9.0, source_resistance="35m", relaxation=0.5)
    >>> print(f"{found.width:.2f} V wide, {found.margin:.2f} V left")
    1.21 V wide, 0.40 V left
    """
    given: dict[str, Any] = {
        "current": current,
        "supply_resistance": supply_resistance,
        "ground_resistance": ground_resistance,
        "source_resistance": source_resistance,
        "relaxation": relaxation,
        "noise_rms": noise_rms,
        "sigmas": sigmas,
    }
    known = _checked(design, given, load, sensor_ground)
    resistances = {key: known[f"{key}_resistance"] for key in ("supply", "ground", "source")}
    effect = effect_of(design, known["current"], resistances, known["relaxation"], sensor_ground)
    return LoadStep(
        design=design,
        load=load,
        current=known["current"],
        effect=effect,
        without=trip_points(design),
        during=trip_points(design, **effect.rails),
        noise=known["noise_rms"] * known["sigmas"],
        asked=Named({**known, "load": load, "sensor_ground": sensor_ground}),
    )


def _checked(design: Any, given: dict[str, Any], load: Any, sensor_ground: Any) -> dict[str, Any]:
    faults: list[Fault] = []
    if not is_kind(design, Design):
        remedy = "hk.load_step(hk.Design(stage, parts, supply=5.0), current=9.0)"
        faults.append(wrong_kind("design", design, "a Design", remedy))
    known: dict[str, Any] = {}
    for name, value in given.items():
        if name in _SIGNED:
            found = read_array(faults, name, value, _UNITS[name])
        else:
            found = read_positives(faults, name, value, _UNITS[name], zero=True)
        known[name] = found[()]
    if load not in LOADS:
        faults.append(unknown_name_fault("output state", str(load), LOADS))
    if sensor_ground not in SENSOR_GROUNDS:
        faults.append(unknown_name_fault("ground of a sensor", str(sensor_ground), SENSOR_GROUNDS))
    together(faults, known)
    if faults:
        raise InputError.of("this load step", faults)
    return known

"""What a cycle panel asks: the plant by its numbers, what the load stands, and what is shown."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from hystkit.analyses.cycle.plants import FirstOrder, Integrating, Plant, StateSpace, TwoLag
from hystkit.base.errors import Fault, InputError, PlantError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.reading import is_kind, wrong_kind

#: Kinds of plants whose numbers can be edited, with the fields of the request that each takes.
NUMBERS: Mapping[str, tuple[str, ...]] = {
    "lag": ("tau", "on_level", "off_level"),
    "two lags": ("tau", "sensor_tau", "on_level", "off_level"),
    "integrating": ("rate_on", "rate_off"),
}
_CLASSES: Mapping[str, Any] = {"lag": FirstOrder, "two lags": TwoLag, "integrating": Integrating}
#: A linear plant of one's own, taken as it is.
OWN = "own"
KINDS = (*NUMBERS, OWN)
#: A sensor lag to begin with, as a share of the time constant.
_SENSOR_SHARE = 0.1


@dataclass(frozen=True)
class CycleRequest:
    """What a `CyclePanel` asks.

    Numbers that the kind of plant has no use for are kept, so that they are there again when it
    is chosen.

    Attributes
    ----------
    kind : {"lag", "two lags", "integrating", "own"}
        Of the plant.
    tau, sensor_tau : float
        Time constant of the process value and of the sensor [s].
    on_level, off_level : float
        Where the process value would settle with the load on and off [unit].
    rate_on, rate_off : float
        Rate of change with the load on and off, signed [unit/s].
    dead_time : float or pair of float
        From a command until it acts; a pair gives it for on and for off [s].
    own : StateSpace or None
        A linear plant of one's own; its numbers are not edited here.
    name : str
        Of the plant.
    load : {"high", "low"}
        Output state in which the load is on.
    min_on, min_off : float
        Time that a timer keeps a command, and that the load stands at least [s].
    starts_per_hour : float or None
        Starts that the load stands at most [1/h].
    operations : float or None
        Operations that its contact is rated for [1].
    start : float or None
        Process value from which a run starts [unit]; None shows the steady cycle.
    until : float or None
        How long such a run takes [s]; None leaves it to the plant.
    """

    kind: str = "lag"
    tau: float = 600.0
    sensor_tau: float = _SENSOR_SHARE * 600.0
    on_level: float = 1.0
    off_level: float = 0.0
    rate_on: float = 1e-3
    rate_off: float = -1e-3
    dead_time: float | tuple[float, float] = 0.0
    own: StateSpace | None = None
    name: str = ""
    load: str = "high"
    min_on: float = 0.0
    min_off: float = 0.0
    starts_per_hour: float | None = None
    operations: float | None = None
    start: float | None = None
    until: float | None = None

    def plant(self, unit: str) -> Plant:
        """Build the plant.

        Parameters
        ----------
        unit : str
            Unit of the process value; a plant of one's own brings its own.

        Returns
        -------
        Plant
            A single one.

        Raises
        ------
        PlantError
            Naming everything that cannot be used.
        """
        if self.kind not in KINDS:
            raise PlantError.of("this plant", [unknown_name_fault("kind", self.kind, KINDS)])
        if self.kind == OWN:
            if self.own is None:
                raise PlantError.of("this plant", [_NONE_GIVEN])
            return self.own
        numbers = {name: getattr(self, name) for name in NUMBERS[self.kind]}
        made: Plant = _CLASSES[self.kind](
            **numbers, dead_time=self.dead_time, unit=unit, name=self.name
        )
        return made


def begun_with(plant: FirstOrder) -> dict[str, Any]:
    """Give every number of a request from a lag, those of the other kinds in keeping with it.

    Parameters
    ----------
    plant : FirstOrder
        To begin with.

    Returns
    -------
    dict of str to float
        Fields of `CycleRequest`.
    """
    tau, on, off = (float(value) for value in (plant.tau, plant.on_level, plant.off_level))
    # As steep as the lag half way between its levels.
    rate = (on - off) / (2 * tau)
    return {
        "tau": tau,
        "sensor_tau": _SENSOR_SHARE * tau,
        "on_level": on,
        "off_level": off,
        "rate_on": float(f"{rate:.2g}"),
        "rate_off": -float(f"{rate:.2g}"),
    }


def numbers_of(plant: Any) -> dict[str, Any]:
    """Give the fields of a request that stand for a plant.

    Parameters
    ----------
    plant : Plant
        A single one.

    Returns
    -------
    dict of str to object
        Fields of `CycleRequest`.

    Raises
    ------
    InputError
        If it is no plant, or an array of them.
    """
    if not is_kind(plant, Plant):
        example = "hk.FirstOrder(tau=600, on_level=40, off_level=10)"
        raise InputError.of("this panel", [wrong_kind("plant", plant, "a plant", example)])
    if plant.shape:
        fault = Fault(
            "a panel shows one plant.",
            have=f"plants of shape {plant.shape}",
            remedy="one value of each, or hk.steady_cycle for all of them",
        )
        raise InputError.of("this panel", [fault])
    kind = next((name for name, one in _CLASSES.items() if type(plant) is one), OWN)
    if kind == OWN:
        return {"kind": OWN, "own": plant}
    on, off = (float(time) for time in plant.dead_time)
    numbers = {name: float(getattr(plant, name)) for name in NUMBERS[kind]}
    dead_time = on if on == off else (on, off)
    return {"kind": kind, **numbers, "dead_time": dead_time, "name": plant.name}


_NONE_GIVEN = Fault(
    "no plant of your own is there.",
    remedy="panel.set(plant=hk.StateSpace(a, b, c, ...))",
)

"""What the load acts on: a lag, a lag behind a slow sensor, an integrator, or a linear plant."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Dynamics
from hystkit.analyses.cycle.numbers import Given, Numbers, read_dead_time, read_numbers
from hystkit.base.errors import Fault, PlantError
from hystkit.circuit.arrays import together
from hystkit.circuit.reading import is_kind, set_frozen, wrong_kind

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Plant(ABC):
    """What all plants share: the dead time, the unit and the name.

    The dead time is the time from the command until it acts: a switch closes at once, heat arrives
    later. A pair gives it for switching on and for switching off.

    Attributes
    ----------
    dead_time : pair of float or ndarray
        Dead time on switching on and on switching off [s].
    unit : str
        Unit of the process value, such as ``"°C"``.
    name : str
        For titles.
    """

    dead_time: tuple[Numbers, Numbers]
    unit: str
    name: str

    @property
    @abstractmethod
    def dynamics(self) -> Dynamics:
        """The plant in the form that all plants share."""

    @property
    def disturbance_unit(self) -> str:
        """Unit of a disturbance, which shifts the levels at which a lag settles."""
        return self.unit

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the array of plants; () for a single one."""
        return self.dynamics.shape

    @property
    def lift(self) -> Array:
        """How far the load lifts the sensed value, negative for one that cools, shape (...).

        The distance between both levels [unit], or where the plant does not settle the difference
        between both rates [unit/s].
        """
        dynamics = self.dynamics
        lift = dynamics.sensed_of(dynamics.settled(True) - dynamics.settled(False))
        drift = dynamics.sensed_of(dynamics.on - dynamics.off)
        return np.where(np.isnan(lift), drift, lift)

    @property
    def heats(self) -> NDArray[np.bool_]:
        """Whether the load drives the sensed value up, shape (...)."""
        return np.asarray(self.lift > 0)

    def __eq__(self, other: object) -> bool:
        """Whether two plants are of the same kind with the same values."""
        if type(self) is not type(other):
            return NotImplemented
        return all(np.array_equal(mine, theirs) for mine, theirs in self._pairs(other))

    def __hash__(self) -> int:
        """Hash by kind and content."""
        return hash((type(self), *(np.asarray(mine).tobytes() for mine, _ in self._pairs(self))))

    def _pairs(self, other: Any) -> list[tuple[Any, Any]]:
        plain: list[tuple[Any, Any]] = []
        for field in fields(self):
            mine, theirs = getattr(self, field.name), getattr(other, field.name)
            pair = isinstance(mine, tuple)
            plain += zip(mine, theirs, strict=True) if pair else [(mine, theirs)]
        return plain

    def _describe(self, faults: list[Fault], dead_time: Any, unit: str, name: str) -> None:
        """Set what all plants share."""
        set_frozen(self, "dead_time", read_dead_time(faults, dead_time))
        for field, text in (("unit", unit), ("name", name)):
            if not is_kind(text, str):
                faults.append(wrong_kind(field, text, "text", f'{field}="{text}"'))
            set_frozen(self, field, str(text))

    def _refuse(self, faults: list[Fault], **numbers: Any) -> None:
        """Raise for the faults, those of shapes that do not fit included."""
        together(faults, {**numbers, "dead_time on": self.dead_time[0], "off": self.dead_time[1]})
        if faults:
            raise PlantError.of("this plant", faults)

    def _dead_times(self) -> dict[str, Array]:
        on, off = self.dead_time
        return {"dead_on": np.asarray(on), "dead_off": np.asarray(off)}


@dataclass(frozen=True, eq=False)
class FirstOrder(Plant):
    """One lag: a body that is warmed or cooled as a whole, sensed without delay of its own.

    Parameters
    ----------
    tau : float, str or array_like
        Time constant [s], > 0.
    on_level, off_level : float, str or array_like
        Where the process value would settle with the load on and off, ambient and steady
        disturbances included [unit]. The load heats if `on_level` is above `off_level`.
    dead_time : float, str, array_like, or tuple of two of these, default 0
        Time from the command until it acts [s], >= 0; a tuple gives (on, off).
    unit : str, optional
        Unit of the process value; text such as ``"58 °C"`` may then carry it.
    name : str, optional
        For titles.

    Raises
    ------
    PlantError
        Naming everything that cannot be used.

    Notes
    -----
    All numbers may be arrays that broadcast: one element for each plant.

    Examples
    --------
    >>> FirstOrder(tau="600 s", on_level=40, off_level=10, unit="°C").on_level
    40.0
    """

    tau: Numbers
    on_level: Numbers
    off_level: Numbers

    def __init__(
        self,
        tau: Given,
        on_level: Given,
        off_level: Given,
        dead_time: Any = 0.0,
        unit: str = "",
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        self._describe(faults, dead_time, unit, name)
        set_frozen(self, "tau", read_numbers(faults, "tau", tau, "s", "> 0"))
        set_frozen(self, "on_level", read_numbers(faults, "on_level", on_level, self.unit))
        set_frozen(self, "off_level", read_numbers(faults, "off_level", off_level, self.unit))
        self._refuse(faults, tau=self.tau, on_level=self.on_level, off_level=self.off_level)

    @cached_property
    def dynamics(self) -> Dynamics:
        """The lag as x' = (level - x) / tau."""
        rate = 1 / np.asarray(self.tau)
        return Dynamics(
            a=-rate[..., None, None],
            on=(rate * self.on_level)[..., None],
            off=(rate * self.off_level)[..., None],
            sensed=np.ones(1),
            process=np.ones(1),
            disturbance=rate[..., None],
            **self._dead_times(),
        )


@dataclass(frozen=True, eq=False)
class TwoLag(Plant):
    """A lag that is sensed through a second one: a body and the probe that follows it.

    Parameters
    ----------
    tau : float, str or array_like
        Time constant of the process value [s], > 0.
    sensor_tau : float, str or array_like
        Time constant of the sensor [s], > 0; the two may be equal.
    on_level, off_level : float, str or array_like
        Where the process value would settle with the load on and off, ambient and steady
        disturbances included [unit]. The load heats if `on_level` is above `off_level`.
    dead_time : float, str, array_like, or tuple of two of these, default 0
        Time from the command until it acts [s], >= 0; a tuple gives (on, off).
    unit : str, optional
        Unit of the process value; text such as ``"58 °C"`` may then carry it.
    name : str, optional
        For titles.

    Raises
    ------
    PlantError
        Naming everything that cannot be used.

    Notes
    -----
    All numbers may be arrays that broadcast: one element for each plant.

    Examples
    --------
    >>> fridge = TwoLag(tau=7200, sensor_tau=240, on_level=-14, off_level=25, dead_time="30 s")
    >>> bool(fridge.heats)
    False
    """

    tau: Numbers
    sensor_tau: Numbers
    on_level: Numbers
    off_level: Numbers

    def __init__(
        self,
        tau: Given,
        sensor_tau: Given,
        on_level: Given,
        off_level: Given,
        dead_time: Any = 0.0,
        unit: str = "",
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        self._describe(faults, dead_time, unit, name)
        set_frozen(self, "tau", read_numbers(faults, "tau", tau, "s", "> 0"))
        set_frozen(self, "sensor_tau", read_numbers(faults, "sensor_tau", sensor_tau, "s", "> 0"))
        set_frozen(self, "on_level", read_numbers(faults, "on_level", on_level, self.unit))
        set_frozen(self, "off_level", read_numbers(faults, "off_level", off_level, self.unit))
        self._refuse(
            faults,
            tau=self.tau,
            sensor_tau=self.sensor_tau,
            on_level=self.on_level,
            off_level=self.off_level,
        )

    @cached_property
    def dynamics(self) -> Dynamics:
        """The lag x0' = (level - x0) / tau and its sensor x1' = (x0 - x1) / sensor_tau."""
        rates = 1 / np.asarray(self.tau), 1 / np.asarray(self.sensor_tau)
        rate, sensor = np.broadcast_arrays(*rates)
        a = np.zeros((*rate.shape, 2, 2))
        a[..., 0, 0], a[..., 1, 0], a[..., 1, 1] = -rate, sensor, -sensor
        driven = np.array([1.0, 0.0])
        return Dynamics(
            a=a,
            on=np.asarray(rate * self.on_level)[..., None] * driven,
            off=np.asarray(rate * self.off_level)[..., None] * driven,
            sensed=np.array([0.0, 1.0]),
            process=driven,
            disturbance=np.asarray(rate)[..., None] * driven,
            **self._dead_times(),
        )


@dataclass(frozen=True, eq=False)
class Integrating(Plant):
    """A plant that integrates: a tank that is filled or drained at a steady rate.

    Parameters
    ----------
    rate_on, rate_off : float, str or array_like
        Rate of change of the process value with the load on and off, signed [unit/s].
    dead_time : float, str, array_like, or tuple of two of these, default 0
        Time from the command until it acts [s], >= 0; a tuple gives (on, off).
    unit : str, optional
        Unit of the process value.
    name : str, optional
        For titles.

    Raises
    ------
    PlantError
        Naming everything that cannot be used.

    Notes
    -----
    All numbers may be arrays that broadcast: one element for each plant.

    Examples
    --------
    >>> bool(Integrating(rate_on=0.004, rate_off=-0.002, unit="m").heats)
    True
    """

    rate_on: Numbers
    rate_off: Numbers

    def __init__(
        self,
        rate_on: Given,
        rate_off: Given,
        dead_time: Any = 0.0,
        unit: str = "",
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        self._describe(faults, dead_time, unit, name)
        per_second = self.disturbance_unit
        set_frozen(self, "rate_on", read_numbers(faults, "rate_on", rate_on, per_second))
        set_frozen(self, "rate_off", read_numbers(faults, "rate_off", rate_off, per_second))
        self._refuse(faults, rate_on=self.rate_on, rate_off=self.rate_off)

    @property
    def disturbance_unit(self) -> str:
        """Unit of a disturbance, which adds to both rates."""
        return f"{self.unit}/s" if self.unit else ""

    @cached_property
    def dynamics(self) -> Dynamics:
        """The integrator as x' = rate."""
        return Dynamics(
            a=np.zeros((1, 1)),
            on=np.asarray(self.rate_on)[..., None],
            off=np.asarray(self.rate_off)[..., None],
            sensed=np.ones(1),
            process=np.ones(1),
            disturbance=np.ones(1),
            **self._dead_times(),
        )


@dataclass(frozen=True, eq=False)
class StateSpace(Plant):
    """A linear plant of one's own: x' = A x + B u, with an input u for each state of the load.

    Parameters
    ----------
    a : array_like
        Matrix A, shape (..., n, n) [1/s].
    b : array_like
        Column B, shape (..., n), or (..., n, m) for m inputs; it has as many axes as `a`, or one
        less for a single input.
    c : array_like
        Row that gives the sensed value, shape (..., n).
    on, off : float or array_like, default 1 and 0
        Input with the load on and off: shape (...), or (..., m). Ambient is a further input that
        is the same in both.
    process : array_like, optional
        Row that gives the process value, shape (..., n); `c` unless given.
    dead_time : float, str, array_like, or tuple of two of these, default 0
        Time from the command until it acts [s], >= 0; a tuple gives (on, off).
    disturbance : array_like, optional
        The x' that a disturbance of 1 adds, shape (..., n); the column B of a single input unless
        given.
    unit : str, optional
        Unit of the process value.
    name : str, optional
        For titles.

    Raises
    ------
    PlantError
        Naming everything that cannot be used.

    Examples
    --------
    A plate heated by a coil, both to an ambient of 20:

    >>> plate = StateSpace(
    ...     a=[[-0.02, 0.01], [0.002, -0.003]],
    ...     b=[[0.5, 0.01], [0.0, 0.001]],
    ...     c=[0, 1],
    ...     on=[1, 20],
    ...     off=[0, 20],
    ... )
    >>> float(plate.dynamics.sensed_of(plate.dynamics.settled(False)).round(6))
    20.0
    """

    a: Array
    b: Array
    c: Array
    on: Numbers
    off: Numbers
    process: Array
    disturbance: Array | None

    def __init__(
        self,
        a: Sequence[Any] | Array,
        b: Sequence[Any] | Array,
        c: Sequence[Any] | Array,
        on: Given = 1.0,
        off: Given = 0.0,
        process: Sequence[Any] | Array | None = None,
        dead_time: Any = 0.0,
        disturbance: Sequence[Any] | Array | None = None,
        unit: str = "",
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        self._describe(faults, dead_time, unit, name)
        given = {"a": a, "b": b, "c": c, "on": on, "off": off}
        given["process"] = c if process is None else process
        for key, value in given.items():
            set_frozen(self, key, read_numbers(faults, key, value))
        column = None if disturbance is None else read_numbers(faults, "disturbance", disturbance)
        set_frozen(self, "disturbance", column)
        if not faults:
            faults += self._misshapen()
        self._refuse(faults, **({} if faults else self._leading()))

    @property
    def disturbance_unit(self) -> str:
        """No unit: a disturbance is a multiple of a column."""
        return ""

    @cached_property
    def dynamics(self) -> Dynamics:
        """The plant as it was given, its inputs put into the forcing."""
        single = self._single_input
        column = self.b if single and self.disturbance is None else self.disturbance
        return Dynamics(
            a=self.a,
            on=self._driven(self.on),
            off=self._driven(self.off),
            sensed=self.c,
            process=self.process,
            disturbance=column,
            **self._dead_times(),
        )

    @property
    def _single_input(self) -> bool:
        return self.b.ndim == self.a.ndim - 1

    def _driven(self, value: Numbers) -> Array:
        if self._single_input:
            return np.asarray(np.asarray(value)[..., None] * self.b)
        return np.asarray((self.b @ np.asarray(value)[..., None])[..., 0])

    def _misshapen(self) -> list[Fault]:
        """Give a fault for each array that has no place in x' = A x + B u, y = C x."""
        shape = np.shape(self.a)
        n = shape[-1] if shape else 0
        if len(shape) < 2 or shape[-2] != n:
            return [_shape_fault("a", self.a, "(..., n, n)")]
        faults = []
        single = np.ndim(self.b) == len(shape) - 1
        if single and np.shape(self.b)[-1:] != (n,):
            faults.append(_shape_fault("b", self.b, f"(..., {n}), or (..., {n}, m) for m inputs"))
        if not single and (np.ndim(self.b) != len(shape) or np.shape(self.b)[-2] != n):
            faults.append(_shape_fault("b", self.b, f"(..., {n}), or (..., {n}, m) for m inputs"))
        elif not single:
            m = np.shape(self.b)[-1]
            faults += [
                _shape_fault(name, value, f"(..., {m}), one value for each input")
                for name, value in (("on", self.on), ("off", self.off))
                if np.shape(value)[-1:] != (m,)
            ]
        rows = {"c": self.c, "process": self.process, "disturbance": self.disturbance}
        return faults + [
            _shape_fault(name, row, f"(..., {n})")
            for name, row in rows.items()
            if row is not None and np.shape(row)[-1:] != (n,)
        ]

    def _leading(self) -> dict[str, Any]:
        """Give one entry of each array for each plant, to see whether their shapes fit."""
        inner = 0 if self._single_input else 1
        axes = {"a": 2, "b": 1 + inner, "c": 1, "on": inner, "off": inner, "process": 1}
        arrays = {name: np.asarray(getattr(self, name)) for name in axes}
        return {name: np.empty(v.shape[: v.ndim - axes[name]]) for name, v in arrays.items()}


def _shape_fault(name: str, value: Any, wanted: str) -> Fault:
    return Fault(
        f"{name} has a shape that does not fit.",
        asked=f"{name} of shape {wanted}",
        have=f"shape {np.shape(value)}",
        remedy="matrices and rows of one plant, or of one array of plants",
    )

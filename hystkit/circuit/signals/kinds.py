"""Names of the signals and sensors that a record can hold, and their plain values."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, fields
from inspect import signature
from typing import Any

from hystkit.circuit.parts import Part
from hystkit.circuit.signals.measured import MeasuredTable
from hystkit.circuit.signals.platinum import Rtd
from hystkit.circuit.signals.simple import Attenuator, CurrentLoop, Linear, Potentiometer
from hystkit.circuit.signals.thermistor import Ntc, NtcCoefficients, ResistanceTable
from hystkit.circuit.signals.wired import DrivenSensor, SensorDivider

SIGNALS: dict[str, type] = {
    "linear": Linear,
    "current loop": CurrentLoop,
    "attenuator": Attenuator,
    "potentiometer": Potentiometer,
    "sensor divider": SensorDivider,
    "driven sensor": DrivenSensor,
    "measured table": MeasuredTable,
}
SENSORS: dict[str, type] = {
    "ntc": Ntc,
    "ntc coefficients": NtcCoefficients,
    "resistance table": ResistanceTable,
    "rtd": Rtd,
}
_KINDS = {**SIGNALS, **SENSORS}


def kind_of(value: object) -> str | None:
    """Tell under which name a signal or a sensor is recorded.

    Parameters
    ----------
    value : object
        Any object.

    Returns
    -------
    str or None
        None for what a record cannot hold.
    """
    return next((kind for kind, known in _KINDS.items() if type(value) is known), None)


def stated(value: Any) -> dict[str, Any]:
    """Give the fields of a signal or a sensor that its user stated.

    Parameters
    ----------
    value : dataclass
        A signal or a sensor.

    Returns
    -------
    dict
        Field to value, without defaults and without the supply, which its design fills in.
    """
    defaults = {name: p.default for name, p in signature(type(value)).parameters.items()}
    given = {field.name: getattr(value, field.name) for field in fields(value)}
    return {name: v for name, v in given.items() if v != defaults[name] and name != "v_cc"}


def plain(value: Any) -> Any:
    """Write a signal or a sensor as plain JSON values.

    Parameters
    ----------
    value : object
        A signal, a sensor or one of their fields.

    Returns
    -------
    object
        Numbers, texts, lists and dictionaries.
    """
    kind = kind_of(value)
    if kind is not None:
        return {"kind": kind, **{name: plain(v) for name, v in stated(value).items()}}
    if isinstance(value, Part):
        return asdict(value)
    return list(value) if isinstance(value, tuple) else value


def built(value: Any) -> Any:
    """Rebuild what `plain` wrote.

    Parameters
    ----------
    value : object
        Plain JSON values.

    Returns
    -------
    object
        The signal, sensor or field.

    Raises
    ------
    KeyError
        If a kind does not exist.
    HystkitError
        If the values describe no signal.
    """
    if not isinstance(value, Mapping):
        return value
    entries = {name: built(v) for name, v in value.items() if name != "kind"}
    return _KINDS[value["kind"]](**entries) if "kind" in value else Part(**entries)

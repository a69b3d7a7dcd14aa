"""The saved design: a small versioned JSON record, written and read without loss."""

from __future__ import annotations

import json
import os
from collections.abc import Mapping
from dataclasses import asdict, fields
from functools import partial
from pathlib import Path
from typing import Any

from hystkit.base.errors import Fault, HystkitError, OutputExistsError, RecordError
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.circuit.design_checks import read_parts
from hystkit.circuit.device import Device
from hystkit.circuit.elements import Element, Resistor, Wire
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.kinds import SIGNALS, built, kind_of, plain
from hystkit.circuit.stage import Stage

FORMAT = "hystkit design"
VERSION = 1
#: Media type of a record, in the output of a panel.
MIME = "application/vnd.hystkit.design+json"

_KEYS = ("format", "version", "name", "stage", "parts", "supply", "device", "levels", "signal")


def save(design: Design, path: str | os.PathLike[str], *, overwrite: bool = False) -> Path:
    """Write a design to a file.

    Parameters
    ----------
    design : Design
        What to save.
    path : path
        File to write, JSON.
    overwrite : bool, default False
        Whether an existing file may be replaced.

    Returns
    -------
    Path
        The file written.

    Raises
    ------
    OutputExistsError
        If the file exists and `overwrite` is false.
    """
    target = Path(path)
    if target.exists() and not overwrite:
        raise OutputExistsError(
            f"{target} exists already.",
            asked=f"save a design to {target}",
            rule="a file is never replaced unasked",
            remedy="another name, or overwrite=True",
        )
    text = json.dumps(to_record(design), indent=2, ensure_ascii=False) + "\n"
    # A crash while writing must not leave half a record in place of a whole one.
    partial = target.with_name(target.name + ".partial")
    partial.write_text(text, encoding="utf-8")
    partial.replace(target)
    return target


def load(path: str | os.PathLike[str]) -> Design:
    """Read a design from a file that `save` wrote.

    Parameters
    ----------
    path : path
        JSON record.

    Returns
    -------
    Design
        Equal to the one that was saved.

    Raises
    ------
    RecordError
        If the file is missing, is not a record, is of a newer version, or describes no valid
        design; every fault is named.
    """
    source = Path(path)
    try:
        record = json.loads(source.read_text(encoding="utf-8"))
    except OSError as error:
        raise RecordError(
            f"{source} cannot be read.",
            asked=f"a design from {source}",
            have=error.strerror or str(error),
            remedy="the path of a file written by hystkit.save",
        ) from None
    except (ValueError, RecursionError) as error:
        raise RecordError(
            f"{source} is not JSON text.",
            asked=f"a design from {source}",
            have=str(error),
            remedy="a file written by hystkit.save, or mend the place named",
        ) from None
    return from_record(record, str(source))


def to_record(design: Design) -> dict[str, Any]:
    """Describe a design in plain JSON values.

    Parameters
    ----------
    design : Design
        Any design.

    Returns
    -------
    dict
        The record, keys in reading order.
    """
    signal = design.signal
    if signal is not None and kind_of(signal) not in SIGNALS:
        raise RecordError(
            "this signal description cannot be saved.",
            asked=f"save a {type(signal).__name__}",
            rule=f"saved signals are {', '.join(SIGNALS)}",
            remedy="design.with_signal(None), or one of these",
        )
    return {
        "format": FORMAT,
        "version": VERSION,
        "name": design.name,
        "stage": _stage_record(design.stage),
        "parts": {name: asdict(part) for name, part in design.parts.items()},
        "supply": asdict(design.supply),
        "device": {**vars(design.device), "limits": dict(design.device.limits)},
        "levels": {name: asdict(part) for name, part in design.levels.items()},
        "signal": None if signal is None else plain(signal),
    }


def from_record(record: Any, source: str = "this record") -> Design:
    """Rebuild a design from its record.

    Parameters
    ----------
    record : dict
        What `to_record` gave, possibly edited by hand.
    source : str
        What to call it in errors.

    Returns
    -------
    Design
        The design.

    Raises
    ------
    RecordError
        Naming every fault found.
    """
    faults = _shape_faults(record)
    if faults:
        raise RecordError.of(source, faults)
    built: dict[str, Any] = {}
    for key, builder in _BUILDERS.items():
        try:
            built[key] = builder(record.get(key))
        except HystkitError as error:
            faults += [_prefixed(key, fault) for fault in error.faults]
        except (TypeError, KeyError, AttributeError, ValueError) as error:
            faults.append(_shapeless(key, error))
    if not faults:
        try:
            return Design(**built)
        except HystkitError as error:
            faults += error.faults
    raise RecordError.of(source, faults)


def _stage_record(stage: Stage) -> dict[str, Any]:
    if not stage.is_custom:
        choices = ("sense", "supply", "reference", "output")
        return {choice: getattr(stage, choice) for choice in choices}
    return {
        "sense": stage.sense,
        "supply": stage.supply,
        "output": stage.output,
        "name": stage.name,
        "elements": [
            [e.name, e.node_a, e.node_b] if isinstance(e, Resistor) else [e.node_a, e.node_b]
            for e in stage.wiring
        ],
    }


def _stage(record: dict[str, Any]) -> Stage:
    choices = _texts(dict(record), "name")
    elements = choices.pop("elements", None)
    if elements is None:
        return Stage(choices.pop("sense"), **choices)
    return Stage.custom([_element(entry) for entry in elements], **choices)


def _texts(values: dict[str, Any], *keys: str) -> dict[str, Any]:
    """Give the values back if those of these keys are text, where they are there at all."""
    for key in keys:
        if not isinstance(values.get(key, ""), str):
            raise TypeError(f"{key} is not text but {values[key]!r}")
    return values


def _element(entry: list[str]) -> Element:
    return Wire(*entry) if len(entry) == 2 else Resistor(*entry)


def _parts(record: dict[str, Any] | None, unit: str) -> dict[str, Part | None]:
    faults: list[Fault] = []
    given = {}
    for name, entry in (record or {}).items():
        try:
            given[name] = Part(**entry) if isinstance(entry, Mapping) else entry
        except HystkitError as error:
            faults += [_prefixed(name, fault) for fault in error.faults]
        except TypeError as error:
            faults.append(_shapeless(name, error))
    parts = read_parts(given, unit, faults)
    if faults:
        raise RecordError.of("these parts", faults)
    return parts


def _device(record: dict[str, Any] | None) -> Device:
    known = [field.name for field in fields(Device)]
    faults = [
        unknown_name_fault("field of a device", n, known) for n in record or {} if n not in known
    ]
    if faults:
        raise RecordError.of("this device", faults)
    return Device(**_texts(record or {}, "name"))


def _signal(record: dict[str, Any] | None) -> Signal | None:
    if record is None:
        return None
    kind = record.get("kind")
    if kind not in SIGNALS:
        raise RecordError.of(
            "this signal", [unknown_name_fault("signal kind", str(kind), list(SIGNALS))]
        )
    signal: Signal = built(_texts(dict(record), "unit", "name"))
    return signal


_BUILDERS: dict[str, Any] = {
    "name": lambda value: "" if value is None else _texts({"name": value}, "name")["name"],
    "stage": _stage,
    "parts": partial(_parts, unit="Ω"),
    "supply": lambda value: Supply(**value) if isinstance(value, Mapping) else Supply(value),
    "device": _device,
    "levels": partial(_parts, unit="V"),
    "signal": _signal,
}


def _shape_faults(record: Any) -> list[Fault]:
    if not isinstance(record, dict) or record.get("format") != FORMAT:
        found = record.get("format") if isinstance(record, dict) else type(record).__name__
        return [
            Fault(
                "this is not a hystkit design record.",
                have=f"format = {found!r}",
                rule=f'a JSON object with "format": "{FORMAT}"',
                remedy="a file written by hystkit.save",
            )
        ]
    version = record.get("version")
    if version != VERSION:
        return [
            Fault(
                "this record is of another version.",
                have=f"version = {version!r}",
                rule=f"this hystkit reads version {VERSION}",
                remedy="a newer hystkit, or save the design anew",
            )
        ]
    faults = [
        unknown_name_fault("key of a design record", n, _KEYS) for n in record if n not in _KEYS
    ]
    for key in ("stage", "parts", "supply"):
        if key not in record:
            faults.append(
                Fault(f"{key} is missing.", have=", ".join(record), remedy=f'add "{key}"')
            )
    return faults


def _prefixed(key: str, fault: Fault) -> Fault:
    return Fault(f"{key}: {fault.problem}", fault.asked, fault.have, fault.rule, fault.remedy)


def _shapeless(key: str, error: Exception) -> Fault:
    return Fault(
        f"{key} does not have the shape of a record.",
        have=f"{type(error).__name__}: {error}",
        rule="the shape that hystkit.save writes",
        remedy="compare with a freshly saved design",
    )

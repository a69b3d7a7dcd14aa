"""The saved design: a small versioned JSON record, written and read without loss."""

from __future__ import annotations

import json
import os
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict, fields
from functools import partial
from inspect import Parameter, signature
from pathlib import Path
from typing import Any

from hystkit.base.errors import Fault, HystkitError, InputError, RecordError
from hystkit.base.files import write_text
from hystkit.base.nearest import unknown_name_fault
from hystkit.circuit.design import Design
from hystkit.circuit.design_checks import read_parts
from hystkit.circuit.device import Device
from hystkit.circuit.elements import Element, Resistor, Wire
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.reading import is_kind, wrong_kind
from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.kinds import SENSORS, SIGNALS, built, kind_of, plain
from hystkit.circuit.stage import Stage

FORMAT = "hystkit design"
VERSION = 1
#: Media type of a record, in the output of a panel.
MIME = "application/vnd.hystkit.design+json"

_NEEDED = ("stage", "parts", "supply")
_CHOICES = ("sense", "supply", "reference", "output")
_CUSTOM = ("sense", "supply", "output", "name", "elements")
_PART = ("value", "tol", "tempco")
_SUPPLY = ("v_cc", "v_ee", "tol")
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
    InputError
        If it cannot be written.
    """
    text = json.dumps(to_record(design), indent=2, ensure_ascii=False) + "\n"
    return write_text(Path(path), text, overwrite=overwrite)


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
    repeated: list[str] = []
    try:
        # Some editors put a byte order mark in front.
        text = source.read_text(encoding="utf-8-sig")
        record = json.loads(text, object_pairs_hook=partial(_unique, repeated))
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
    return _rebuilt(record, str(source), [_repeated(key) for key in dict.fromkeys(repeated)])


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

    Raises
    ------
    InputError
        If it is no design.
    RecordError
        If its signal is of a kind that a record does not know.
    """
    if not is_kind(design, Design):
        remedy = "hk.save(hk.Design(stage, parts, supply=5.0), path)"
        raise InputError.of("this request", [wrong_kind("design", design, "a Design", remedy)])
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
        "device": {name: _as_json(value) for name, value in vars(design.device).items()},
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
    return _rebuilt(record, source, [])


def _rebuilt(record: Any, source: str, faults: list[Fault]) -> Design:
    faults += _shape_faults(record)
    if not isinstance(record, dict) or record.get("format") != FORMAT or _is_other(record):
        raise RecordError.of(source, faults)
    built: dict[str, Any] = {}
    for key, builder in _BUILDERS.items():
        if key in _NEEDED and key not in record:
            continue
        try:
            built[key] = builder(record.get(key))
        except HystkitError as error:
            faults += [_prefixed(key, fault) for fault in error.faults]
        except (TypeError, KeyError, AttributeError, ValueError):
            faults.append(_shapeless(key, record.get(key)))
    if {*_NEEDED, "levels"} <= built.keys():
        try:
            design = Design(**built)
        except HystkitError as error:
            faults += error.faults
    if faults:
        raise RecordError.of(source, faults)
    return design


def _as_json(value: Any) -> Any:
    if isinstance(value, Mapping):
        return dict(value)
    return list(value) if isinstance(value, tuple) else value


def _stage_record(stage: Stage) -> dict[str, Any]:
    if not stage.is_custom:
        return {choice: getattr(stage, choice) for choice in _CHOICES}
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


def _stage(record: Any) -> Stage:
    if not isinstance(record, Mapping) or "elements" not in record:
        choices = _keys(record, "stage", _CHOICES, ("sense",))
        return Stage(choices.pop("sense"), **choices)
    choices = _texts(_keys(record, "circuit", _CUSTOM), "name")
    return Stage.custom(_elements(choices.pop("elements")), **choices)


def _texts(values: dict[str, Any], *keys: str) -> dict[str, Any]:
    """Give the values back if those of these keys are text, where they are there at all."""
    faults = [
        wrong_kind(key, values[key], "text", '"..."')
        for key in keys
        if not isinstance(values.get(key, ""), str)
    ]
    if faults:
        raise RecordError.of("these texts", faults)
    return values


def _elements(entries: Any) -> list[Element]:
    wanted = 'a list such as ["R_F", "out", "plus"], or ["minus", "ref"] for a wire'
    remedy = "[" + wanted.partition(", or")[0].removeprefix("a list such as ") + ", ...]"
    if not isinstance(entries, list):
        raise RecordError.of("this circuit", [wrong_kind("elements", entries, "a list", remedy)])
    faults = [
        wrong_kind("an element", entry, wanted, remedy)
        for entry in entries
        if not isinstance(entry, list)
        or len(entry) not in (2, 3)
        or not all(isinstance(text, str) for text in entry)
    ]
    if faults:
        raise RecordError.of("this circuit", faults)
    return [Wire(*entry) if len(entry) == 2 else Resistor(*entry) for entry in entries]


def _parts(record: Any, unit: str) -> dict[str, Part | None]:
    if not isinstance(record, Mapping | None):
        fault = wrong_kind("this section", record, "a JSON object", '{"...": {"value": ...}, ...}')
        raise RecordError.of("these parts", [fault])
    faults: list[Fault] = []
    given = {}
    for name, entry in (record or {}).items():
        try:
            given[name] = _part(entry) if isinstance(entry, Mapping) else entry
        except HystkitError as error:
            faults += [_prefixed(name, fault) for fault in error.faults]
    parts = read_parts(given, unit, faults)
    if faults:
        raise RecordError.of("these parts", faults)
    return parts


def _part(record: Any) -> Part:
    return Part(**_keys(record, "part", _PART, ("value",)))


def _supply(record: Any) -> Supply:
    if not isinstance(record, Mapping):
        return Supply(record)
    return Supply(**_keys(record, "supply", _SUPPLY, ("v_cc",)))


def _device(record: dict[str, Any] | None) -> Device:
    if record is None:
        return Device()
    known = [field.name for field in fields(Device)]
    return Device(**_texts(_keys(record, "device", known), "name"))


def _signal(record: Any) -> Signal | None:
    if record is None:
        return None
    kind = record.get("kind") if isinstance(record, Mapping) else record
    if not isinstance(kind, str) or kind not in SIGNALS:
        raise RecordError.of(
            "this signal", [unknown_name_fault("signal kind", str(kind), list(SIGNALS))]
        )
    faults = [*_signal_faults(record)]
    if faults:
        raise RecordError.of("this signal", faults)
    signal: Signal = built(_texts(dict(record), "unit", "name"))
    return signal


def _signal_faults(record: Mapping[str, Any]) -> Iterator[Fault]:
    """Find keys that a signal, or a sensor or part in it, does not know or lacks."""
    kind = record.get("kind")
    known: tuple[str, ...] = _PART
    needed: tuple[str, ...] = ("value",)
    if "kind" in record:
        if kind not in (kinds := {**SIGNALS, **SENSORS}):
            yield unknown_name_fault("signal or sensor kind", str(kind), list(kinds))
            return
        parameters = signature(kinds[kind]).parameters
        known = ("kind", *parameters)
        needed = tuple(n for n, p in parameters.items() if p.default is Parameter.empty)
    try:
        _keys(record, str(kind or "part"), known, needed)
    except RecordError as error:
        yield from error.faults
    for value in record.values():
        if isinstance(value, Mapping):
            yield from _signal_faults(value)


_BUILDERS: dict[str, Any] = {
    "name": lambda value: "" if value is None else _texts({"name": value}, "name")["name"],
    "stage": _stage,
    "parts": partial(_parts, unit="Ω"),
    "supply": _supply,
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
    if _is_other(record):
        return [_version_fault(record.get("version"))]
    faults = [
        unknown_name_fault("key of a design record", n, _KEYS) for n in record if n not in _KEYS
    ]
    for key in _NEEDED:
        if key not in record:
            faults.append(
                Fault(f"{key} is missing.", have=", ".join(record), remedy=f'add "{key}"')
            )
    return faults


def _is_other(record: Mapping[str, Any]) -> bool:
    version = record.get("version")
    return type(version) is not int or version != VERSION


def _version_fault(version: object) -> Fault:
    if type(version) is int and version > VERSION:
        return Fault(
            "this record is of a newer version.",
            have=f"version = {version}",
            rule=f"this hystkit reads version {VERSION}",
            remedy="a newer hystkit",
        )
    return Fault(
        "this is not a version of a design record.",
        have=f"version = {version!r}",
        rule=f"this hystkit reads version {VERSION}",
        remedy=f'"version": {VERSION}, if the rest is as hystkit.save writes it',
    )


def _unique(repeated: list[str], pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """Build a JSON object; keys that stand in it twice are noted."""
    found = dict(pairs)
    if len(found) < len(pairs):
        counts = Counter(key for key, _ in pairs)
        repeated += [key for key, count in counts.items() if count > 1]
    return found


def _repeated(key: str) -> Fault:
    return Fault(
        f"the key {key!r} stands twice in one object.",
        have=f"{key!r} with two values",
        rule="each key once",
        remedy="leave out the one that is not meant",
    )


def _keys(
    record: Any, kind: str, known: Sequence[str], needed: Sequence[str] = ()
) -> dict[str, Any]:
    """Give a section of the record back if it holds known keys only, and all that it needs."""
    if not isinstance(record, Mapping):
        fault = wrong_kind(f"this {kind}", record, "a JSON object", "{" + _quoted(known) + "}")
        raise RecordError.of(f"this {kind}", [fault])
    faults = [unknown_name_fault(f"key of a {kind}", n, known) for n in record if n not in known]
    faults += [
        Fault(f"{n} is missing.", have=", ".join(record), remedy=f'add "{n}"')
        for n in needed
        if n not in record
    ]
    if faults:
        raise RecordError.of(f"this {kind}", faults)
    return dict(record)


def _quoted(names: Sequence[str]) -> str:
    return ", ".join(f'"{name}": ...' for name in names)


def _prefixed(key: str, fault: Fault) -> Fault:
    if fault.problem.startswith(f"{key} "):
        return fault
    return Fault(f"{key}: {fault.problem}", fault.asked, fault.have, fault.rule, fault.remedy)


def _shapeless(key: str, value: object) -> Fault:
    remedy = "compare with a freshly saved design"
    return wrong_kind(key, value, "in the shape that hystkit.save writes", remedy)

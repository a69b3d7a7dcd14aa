"""Saved designs: nothing is lost on the way, and a damaged file is refused, never half read."""

from __future__ import annotations

import copy
import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.record import from_record, to_record
from tests.circuit.custom import BRIDGE, TAPPED
from tests.circuit.strategies import designs

JsonObject = dict[str, Any]


def written(**changes: Any) -> JsonObject:
    """A record as it stands in a file, some of its keys replaced."""
    design = hk.Design(
        hk.Stage("inverting", reference="source", output="open-collector"),
        {"R_R": hk.Part("10k", tol=0.01), "R_F": "100k", "R_PU": "4k7"},
        supply=5,
        levels={"V_REF": 2.5},
        signal=hk.signals.Linear(1.2, span=(0, 2), unit="m"),
        name="tank",
    )
    record: JsonObject = json.loads(json.dumps(to_record(design)))
    return {**record, **changes}


def faults_of(record: object) -> list[str]:
    with pytest.raises(hk.RecordError) as caught:
        from_record(record)
    return [fault.problem for fault in caught.value.faults]


@given(designs())
def test_a_record_is_json_and_rebuilds_the_design(design: hk.Design) -> None:
    text = json.dumps(to_record(design), allow_nan=False)
    assert from_record(json.loads(text)) == design


@given(designs(st.sampled_from((TAPPED, BRIDGE))))
def test_a_custom_circuit_keeps_its_wiring_and_its_sense(design: hk.Design) -> None:
    twin = from_record(json.loads(json.dumps(to_record(design))))
    assert twin.stage == design.stage
    assert twin.elements == design.elements


def test_save_and_load(tmp_path: Path) -> None:
    design = from_record(written(name="Bächlein ↯ 水"))
    path = hk.save(design, tmp_path / "tank.json")
    assert path == tmp_path / "tank.json"
    assert hk.load(path) == hk.load(str(path)) == design
    assert [each.name for each in tmp_path.iterdir()] == ["tank.json"]


def test_save_never_replaces_a_file_unasked(tmp_path: Path) -> None:
    design = from_record(written())
    path = hk.save(design, tmp_path / "tank.json")
    before = path.read_bytes()
    with pytest.raises(hk.OutputExistsError, match="exists already"):
        hk.save(design.with_parts(R_F="1M"), path)
    assert path.read_bytes() == before
    hk.save(design.with_parts(R_F="1M"), path, overwrite=True)
    assert hk.load(path).parts["R_F"].value == 1e6


def test_only_a_design_is_saved(tmp_path: Path) -> None:
    with pytest.raises(hk.InputError, match="design is not a Design"):
        hk.save(hk.Stage("inverting"), tmp_path / "a.json")  # type: ignore[arg-type]
    assert list(tmp_path.iterdir()) == []


def test_a_signal_of_another_kind_is_not_saved() -> None:
    class Own(hk.signals.Linear):
        """Someone's own description, which a record does not know."""

    design = from_record(written()).with_signal(Own(1, span=(0, 1)))
    with pytest.raises(hk.RecordError, match="cannot be saved"):
        to_record(design)


def test_what_a_hand_may_leave_out() -> None:
    record = written()
    for key in ("name", "device", "levels", "signal"):
        record.pop(key)
    record["stage"] = {"sense": "inverting"}
    record["parts"] = {"R_T": "46k4", "R_B": 26.7e3, "R_F": {"value": "100k", "tol": "1 %"}}
    record["supply"] = 5
    design = from_record(record)
    assert design.parts["R_F"] == hk.Part(100e3, 0.01)
    assert design.supply == hk.Supply(5)


@pytest.mark.parametrize(
    "text",
    [
        b"",
        b"{",
        b"\xff\xfe\x00",
        b"\x89PNG\r\n\x1a\n",
        b"[" * 100_000,
        b'{"format": "hystkit design"',
        b"9" * 10_000,
        b"null",
        b"[]",
        b'"hystkit design"',
        b"{}",
        b'{"format": "something else", "version": 1}',
    ],
)
def test_a_file_that_is_no_record(tmp_path: Path, text: bytes) -> None:
    path = tmp_path / "broken.json"
    path.write_bytes(text)
    with pytest.raises(hk.RecordError) as caught:
        hk.load(path)
    assert caught.value.faults[0].remedy


def test_a_file_cut_off_anywhere(tmp_path: Path) -> None:
    whole = json.dumps(written()).encode()
    path = tmp_path / "cut.json"
    for end in range(0, len(whole), 7):
        path.write_bytes(whole[:end])
        with pytest.raises(hk.RecordError, match=r"is not JSON text"):
            hk.load(path)


def test_a_file_that_is_not_there(tmp_path: Path) -> None:
    for path in (tmp_path / "missing.json", tmp_path):
        with pytest.raises(hk.RecordError, match="cannot be read"):
            hk.load(path)


@pytest.mark.parametrize("version", [0, -1, "1", None, [1], 1e9, True, 1.0])
def test_what_is_no_version(version: object) -> None:
    assert faults_of(written(version=version)) == ["this is not a version of a design record."]


def test_a_newer_version_asks_for_a_newer_hystkit() -> None:
    with pytest.raises(hk.RecordError, match="newer version") as caught:
        from_record(written(version=2))
    assert caught.value.faults[0].remedy == "a newer hystkit"


def test_a_byte_order_mark_is_passed_over(tmp_path: Path) -> None:
    path = tmp_path / "marked.json"
    path.write_bytes(b"\xef\xbb\xbf" + json.dumps(written()).encode())
    assert hk.load(path) == from_record(written())


def test_a_key_that_stands_twice_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "twice.json"
    text = json.dumps(written(name=5)).replace('"R_F": {', '"R_F": 5, "R_F": {', 1)
    path.write_text(text, encoding="utf-8")
    with pytest.raises(hk.RecordError, match="the key 'R_F' stands twice") as caught:
        hk.load(path)
    assert len(caught.value.faults) == 2


def test_save_tells_what_is_in_the_way(tmp_path: Path) -> None:
    for target in (tmp_path / "none" / "tank.json", tmp_path):
        with pytest.raises(hk.InputError, match="cannot be written"):
            hk.save(from_record(written()), target)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("changes", "problems"),
    [
        ({"stage": {"sence": "inverting"}}, ["no key of a stage 'sence'", "sense is missing"]),
        ({"parts": {"R_F": {"tolerance": 2}}}, ["no key of a part 'tolerance'", "value is"]),
        ({"supply": {"vcc": 5}}, ["no key of a supply 'vcc'", "v_cc is missing"]),
        ({"device": {"drop_lo": 0.2}}, ["no key of a device 'drop_lo'"]),
        ({"levels": {"V_REF": {"val": 2}}}, ["no key of a part 'val'", "value is missing"]),
        (
            {"signal": {"kind": "linear", "gain": 2}},
            ["no key of a linear 'gain'", "per_unit", "sp"],
        ),
        ({"stage": {"elements": [["R_1", "a"], ["R_2"], 5]}}, ["an element", "an element"]),
        ({"stage": 5, "supply": None, "parts": []}, ["this stage", "this section", "V_CC"]),
    ],
)
def test_faults_of_a_section_name_its_keys(changes: JsonObject, problems: list[str]) -> None:
    found = faults_of(written(**changes))
    assert len(found) == len(problems)
    assert all(told in each for told, each in zip(problems, found, strict=True)), found
    assert not any("__init__" in each or "Error" in each for each in found)


def test_what_does_not_fit_together_is_told_beside_the_rest() -> None:
    found = faults_of(written(levels={}, device={"delay": -1}, signal={"kind": "linear"}, extra=1))
    assert [each.split()[0] for each in found] == [
        "there",
        "device:",
        "signal:",
        "signal:",
        "V_REF",
    ]


def test_unknown_and_missing_keys_are_reported_together() -> None:
    record = written(part={}, sply=5)
    record.pop("supply")
    assert faults_of(record) == [
        "there is no key of a design record 'part' here.",
        "there is no key of a design record 'sply' here.",
        "supply is missing.",
    ]


def test_every_fault_is_reported_at_once() -> None:
    found = faults_of(
        written(
            name=5,
            stage={"sense": "inverted", "output": "open-collector"},
            parts={"R_R": "4,7k", "R_F": {"value": 1, "tolerance": 2}, "R_PU": None},
            supply={"v_cc": -5},
            device={"drop_lo": 0.2, "offsett": 1},
            levels={"V_REF": "4 Ω"},
            signal={"kind": "quadratic"},
        )
    )
    assert [each.split()[0] for each in found] == [
        "name",
        "stage:",
        *["parts:"] * 3,
        "supply:",
        *["device:"] * 2,
        "levels:",
        "signal:",
    ]


def places(value: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """Every place inside a record, containers included."""
    if path:
        yield path
    keys = value.keys() if isinstance(value, dict) else range(len(value))
    for key in keys:
        if isinstance(value[key], dict | list):
            yield from places(value[key], (*path, key))
        else:
            yield (*path, key)


def replaced(record: JsonObject, path: tuple[Any, ...], value: object) -> JsonObject:
    changed = copy.deepcopy(record)
    inner: Any = changed
    for key in path[:-1]:
        inner = inner[key]
    inner[path[-1]] = value
    return changed


NUMBERS = st.sampled_from(
    (float("nan"), float("inf"), -float("inf"), 10**400, -1e308, 1e308, 0, -1)
)
DAMAGE = st.one_of(
    NUMBERS,
    st.none(),
    st.booleans(),
    st.text(max_size=5),
    st.lists(st.integers() | st.text(max_size=3), max_size=3),
    st.dictionaries(st.text(max_size=5), st.integers(), max_size=2),
)
RECORDS = [
    written(),
    json.loads(
        json.dumps(to_record(hk.Design(TAPPED, dict.fromkeys(TAPPED.parts, 1e4), supply=5)))
    ),
]


@given(st.sampled_from(RECORDS), st.data())
def test_a_damaged_record_gives_a_design_or_a_record_error(
    record: JsonObject, data: st.DataObject
) -> None:
    damaged = replaced(record, data.draw(st.sampled_from(list(places(record)))), data.draw(DAMAGE))
    try:
        design = from_record(damaged)
    except hk.RecordError:
        return
    # What was taken is sound: it can be written, and it stays the same.
    assert from_record(json.loads(json.dumps(to_record(design), allow_nan=False))) == design
    hk.trip_points(design)


@pytest.mark.parametrize("number", ["NaN", "Infinity", "-Infinity", "1e999", "1" + "0" * 400])
@pytest.mark.parametrize("place", [p for p in places(written()) if p[0] in ("parts", "supply")])
def test_numbers_that_are_not_finite(tmp_path: Path, number: str, place: tuple[Any, ...]) -> None:
    path = tmp_path / "record.json"
    text = json.dumps(replaced(written(), place, "@"))
    path.write_text(text.replace('"@"', number), encoding="utf-8")
    with pytest.raises(hk.RecordError):
        hk.load(path)


def test_the_file_is_named_in_the_error(tmp_path: Path) -> None:
    path = tmp_path / "two faults.json"
    path.write_text(json.dumps(written(parts={}, levels={})), encoding="utf-8")
    with pytest.raises(hk.RecordError, match=r"2 faults in .*two faults\.json"):
        hk.load(path)

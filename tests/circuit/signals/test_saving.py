"""Signals in a record and as code: every kind, with the sensor inside it."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given

import hystkit as hk
from hystkit.circuit.record import from_record, to_record
from hystkit.circuit.signals import Signal
from hystkit.circuit.signals.kinds import SENSORS, SIGNALS, kind_of
from tests.circuit.signals.strategies import saved_signals

S = hk.signals
STAGE = hk.Stage("inverting")
PARTS = {"R_T": "10k", "R_B": "10k", "R_F": "100k"}


def designed(signal: Signal) -> hk.Design:
    return hk.Design(STAGE, PARTS, supply=5.0, signal=signal)


@given(saved_signals())
def test_a_record_brings_it_back(signal: Signal) -> None:
    design = designed(signal)
    record = json.loads(json.dumps(to_record(design), allow_nan=False))
    assert from_record(record) == design
    assert record["signal"]["kind"] == kind_of(signal)


@given(saved_signals())
def test_its_code_builds_it_again(signal: Signal) -> None:
    design = designed(signal)
    again = eval(design.as_code(), {"__builtins__": {}, "hk": hk})
    assert again == design
    assert again.as_code() == design.as_code()


@given(saved_signals())
def test_a_ratiometric_one_takes_the_supply_of_its_design(signal: Signal) -> None:
    design = designed(signal)
    assert design.signal == signal.at(5.0)
    moved = design.with_supply(v_cc=9.0)
    assert moved.signal == signal.at(9.0)
    # The supply is the design's and is not stored a second time.
    assert "v_cc" not in to_record(design)["signal"]


def test_every_kind_has_a_name_of_its_own() -> None:
    exported = {getattr(S, name) for name in S.__all__} - {S.Signal, S.Limits, S.Function}
    assert {*SIGNALS.values(), *SENSORS.values()} == exported
    assert not SIGNALS.keys() & SENSORS.keys()


def test_a_record_is_plain_and_brief(tmp_path: Path) -> None:
    sensor = S.Ntc("10k", 3950, r25_tol="1 %")
    design = designed(S.SensorDivider(sensor, hk.Part("10k", tol=0.01), span=(-20, 60)))
    path = hk.save(design, tmp_path / "vent.json")
    assert json.loads(path.read_text(encoding="utf-8"))["signal"] == {
        "kind": "sensor divider",
        "sensor": {"kind": "ntc", "r25": 10000.0, "b": 3950.0, "r25_tol": 0.01},
        "other": {"value": 10000.0, "tol": 0.01, "tempco": 0.0},
        "span": [-20.0, 60.0],
    }
    assert hk.load(path) == design


@pytest.mark.parametrize(
    ("entry", "said"),
    [
        ({"kind": "ntc", "r25": 1e4, "b": 3950}, "there is no signal kind 'ntc'"),
        ({"kind": "Linear", "per_unit": 1, "span": [0, 1]}, "try     linear"),
        ({"span": [0, 1]}, "there is no signal kind 'None'"),
        ({"kind": "linear", "span": [0, 1]}, "per_unit"),
        ({"kind": "linear", "per_unit": 1, "span": [1, 0]}, "not an interval"),
        ({"kind": "linear", "per_unit": 1, "span": [0, 1], "slope": 1}, "slope"),
        (
            {"kind": "driven sensor", "sensor": {"kind": "ptc"}, "current": 1e-3, "span": [0, 1]},
            "ptc",
        ),
        (
            {"kind": "driven sensor", "sensor": {"kind": "rtd", "r0": -1}, "current": 1e-3,
             "span": [0, 1]},
            "r0 is not positive",
        ),
    ],
)  # fmt: skip
def test_what_is_no_signal_is_refused(entry: dict[str, object], said: str) -> None:
    record = {**to_record(designed(S.Linear(1, span=(0, 1)))), "signal": entry}
    with pytest.raises(hk.RecordError) as caught:
        from_record(record)
    assert said in str(caught.value)
    assert "signal" in str(caught.value)


def test_functions_are_refused_by_name() -> None:
    design = designed(S.Function(np.exp, span=(0, 1)))
    with pytest.raises(hk.RecordError, match="cannot be saved") as caught:
        to_record(design)
    assert "save a Function" in str(caught.value)
    assert "measured table" in str(caught.value)

"""Windows hold exactly where every corner of the tolerances says so, in volts and beyond."""

from __future__ import annotations

from itertools import product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.analyses.sizing.requirement import signal_corners
from hystkit.circuit.signals import CurrentLoop, Linear, Ntc, SensorDivider
from hystkit.numeric.tolerances import toleranced
from tests.analyses import exhaustive

OPEN = hk.Stage("inverting", output="open-collector")
DEVICE = hk.Device(drop_low=0.2, offset=1e-3, offset_drift=2e-5, leakage=5e-8,
                   limits={"drop_low": (0.1, 0.4), "offset": (-3e-3, 3e-3)})  # fmt: skip
TANK = Linear(1.2, 0.6, span=(0, 2), unit="m", name="level", slope_tol=0.01, zero_error=5e-3)
NTC = SensorDivider(Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005), hk.Part("10k", tol=0.01),
                    span=(-20, 60))  # fmt: skip


def corner_values(candidate: hk.Candidate, excursion: float = 0.0) -> list[dict[str, float]]:
    box = toleranced(candidate.design, excursion)
    return [dict(zip(box, ends, strict=True)) for ends in product(*box.values())]


def corner_trips(candidate: hk.Candidate, excursion: float = 0.0) -> dict[str, Any]:
    corners = corner_values(candidate, excursion)
    grid = {name: np.array([corner[name] for corner in corners]) for name in corners[0]}
    trips = hk.trip_points(candidate.design, **grid)
    return {"upper": trips.upper, "lower": trips.lower, **grid}


@settings(max_examples=25)
@given(
    middle=st.floats(1.5, 3.5),
    width=st.floats(0.3, 1.0),
    halves=st.tuples(st.floats(0.03, 0.25), st.floats(0.03, 0.25)),
    tol=st.sampled_from([0.0, 0.001, 0.01, 0.05]),
    temperature=st.sampled_from([None, (-20, 60)]),
)
def test_random_windows_hold_exactly_as_all_corners_say(
    middle: float, width: float, halves: tuple[float, float], tol: float, temperature: Any
) -> None:
    upper, lower = middle + width / 2, middle - width / 2
    windows = {
        "upper": (upper - halves[0], upper + halves[0]),
        "lower": (lower - halves[1], lower + halves[1]),
    }
    found = hk.size(
        OPEN, supply=hk.Supply(5.0, tol=0.01), **windows, series="E12", tol=tol, tempco=1e-4,
        temperature=temperature, device=DEVICE, parts={"R_PU": hk.Part("4k7", tol=0.05)}, count=3,
        suggest=False,
    )  # fmt: skip
    excursion = 0.0 if temperature is None else 45.0
    for candidate in found:
        trips = corner_trips(candidate, excursion)
        inside = [np.all((a <= trips[n]) & (trips[n] <= b)) for n, (a, b) in windows.items()]
        assert candidate.holds is bool(all(inside))
        for name in windows:
            low, high = candidate.extremes[name]
            assert (low, high) == pytest.approx((trips[name].min(), trips[name].max()), rel=1e-12)
        margins = [min(trips[n].min() - a, b - trips[n].max()) for n, (a, b) in windows.items()]
        assert candidate.margin == pytest.approx(min(margins), abs=1e-12)
        assert (candidate.margin >= 0) is candidate.holds


def test_no_combination_holds_where_the_search_says_so() -> None:
    free = ("R_T", "R_B", "R_F")
    points = exhaustive.grid(free, "E12", (1e3, 1e6))
    template = hk.Design(
        OPEN, {**{n: hk.Part(1e4, 0.01) for n in free}, "R_PU": "4k7"}, supply=5.0, device=DEVICE
    )
    for half in (0.030, 0.034, 0.038, 0.042):
        windows = {"upper": (2.7 - half, 2.7 + half), "lower": (2.3 - half, 2.3 + half)}
        found = hk.size(OPEN, supply=5.0, **windows, series="E12", device=DEVICE,
                        parts={"R_PU": "4k7"}, suggest=False)  # fmt: skip
        assert found.fits is bool((exhaustive.worst_errors(template, points, **windows) <= 1).any())


@pytest.mark.parametrize("loaded", ["high", "low"])
@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_rising_sensor(sense: str, loaded: str) -> None:
    # A pump that fills runs at low level, a drain pump at high level.
    fills = (sense == "inverting") == (loaded == "high")
    low, high = (0.7, 0.9), (1.3, 1.5)
    on, off = (low, high) if fills else (high, low)
    found = hk.size(hk.Stage(sense), supply=5.0, signal=TANK, load=loaded, on_at=on, off_at=off,
                    parts={} if sense == "inverting" else {"R_B": "33k"}, count=1)  # fmt: skip
    assert found.fits
    best = found[0]
    assert best.trips.measurand.low == pytest.approx(0.8, abs=0.05)
    assert best.trips.measurand.high == pytest.approx(1.4, abs=0.05)
    assert set(best.switching) == {"on_at", "off_at"}
    assert_inside(best, {"on_at": on, "off_at": off})


@pytest.mark.parametrize("loaded", ["high", "low"])
@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_falling_sensor(sense: str, loaded: str) -> None:
    # Voltage falls as it gets warmer: an inverting stage goes high when it is hot.
    cools = (sense == "inverting") == (loaded == "high")
    on, off = ((27.0, 30.0), (22.0, 25.0)) if cools else ((22.0, 25.0), (27.0, 30.0))
    found = hk.size(hk.Stage(sense), supply=hk.Supply(5.0, tol=0.05), signal=NTC, load=loaded,
                    on_at=on, off_at=off, tol=0.001, count=1,
                    parts={} if sense == "inverting" else {"R_B": "33k"})  # fmt: skip
    assert found.fits, found
    assert_inside(found[0], {"on_at": on, "off_at": off})


def assert_inside(candidate: hk.Candidate, windows: dict[str, tuple[float, float]]) -> None:
    """Every corner of stage and sensor, one by one."""
    signal = candidate.design.signal
    assert signal is not None
    corners, trips = corner_values(candidate), corner_trips(candidate)
    edges = candidate.requirement.edges(candidate.design.stage.sense)
    for edge, (a, b) in windows.items():
        found = []
        for place, corner in enumerate(corners):
            shared = {"V_CC": corner.get("V_CC", 5.0)} if getattr(signal, "ratiometric", 0) else {}
            found += [
                float(signal.quantity(trips[edges[edge]][place], **parameters, **shared))
                for parameters in signal_corners(signal)
            ]
        assert a <= min(found)
        assert max(found) <= b
        assert candidate.switching[edge] == pytest.approx((min(found), max(found)), rel=1e-9)


@settings(max_examples=15)
@given(half=st.floats(0.3, 3.0), supply_tol=st.sampled_from([0.0, 0.02, 0.1]))
def test_ratiometric_windows_are_judged_with_the_supply_that_they_share(
    half: float, supply_tol: float
) -> None:
    supply = hk.Supply(5.0, tol=supply_tol)
    windows = {"on_at": (28 - half, 28 + half), "off_at": (22 - half, 22 + half)}
    signal = SensorDivider(Ntc("10k", 3950), "10k", span=(-20, 60))
    found = hk.size(OPEN, supply=supply, signal=signal, device=DEVICE, series="E24", count=1,
                    parts={"R_PU": hk.Part("4k7", tol=0.05)}, suggest=False, **windows)  # fmt: skip
    best = found[0]
    trips = corner_trips(best)
    edges = best.requirement.edges("inverting")
    v_cc = trips.get("V_CC", 5.0)
    inside = []
    for edge, (a, b) in windows.items():
        quantities = best.design.signal.quantity(trips[edges[edge]], V_CC=v_cc)
        inside.append(bool(np.all((quantities >= a) & (quantities <= b))))
    assert best.holds is all(inside)


def test_a_ratiometric_stage_does_not_mind_its_supply() -> None:
    # An ideal push-pull output follows V_CC too: all cancels, whatever the supply does.
    windows: Any = {"on_at": (26.5, 29.5), "off_at": (20.5, 23.5)}
    signal = SensorDivider(Ntc("10k", 3950), "10k", span=(-20, 60))
    still, loose = (
        hk.size(hk.Stage("inverting"), supply=hk.Supply(5.0, tol=tol), signal=signal, **windows)
        for tol in (0.0, 0.2)
    )
    assert loose[0].worst_error == pytest.approx(still[0].worst_error, rel=1e-9)
    fixed = hk.size(
        hk.Stage("inverting"), supply=hk.Supply(5.0, tol=0.2), suggest=False, **windows,
        signal=SensorDivider(Ntc("10k", 3950), "10k", excitation=5.0, span=(-20, 60)),
    )  # fmt: skip
    assert fixed[0].worst_error > 2 * loose[0].worst_error


def test_sensor_tolerance_is_taken_off_the_windows() -> None:
    windows: Any = {"on_at": (0.7, 0.9), "off_at": (1.3, 1.5)}
    sharp, blunt = (
        hk.size(hk.Stage("inverting"), supply=5.0, count=1, signal=signal, **windows)[0]
        for signal in (Linear(1.2, 0.6, span=(0, 2), unit="m"), TANK)
    )
    assert blunt.worst_error > sharp.worst_error
    # At 1.3 m the signal may stand 1 % of 1.56 V and 5 mV higher than it should.
    assert blunt.target.upper[0] == pytest.approx(0.6 + 1.2 * 1.3 + 0.01 * 1.56 + 0.005)


def test_numbers_in_the_measurand() -> None:
    loop = CurrentLoop("150", span=(0, 2), unit="m", name="level")
    found = hk.size(hk.Stage("inverting"), supply=5.0, signal=loop, on_at=0.8, off_at="1.41")
    assert found[0].trips.lower == pytest.approx(float(loop.volts(0.8)), abs=3e-3)
    assert found[0].trips.upper == pytest.approx(float(loop.volts(1.41)), abs=3e-3)


def test_all_forms_are_compared_by_what_they_reach() -> None:
    windows: Any = {"upper": (2.6, 2.8), "lower": (2.2, 2.4)}
    every = hk.size(supply=5.0, device=DEVICE, **windows, series="E24", count=5)
    customary = {"R_PU": hk.Part("4k7", tol=0.01)}
    alone = [
        hk.size(stage, supply=5.0, device=DEVICE, **windows, series="E24", count=1, parts=parts)
        for stage, parts in ((hk.Stage("inverting"), {}), (OPEN, customary))
    ]
    assert every[0].worst_error <= min(one[0].worst_error for one in alone) + 1e-9
    assert every.searched == 4 * 73**3
    errors = [c.worst_error for c in every]
    assert errors == sorted(errors)
    assert {c.design.stage.reference for c in every} == {"divider"}


@pytest.mark.parametrize("sense", ["inverting", "non-inverting"])
def test_units_with_their_own_sensor_switch_within_the_windows(sense: str) -> None:
    # The source resistance of the sensor moves with the quantity: each trip is where both agree.
    on, off = ((27.0, 31.0), (21.0, 25.0)) if sense == "inverting" else ((21.0, 25.0), (27.0, 31.0))
    device = hk.Device(drop_low=0.1, bias_plus=5e-8, bias_minus=5e-8)
    found = hk.size(hk.Stage(sense), supply=hk.Supply(5.0, tol=0.05), signal=NTC, on_at=on,
                    off_at=off, tol=0.001, count=1, device=device,
                    parts={} if sense == "inverting" else {"R_B": "33k"})  # fmt: skip
    best = found[0]
    assert best.holds
    assert "R_S" in best.design.parts
    assert "R_S" not in {line.reference for line in best.bill}
    rng = np.random.default_rng(8)
    count = 20_000
    box = {n: pair for n, pair in toleranced(best.design).items() if n != "R_S"}
    units = {n: rng.uniform(*pair, count) for n, pair in box.items()}
    sensor = {
        n: rng.uniform(p.low, p.high, count) for n, p in NTC.parameters.items() if p.low < p.high
    }
    sensor["V_CC"] = units["V_CC"]
    for edge, trip in best.requirement.edges(sense).items():
        quantity = np.full(count, 25.0)
        for _ in range(60):
            source = NTC.source_resistance(quantity, **sensor)
            volts = getattr(hk.trip_points(best.design, **units, R_S=source), trip)
            quantity = np.asarray(NTC.quantity(volts, **sensor))
        low, high = {"on_at": on, "off_at": off}[edge]
        assert low <= quantity.min()
        assert quantity.max() <= high
        bounds = best.switching[edge]
        assert bounds[0] <= quantity.min() < quantity.max() <= bounds[1]


def test_source_resistance_that_was_given_is_kept() -> None:
    request: dict[str, Any] = {"supply": 5.0, "signal": NTC, "on_at": 28, "off_at": 22, "count": 1}
    own = hk.size(hk.Stage("inverting"), **request, parts={"R_S": "5k"})[0]
    assert own.design.parts["R_S"] == hk.Part("5k")
    assert "R_S" in {line.reference for line in own.bill}
    taken = hk.size(hk.Stage("inverting"), **request)[0].design.parts["R_S"]
    ends = [float(NTC.at(5.0).source_resistance(q, R_25=r, R_X=x, B=b)) for q in (22, 28)
            for r in (9900, 10100) for x in (9900, 10100)
            for b in (3950 * 0.995, 3950 * 1.005)]  # fmt: skip
    assert taken.value * (1 - taken.tol) == pytest.approx(min(ends), rel=1e-9)
    assert taken.value * (1 + taken.tol) == pytest.approx(max(ends), rel=1e-9)
    # A source without resistance brings none.
    tank = hk.size(hk.Stage("inverting"), supply=5.0, signal=TANK, on_at=0.8, off_at=1.4, count=1)
    assert "R_S" not in tank[0].design.parts

"""The width window: every bound against what it stands for, and what would open an empty one."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import hystkit as hk
from hystkit.review.window.search import Requirement, first_widths, limiting_widths

TEMPERATURE = hk.signals.Linear("50m", span=(-10, 30), unit="°C", name="temperature")


def fridge_stage(**changes: Any) -> hk.Design:
    """Output high, and the compressor on, above 5.08 °C, off below 3.42 °C."""
    given: dict[str, Any] = {
        "parts": {"R_I": "10k", "R_F": "600k"},
        "supply": 5.0,
        "levels": {"V_REF": 0.25},
        "signal": TEMPERATURE,
        **changes,
    }
    stage = hk.Stage("non-inverting", reference="source")
    return hk.Design(stage, given.pop("parts"), **given)


#: A vaccine fridge of our own: settles at -14 °C and 25 °C, with a probe that lags.
FRIDGE = hk.TwoLag(tau=7200, sensor_tau=240, on_level=-14, off_level=25, dead_time=30, unit="°C")
#: A tank that fills and empties at a constant rate, where every bound has a formula.
TANK = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20, unit="m")
LEVEL = hk.signals.Linear(1.0, span=(0, 5), unit="m", name="level")


def tank_stage(**changes: Any) -> hk.Design:
    """Trips at 2.25 m and 2.75 m, the pump on below."""
    given: dict[str, Any] = {"supply": 5.0, "levels": {"V_REF": 2.5}, "signal": LEVEL, **changes}
    parts = given.pop("parts", {"R_R": "10k", "R_F": "90k"})
    return hk.Design(hk.Stage("inverting", reference="source"), parts, **given)


def width_of(name: str, design: hk.Design | None = None, **asked: Any) -> float:
    return hk.width_window(design or tank_stage(), **asked)[name].width


# -- bounds of the cycle, where there is a formula ----------------------------------------------


def test_cycling_of_an_integrating_plant() -> None:
    # Period (H + L (r1 + r2)) (1/r1 + 1/r2); the rates and the dead time of TANK, from theory.
    rise, fall, dead = 2e-3, 1e-3, 20
    expected = 3600 / 3.0 / (1 / rise + 1 / fall) - dead * (rise + fall)
    assert width_of("cycling", plant=TANK, starts_per_hour=3) == pytest.approx(expected, rel=1e-4)


def test_shortest_times_of_an_integrating_plant() -> None:
    # On for (H + L (r1 + r2)) / r1, off for (H + L (r1 + r2)) / r2.
    overshoot = 20 * 3e-3
    found = hk.width_window(tank_stage(), plant=TANK, min_on=200, min_off=500)
    assert found["minimum on time"].width == pytest.approx(200 * 2e-3 - overshoot, rel=1e-4)
    assert found["minimum off time"].width == pytest.approx(500 * 1e-3 - overshoot, rel=1e-4)


def test_swing_of_an_integrating_plant() -> None:
    # Extremes lie L r1 above and L r2 below the trips.
    assert width_of("swing", plant=TANK, swing=0.3) == pytest.approx(0.3 - 0.06, rel=1e-4)


def test_a_swing_that_dead_time_alone_exceeds() -> None:
    found = hk.width_window(tank_stage(), plant=TANK, swing=0.05)
    assert found["swing"].width == 0
    assert found.feasible is None
    assert "dead time and lag" in found["swing"].text


@pytest.mark.parametrize("limit", [{"starts_per_hour": 1.5}, {"min_on": 1000}, {"swing": 2.5}])
def test_the_exact_cycle_meets_each_bound_of_a_lagging_plant(limit: dict[str, float]) -> None:
    """Just inside a bound the cycle keeps its limit, just outside it does not."""
    (name,) = limit
    bound_name = {"starts_per_hour": "cycling", "min_on": "minimum on time"}.get(name, name)
    found = hk.width_window(fridge_stage(), plant=FRIDGE, **limit)
    bound = found[bound_name]
    ratio = np.array([0.999, 1.001]) ** (1 if bound.kind == "ceiling" else -1)
    on_at, off_at = found.asked.axis.edges(bound.width * ratio)
    cycle = hk.steady_cycle(FRIDGE, on_at=on_at, off_at=off_at)
    reached = {
        "starts_per_hour": -cycle.starts_per_hour,
        "min_on": cycle.on_time,
        "swing": -(cycle.high - cycle.low),
    }[name]
    wanted = limit[name] * (1 if name == "min_on" else -1)
    assert reached[0] >= wanted > reached[1]


def test_the_reach_of_a_plant_that_settles() -> None:
    # About 4.25 °C the nearer level lies 18.25 °C below: no width beyond twice that is reached.
    design = fridge_stage(signal=hk.signals.Linear("50m", span=(-40, 50), unit="°C"))
    assert width_of("reach", design, plant=FRIDGE) == pytest.approx(2 * 18.25, rel=1e-3)


# -- floors of disturbances ------------------------------------------------------------------

NOISE = hk.Noise.two_pole(rms="20m", f1=10, f2="1k")


def test_disturbances_and_their_sum() -> None:
    # A signal of 1 V per m: metres are volts.
    found = hk.width_window(
        tank_stage(), noise=NOISE, hum=("30m", 50), load_step=0.1, slope="0.1 V/s"
    )
    noise = hk.width_for(probability=1e-3, noise=NOISE, slope=0.1)
    hum = hk.hum_width(0.03, 50, 0.1)
    assert found["noise"].width == pytest.approx(noise)
    assert found["hum"].width == pytest.approx(hum)
    assert found["load step"].width == pytest.approx(0.1)
    assert found["all disturbances"].width == pytest.approx(noise + hum + 0.1)


def test_the_plant_gives_the_slope() -> None:
    by_plant = width_of("noise", plant=TANK, noise=NOISE)
    # The slower of both rates, 1 mm/s, is 1 mV/s here.
    assert by_plant == pytest.approx(width_of("noise", slope=1e-3, noise=NOISE))


def test_the_slope_is_that_at_the_width_found() -> None:
    found = hk.width_window(fridge_stage(), plant=FRIDGE, noise=NOISE)
    width = found["noise"].width
    on_at, off_at = found.asked.axis.edges(width)
    cycle = hk.steady_cycle(FRIDGE, on_at=on_at, off_at=off_at)
    slope = 0.05 * min(abs(cycle.rate_at_on), abs(cycle.rate_at_off))
    needed = hk.width_for(probability=1e-3, noise=NOISE, slope=slope)
    assert 0.05 * width == pytest.approx(needed, rel=1e-5)


def test_a_load_step_is_taken_without_the_noise_it_allows_for() -> None:
    rail = hk.signals.Linear(1.0, span=(0, 5), unit="V", name="rail")
    design = tank_stage(signal=rail)
    step = hk.load_step(
        design, current=2, source_resistance=0.1, load="low", noise_rms=0.01, sigmas=6
    )
    assert width_of("load step", design, load="low", load_step=step) == pytest.approx(0.2)


def test_offset_and_bias() -> None:
    device = hk.Device(offset=0.005, bias_plus="1u")
    design = tank_stage(device=device)
    # 5 mV, and 1 µA in 9 kΩ; a tenth of the width unless said otherwise.
    assert width_of("offset", design) == pytest.approx(0.14, rel=1e-6)
    assert width_of("offset", design, error_share=0.2) == pytest.approx(0.07, rel=1e-6)


# -- ceilings --------------------------------------------------------------------------------


def test_accuracy_leaves_room_for_the_tolerances() -> None:
    assert width_of("accuracy", accuracy=0.3) == pytest.approx(0.6)
    assert width_of("accuracy", accuracy=0.3, uncertainty=0.05) == pytest.approx(0.5)
    loose = tank_stage(levels={"V_REF": hk.Part(2.5, tol=0.01)})
    worst = max(
        abs(end - nominal)
        for name, nominal in (("lower", 2.25), ("upper", 2.75))
        for end in hk.spread(loose).extremes[name]
    )
    assert width_of("accuracy", loose, accuracy=0.3) == pytest.approx(2 * (0.3 - worst))


def test_a_decreasing_signal_and_volts() -> None:
    """The same stage in volts, and behind a sensor whose voltage falls, has the same window."""
    falling = hk.signals.Linear(-1.0, at_zero=5, span=(0, 5), unit="m", name="depth")
    down = hk.Integrating(rate_on=-2e-3, rate_off=1e-3, dead_time=20, unit="m")
    asked: dict[str, Any] = {"starts_per_hour": 3, "noise": NOISE, "swing": 1.0}
    found = hk.width_window(tank_stage(signal=falling), plant=down, **asked)
    volts = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20)
    plain = hk.width_window(tank_stage(signal=None), plant=volts, **asked)
    same = hk.width_window(tank_stage(), plant=TANK, **asked)
    for name in ("cycling", "noise", "swing"):
        assert found[name].width == pytest.approx(same[name].width, rel=1e-4)
        assert plain[name].width == pytest.approx(same[name].width, rel=1e-4)
    assert plain.unit == "V"


# -- the window ------------------------------------------------------------------------------


def test_what_binds_and_what_is_feasible() -> None:
    found = hk.width_window(
        tank_stage(), plant=TANK, starts_per_hour=3, noise=NOISE, accuracy=0.6, swing=1.0
    )
    floors = [bound.width for bound in found.bounds if bound.kind == "floor"]
    ceilings = [bound.width for bound in found.bounds if bound.kind == "ceiling"]
    assert found.feasible == (max(floors), min(ceilings))
    assert found.floor is not None
    assert found.ceiling is not None
    assert (found.floor.width, found.ceiling.width) == found.feasible
    assert found.inside == (max(floors) <= 0.5 <= min(ceilings))
    assert found.target is not None
    assert max(floors) < found.target < min(ceilings)
    assert found.edges is not None
    assert found.edges[1] - found.edges[0] == pytest.approx(found.target)
    assert sum(found.edges) / 2 == pytest.approx(found.middle)
    assert found.openings == ()


def test_nothing_asked_leaves_every_width_of_the_span() -> None:
    found = hk.width_window(tank_stage())
    assert found.feasible == (0.0, pytest.approx(5.0))


def test_every_opening_opens_the_window_when_it_is_run() -> None:
    asked: dict[str, Any] = {
        "plant": FRIDGE,
        "starts_per_hour": 1,
        "swing": 2.0,
        "min_on": 300,
        "accuracy": 1.5,
        "noise": hk.Noise.two_pole(rms="2m", f1=10, f2="1k"),
    }
    found = hk.width_window(fridge_stage(), **asked)
    assert found.feasible is None
    assert found.openings
    for opening in found.openings:
        then = hk.width_window(fridge_stage(), **{**asked, **opening.changes})
        assert then.feasible == opening.feasible
        # The smallest change, to the digits it is written with, leaves hardly any room.
        assert opening.feasible[1] / opening.feasible[0] < 1.03


ASKED = st.fixed_dictionaries(
    {
        "starts_per_hour": st.floats(0.5, 20),
        "min_on": st.floats(20, 2000),
        "swing": st.floats(0.05, 2),
        "accuracy": st.floats(0.02, 1),
        "hum": st.tuples(st.floats(1e-3, 0.3), st.just(50.0)),
        "load_step": st.floats(1e-3, 0.5),
        "uncertainty": st.floats(0, 0.05),
    }
)


@settings(max_examples=40, deadline=None)
@given(ASKED)
def test_openings_of_random_windows(asked: dict[str, Any]) -> None:
    """Each opening opens; and a window that is empty with none is one that nothing single opens."""
    found = hk.width_window(tank_stage(), plant=TANK, **asked)
    if found.feasible is not None:
        assert found.openings == ()
        return
    for opening in found.openings:
        then = hk.width_window(tank_stage(), **{"plant": TANK, **asked, **opening.changes})
        assert then.feasible is not None
        assert then.feasible == pytest.approx(opening.feasible)
        assert opening.text


def test_less_dead_time_is_found() -> None:
    """0.06 m of overshoot alone exceed a swing of 0.05 m; less than 5/6 of the dead time helps."""
    found = hk.width_window(tank_stage(), plant=TANK, swing=0.05, load_step=0.01)
    (opening,) = [o for o in found.openings if "plant" in o.changes]
    on, off = opening.changes["plant"].dead_time
    assert on == off
    assert (on * 3e-3 + 0.01) == pytest.approx(0.05, abs=20 * 3e-3 * 0.011)


def test_views_say_what_binds() -> None:
    text = str(hk.width_window(tank_stage(), plant=TANK, starts_per_hour=3, swing=0.1))
    assert "bound by cycling and swing" in text
    assert "would open it" in text


WIDTHS = first_widths(1.0)

# -- the search ------------------------------------------------------------------------------


@given(st.floats(1e-5, 0.99), st.booleans())
def test_limiting_widths_are_found_closely(limit: float, least: bool) -> None:
    requirement: Requirement[Any] = Requirement(lambda w: (w >= limit) == least, least)
    (found,) = limiting_widths(lambda w: w, [requirement], (WIDTHS, WIDTHS))
    assert found == pytest.approx(limit, rel=1e-5)
    assert (found >= limit) == least


def test_limiting_widths_at_the_ends() -> None:
    def never(widths: Any) -> Any:
        return np.zeros(widths.shape, dtype=bool)

    def always(widths: Any) -> Any:
        return ~never(widths)

    tries = [Requirement(meets, least) for meets in (never, always) for least in (True, False)]
    assert limiting_widths(lambda w: w, tries, (WIDTHS, WIDTHS)) == [math.inf, 0.0, 0.0, math.inf]


def test_a_plant_that_does_not_cycle_tells_no_slope() -> None:
    turned = hk.Integrating(-1e-3, 2e-3, unit="m")
    window = hk.width_window(tank_stage(), plant=turned, noise=NOISE, hum=("30m", 100), swing=1)
    assert window.feasible is None
    assert math.isinf(window["noise"].width)
    assert math.isinf(window["all disturbances"].width)
    assert window.openings == ()


def test_noise_that_asks_for_more_than_the_plant_reaches() -> None:
    slow = hk.FirstOrder(3600, on_level=2.8, off_level=2.2, unit="m")
    loud = hk.Noise.two_pole(rms="60m", f1=10, f2="1k")
    window = hk.width_window(tank_stage(), plant=slow, noise=loud)
    assert math.isinf(window["noise"].width)
    assert any("noise of at most" in opening.text for opening in window.openings)


def test_a_floor_that_any_width_meets_does_not_bind() -> None:
    turned = hk.width_window(tank_stage(), plant=hk.Integrating(-1e-3, 2e-3), starts_per_hour=20)
    assert turned.floor is None
    assert "bound by reach" in turned.to_text()


def test_quantities_are_shown_in_their_own_unit() -> None:
    """A percent counts as 1, and a large number has no exponent."""
    opening = hk.signals.Linear("50m", span=(0, 100), unit="%", name="opening")
    window = hk.width_window(tank_stage(signal=opening), accuracy="12.5 %", uncertainty=0.5)
    assert window["accuracy"].width == pytest.approx(24.0)
    assert "24 %" in window.to_text()
    assert "± 12.5 % of 50 %" in window["accuracy"].text
    pressure = hk.signals.Linear("20u", span=(0, 250e3), unit="Pa", name="vessel")
    text = hk.width_window(tank_stage(signal=pressure), accuracy="20 kPa").to_text()
    assert "40000 Pa" in text
    assert "e+" not in text


# -- refusals --------------------------------------------------------------------------------


def test_everything_that_is_missing_or_wrong_is_named() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.width_window(
            tank_stage(), starts_per_hour=3, noise=NOISE, hum=3, probability=1.5, accuracy="soon"
        )
    for word in ("no plant", "how fast", "hum", "probability", "accuracy"):
        assert word in str(caught.value)


def test_a_band_outside_the_span_of_its_signal_is_refused() -> None:
    shallow = hk.signals.Linear(1.0, span=(0, 1), unit="m", name="level")
    with pytest.raises(hk.DesignError, match="outside the signal's span"):
        hk.width_window(tank_stage(signal=shallow))


def test_units_have_to_agree() -> None:
    with pytest.raises(hk.InputError, match="different units"):
        hk.width_window(tank_stage(), plant=FRIDGE)


def test_a_design_that_does_not_switch_is_refused() -> None:
    beyond = hk.signals.MeasuredTable([0.0, 1.0], [0.0, 2.4], unit="m", name="level")
    dead = tank_stage(signal=beyond)
    with pytest.raises(hk.DesignError, match="switches"):
        hk.width_window(dead)
    with pytest.raises(hk.InputError, match="Design"):
        hk.width_window("a stage")  # type: ignore[arg-type]

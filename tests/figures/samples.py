"""Levels, loops and responses to draw, made by hand and at random."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from hypothesis import strategies as st

from hystkit.circuit.signals import Linear
from hystkit.numeric.views import Levels, Loop, Response

NAN = float("nan")


@dataclass(frozen=True)
class Thermistor:
    """10 kΩ NTC (B 3950 K) to ground under 10 kΩ: a curved sensor."""

    supply: float = 5.0
    span: tuple[float, float] = (-10.0, 45.0)
    unit: str = "°C"
    name: str = "temperature"
    decreasing: bool = True

    def volts(self, quantity: Any) -> Any:
        share = np.exp(3950 * (1 / (np.asarray(quantity) + 273.15) - 1 / 298.15))
        return self.supply * share / (share + 1)

    def quantity(self, volts: Any) -> Any:
        share = np.asarray(volts, dtype=float) / (self.supply - np.asarray(volts, dtype=float))
        return 1 / (1 / 298.15 + np.log(share) / 3950) - 273.15


def levels(lower: float, upper: float, **changes: Any) -> Levels:
    """Levels of a 5 V stage with these trips."""
    values = {"v_ee": 0.0, "v_cc": 5.0, "output_high": 4.9, "output_low": 0.2} | changes
    width, middle = upper - lower, (upper + lower) / 2
    ends = [*(values.get("lower_interval") or ()), *(values.get("upper_interval") or ())]
    ends += [lower, upper]
    # As in an inverting stage, whose signal is wired to a pin.
    if "pins" not in values:
        values |= {
            "pins": (min(ends), max(ends)) if upper >= lower else None,
            "signal_at_pin": True,
        }
    return Levels(upper=upper, lower=lower, width=width, middle=middle, **values)


def vent() -> Levels:
    """A greenhouse vent with everything that a ruler can show but a reference."""
    sensor = Thermistor()
    span = (float(sensor.volts(45.0)), float(sensor.volts(-10.0)))
    return levels(
        2.332, 2.553, upper_interval=(2.52, 2.585), lower_interval=(2.30, 2.362),
        common_mode=(0.0, 3.5), signal=sensor, signal_span=span,
    )  # fmt: skip


def failed(message: str = "the loop gain is below one, so the output never switches.") -> Levels:
    """A design without trips."""
    return levels(NAN, NAN, ok=False, message=message, common_mode=(0.0, 3.5))


def loop_of(found: Levels) -> Loop:
    """The loop of an inverting stage with these levels."""
    known = [v for v in (found.v_ee, found.v_cc, found.lower, found.upper) if np.isfinite(v)]
    low, high = min(known), max(known)
    if not found.ok:
        nothing = np.full(2, NAN), np.full(2, NAN)
        return Loop((low, high), nothing, nothing, found)
    before = np.array([found.output_high] * 2 + [found.output_low] * 2)
    rising = np.array([low, found.upper, found.upper, high])
    falling = np.array([high, found.lower, found.lower, low])
    return Loop((low, high), (rising, before), (falling, before[::-1]), found)


def response_of(found: Levels, points: int = 801, *, zoomed: bool = False) -> Response:
    """Two periods of a sine from rail to rail, or across the band, and the output to it."""
    time = np.linspace(0.0, 0.02, points)
    if not found.ok:
        return Response(time, np.sin(time), np.full_like(time, NAN), np.empty(0), found)
    low, high = found.lower - found.width, found.upper + found.width
    if not zoomed:
        low, high = min(low, found.v_ee), max(high, found.v_cc)
    signal = (low + high) / 2 - (high - low) / 2 * np.cos(2 * np.pi * 100 * time)
    output, switches, above = np.empty_like(time), [], False
    for k, volts in enumerate(signal):
        now = volts > found.lower if above else volts > found.upper
        if now != above:
            switches.append(time[k])
        above = now
        output[k] = found.output_low if above else found.output_high
    return Response(time, signal, output, np.array(switches), found)


def _interval(draw: Any, trip: float, swing: float) -> tuple[float, float] | None:
    if draw(st.booleans()):
        return None
    low, high = (draw(st.floats(0, 0.2)) ** 2 * swing for _ in range(2))
    return trip - low, trip + high


@st.composite
def random_levels(draw: Any) -> Levels:
    """Any levels that a design can give: narrow bands, trips at and outside the rails, sensors."""
    v_cc = draw(st.sampled_from([0.9, 1.8, 3.3, 5.0, 12.0, 15.0, 48.0, 230.0]))
    v_ee = draw(st.sampled_from([0.0, 0.0, -v_cc, -v_cc / 3]))
    swing = v_cc - v_ee
    place = draw(
        st.one_of(
            st.floats(0, 1),
            st.sampled_from([0.0, 1.0, 0.5, 1e-3, 0.999]),
            st.floats(-3, 4),
            st.sampled_from([-200.0, 40.0]),
        )
    )
    width = swing * draw(st.one_of(st.floats(1e-5, 1.2), st.sampled_from([1e-7, 1e-4, 0.003, 1.0])))
    lower = v_ee + place * swing - width * draw(st.sampled_from([0.0, 0.5, 1.0]))
    upper = lower + width
    high = v_cc - draw(st.floats(0, 0.4)) ** 2 * swing
    low = v_ee + draw(st.floats(0, 0.4)) ** 2 * swing
    bare = {
        "v_ee": v_ee, "v_cc": v_cc, "output_high": high, "output_low": low,
        "lower_interval": _interval(draw, lower, swing),
        "upper_interval": _interval(draw, upper, swing),
        "reference": draw(st.none() | st.floats(v_ee, v_cc)),
    }  # fmt: skip
    if draw(st.booleans()):
        ends = sorted(draw(st.lists(st.floats(-0.5, 1.5), min_size=2, max_size=2)))
        bare["common_mode"] = (v_ee + ends[0] * swing, v_ee + ends[1] * swing)
        if draw(st.booleans()):
            pins = sorted(draw(st.lists(st.floats(0, 1), min_size=2, max_size=2)))
            bare["pins"] = (v_ee + pins[0] * swing, v_ee + pins[1] * swing)
    if draw(st.booleans()):
        bare |= _sensor(draw, v_ee, swing)
    if draw(st.integers(0, 9)) == 0:
        bare |= {"ok": False, "message": draw(st.text("abcde ", max_size=300))}
        lower = upper = NAN
    return levels(lower, upper, **bare)


def _sensor(draw: Any, v_ee: float, swing: float) -> dict[str, Any]:
    if draw(st.booleans()):
        sensor: Any = Thermistor(supply=v_ee + swing)
    else:
        low = draw(st.sampled_from([-40.0, 0.0, 0.02, 900.0, -1e5]))
        sensor = Linear(
            per_unit=draw(st.sampled_from([1, -1])) * swing / 10 ** draw(st.integers(-3, 5)),
            at_zero=v_ee + swing / 3,
            span=(low, low + 10 ** draw(st.floats(-2, 5))),
            unit=draw(st.sampled_from(["", "m", "°C", "m³/h", "a very long unit", "%"])),
            name=draw(st.sampled_from(["level", "signal", "outlet temperature of a dryer", "$x$"])),
        )
    ends = sorted(float(sensor.volts(end)) for end in sensor.span)
    return {"signal": sensor, "signal_span": (ends[0], ends[1])}

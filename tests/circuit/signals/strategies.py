"""Signals of every kind with every sensor, over spans that the sensor covers."""

from __future__ import annotations

from itertools import accumulate
from typing import Any

import numpy as np
from hypothesis import strategies as st

import hystkit as hk
from hystkit.circuit.signals import Signal
from tests.circuit.strategies import within

S = hk.signals
V_CC = 5.0

#: Sensor -> the range over which these tests use it.
RANGES = {S.Rtd: (-200.0, 850.0), S.Ntc: (-60.0, 200.0), S.NtcCoefficients: (-60.0, 200.0)}


def parts(low: float, high: float) -> st.SearchStrategy[hk.Part]:
    return st.builds(hk.Part, within(low, high), tol=within(0, 0.1))


@st.composite
def columns(draw: st.DrawFn, low: float, high: float) -> tuple[list[float], list[float]]:
    """A rising column, and one from `low` to `high` that rises or falls."""
    count = draw(st.integers(3, 8))
    steps = [draw(within(1, 10)) for _ in range(2 * count)]
    first = list(accumulate(steps[:count], initial=draw(within(-50, 50))))
    second = np.array(list(accumulate(steps[count:], initial=0.0)))
    scaled = low + (high - low) * second / second[-1]
    return first, list(map(float, scaled if draw(st.booleans()) else scaled[::-1]))


@st.composite
def sensors(draw: st.DrawFn) -> Any:
    tolerance = within(0, 0.1)
    first, second = draw(columns(1e3, 1e5))
    return draw(
        st.builds(S.Ntc, within(1e3, 1e5), within(3000, 4500), tolerance, within(0, 0.02))
        | st.builds(
            S.NtcCoefficients,
            within(9e-4, 1.4e-3),
            within(2e-4, 2.6e-4),
            within(5e-8, 2e-7),
            tolerance,
        )
        | st.builds(S.Rtd, within(50, 2000), st.sampled_from((None, "AA", "A", "B", "C")))
        | st.builds(lambda tol: S.ResistanceTable(first, second, tol), tolerance)
    )


@st.composite
def spans(draw: st.DrawFn, sensor: Any = None) -> tuple[float, float]:
    low, high = RANGES.get(type(sensor), (-100.0, 100.0))
    if isinstance(sensor, S.ResistanceTable):
        low, high = sensor.quantities[0], sensor.quantities[-1]
    # Both ends of the sensor's range are drawn often.
    bottom = draw(st.just(low) | within(low, low + 0.4 * (high - low)))
    return bottom, draw(st.just(high) | within(high - 0.4 * (high - low), high))


@st.composite
def wired(draw: st.DrawFn) -> Signal:
    sensor = draw(sensors())
    span = draw(spans(sensor))
    middle = float(sensor.resistance(sum(span) / 2))
    return draw(
        st.builds(
            S.SensorDivider,
            st.just(sensor),
            parts(middle / 30, middle * 30),
            st.sampled_from(("bottom", "top")),
            st.none() | parts(1, 10),
            span=st.just(span),
            name=st.text(max_size=10),
        )
        | st.builds(
            S.DrivenSensor,
            st.just(sensor),
            within(1e-5, 1e-2),
            within(0, 0.1),
            st.none() | within(1, 10),
            span=st.just(span),
        )
    )


def saved_signals() -> st.SearchStrategy[Signal]:
    """Every kind that a record holds; ratiometric ones know no supply yet."""
    error = within(0, 0.1)
    plain = st.one_of(
        st.builds(
            S.Linear,
            within(1e-3, 10) | within(-10, -1e-3),
            within(-5, 5),
            span=spans(),
            slope_tol=error,
            zero_error=error,
        ),
        st.builds(
            S.CurrentLoop,
            parts(10, 500),
            span=spans(),
            error=error,
            loop_limit=st.none() | within(0.021, 0.1),
            unit=st.sampled_from(("", "m", "°C")),
        ),
        st.builds(S.Attenuator, parts(1e3, 1e6), parts(1e3, 1e6), span=spans()),
        st.builds(
            S.Potentiometer,
            parts(1e3, 1e5),
            st.none() | parts(1, 10),
            span=spans(),
            linearity=error,
        ),
        columns(0.1, 4.0).map(lambda table: S.MeasuredTable(*table, unit="m", error="5 mV")),
    )
    return plain | wired()


def callables() -> st.SearchStrategy[Signal]:
    return st.builds(
        lambda span, scale, pair: S.Function(
            lambda q: scale * np.exp(q / 100.0),
            (lambda v: 100.0 * np.log(v / scale)) if pair else None,
            span=span,
        ),
        spans(),
        within(0.1, 1) | within(-1, -0.1),
        st.booleans(),
    )


def any_signals() -> st.SearchStrategy[Signal]:
    """Every kind, ratiometric ones on a supply."""
    return (saved_signals() | callables()).map(lambda signal: signal.at(V_CC))

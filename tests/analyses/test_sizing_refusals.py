"""What a sizing request is refused for, word by word."""

from __future__ import annotations

from textwrap import dedent
from typing import Any

import pytest

import hystkit as hk
from hystkit.circuit.signals import Linear

STAGE = hk.Stage("inverting")
TANK = Linear(1.2, 0.6, span=(0, 2), unit="m", name="level", slope_tol=0.05)
NUMBERS: dict[str, Any] = {"supply": 5.0, "upper": 2.7, "lower": 2.3}

CASES: dict[str, tuple[dict[str, Any], type[Exception], str]] = {
    "no trips": (
        {"supply": 5.0},
        hk.InputError,
        """\
        no trips are wanted.
          asked   nothing
          rule    upper and lower together, or on_at and off_at together
          try     upper=2.7, lower=2.3""",
    ),
    "volts and measurand": (
        {"supply": 5.0, "upper": 2.7, "off_at": 1.0},
        hk.InputError,
        """\
        the wanted trips are incomplete.
          asked   upper, off_at
          rule    upper and lower together, or on_at and off_at together
          try     upper=2.7, lower=2.3""",
    ),
    "no signal": (
        {"supply": 5.0, "on_at": 1, "off_at": 2},
        hk.InputError,
        """\
        on_at and off_at need the signal that they are read from.
          asked   on_at = 1, off_at = 2
          have    no signal
          try     signal=hk.signals.Linear(...), or upper= and lower= in volts""",
    ),
    "order": (
        {"supply": 5.0, "upper": 2.3, "lower": 2.7},
        hk.InputError,
        """\
        the upper trip is not above the lower.
          asked   upper 2.3 V, lower 2.7 V
          rule    upper > lower: the width is their difference
          try     exchange them""",
    ),
    "window and number": (
        {"supply": 5.0, "upper": (2.6, 2.8), "lower": 2.3},
        hk.InputError,
        """\
        one of upper and lower is a window, the other a number.
          asked   upper 2.6 V to 2.8 V, lower 2.3 V
          rule    windows are held over all tolerances, numbers are met as closely as can be
          try     two windows, or two numbers""",
    ),
    "window reversed": (
        {"supply": 5.0, "upper": (2.8, 2.6), "lower": (2.2, 2.4)},
        hk.InputError,
        """\
        the window of upper is the wrong way round.
          asked   upper=(2.8, 2.6)
          rule    the lower number first
          try     upper=(2.6, 2.8)""",
    ),
    "window without width": (
        {"supply": 5.0, "upper": (2.8, 2.8), "lower": (2.2, 2.4)},
        hk.InputError,
        """\
        the window of upper has no width.
          asked   upper=(2.8, 2.8)
          rule    low < high
          try     upper=2.8, a number, for the trip that comes nearest""",
    ),
    "three numbers": (
        {"supply": 5.0, "upper": (2.6, 2.7, 2.8), "lower": (2.2, 2.4)},
        hk.InputError,
        """\
        upper is neither a number nor a window.
          asked   upper=(2.6, 2.7, 2.8)
          rule    a number, or two numbers with the lower one first
          try     upper=(low, high)""",
    ),
    "on and off alike": (
        {"supply": 5.0, "on_at": 1.0, "off_at": 1.0, "signal": TANK},
        hk.InputError,
        """\
        the load is to switch on and off at one and the same point.
          asked   on at 1 m, off at 1 m
          rule    hysteresis lies between two points
          try     two different points""",
    ),
    "outside the span": (
        {"supply": 5.0, "on_at": 1.0, "off_at": 3.0, "signal": TANK},
        hk.InputError,
        """\
        off_at lies outside the span of the signal.
          asked   off_at = 3 m
          have    span 0 m to 2 m
          rule    a signal is known within its span
          try     a signal with a wider span""",
    ),
    "wrong sense": (
        {"supply": 5.0, "on_at": 1.5, "off_at": 0.9, "signal": TANK},
        hk.InputError,
        """\
        a stage that is inverting cannot switch the load in this order.
          asked   on at 1.5 m, off at 900 mm
          have    the load is on with the output high: it goes on where the signal's voltage \
falls to the lower trip; on at 2.4 V, off at 1.68 V
          rule    the load goes on at the one trip and off at the other
          try     a stage that is non-inverting, or load="low\"""",
    ),
    "sensor wider than the window": (
        {"supply": 5.0, "on_at": (0.96, 1.0), "off_at": (1.5, 1.7), "signal": TANK},
        hk.InfeasibleError,
        """\
        the signal's own tolerances take the whole window of on_at.
          asked   on_at = 960 mm to 1 m
          have    at 960 mm the signal may be as high as 1.81 V, at 1 m as low as 1.74 V
          rule    a trip point inside the window lies between the two
          try     a wider window, or a sensor with closer tolerances""",
    ),
    "too wide for the swing": (
        {"supply": 5.0, "upper": 5.2, "lower": 0.1},
        hk.InfeasibleWidthError,
        """\
        no resistor ratio gives the width that was asked for.
          asked   width = 5.1 V (upper 5.2 V, lower 100 mV)
          have    output swing = 5 V (V_OH 5 V, V_OL 0 V)
          rule    width <= output swing of an inverting form
          try     a device with a larger swing, or a width <= 5 V, or the form non-inverting, \
single supply, divider reference, push-pull""",
    ),
    "unknown series": (
        {**NUMBERS, "series": "E97"},
        hk.InputError,
        """\
        there is no preferred series 'E97' here.
          asked   E97
          have    E3, E6, E12, E24, E48, E96, E192
          try     E96""",
    ),
    "series by part": (
        {**NUMBERS, "series": {"R_T": "E96", "R_Q": "E24"}},
        hk.InputError,
        """\
        2 faults in this request:
          1  there is no free part (series) 'R_Q' here.
               asked   R_Q
               have    R_T, R_B, R_F
          2  series is missing for R_B, R_F.
               asked   series for R_T, R_Q
               rule    a mapping names every free part
               try     add R_B, R_F, or give one setting for all""",
    ),
    "drawer": (
        {**NUMBERS, "series": ["10k", -3]},
        hk.InputError,
        """\
        the values at hand are not resistances.
          asked   series=('10k', -3)
          rule    at least one value, each above zero
          try     series="E96", or the values in the drawer such as ("10k", "22k", "47k")""",
    ),
    "range reversed": (
        {**NUMBERS, "ranges": ("1M", "1k")},
        hk.InputError,
        """\
        the range of a free part is not an interval.
          asked   ranges=('1M', '1k')
          rule    two resistances above zero, the lower one first
          try     ranges=("1k", "1M")""",
    ),
    "range without a value": (
        {**NUMBERS, "ranges": ("5k", "5.01k"), "series": "E12", "free": ("R_F",),
         "parts": {"R_T": "10k", "R_B": "10k"}},
        hk.InputError,
        """\
        no preferred value of R_F lies in its range.
          asked   E12 from 5 kΩ to 5.01 kΩ
          try     a wider range or a finer series""",
    ),
    "tolerance": (
        {**NUMBERS, "tol": 5},
        hk.InputError,
        """\
        the tolerance of the free parts is outside its range.
          asked   tol=5
          rule    0 % <= tol < 100 %
          try     tol="1 %\"""",
    ),
    "temperature coefficient in volts": (
        {**NUMBERS, "tempco": {"R_T": "50 ppm/K", "R_B": "1 mV", "R_F": 0.0}},
        hk.InputError,
        """\
        tempco is not in 1/K.
          asked   a number in 1/K
          have    '1 mV'
          try     100 ppm/K""",
    ),
    "temperature coefficient": (
        {**NUMBERS, "tempco": 0.03, "temperature": (-20, 60), "free": ("R_F",),
         "parts": {"R_T": "10k", "R_B": "10k"}},
        hk.InputError,
        """\
        R_F would drift to zero.
          asked   0.03 1/K over 45 K
          rule    temperature coefficient times temperature difference < 1
          try     the coefficient in 1/K: 100 ppm/K is 100e-6""",
    ),
    "free and given": (
        {**NUMBERS, "free": ("R_T", "R_F"), "parts": {"R_T": "10k", "R_B": "10k"}},
        hk.InputError,
        """\
        R_T cannot be both free and given.
          asked   free R_T, R_F, parts R_T, R_B
          try     leave R_T out of one of the two""",
    ),
    "neither free nor given": (
        {**NUMBERS, "free": ("R_T",)},
        hk.InputError,
        """\
        R_B, R_F are neither free nor given.
          asked   free R_T, parts none
          rule    this stage has R_T, R_B, R_F
          try     free=(...) names what is searched, parts={"R_PU": "4k7"} what is fixed""",
    ),
    "nothing free": (
        {**NUMBERS, "parts": {"R_T": "10k", "R_B": "10k", "R_F": "100k"}},
        hk.InputError,
        """\
        no part is free.
          asked   parts R_T, R_B, R_F
          rule    at least one part is searched
          try     leave one of them out""",
    ),
    "free as text": (
        {**NUMBERS, "free": "R_T"},
        hk.InputError,
        """\
        the free parts are not a list of names.
          asked   free='R_T'
          rule    each name once
          try     free=("R_T", "R_F")""",
    ),
    "unknown part": (
        {**NUMBERS, "parts": {"R_X": "10k"}},
        hk.DesignError,
        """\
        there is no part of this stage 'R_X' here.
          asked   R_X
          have    R_T, R_B, R_F, R_S, R_L""",
    ),
    "everything at once": (
        {"supply": "5 A", "upper": 2.7, "load": "on", "count": 0, "temperature": (60, -20),
         "limits": {"supply_curent": 1}},
        hk.InputError,
        """\
        6 faults in this request:
          1  V_CC is not in V.
               asked   a number in V
               have    '5 A'
               try     2.5 or 2.5 V
          2  the load is on in neither output state.
               asked   load='on'
               try     load="high" or load="low"
          3  the wanted trips are incomplete.
               asked   upper
               rule    upper and lower together, or on_at and off_at together
               try     upper=2.7, lower=2.3
          4  there is no limit 'supply_curent' here.
               asked   supply_curent
               have    supply_current, input_resistance, output_current
               try     supply_current
          5  the temperature is not a range.
               asked   temperature=(60, -20)
               rule    two numbers in °C, the lower one first
               try     temperature=(-20, 60), or None to leave drift out
          6  the number of candidates is not a whole number of at least 1.
               asked   count=0
               try     count=10""",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", CASES)
def test_refusal(name: str) -> None:
    request, error, text = CASES[name]
    with pytest.raises(error) as caught:
        hk.size(STAGE, **request)
    assert str(caught.value) == dedent(text)


def test_too_many_parts_are_refused_before_the_search() -> None:
    stage = hk.Stage("inverting", output="open-collector", including=("R_S", "R_L"))
    with pytest.raises(hk.InputError) as caught:
        hk.size(stage, supply=5.0, upper=2.7, lower=2.3)
    (fault,) = caught.value.faults
    assert fault.problem.startswith("the search is too wide")
    assert fault.have == "6,975,757,441 combinations beside the two longest lists"
    assert fault.remedy == "fix one part, or give narrower ranges or a coarser series"


def test_too_many_tolerances_are_refused() -> None:
    wires = [hk.Resistor(f"R_{i}", f"n{i}", f"n{i + 1}") for i in range(1, 17)]
    stage = hk.Stage.custom(
        [hk.Resistor("R_0", "cc", "n1"), *wires, hk.Resistor("R_F", "out", "plus"),
         hk.Wire("n17", "plus"), hk.Resistor("R_B", "plus", "ground"),
         hk.Wire("signal", "minus")]
    )  # fmt: skip
    parts = {name: hk.Part("1k", tol=0.01) for name in stage.parts if name != "R_F"}
    with pytest.raises(hk.DesignError, match="too many uncertain resistances"):
        hk.size(stage, supply=5.0, upper=(2.6, 2.8), lower=(2.2, 2.4), parts=parts)


def test_no_form_goes_with_the_levels() -> None:
    with pytest.raises(hk.DesignError, match="no built-in form goes with these levels"):
        hk.size(supply=5.0, upper=2.7, lower=2.3, levels={"V_XX": 1.0})


def test_every_form_is_refused_with_its_reason() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.size(supply=5.0, upper=2.7, lower=2.3, parts={"R_F": "x"})
    assert str(caught.value).startswith("R_F is not a number.")


@pytest.mark.parametrize(
    ("given", "text"),
    [
        ({"supply_current": "-1 mA"}, "the limit of supply current is not above zero."),
        ({"output_current": "x"}, "output_current is not a number."),
        ({"power": 1.0}, "there is no limit 'power' here."),
    ],
)
def test_limits_that_cannot_be_used(given: dict[str, Any], text: str) -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.size(STAGE, **NUMBERS, limits=given)
    assert str(caught.value).splitlines()[0] == text


def test_limits_are_read_with_their_units() -> None:
    limits = hk.Limits(supply_current="1 mA", input_resistance="47k")
    assert limits.given == {"supply_current": 1e-3, "input_resistance": 47e3}
    assert hk.Limits().given == {}
    both = hk.Limits
    with pytest.raises(hk.InputError) as caught:
        both(supply_current=0, output_current="1 V")
    assert len(caught.value.faults) == 2

"""Engineering numbers: read, refused, shown, and read back."""

from __future__ import annotations

import math
from decimal import Decimal
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.errors import Fault, QuantityError
from hystkit.base.quantity import (
    TOLERANCE_LETTERS,
    code,
    parse_percent,
    read,
    show,
    show_latex,
)
from hystkit.base.units import PREFIXES

UNITS = ("Ω", "V", "A", "F", "s", "Hz", "V/s", "V/√Hz", "K", "°C", "1/K", "%", "lx", "")
SIZES = st.floats(1e-18, 1e18) | st.floats(-1e18, -1e-18) | st.just(0.0)


@pytest.mark.parametrize(
    ("text", "unit", "number"),
    [
        ("4k7", "Ω", 4700.0),
        ("4K7", "Ω", 4700.0),
        ("4.7k", "Ω", 4700.0),
        ("4.7 kΩ", "Ω", 4700.0),
        ("4.7\N{NO-BREAK SPACE}k\N{OHM SIGN}", "Ω", 4700.0),
        ("4.7kohm", "Ω", 4700.0),
        ("4k7 Ω", "Ω", 4700.0),
        ("1R5", "Ω", 1.5),
        ("R47", "Ω", 0.47),
        ("47R", "Ω", 47.0),
        ("0R", "Ω", 0.0),
        ("1M", "Ω", 1e6),
        ("1m", "Ω", 1e-3),
        ("4k7", "", 4700.0),
        ("100n", "F", 1e-7),
        ("n33", "F", 0.33e-9),
        ("4u7", "F", 4.7e-6),
        ("4.7 \N{MICRO SIGN}F", "F", 4.7e-6),
        ("4.7 \N{GREEK SMALL LETTER MU}F", "F", 4.7e-6),
        ("3V3", "V", 3.3),
        ("12 V", "V", 12.0),
        ("-15", "V", -15.0),
        ("+15V", "V", 15.0),
        ("\N{MINUS SIGN}15 V", "V", -15.0),
        ("-0V7", "V", -0.7),
        ("1e3 mV", "V", 1.0),
        ("20 mA", "A", 0.02),
        ("12 mV/s", "V/s", 0.012),
        ("2.2e3", "", 2200.0),
        (" .5 ", "", 0.5),
        ("5.", "", 5.0),
        ("0", "", 0.0),
        ("1 %", "%", 0.01),
        ("250 ppm", "%", 250e-6),
        ("100 ppm/K", "1/K", 1e-4),
        ("100e-6", "1/K", 1e-4),
        ("25 °C", "°C", 25.0),
        ("25 degC", "°C", 25.0),
        ("3950 K", "K", 3950.0),
        ("1 m", "m", 1.0),
        ("1 mm", "m", 0.001),
        ("40 lx", "lx", 40.0),
    ],
)
def test_engineering_text_is_read_to_the_nearest_float(text: str, unit: str, number: float) -> None:
    assert read(text, unit=unit) == number


@pytest.mark.parametrize(
    "number", [4700, 4700.0, Fraction(4700), np.float64(4700), np.float32(4700), np.int64(4700)]
)
def test_numbers_of_any_kind_come_back_as_a_float(number: float) -> None:
    result = read(number, unit="Ω")
    assert result == 4700.0
    assert type(result) is float


@pytest.mark.parametrize(
    ("text", "unit", "proposed"),
    [
        ("4,7k", "Ω", "4.7k"),
        ("4,7 kΩ", "Ω", "4.7 kΩ"),
        ("-0,5", "V", "-0.5"),
        ("1.000,0", "Ω", "1000.0"),
        ("1,000.5", "Ω", "1000.5"),
        ("1,000", "Ω", "1.000 or 1000"),
        ("1.000.000", "Ω", "1000000"),
        ("1,234,567 Ω", "Ω", "1234567 Ω"),
        ("1 000", "Ω", "1000"),
        ("1\N{NARROW NO-BREAK SPACE}000,5", "Ω", "1000.5"),
        ("1'000", "Ω", "1000"),
        ("1_000", "Ω", "1000"),
        ("\N{FULLWIDTH DIGIT FOUR}k7", "Ω", "4k7"),
        ("\N{ARABIC-INDIC DIGIT FOUR}k7", "Ω", "4k7"),
        ("\N{DEVANAGARI DIGIT FOUR}7", "Ω", "47"),
        ("10 kv", "V", "10 kV"),
        ("1 hz", "Hz", "1 Hz"),
        ("5", "%", "5 %"),
        ("0.01", "%", "0.01 % or 1 %"),
    ],
)
def test_text_of_several_readings_is_refused_with_each_of_them(
    text: str, unit: str, proposed: str
) -> None:
    with pytest.raises(QuantityError) as caught:
        read(text, unit=unit)
    (fault,) = caught.value.faults
    assert fault.have == repr(text)
    assert fault.rule
    assert fault.remedy == proposed
    for each in proposed.split(" or "):
        assert math.isfinite(read(each, unit=unit))


@pytest.mark.parametrize(
    ("value", "unit", "problem"),
    [
        ("", "Ω", "R_T is empty."),
        (" \t", "Ω", "R_T is empty."),
        ("nan", "Ω", "R_T is not a finite number."),
        ("-Infinity", "Ω", "R_T is not a finite number."),
        ("∞", "Ω", "R_T is not a finite number."),
        (math.nan, "Ω", "R_T is not a finite number."),
        (math.inf, "Ω", "R_T is not a finite number."),
        (10**400, "Ω", "R_T is not a finite number."),
        ("1e999", "Ω", "R_T is too large or too small to be held."),
        ("1e-400", "Ω", "R_T is too large or too small to be held."),
        ("10kF", "Ω", "R_T is not in Ω."),
        ("1 %", "Ω", "R_T is not in Ω."),
        ("5 mm³", "m³", "R_T is not in m³."),
        ("1k%", "%", "R_T is not in %."),
        ("5 V", "", "R_T takes no unit."),
        ("4k7k", "Ω", "R_T is not a number."),
        ("3V3 V", "V", "R_T is not a number."),
        ("4 7", "Ω", "R_T is not a number."),
        ("1.2.3", "Ω", "R_T is not a number."),
        ("5²", "Ω", "R_T is not in Ω."),
        ("0x10", "Ω", "R_T is not a number."),
        ("1e" + "9" * 5000, "Ω", "R_T is not a number."),
        ("--5", "Ω", "R_T is not a number."),
        ("k", "Ω", "R_T is not a number."),
        ("__import__('os')", "Ω", "R_T is not a number."),
        (True, "Ω", "R_T is not a single number."),
        (np.True_, "Ω", "R_T is not a single number."),
        (None, "Ω", "R_T is not a single number."),
        (1j, "Ω", "R_T is not a single number."),
        ([4700.0], "Ω", "R_T is not a single number."),
        (np.array([1.0, 2.0]), "Ω", "R_T is not a single number."),
        (b"4k7", "Ω", "R_T is not a single number."),
    ],
    ids=lambda value: str(value)[:20],
)
def test_garbage_is_refused_with_what_was_asked_what_was_found_and_what_to_do(
    value: object, unit: str, problem: str
) -> None:
    with pytest.raises(QuantityError) as caught:
        read(value, unit=unit, name="R_T")  # type: ignore[arg-type]
    (fault,) = caught.value.faults
    assert fault.problem == problem
    assert fault.asked == (f"a number in {unit}" if unit else "a number")
    assert repr(value)[:40] in fault.have
    assert len(fault.have) < 100
    assert fault.remedy


@given(st.text() | st.from_regex(r"[-+0-9.,eEkKmMuµΩR% ']{1,12}", fullmatch=True))
def test_text_gives_a_finite_number_or_a_complete_error(text: str) -> None:
    for unit in ("Ω", "%", "m³", ""):
        number, faults = outcome(text, unit)
        assert math.isfinite(number) != bool(faults)
        assert all(fault.asked and fault.have and fault.remedy for fault in faults)


def outcome(text: str, unit: str) -> tuple[float, tuple[Fault, ...]]:
    try:
        return read(text, unit=unit), ()
    except QuantityError as error:
        return math.nan, error.faults


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_python_text_of_a_float_reads_back_exactly(number: float) -> None:
    assert read(repr(number)) == number
    assert read(number) == number


@given(st.integers(0, 10**6), st.integers(0, 5), st.sampled_from([p for p in PREFIXES if p != "m"]))
def test_letter_code_and_prefix_agree_with_exact_arithmetic(
    digits: int, places: int, prefix: str
) -> None:
    exact = float(Decimal(digits).scaleb(PREFIXES[prefix] - places))
    whole, decimals = divmod(digits, 10**places)
    fraction = f"{decimals:0{places}d}" if places else ""
    assert read(f"{whole}.{fraction} {prefix}Ω", unit="Ω") == exact
    assert read(f"{whole}{prefix or 'R'}{fraction}", unit="Ω") == exact


@given(SIZES, st.sampled_from(UNITS), st.integers(1, 15))
def test_what_is_shown_reads_back_to_the_digits_shown(
    number: float, unit: str, digits: int
) -> None:
    again = read(show(number, unit, digits), unit=unit)
    assert again == pytest.approx(number, rel=0.5001 * 10 ** (1 - digits), abs=0)
    assert show(again, unit, digits) == show(number, unit, digits)


@given(SIZES, st.sampled_from(["Ω", "V", "A", "F"]))
def test_a_prefix_leaves_one_to_three_digits_ahead_of_the_point(number: float, unit: str) -> None:
    shown = show(number, unit).split()[0]
    if 1e-15 <= abs(number) < 0.9999e15:
        assert 1 <= abs(float(shown)) < 1000


@pytest.mark.parametrize(
    ("number", "unit", "shown"),
    [
        (46400, "Ω", "46.4 kΩ"),
        (0.2218, "V", "221.8 mV"),
        (-15.0, "V", "-15 V"),
        (0.0, "V", "0 V"),
        (-0.0, "V", "0 V"),
        (999.96, "Ω", "1 kΩ"),
        (1e-7, "F", "100 nF"),
        (4.7e-6, "F", "4.7 \N{MICRO SIGN}F"),
        (1800.0, "s", "1800 s"),
        (0.0015, "s", "1.5 ms"),
        (3950.0, "K", "3950 K"),
        (0.001, "m³", "0.001 m³"),
        (0.01, "%", "1 %"),
        (100e-6, "1/K", "100 ppm/K"),
        (2e-9, "V/√Hz", "2 nV/√Hz"),
        (0.35, "", "0.35"),
        (65536.0, "", "65540"),
        (1.5e12, "", "1.5e12"),
        (math.nan, "V", "—"),
        (math.inf, "V", "∞ V"),
        (-math.inf, "V", "-∞ V"),
    ],
)
def test_numbers_are_shown_as_an_engineer_writes_them(number: float, unit: str, shown: str) -> None:
    assert show(number, unit) == shown


@pytest.mark.parametrize(
    ("number", "unit", "latex"),
    [
        (46400, "Ω", r"46.4\,\mathrm{k\Omega}"),
        (4.7e-6, "F", r"4.7\,\mathrm{\mu F}"),
        (0.01, "%", r"1\,\mathrm{\%}"),
        (22.5, "°C", r"22.5\,\mathrm{{}^{\circ}C}"),
        (2e-9, "V/√Hz", r"2\,\mathrm{nV/\sqrt{Hz}}"),
        (55, "% RH", r"55\,\mathrm{\%~RH}"),
        (3, "a_b", r"3\,\mathrm{a\_b}"),
        (3, "é", r"3\,\mathrm{\text{é}}"),
        (1.5e12, "", r"1.5\times 10^{12}"),
        (math.nan, "V", r"\text{---}"),
        (-math.inf, "V", r"-\infty\,\mathrm{V}"),
    ],
)
def test_latex_says_the_same(number: float, unit: str, latex: str) -> None:
    assert show_latex(number, unit) == latex


@pytest.mark.parametrize(
    ("ohms", "text"),
    [
        (46400, "46k4"),
        (100e3, "100k"),
        (4700, "4k7"),
        (47, "47R"),
        (1.5, "1R5"),
        (0.47, "R47"),
        (0.0047, "R0047"),
        (0, "0R"),
        (1e6, "1M"),
        (2.2e9, "2G2"),
        (999.96, "1k"),
    ],
)
def test_letter_code(ohms: float, text: str) -> None:
    assert code(ohms) == text


@given(st.floats(1e-6, 1e14), st.integers(1, 15))
def test_letter_code_reads_back_to_the_digits_shown(ohms: float, digits: int) -> None:
    text = code(ohms, digits)
    assert read(text, unit="Ω") == pytest.approx(ohms, rel=0.5001 * 10 ** (1 - digits))
    assert "." not in text


@pytest.mark.parametrize("ohms", [-1.0, math.nan, math.inf])
def test_no_letter_code_where_there_is_no_resistor(ohms: float) -> None:
    with pytest.raises(QuantityError, match="letter code"):
        code(ohms)


def test_no_digits_is_refused() -> None:
    with pytest.raises(QuantityError, match="digits = 0"):
        show(1.0, digits=0)


@pytest.mark.parametrize(
    ("text", "fraction"),
    [("5 %", 0.05), ("±5%", 0.05), ("J", 0.05), ("100 ppm", 1e-4), (0.05, 0.05), ("0 %", 0.0)],
)
def test_tolerances_are_fractions(text: float | str, fraction: float) -> None:
    assert parse_percent(text) == fraction


@given(st.floats(1e-9, 100))
def test_bare_text_counts_per_cent_only_where_the_heading_says_so(percent: float) -> None:
    assert parse_percent(str(percent), bare=True) == pytest.approx(percent / 100, rel=1e-15)
    with pytest.raises(QuantityError, match=r"may be a fraction or count per cent"):
        parse_percent(str(percent))


@pytest.mark.parametrize("text", ["", "±", "x", "5 V", "5,0 %", "nan", True, None])
@pytest.mark.parametrize("bare", [True, False])
def test_other_tolerances_are_refused(text: str, bare: bool) -> None:
    with pytest.raises(QuantityError, match="tolerance"):
        parse_percent(text, bare=bare)


def test_tolerance_letters_ascend() -> None:
    assert sorted(TOLERANCE_LETTERS.items()) == sorted(
        TOLERANCE_LETTERS.items(), key=lambda item: item[1]
    )


@pytest.mark.parametrize(
    ("text", "unit", "expected"),
    [
        ("30 min", "s", 1800.0),
        ("1.5h", "s", 5400.0),
        ("-1e1 min", "s", -600.0),
        ("30 mm/min", "m/s", 5e-4),
        ("7.2 V/h", "V/s", 2e-3),
        ("90 °C/min", "°C/s", 1.5),
        ("10 m", "s", 0.01),
    ],
)
def test_minutes_and_hours_are_read_for_seconds(text: str, unit: str, expected: float) -> None:
    assert read(text, unit=unit) == pytest.approx(expected, rel=1e-15)


@pytest.mark.parametrize(("text", "unit"), [("5 min", "V"), ("5 h", "m"), ("5 kmin", "s")])
def test_minutes_and_hours_stand_for_nothing_else(text: str, unit: str) -> None:
    with pytest.raises(QuantityError):
        read(text, unit=unit)

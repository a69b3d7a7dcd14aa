"""Engineering numbers: read from text, and shown the same way.

Read are plain numbers, SI prefixes and the letter code of IEC 60062, in which a letter stands for
the decimal point: ``4k7`` is 4700. Text whose meaning depends on where it was written, such as
``4,7k``, is refused.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from decimal import Decimal
from numbers import Real

from hystkit.base.digits import span_digits
from hystkit.base.errors import QuantityError
from hystkit.base.misread import explain
from hystkit.base.units import Unit, latex_unit, unit_of

#: Tolerance letters of IEC 60062, as fractions.
TOLERANCE_LETTERS: Mapping[str, float] = {
    "B": 0.001, "C": 0.0025, "D": 0.005, "F": 0.01, "G": 0.02, "J": 0.05, "K": 0.1, "M": 0.2,
}  # fmt: skip

_NUMBER = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+))(?:[eE]([+-]?[0-9]{1,9}))?\s*(.*)")
_LETTER_CODE = re.compile(r"([+-]?[0-9]*)([^\W\d_])([0-9]+)\s*(.*)")
_LETTERS = {0: "R", 3: "k", 6: "M", 9: "G", 12: "T"}


def read(value: float | str, *, unit: str = "", name: str = "value") -> float:
    """Return a number or an engineering number as a float in SI units.

    Parameters
    ----------
    value : float or str
        A number, returned as it is, or text such as ``"4k7"``, ``"4.7 kΩ"``, ``"100n"``,
        ``"1R5"``, ``"2.2e3"`` or ``"-15"``. Micro may be written µ or u, ohm Ω, ohm or R; where
        seconds are expected, min and h are read too.
    unit : str, optional
        The unit expected, such as ``"Ω"`` or ``"V"``. Text may name it or leave it out, except
        with ``"%"``: text has to carry its sign, and only a number is taken as the fraction.
    name : str, optional
        What the number is, for the error.

    Returns
    -------
    float
        Finite; sign and size are not judged here.

    Raises
    ------
    QuantityError
        If it is not a number, not finite, in another unit, or open to several readings.

    References
    ----------
    IEC 60062:2016, Marking codes for resistors and capacitors.

    Examples
    --------
    >>> read("4k7", unit="Ω"), read("-20 mV", unit="V"), read("1 %", unit="%")
    (4700.0, -0.02, 0.01)
    >>> read("2.5 h", unit="s"), read("30 mm/min", unit="m/s")
    (9000.0, 0.0005)
    """
    number = _parse(value, unit_of(unit)) if isinstance(value, str) else _plain(value)
    if number is None or not math.isfinite(number):
        raise _refusal(value, unit, name)
    return number


def read_own(value: float | str, *, unit: str = "", name: str = "value") -> float:
    """Return a measured quantity in its own unit: as `read`, but a percent counts as 1.

    Parameters
    ----------
    value : float or str
        A number, or text that may name the unit.
    unit : str, optional
        Unit of the quantity, such as ``"°C"``, or ``"%"`` of a valve's opening.
    name : str, optional
        What the number is, for the error.

    Returns
    -------
    float
        Finite.

    Raises
    ------
    QuantityError
        As from `read`.

    Examples
    --------
    >>> read_own("45 %", unit="%"), read_own(45, unit="%"), read_own("80 mm", unit="m")
    (45.0, 45.0, 0.08)
    """
    if unit == "%" and isinstance(value, str):
        return read(value.strip().removesuffix("%"), name=name)
    return read(value, unit=unit, name=name)


def parse_percent(text: float | str, *, name: str = "tolerance", bare: bool = False) -> float:
    """Return a tolerance as a fraction.

    Parameters
    ----------
    text : float or str
        A number, which is the fraction already; or text: ``"5 %"``, ``"±5 %"``, ``"100 ppm"``, or
        a tolerance letter of IEC 60062 such as ``"J"``.
    name : str, optional
        What the number is, for the error.
    bare : bool, optional
        Whether ``"5"`` stands for 5 %, as in a field that is headed "%". Refused otherwise, for it
        could be a fraction as well.

    Returns
    -------
    float
        The fraction: 0.05 for ``"5 %"``.

    Raises
    ------
    QuantityError
        If it cannot be read.

    Examples
    --------
    >>> parse_percent("±5 %"), parse_percent("F"), parse_percent(0.02)
    (0.05, 0.01, 0.02)
    """
    if not isinstance(text, str):
        return read(text, unit="%", name=name)
    typed = text.strip().removeprefix("±").strip()
    if typed in TOLERANCE_LETTERS:
        return TOLERANCE_LETTERS[typed]
    if bare and (typed[-1:] == "." or typed[-1:].isdecimal()):
        typed += "%"
    return read(typed or text, unit="%", name=name)


def show(value: float, unit: str = "", digits: int = 4) -> str:
    """Return a number as it stands in a table or at a mark, with an SI prefix.

    Parameters
    ----------
    value : float
        In SI units; a fraction with the unit ``"%"``.
    unit : str, optional
        Its unit. Without one, and with a unit that takes no prefix, the number is shown plain.
    digits : int, optional
        Significant digits, >= 1; trailing zeros are dropped.

    Returns
    -------
    str
        `read` takes it back, to the digits shown. NaN is a dash.

    Examples
    --------
    >>> show(46400, "Ω"), show(0.22184, "V"), show(0.01, "%"), show(0.35)
    ('46.4 kΩ', '221.8 mV', '1 %', '0.35')
    """
    if math.isnan(value):
        return "—"
    number, shown = _scaled(value, unit, digits)
    return f"{number} {shown}".rstrip()


def show_span(low: float, high: float, unit: str = "") -> str:
    """Return both ends of an interval, with digits enough to tell them apart.

    Parameters
    ----------
    low, high : float
        In SI units.
    unit : str, optional
        Their unit.

    Examples
    --------
    >>> show_span(2.4975, 2.5025, "V")
    '2.4975 V to 2.5025 V'
    """
    digits = span_digits(low, high)
    return " to ".join(show(end, unit, digits) for end in (low, high))


def show_own(value: float, unit: str = "", digits: int = 4) -> str:
    """Return a measured quantity in its own unit: a level in m does not turn into mm.

    Parameters
    ----------
    value : float
        In `unit`, in which a percent counts as 1.
    unit : str, optional
        Any unit; it takes no prefix.
    digits : int, optional
        Significant digits, >= 1; trailing zeros are dropped.

    Examples
    --------
    >>> show_own(0.79, "m"), show_own(45, "%"), show_own(12345.6, "Pa")
    ('0.79 m', '45 %', '12350 Pa')
    """
    return "—" if math.isnan(value) else f"{show(value, '', digits)} {unit}".rstrip()


def show_latex(value: float, unit: str = "", digits: int = 4) -> str:
    r"""Return what `show` returns, as LaTeX for math mode; amsmath is enough.

    Parameters
    ----------
    value : float
        In SI units; a fraction with the unit ``"%"``.
    unit : str, optional
        Its unit.
    digits : int, optional
        Significant digits, >= 1.

    Examples
    --------
    >>> print(show_latex(46400, "Ω"))
    46.4\,\mathrm{k\Omega}
    """
    if math.isnan(value):
        return r"\text{---}"
    number, shown = _scaled(value, unit, digits)
    mantissa, e, power = number.replace("∞", r"\infty").partition("e")
    if e:
        mantissa += rf"\times 10^{{{int(power)}}}"
    return rf"{mantissa}\,{latex_unit(shown)}" if shown else mantissa


def code(ohms: float, digits: int = 4) -> str:
    """Return a resistance in the letter code of IEC 60062.

    Parameters
    ----------
    ohms : float
        Resistance [Ω], finite and >= 0.
    digits : int, optional
        Significant digits, >= 1; trailing zeros are dropped.

    Raises
    ------
    QuantityError
        If no resistor has this value.

    Examples
    --------
    >>> code(46400), code(4700), code(1.5), code(0.47), code(1e6)
    ('46k4', '4k7', '1R5', 'R47', '1M')
    """
    if not (math.isfinite(ohms) and ohms >= 0):
        raise QuantityError(
            "a resistance has a letter code only if it is finite and not negative.",
            have=str(ohms),
            remedy="show(), which writes any number",
        )
    rounded = _rounded(ohms, digits)
    scale = max((s for s in _LETTERS if s <= _exponent(rounded)), default=0)
    whole, _, decimals = _positional(rounded.scaleb(-scale)).partition(".")
    return f"{'' if whole == '0' and decimals else whole}{_LETTERS[scale]}{decimals}"


def _plain(value: object) -> float | None:
    """Return a number as a float; None for anything else, and for True and False."""
    if isinstance(value, bool) or not isinstance(value, Real):
        return None
    try:
        return float(value)
    except OverflowError:
        return None


def _parse(text: str, unit: Unit) -> float | None:
    """Return the number that `text` stands for in `unit`, None if it stands for none."""
    text = text.strip().replace("\N{MINUS SIGN}", "-")
    if (match := _NUMBER.fullmatch(text)) and match[3] in unit.suffixes:
        return _assembled(match[1], int(match[2] or 0) + unit.suffixes[match[3]])
    if match and match[3] in unit.multiples:
        exponent, factor = unit.multiples[match[3]]
        return factor * _assembled(match[1], int(match[2] or 0) + exponent)
    # A unit may follow unless the letter is the unit already: 4k7 Ω, but 3V3.
    if (
        (match := _LETTER_CODE.fullmatch(text))
        and match[2] in unit.marks
        and match[4] in ({""} if match[2] in unit.names else unit.names)
    ):
        return _assembled(f"{match[1]}.{match[3]}", unit.marks[match[2]])
    return None


def _assembled(digits: str, exponent: int) -> float:
    """Return the nearest float, so that "4.7k" is exactly 4700; NaN if it would round to zero."""
    number = float(f"{digits}e{exponent}")
    return math.nan if number == 0 and digits.strip("+-.0") else number


def _refusal(value: object, unit: str, name: str) -> QuantityError:
    known = unit_of(unit)
    return QuantityError.of(name, [explain(value, known, name, lambda text: _parse(text, known))])


def _scaled(value: float, unit: str, digits: int) -> tuple[str, str]:
    """Return the digits and the unit, prefix included, that `value` is shown with."""
    known = unit_of(unit)
    if math.isinf(value):
        return ("∞" if value > 0 else "-∞"), unit
    rounded = _rounded(value, digits)
    scale = known.scale_for(_exponent(rounded))
    number = rounded.scaleb(-scale)
    if -5 < _exponent(number) < 9:
        return _positional(number), known.shown[scale]
    mantissa = _positional(number.scaleb(-_exponent(number)))
    return f"{mantissa}e{_exponent(number)}", known.shown[scale]


def _rounded(value: float, digits: int) -> Decimal:
    if digits < 1:
        raise QuantityError(
            "a number is shown with at least one digit.",
            asked=f"digits = {digits}",
            remedy="digits = 4",
        )
    return Decimal(f"{value:.{digits - 1}e}")


def _exponent(number: Decimal) -> int:
    """Return the power of ten of the first digit; 0 for zero, which has none."""
    return number.adjusted() if number else 0


def _positional(number: Decimal) -> str:
    """Return a number without exponent and without trailing zeros; zero has no sign."""
    return f"{number.normalize():f}" if number else "0"

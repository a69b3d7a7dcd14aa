"""The law with numbers put in: what is printed can be computed again from what is printed."""

from __future__ import annotations

import re
from fractions import Fraction

import pytest

import hystkit as hk
from hystkit.symbolic.printing import fits, width
from hystkit.symbolic.symbols import NON_IDEAL
from hystkit.symbolic.tables import trip_fields
from tests.export.designs import DEVICE, bare, every_design
from tests.symbolic.coupled import every_coupled

PREFIXES = {
    "G": 9, "M": 6, "k": 3, "": 0, "m": -3, r"\mu ": -6, r"\mu": -6, "n": -9, "p": -12, "f": -15
}  # fmt: skip
UNIT = re.compile(r"\\,\\mathrm\{(G|M|k|m|\\mu ?|n|p|f)?(?:V|\\Omega|S|A)\}")
FRACTION = re.compile(r"\\frac\{((?:[^{}]|\{[^{}]*\})*)\}\{((?:[^{}]|\{[^{}]*\})*)\}")


def narrow(v_ref: float = 2.5) -> hk.Design:
    """A band of one millivolt at 2.5 V."""
    device = hk.Device(drop_high=0.1, drop_low=0.1, r_high=50, r_low=30)
    return hk.Design(
        hk.Stage("non-inverting", reference="source"),
        {"R_I": "1k", "R_F": "4M7"},
        supply=5,
        device=device,
        levels={"V_REF": v_ref},
    )


DESIGNS = {
    **every_design(),
    **every_coupled(),
    "narrow": narrow(),
    "narrow, odd reference": narrow(2.49987),
    "narrow, ideal": narrow().with_device(r_high=0, r_low=0),
}


def numbers(design: hk.Design) -> str:
    return hk.derive(design).for_design(design).latex("numbers", design=design)


def equations(design: hk.Design) -> list[tuple[str, str, str]]:
    """Name, right side and result of every line, continued ones joined."""
    found = []
    body = numbers(design).removeprefix("\\begin{aligned}\n").removesuffix("\n\\end{aligned}")
    for text in body.replace("\\\\\n&\\quad", "").split("\\\\\n"):
        left, right, result = re.split(r" *&?= ", text)
        found.append((left.strip(), right.strip(), result.strip()))
    return found


def value(text: str) -> Fraction:
    """Compute what a reader computes from the numbers and units printed."""
    text = UNIT.sub(lambda m: f"*ten({PREFIXES[m[1] or '']})", text)
    text = re.sub(r"\\times 10\^\{(-?\d+)\}", r"*ten(\1)", text)
    text = re.sub(r"([0-9]+(?:\.[0-9]+)?)((?:\*ten\(-?\d+\))+)", r"(number('\1')\2)", text)
    text = re.sub(r"(?<!['(\-\d.])(\d+(?:\.\d+)?)(?!['\d.])", r"number('\1')", text)
    while FRACTION.search(text):
        text = FRACTION.sub(r"((\1)/(\2))", text)
    text = re.sub(r"\\(?:left|right|bigl|bigr|quad|,)", "", text)
    text = text.replace("[", "(").replace("]", ")").replace("\\cdot", "*").replace("\n", " ")
    text = text.strip().replace(") (", ")*(").replace("))((", "))*((")
    return Fraction(eval(text, {"number": Fraction, "ten": lambda n: Fraction(10) ** n}))


@pytest.mark.parametrize("name", DESIGNS)
def test_printed_numbers_give_the_printed_results(name: str) -> None:
    for left, right, result in equations(DESIGNS[name]):
        digits = len(re.sub(r"\D|\\,.*", "", result.split(r"\,")[0]).lstrip("0"))
        computed, printed = value(right), value(result)
        # Trailing zeros are dropped, so that four digits at least are meant.
        unit = abs(printed) / 10 ** (max(digits, 4) - 1)
        assert abs(computed - printed) <= unit / 2 * Fraction(1001, 1000), (left, right, result)


@pytest.mark.parametrize("name", DESIGNS)
def test_printed_trips_are_those_of_trip_points_and_show_the_width(name: str) -> None:
    trips = hk.trip_points(DESIGNS[name])
    (_, _, upper), (_, _, lower) = equations(DESIGNS[name])[-2:]
    apart = value(upper) - value(lower)
    assert float(apart) == pytest.approx(float(trips.width), rel=0.06)
    assert float(value(upper)) == pytest.approx(float(trips.upper), abs=0.1 * float(trips.width))


def test_given_values_are_printed_as_they_are() -> None:
    assert r"2.49987\,\mathrm{V}" in numbers(narrow(2.49987))
    assert r"2.5\,\mathrm{V}" in numbers(narrow())


def test_named_quantities_stand_where_numbers_do_not_fit() -> None:
    stages = {sense: hk.Stage(sense, supply="split") for sense in ("inverting", "non-inverting")}
    laws = [hk.derive(stage).without(NON_IDEAL) for stage in stages.values()]
    assert [len(law.rows) for law in laws] == [2, 2]  # in symbols both trips stand alone
    names = [[left for left, _, _ in equations(bare(stage))] for stage in stages.values()]
    assert names[0][0].startswith("S")
    assert names[1] == [r"V_{\mathrm{upper}}", r"V_{\mathrm{lower}}"]


def test_digits_of_a_number_count_for_its_room() -> None:
    upper = hk.derive(hk.Stage("inverting", reference="source")).ideal.upper
    room = [tuple((s, letters) for s in upper.free_symbols) for letters in (6.0, 9.0, 14.0)]
    widths = [width(upper, each) for each in room]
    assert widths == sorted(set(widths))
    assert [fits(upper, each) for each in room] == [True, True, False]


@pytest.mark.parametrize("name", ["narrow", "lattice, device"])
def test_trips_in_the_table_are_those_of_trip_points(name: str) -> None:
    design = DESIGNS[name]
    trips = hk.trip_points(design)
    fields = trip_fields(hk.derive(design), design)
    found = [float(str(field.value)) for field in fields]
    wanted = [float(trips.upper), float(trips.lower), float(trips.width)]
    assert found == pytest.approx(wanted, rel=1e-9)


def test_the_table_does_not_expand_the_law(monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(law: hk.SwitchingLaw) -> None:
        raise AssertionError("the law was expanded")

    monkeypatch.setattr(hk.SwitchingLaw, "formulas", property(refuse))
    design = bare(hk.Stage("inverting")).with_device(**vars(DEVICE))
    assert len(trip_fields(hk.derive(design), design)) == 3

"""The name that was probably meant."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from hystkit.base.nearest import nearest_name, unknown_name_fault

NAMES = ("R_T", "R_B", "R_F", "R_PU", "V_REF", "V_CC")


@pytest.mark.parametrize(
    ("typed", "meant"),
    [("R_FF", "R_F"), ("rt", "R_T"), ("Vref", "V_REF"), ("V-CC", "V_CC"), ("R_PUP", "R_PU")],
)
def test_slips_find_the_name(typed: str, meant: str) -> None:
    assert nearest_name(typed, NAMES) == meant


def test_nothing_is_proposed_where_nothing_is_close() -> None:
    assert nearest_name("temperature", NAMES) is None
    assert nearest_name("R_F", []) is None


@given(st.sampled_from(NAMES), st.integers(0, 2**6 - 1))
def test_case_and_underscores_do_not_count(name: str, pattern: int) -> None:
    cased = "".join(c.lower() if pattern >> i & 1 else c for i, c in enumerate(name))
    assert nearest_name(cased, NAMES) == name
    assert nearest_name(cased.replace("_", ""), NAMES) == name


@given(st.text(), st.lists(st.text(min_size=1), max_size=6))
def test_only_known_names_are_proposed(typed: str, known: list[str]) -> None:
    assert nearest_name(typed, known) in {None, *known}


def test_the_fault_lists_what_exists_and_proposes_the_nearest() -> None:
    fault = unknown_name_fault("part", "R_FF", iter(NAMES))
    assert fault.asked == "R_FF"
    assert fault.have == ", ".join(NAMES)
    assert fault.remedy == "R_F"
    assert "part" in fault.problem


def test_the_fault_of_a_name_that_is_no_text_can_be_told() -> None:
    assert unknown_name_fault("part", 7, []).have == "no part at all"

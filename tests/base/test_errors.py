"""Errors: what they say, what they can be caught as, and that they survive a pickle."""

from __future__ import annotations

import pickle

import pytest

from hystkit.base import errors
from hystkit.base.errors import (
    Fault,
    HystkitError,
    InfeasibleWidthError,
    InputError,
    OutputExistsError,
    UnknownNameError,
)

WIDTH = Fault(
    "no resistor ratio gives the width that was asked for.",
    asked="width = 0.50 V",
    have="output swing = 0.20 V",
    rule="width <= output swing",
    remedy="a width <= 0.20 V",
)
RAILS = Fault("V_CC is not above V_EE.", have="V_CC 3 V, V_EE 5 V")

CLASSES = [
    value
    for value in vars(errors).values()
    if isinstance(value, type) and issubclass(value, HystkitError)
]


def test_rows_are_aligned_under_the_problem() -> None:
    error = InfeasibleWidthError.of("the sizing", [WIDTH])
    assert str(error).splitlines() == [
        "no resistor ratio gives the width that was asked for.",
        "  asked   width = 0.50 V",
        "  have    output swing = 0.20 V",
        "  rule    width <= output swing",
        "  try     a width <= 0.20 V",
    ]


def test_rows_without_text_are_left_out() -> None:
    assert str(InputError("no.", remedy="yes")) == "no.\n  try     yes"


def test_several_faults_are_numbered_in_order() -> None:
    error = InputError.of("the design", [WIDTH, RAILS])
    lines = str(error).splitlines()
    assert lines[0] == "2 faults in the design:"
    assert lines[1] == "  1  no resistor ratio gives the width that was asked for."
    assert lines[6] == "  2  V_CC is not above V_EE."
    assert lines[7] == "       have    V_CC 3 V, V_EE 5 V"
    assert error.faults == (WIDTH, RAILS)


def test_text_of_several_lines_hangs_under_its_first() -> None:
    rows = str(InputError("no.", have="one\ntwo")).splitlines()
    assert rows[1].index("one") == rows[2].index("two")


def test_one_fault_alone_has_no_number() -> None:
    assert str(InputError.of("the design", [RAILS])) == str(RAILS)


def test_no_fault_is_no_error() -> None:
    with pytest.raises(ValueError, match="no faults to report in the design"):
        InputError.of("the design", [])


@pytest.mark.parametrize("kind", CLASSES, ids=lambda kind: kind.__name__)
def test_every_class_reports_alike_and_survives_a_pickle(kind: type[HystkitError]) -> None:
    error = kind.of("the design", [WIDTH, RAILS])
    copy = pickle.loads(pickle.dumps(error))
    assert type(copy) is kind
    assert str(copy) == str(error) == str(HystkitError.of("the design", [WIDTH, RAILS]))
    assert copy.faults == error.faults


@pytest.mark.parametrize("kind", CLASSES, ids=lambda kind: kind.__name__)
def test_every_class_stands_in_the_tree_at_the_top_of_the_file(kind: type[HystkitError]) -> None:
    tree = (errors.__doc__ or "").splitlines()
    (line,) = (line for line in tree if kind.__name__ in line.split())
    builtin = [b for b in (ValueError, KeyError, FileExistsError) if b in kind.__bases__]
    assert [b.__name__ for b in builtin] == [b.__name__ for b in builtin if b.__name__ in line]


def test_builtins_catch_what_a_caller_would_expect_of_them() -> None:
    assert issubclass(InputError, ValueError)
    assert issubclass(UnknownNameError, KeyError)
    assert issubclass(InfeasibleWidthError, ValueError)
    assert issubclass(OutputExistsError, FileExistsError)

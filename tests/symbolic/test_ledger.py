"""Named quantities: kept once, never two of one name, and put back without loss."""

from __future__ import annotations

import sympy as sp
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.symbolic.ledger import HIGH, LOW, Ledger, expand, needed, restrict
from hystkit.symbolic.symbols import NON_IDEAL, symbol
from tests.circuit.custom import BRIDGE
from tests.circuit.strategies import VARIANTS

R_1, R_2, R_3 = map(symbol, ("R_1", "R_2", "R_3"))


def test_a_bare_symbol_needs_no_name() -> None:
    ledger = Ledger()
    assert ledger.define("Z_", HIGH, R_1, "resistance", "Ω") == R_1
    assert ledger.define("Z_", HIGH, sp.S.Zero, "resistance", "Ω") == 0
    assert ledger.definitions() == ()


def test_what_is_equal_in_both_states_is_kept_once_and_loses_its_mark() -> None:
    ledger = Ledger()
    high, low = (ledger.define("S_n1", state, R_1 + R_2, "sum", "Ω") for state in (HIGH, LOW))
    assert high == low == symbol("S_n1H")
    (row,) = ledger.definitions()
    assert (row.symbol, row.expression, row.state) == (symbol("S_n1"), R_1 + R_2, None)
    assert ledger.shared_names() == {symbol("S_n1H"): symbol("S_n1")}


def test_what_differs_carries_the_mark_of_its_state() -> None:
    ledger = Ledger()
    ledger.define("E_", HIGH, R_1 + R_2, "voltage", "V")
    ledger.define("E_", LOW, R_1 + R_3, "voltage", "V")
    found = [(row.symbol.name, row.state) for row in ledger.definitions()]
    assert found == [("E_H", HIGH), ("E_L", LOW)]
    assert ledger.shared_names() == {}


def test_two_quantities_never_share_a_name() -> None:
    ledger = Ledger()
    sums = [R_1 + R_2, R_1 + R_3, R_2 + R_3]
    bases = ("G_ab", "G_abH", "G_ab2", "G_ab")
    for state in (HIGH, LOW, HIGH):
        for base in bases:
            for each in sums:
                ledger.define(base, state, each, "conductance", "S")
    rows = ledger.definitions()
    assert len({row.symbol for row in rows}) == len(rows) == 9
    assert {row.state for row in rows} == {None}
    for base in {*bases}:
        kept = {row.expression for row in rows if row.symbol.name.startswith(base)}
        assert kept == {*sums}


@given(st.lists(st.tuples(st.sampled_from("abc"), st.integers(1, 3), st.booleans()), max_size=8))
def test_a_definition_stands_for_what_was_defined(asked: list[tuple[str, int, bool]]) -> None:
    """Each new quantity is built on the one before; put back in, all is as it was."""
    ledger, plain, named, wanted = Ledger(), R_1, R_1, []
    for base, number, is_high in asked:
        plain = (plain + number) / (R_2 + number)
        state = HIGH if is_high else LOW
        named = ledger.define(f"Z_{base}", state, (named + number) / (R_2 + number), "any", "Ω")
        wanted.append((named, plain))
    changes = ledger.shared_names()
    for found, meant in wanted:
        assert expand(found.xreplace(changes), ledger.definitions()) == meant


def test_restricting_drops_what_becomes_bare() -> None:
    ledger = Ledger()
    z = ledger.define("Z_", HIGH, R_1 * R_2 / (R_1 + R_2), "parallel", "Ω")
    ledger.define("S_", HIGH, 1 / (R_3 + z), "sum", "S")
    kept, changes = restrict(ledger.definitions(), [R_1])
    assert [(row.symbol.name, row.expression) for row in kept] == [("S_H", 1 / R_3)]
    assert changes == {R_1: 0, z: 0}


def test_only_what_acts_is_needed() -> None:
    for stage in (*VARIANTS[::5], BRIDGE):
        law = hk.derive(stage)
        for trip in law.named:
            rows, leaves = needed((trip,), law.definitions)
            assert expand(trip, rows) == expand(trip, law.definitions)
            assert leaves == expand(trip, law.definitions).free_symbols
            assert [row for row in law.definitions if row in rows] == list(rows)


def test_expanding_a_restricted_law_is_setting_the_symbol_to_zero() -> None:
    for stage in VARIANTS[::7]:
        law = hk.derive(stage)
        kept, changes = restrict(law.definitions, [symbol("I_BP"), symbol("V_OS")])
        for trip in law.named:
            short = expand(trip.xreplace(changes), kept)
            zeros = {symbol("I_BP"): 0, symbol("V_OS"): 0}
            assert sp.simplify(short - expand(trip, law.definitions).subs(zeros)) == 0
    assert {"I_BP", "V_OS"} < {*NON_IDEAL}

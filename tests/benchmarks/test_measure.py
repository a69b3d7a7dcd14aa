"""The harness itself: ratios, verdicts, and that a broken program is not taken for a fast one."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.benchmarks.measure import Comparison, alternating, in_fresh_process, shown, slowness


def test_ratio_and_verdict() -> None:
    kept = Comparison("move", 0.010, "afresh", 0.080, at_least=4.0)
    assert kept.ratio == pytest.approx(8.0)
    assert kept.passed
    assert "pass" in str(kept)
    assert "8.0" in str(kept)
    assert not Comparison("move", 0.010, "afresh", 0.030, at_least=4.0).passed
    assert not Comparison("import", 0.2, "other", 1.0, limit=0.15).passed
    assert Comparison("import", 0.1, "other", 1.0, limit=0.15).passed
    assert "FAIL" in str(Comparison("import", 0.2, "other", 1.0, limit=0.15))


def test_a_limit_in_time_grows_with_a_slower_machine_and_a_ratio_does_not() -> None:
    late = Comparison("move", 0.12, "afresh", 0.2, limit=0.1, slower=1.3)
    assert late.passed
    assert not replace(late, slower=1.1).passed
    assert not replace(late, at_least=2.0).passed
    assert slowness() >= 1.0


def test_shown_in_the_fitting_unit() -> None:
    assert shown(1.234) == "1.23 s"
    assert shown(0.01234) == "12.3 ms"


def test_fresh_process_reports_its_own_time() -> None:
    assert in_fresh_process("elapsed = 0.25", repeat=1) == 0.25


def test_fresh_process_that_fails_is_an_error() -> None:
    with pytest.raises(RuntimeError, match="no_such_library"):
        in_fresh_process("import no_such_library", repeat=1)


def test_calls_are_taken_in_turns() -> None:
    calls: list[tuple[str, int]] = []
    alternating(lambda n: calls.append(("a", n)), lambda n: calls.append(("b", n)), rounds=2)
    assert calls == [("a", 0), ("b", 0), ("a", 1), ("b", 1), ("a", 2), ("b", 2)]

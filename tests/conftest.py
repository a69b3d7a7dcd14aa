"""Settings that all tests share."""

from __future__ import annotations

import os
from collections.abc import Generator

import pytest
from hypothesis import settings

# A deadline would be a timed assertion; CI runs the same examples every time.
settings.register_profile("hystkit", deadline=None, derandomize="CI" in os.environ)
settings.load_profile("hystkit")

#: Tests that may be skipped on a desk without the tools, never in CI.
NEVER_SKIPPED_IN_CI = ("browser", "tex")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(
    item: pytest.Item,
) -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """Turn a skip for want of a tool into a failure where CI should have installed it."""
    report = yield
    wanted = any(item.get_closest_marker(mark) for mark in NEVER_SKIPPED_IN_CI)
    if report.skipped and wanted and "CI" in os.environ:
        report.outcome = "failed"
        report.longrepr = f"skipped in CI, where its tools must be installed: {report.longrepr}"
    return report

"""Shared by all tests: where things are, and no silent skips where none is allowed."""

from __future__ import annotations

import os

import pytest


@pytest.hookimpl(hookwrapper=True)
def pytest_runtest_makereport(item: pytest.Item, call: pytest.CallInfo):
    """With REPORTGEN_NO_SKIPS set, a skipped test is a failed one: the machine was supposed to be able to run it."""
    outcome = yield
    report = outcome.get_result()
    if report.skipped and os.environ.get("REPORTGEN_NO_SKIPS") and not hasattr(report, "wasxfail"):
        report.outcome = "failed"
        report.longrepr = f"skipped where skips are not allowed: {report.longrepr}"

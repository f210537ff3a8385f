"""What all tests share: strictness on the build server, hypothesis that repeats itself."""

from __future__ import annotations

import os
from collections.abc import Generator

import pytest
from hypothesis import HealthCheck, settings

# Derandomised: a failure on one machine is the same failure on every machine; a slow machine is no failure.
settings.register_profile("lowpoint", derandomize=True, deadline=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("lowpoint")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, pytest.TestReport, pytest.TestReport]:
    """With LOWPOINT_STRICT set, a skipped test is a failed one: nothing may be missing there.

    But for the books made by another program: they are not ours to hand on, so a build server may lack them.
    """
    report = yield
    skipped = report.skipped and not hasattr(report, "wasxfail") and "LOWPOINT_CORPUS" not in str(report.longrepr)
    if os.environ.get("LOWPOINT_STRICT") and skipped:
        report.outcome = "failed"
        report.longrepr = f"skipped although LOWPOINT_STRICT is set: {report.longrepr}"
    return report

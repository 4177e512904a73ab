"""What all tests share: no network, no screen, and a skip in CI is a failure."""

import os

import pytest
from hypothesis import settings

os.environ.setdefault("MPLBACKEND", "Agg")
os.environ["PROJ_NETWORK"] = "OFF"

# The same cases on every run: a change fails where it is made, not on somebody else's day.
settings.register_profile("fixed", derandomize=True, deadline=None)
settings.load_profile("fixed")

_skipped: list[str] = []


def pytest_runtest_logreport(report: pytest.TestReport) -> None:
    """Remember what was skipped."""
    if report.skipped:
        _skipped.append(report.nodeid)


def pytest_sessionfinish(session: pytest.Session) -> None:
    """Turn a skip into a failure where CI runs."""
    if os.environ.get("CI") and _skipped:
        for name in _skipped:
            print(f"\nskipped in CI: {name}")
        session.exitstatus = pytest.ExitCode.TESTS_FAILED

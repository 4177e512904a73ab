"""Every published value of the sizing areas is tested, or listed with the reason why none is."""

import csv
import re
import subprocess
import sys
from pathlib import Path

import pytest

from tests.unit.stats.published import rows

TESTS = Path(__file__).parents[2]
SIZING = ("A01", "A02", "A03", "A04", "A05", "A06", "A07", "A10", "A11")
ROW = re.compile(r"A\d\d-\d\d\d")


def listed() -> dict[str, str]:
    """Return the rows that no code answers, with the reason."""
    with (TESTS / "reference" / "unanswered.csv").open(encoding="utf-8", newline="") as stream:
        return {r["id"]: r["reason"] for r in csv.DictReader(stream)}


def in_use() -> set[str]:
    """Return the ids that tests name: in their source, or as the case of a parametrized test."""
    found: set[str] = set()
    for path in TESTS.rglob("test_*.py"):
        if path != Path(__file__):
            found |= set(ROW.findall(path.read_text(encoding="utf-8")))
    run = subprocess.run(
        [sys.executable, "-m", "pytest", "--collect-only", "-q", "-n", "0",
         "-p", "no:cacheprovider", "tests/unit/stats", "tests/unit/sizing", "tests/unit/design"],
        cwd=TESTS.parent, capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert run.returncode == 0, run.stdout[-2000:]
    return found | set(ROW.findall(run.stdout))


@pytest.mark.slow
def test_every_row_of_the_sizing_areas_is_tested_or_listed_with_its_reason():
    """A value that nobody compares is no check."""
    wanted = {i for i in rows() if i.startswith(SIZING)}
    used, reasons = in_use(), listed()
    assert sorted(wanted - used - set(reasons)) == []
    assert sorted(set(reasons) & used) == []
    assert len(wanted & used) >= 150


def test_listed_rows_exist_and_have_a_reason():
    """A reason for a row that is gone would hide nothing but confuse."""
    assert set(listed()) <= set(rows())
    assert all(listed().values())

"""Commands start fast: measured against a bare interpreter start in the same run."""

import pytest

from tests.benchmarks.commands import timed_commands

LIMITS = {
    "`fieldplan --help`": 20,
    "`import fieldplan`": 3,
    "`fieldplan size` with numbers": 45,
    "`fieldplan pack` of Hobbin Ley": 600,
}


@pytest.mark.benchmark
def test_commands_take_few_interpreter_starts() -> None:
    """The aims are 0.15, 0.1, 0.35 and 4 s where an interpreter starts in about 0.01 s."""
    found = {entry.name: entry.ratio for entry in timed_commands()}
    assert set(found) == set(LIMITS)
    assert {name: ratio for name, ratio in found.items() if ratio > LIMITS[name]} == {}

"""The findings about the interval of a mean stay within a few plain simulations."""

import pytest

from tests.benchmarks.near_normal import timed_findings

LIMITS = (1, 20, 40, 60)


@pytest.mark.benchmark
def test_findings_take_few_plain_simulations() -> None:
    """The aims are 5 ms for the sentence and 2 s with the band; one simulation takes 30 ms."""
    found = timed_findings()
    assert [
        entry.name for entry, most in zip(found, LIMITS, strict=True) if entry.ratio > most
    ] == []

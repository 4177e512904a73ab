"""Balanced selection: buckets against looking everywhere, and growth with the number of units."""

import pytest

from tests.benchmarks.balanced import searched, selected


@pytest.mark.benchmark
def test_buckets_beat_looking_everywhere() -> None:
    """The peer looks at all open units in numpy for each nearest neighbour; 10,000 units."""
    assert 3 * selected(10_000) < searched(10_000)


@pytest.mark.benchmark
def test_time_grows_little_faster_than_the_number_of_units() -> None:
    """Ten times the units in at most 40 times the time; looking everywhere would take 100."""
    assert selected(100_000) < 40 * selected(10_000)

"""Placing points: faster than a general-purpose sampler, in the same run on the same machine."""

import pytest

from tests.benchmarks.placement import COUNTS, VERTICES, measured


@pytest.mark.benchmark
@pytest.mark.parametrize("count", COUNTS)
@pytest.mark.parametrize("vertices", VERTICES)
def test_both_ways_are_faster_than_a_general_sampler(vertices: int, count: int) -> None:
    """The peer is ``sample_points`` of geopandas, same polygon and number; ratios only."""
    row = measured(vertices, count)
    assert row.simulated < row.peer
    assert row.issued < row.peer

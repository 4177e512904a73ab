"""What is said of correlation is quick beside the plain ways to the same, in one run."""

import pytest

from tests.benchmarks.correlation import visits, weighing


@pytest.mark.benchmark
def test_curves_are_weighed_quicker_than_matrix_by_matrix() -> None:
    """One eigenvalue decomposition serves all nuggets of a curve."""
    row = weighing()
    assert row.seconds < row.peer_s, row


@pytest.mark.benchmark
def test_a_correlation_is_estimated_quicker_than_by_resampling() -> None:
    """A grid of likelihoods beside 1,000 resampled series."""
    row = visits()
    assert row.seconds < row.peer_s, row

"""Sharing between 1,000 strata is quick beside a general solver, in one run."""

import pytest

from tests.benchmarks.strata import measured


@pytest.mark.benchmark
def test_a_thousand_strata_are_shared_quicker_than_a_linear_program_is_solved() -> None:
    """Whole numbers with a bound, beside parts of results without any rounding."""
    for row in measured():
        assert row.seconds < row.peer_s, row

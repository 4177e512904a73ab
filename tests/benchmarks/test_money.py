"""What is said about money is quick beside the plain ways to find the same, in one run."""

import pytest

from tests.benchmarks.money import being_wrong_row, many_designs


@pytest.mark.benchmark
def test_designs_are_priced_quicker_than_they_are_sized_alone() -> None:
    """A frontier of a hundred designs or more, beside as many whole sizings."""
    row, designs = many_designs()
    assert designs >= 100
    assert row.seconds < row.peer_s, row


@pytest.mark.benchmark
def test_expected_losses_are_quicker_than_simulated_ones() -> None:
    """Quadrature beside 100,000 campaigns a number, which are good to a few per cent only."""
    row = being_wrong_row()
    assert row.seconds < row.peer_s, row

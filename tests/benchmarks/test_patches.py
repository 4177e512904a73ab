"""Patches: quicker than throwing points, in the same run on the same machine."""

import pytest

from tests.benchmarks.patches import LAYOUTS, closed_form, scored, sized


@pytest.mark.benchmark
def test_geometry_is_quicker_than_throwing_points() -> None:
    """The peers answer less exactly, or for one number only; ratios alone."""
    for row in (closed_form(), scored()):
        assert row.seconds < row.peer_s / 5, row


@pytest.mark.benchmark
@pytest.mark.parametrize("layout", LAYOUTS)
def test_sizing_on_a_site_takes_less_than_scoring_draws_of_one_number(layout: str) -> None:
    """A search over n, with its table and picture, beside 200 issued draws of the n it found."""
    row = sized(layout)
    assert row.seconds < row.peer_s, row

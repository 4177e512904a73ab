"""Correlation of reading and result against another library."""

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.calibration import calibration


@pytest.mark.parametrize(("pairs", "slope"), [(5, 2.0), (12, -0.7), (40, 0.1)])
def test_line_and_interval_are_those_of_scipy(pairs: int, slope: float) -> None:
    """Second source: scipy.stats.linregress and pearsonr (Fisher's interval)."""
    rng = np.random.default_rng(pairs)
    x = rng.lognormal(3, 0.5, pairs)
    y = 4 + slope * x + rng.normal(0, 8, pairs)
    found = calibration(list(x), list(y), confidence=0.9)
    line = stats.linregress(x, y)
    interval = stats.pearsonr(x, y).confidence_interval(0.9)
    assert found.pairs == pairs
    assert (found.slope, found.intercept) == pytest.approx((line.slope, line.intercept))
    assert (found.correlation, found.low, found.high) == pytest.approx(
        (line.rvalue, interval.low, interval.high)
    )


def test_points_on_a_line_leave_no_doubt() -> None:
    """R = 1 has no interval; rounding must not take it above 1."""
    found = calibration([1, 2, 3, 7], [0.3, 0.6, 0.9, 2.1])
    assert found.correlation == pytest.approx(1)
    assert found.correlation <= 1
    assert found.slope == pytest.approx(0.3)


@pytest.mark.parametrize(
    ("readings", "results", "words"),
    [
        ([1, 2, 3], [1, 2, 3], "3 pairs"),
        ([1, 2, 3, 4], [1, 2, 3], "4 readings and 3 results"),
        ([5, 5, 5, 5], [1, 2, 3, 4], "all 4 readings are 5"),
        ([1, 2, 3, 4], [7, 7, 7, 7], "all 4 results are 7"),
    ],
)
def test_pairs_that_teach_nothing_are_refused(
    readings: list[float], results: list[float], words: str
) -> None:
    """Each message holds the offending value."""
    with pytest.raises(DesignError, match=words):
        calibration(readings, results)

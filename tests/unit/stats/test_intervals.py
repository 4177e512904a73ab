"""Student's interval against the library and a worked example."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import t_interval, t_quantile
from fieldplan.stats.stratified import stratified_mean
from fieldplan.stats.summary import sample_mean, sample_variance

WELLS = [4.1, 6.8, 2.2, 9.5, 5.0, 3.3, 7.1, 5.9]


def test_wells_give_their_mean_error_and_interval() -> None:
    """By hand: mean 43.9/8 = 5.49, SE = √((1 − 8/14) s²/8) = 0.54, t(7) = 2.3646."""
    mean, error, known = stratified_mean(
        [sample_mean(WELLS)], [sample_variance(WELLS)], [8], [1.0], [14]
    )
    low, high = t_interval(mean, error, known, confidence=0.95, kind="two-sided")
    assert low is not None
    assert high is not None
    assert (round(mean, 2), round(error, 2)) == (5.49, 0.54)
    assert (round(low, 2), round(high, 2)) == (4.21, 6.77)


@settings(deadline=None)
@given(st.floats(-50, 50), st.floats(0.01, 10), st.floats(1, 500), st.floats(0.55, 0.99))
def test_two_sided_interval_equals_scipy(
    mean: float, error: float, known: float, confidence: float
) -> None:
    """Source: scipy.stats.t.interval."""
    expected = stats.t.interval(confidence, known, loc=mean, scale=error)
    found = t_interval(mean, error, known, confidence=confidence, kind="two-sided")
    assert found == pytest.approx(expected, rel=1e-7, abs=1e-7)


@settings(deadline=None)
@given(st.floats(1, 500), st.floats(0.55, 0.99))
def test_limits_are_mirrored_and_put_all_error_on_one_side(known: float, confidence: float) -> None:
    """scipy.stats.t.ppf at the whole confidence."""
    nothing, high = t_interval(0.0, 1.0, known, confidence=confidence, kind="upper-limit")
    low, nothing_either = t_interval(0.0, 1.0, known, confidence=confidence, kind="lower-limit")
    assert nothing is None
    assert nothing_either is None
    assert high == pytest.approx(stats.t.ppf(confidence, known), rel=1e-7, abs=1e-8)
    assert low == pytest.approx(-stats.t.ppf(confidence, known), rel=1e-7, abs=1e-8)


def test_census_interval_is_the_mean_itself() -> None:
    """No error, no width."""
    assert t_interval(7.0, 0.0, math.inf, confidence=0.95, kind="two-sided") == (7.0, 7.0)


@pytest.mark.parametrize(
    ("known", "confidence", "said"),
    [(0, 0.95, "degrees of freedom above 0"), (5, 95, "between 0 and 1"), (5, 0, "0")],
)
def test_impossible_quantiles_are_refused(known: float, confidence: float, said: str) -> None:
    """A percentage for a share, or a single result."""
    with pytest.raises(DesignError, match=said):
        t_quantile(known, confidence=confidence, kind="two-sided")

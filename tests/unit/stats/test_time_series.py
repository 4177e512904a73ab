"""Visits in a row, against sums over whole correlation matrices."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.planned_visits import planned_factor, share_held_as_independent
from fieldplan.stats.time_series import (
    effective_number,
    effective_number_at,
    effective_number_of_lags,
    inflation,
    mean_correlation,
    results_behind_sigma,
    rho_at,
    sigma_of_series,
    visits_by_inflation,
    visits_needed,
)

RHOS = st.floats(-0.9, 0.99).filter(lambda rho: abs(rho) > 1e-6)


def matrix(n: int, rho: float) -> NDArray[np.float64]:
    """Correlations ρ^|i − j| of n visits."""
    at = np.arange(n)
    return np.asarray(float(rho) ** np.abs(at[:, None] - at[None, :]))


def test_36_independent_visits_are_75_at_a_correlation_of_035() -> None:
    """The usual factor gives 36 × 1.35/0.65 = 74.77; the whole sum, ends counted, needs 74."""
    assert 36 * inflation(0.35) == pytest.approx(74.77, abs=0.005)
    assert visits_by_inflation(36, 0.35) == 75
    assert visits_needed(36, 0.35) == 74
    assert 73**2 / matrix(73, 0.35).sum() < 36 <= 74**2 / matrix(74, 0.35).sum()


@given(st.integers(1, 120), RHOS)
def test_the_effective_number_is_the_sum_over_all_pairs(n: int, rho: float) -> None:
    """Brute force: the variance of a mean is σ² ΣΣ ρ^|i − j| / n²."""
    assert effective_number(n, rho) == pytest.approx(n**2 / matrix(n, rho).sum(), rel=1e-7)


@given(st.integers(1, 60), st.floats(0.0, 0.98))
def test_lags_and_days_agree_with_the_closed_form(n: int, rho: float) -> None:
    """Three ways to say the same even series must give one number."""
    expected = effective_number(n, rho)
    lags = [rho**k for k in range(1, n)]
    days = [14.0 * k for k in range(n)]
    assert effective_number_of_lags(n, lags) == pytest.approx(expected, rel=1e-9)
    assert effective_number_at(days, rho, spacing_days=14) == pytest.approx(expected, rel=1e-9)


@given(st.floats(0.5, 200), st.floats(-0.5, 0.9))
def test_no_smaller_number_of_visits_is_worth_as_much(independent: float, rho: float) -> None:
    """Counting upward: one visit fewer falls short."""
    n = visits_needed(independent, rho)
    assert effective_number(n, rho) >= independent * (1 - 1e-8)
    assert n == 1 or effective_number(n - 1, rho) < independent


def test_independent_visits_need_no_more() -> None:
    """At a correlation of 0 nothing may change."""
    assert visits_needed(36, 0.0) == visits_by_inflation(36, 0.0) == 36
    assert effective_number(36, 0.0) == 36
    assert sigma_of_series(4.0, 10, 0.0) == pytest.approx(4.0)
    assert results_behind_sigma(36, 0.0) == 36


@given(st.floats(0.0, 0.99), st.floats(1, 100), st.floats(0.1, 500), st.floats(0.1, 500))
def test_a_correlation_may_be_carried_over_in_two_steps(
    rho: float, spacing: float, first: float, second: float
) -> None:
    """From 30 to 60 and on to 90 days must equal 30 to 90 at once."""
    there = rho_at(rho, from_days=spacing, to_days=first)
    if there >= 0.99 or there < 1e-200:
        return
    twice = rho_at(there, from_days=first, to_days=second)
    assert twice == pytest.approx(rho_at(rho, from_days=spacing, to_days=second), rel=1e-6)


def test_a_correlation_at_three_times_the_spacing_is_its_cube() -> None:
    """By hand: 0.35³ = 0.042875."""
    assert rho_at(0.35, from_days=30, to_days=90) == pytest.approx(0.042875)
    assert rho_at(-0.2, from_days=30, to_days=30) == -0.2


def test_visits_of_one_day_are_worth_one() -> None:
    """A second jar on the same day says nothing new of the year."""
    assert effective_number_at([3.0, 3.0, 3.0], 0.6, spacing_days=7) == pytest.approx(1.0)


def test_two_groups_a_year_apart_are_nearly_unrelated() -> None:
    """By hand: 0.5^(365/30) for every pair."""
    found = mean_correlation([0.0], [365.0, 365.0], 0.5, spacing_days=30)
    assert found == pytest.approx(0.5 ** (365 / 30))


@pytest.mark.parametrize(("n", "rho"), [(5, 0.35), (12, 0.6), (40, 0.9)])
def test_sigma_is_raised_by_what_a_series_hides(n: int, rho: float) -> None:
    """Brute force: E(s²)/σ² is the trace of the centred correlation matrix over n − 1."""
    whole = matrix(n, rho)
    expected = (np.trace(whole) - whole.sum() / n) / (n - 1)
    assert sigma_of_series(math.sqrt(expected), n, rho) == pytest.approx(1.0, rel=1e-9)


@pytest.mark.parametrize("rho", [0.2, 0.5, 0.8])
def test_squares_of_a_long_series_are_worth_so_many_visits(rho: float) -> None:
    """The variance of a mean of squares is 2σ⁴ ΣΣ ρ^(2|i − j|) / n² (Isserlis 1918)."""
    n = 2000
    brute = n**2 / (matrix(n, rho) ** 2).sum()
    assert results_behind_sigma(n, rho) == pytest.approx(brute, rel=0.005)


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: inflation(1.0), "1.0; it must be from"),
        (lambda: effective_number(0, 0.3), "1 visit or more, not 0"),
        (lambda: effective_number_at([], 0.3, spacing_days=7), "not 0"),
        (lambda: effective_number_of_lags(3, [-0.9]), "no variance left"),
        (lambda: effective_number_of_lags(3, [1.4]), "1.4 cannot be"),
        (lambda: rho_at(-0.3, from_days=30, to_days=60), "-0.3 between visits 30 days"),
        (lambda: rho_at(0.3, from_days=0, to_days=60), "must be above 0"),
        (lambda: visits_needed(0, 0.3), "worth 0 independent"),
        (lambda: visits_needed(2e6, 0.98), "farther apart"),
        (lambda: visits_by_inflation(math.nan, 0.3), "nan independent"),
    ],
)
def test_impossible_series_are_refused_in_words(call: object, words: str) -> None:
    """Each names the value that cannot be."""
    with pytest.raises(DesignError) as caught:
        call()  # type: ignore[operator]
    assert words in str(caught.value)


@pytest.mark.parametrize(("rho", "n"), [(0.5, 29), (0.3, 60)])
def test_the_share_held_as_independent_is_what_simulated_series_show(rho, n):
    """Source: simulated series of that correlation; s of a short series hides a little more."""
    rng = np.random.default_rng(20)
    campaigns = 20_000
    series = np.empty((campaigns, n))
    series[:, 0] = rng.normal(size=campaigns)
    for k in range(1, n):
        series[:, k] = rho * series[:, k - 1] + math.sqrt(1 - rho**2) * rng.normal(size=campaigns)
    t = t_quantile(n - 1, confidence=0.95, kind="upper-limit")
    held = (series.mean(axis=1) + t * series.std(axis=1, ddof=1) / math.sqrt(n) >= 0).mean()
    found = share_held_as_independent(rho, t, n - 1)
    assert found == pytest.approx(held, abs=4 * math.sqrt(held * (1 - held) / campaigns) + 0.01)
    assert share_held_as_independent(0.0, t, n - 1) == pytest.approx(0.95)


@pytest.mark.parametrize("rho", [-0.9, -0.5, -0.1, 0.2, 0.7])
def test_the_planned_factor_never_promises_more_than_the_whole_sum_keeps(rho):
    """Source: the whole sum over the correlation matrix, for every n up to 40."""
    for n in range(2, 41):
        assert n / planned_factor(rho) <= effective_number(n, rho) + 1e-9

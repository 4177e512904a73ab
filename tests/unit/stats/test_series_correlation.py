"""The correlation of visits in a pilot, against whole matrices and simulated series."""

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import null_space
from scipy.stats import chi2

from fieldplan.base.errors import DesignError
from fieldplan.stats.series_correlation import (
    autocorrelation,
    corrected_for_length,
    correlation_of_visits,
)

NITRATE = [2.1, 2.6, 2.4, 1.9, 2.2, 3.1, 2.8, 2.0, 1.7, 2.3, 2.5, 2.2]


def series(random: np.random.Generator, days: NDArray[np.float64], rho: float) -> list[float]:
    """Draw a normal series with correlation ρ^days through the square root of its matrix."""
    whole = rho ** np.abs(days[:, None] - days[None, :])
    return list(np.linalg.cholesky(whole) @ random.standard_normal(len(days)) + 10.0)


def test_correlations_at_every_distance_by_hand() -> None:
    """Deviations −2 … 2: products 4, −1 and −4 over a sum of squares of 10."""
    found = [autocorrelation([1, 2, 3, 4, 5], lag) for lag in (1, 2, 3, 4)]
    assert found == pytest.approx([0.4, -0.1, -0.4, -0.4])


def test_the_correction_undoes_the_published_bias() -> None:
    """Putting ρ − (1 + 4ρ)/n in gives ρ back (Marriott & Pope 1954)."""
    for n in (12, 36):
        for rho in (0.0, 0.35, 0.7):
            assert corrected_for_length(rho - (1 + 4 * rho) / n, n) == pytest.approx(rho)


def test_the_corrected_correlation_is_right_on_average() -> None:
    """Simulated series of 24 visits: r1 is short by (1 + 4ρ)/n, what is left is below 1/n."""
    random = np.random.default_rng(11)
    days, rho, n = np.arange(24.0), 0.35, 24
    observed = np.array([autocorrelation(series(random, days, rho)) for _ in range(2000)])
    four = 4 * float(observed.std()) / math.sqrt(len(observed))
    assert abs(observed.mean() - (rho - (1 + 4 * rho) / n)) < four + 1 / n**1.5
    corrected = np.array([corrected_for_length(float(r), n) for r in observed])
    assert abs(corrected.mean() - rho) < (four + 1 / n**1.5) * n / (n - 4)


@pytest.mark.parametrize("days", [np.arange(0, 360, 30), np.array([0, 5, 9, 30, 33, 61, 70, 99])])
def test_the_interval_is_that_of_the_restricted_likelihood(days: NDArray[np.float64]) -> None:
    """Second route: the likelihood of n − 1 contrasts that know nothing of the level."""
    values = np.array(NITRATE[: len(days)])
    found = correlation_of_visits(list(days), values.tolist(), confidence=0.80)
    contrasts = null_space(np.ones((1, len(days))))
    gaps = np.diff(days)
    tried = np.linspace(-0.99 if found.even else 0.0, 0.99, 199)
    heights = []
    for rho in tried:
        apart = np.abs(days[:, None] - days[None, :]) / np.median(gaps)
        whole = np.sign(rho) ** np.round(apart) * abs(rho) ** apart if rho else np.eye(len(days))
        seen = contrasts.T @ whole @ contrasts
        rest = contrasts.T @ values
        square = float(rest @ np.linalg.solve(seen, rest))
        heights.append(-0.5 * (np.linalg.slogdet(seen)[1] + (len(days) - 1) * math.log(square)))
    inside = tried[np.array(heights) >= max(heights) - chi2.ppf(0.80, 1) / 2]
    assert found.low == pytest.approx(float(inside[0]), abs=1e-9)
    assert found.high == pytest.approx(float(inside[-1]), abs=1e-9)


@pytest.mark.parametrize("rho", [0.0, 0.35, 0.7])
def test_four_of_five_intervals_hold_the_true_correlation(rho: float) -> None:
    """Simulated, 30 even visits: within 4 standard errors and 2 points of the stated 80 %."""
    random = np.random.default_rng(int(100 * rho) + 1)
    days = np.arange(30.0)
    hits, runs = 0, 600
    for _ in range(runs):
        found = correlation_of_visits(days.tolist(), series(random, days, rho))
        hits += found.low <= rho <= found.high
    assert abs(hits / runs - 0.80) < 4 * math.sqrt(0.8 * 0.2 / runs) + 0.02


def test_uneven_visits_show_the_same_correlation_as_even_ones() -> None:
    """Simulated at ρ = 0.5 per usual gap: the middle estimate is within 4 standard errors."""
    random = np.random.default_rng(5)
    gaps = np.tile([7.0, 14.0, 10.0, 30.0], 10)
    days = np.concatenate([[0.0], np.cumsum(gaps)])
    spacing = float(np.median(gaps))
    found = [
        correlation_of_visits(days.tolist(), series(random, days, 0.5 ** (1 / spacing)))
        for _ in range(400)
    ]
    rhos = np.array([each.rho for each in found])
    assert not found[0].even
    assert found[0].observed is None
    assert found[0].spacing_days == spacing
    # 1.2533 σ/√runs is the standard error of a median of near-normal estimates.
    assert abs(np.median(rhos) - 0.5) < 4 * 1.2533 * rhos.std() / math.sqrt(len(rhos)) + 0.02


def test_a_round_that_slips_by_some_days_still_is_even() -> None:
    """A monthly round on working days is no reason to change the method."""
    days = [30 * k + (-3, 0, 2, 4)[k % 4] for k in range(12)]
    assert correlation_of_visits(days, NITRATE).even


def test_the_order_of_rows_does_not_matter() -> None:
    """A file may be sorted by result."""
    days = [30.0 * k for k in range(12)]
    turned = correlation_of_visits(days[::-1], NITRATE[::-1])
    assert turned == correlation_of_visits(days, NITRATE)


@pytest.mark.parametrize(
    ("days", "values", "words"),
    [
        (range(7), NITRATE[:7], "7 visits cannot show"),
        ([0, 0, *range(1, 11)], NITRATE, "two visits have one date"),
        (range(12), [3.0] * 12, "all 12 values are 3"),
    ],
)
def test_a_series_that_shows_nothing_is_refused(
    days: list[float], values: list[float], words: str
) -> None:
    """Each message carries the value."""
    with pytest.raises(DesignError) as caught:
        correlation_of_visits(list(days), values)
    assert words in str(caught.value)


def test_a_distance_beyond_the_series_is_refused() -> None:
    """Twelve values have no pair twelve visits apart."""
    with pytest.raises(DesignError, match="12 visits apart"):
        autocorrelation(NITRATE, 12)
    with pytest.raises(DesignError, match="not 4"):
        corrected_for_length(0.3, 4)

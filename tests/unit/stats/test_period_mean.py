"""The mean of the very period that is visited, against sums over a fine grid of days."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.period_mean import period_variance_share
from fieldplan.stats.time_series import effective_number


@pytest.mark.parametrize(("n", "rho"), [(1, 0.5), (4, 0.35), (12, 0.05), (12, 0.8), (26, 0.97)])
def test_it_is_the_variance_over_all_moments_of_the_period(n: int, rho: float) -> None:
    """Brute force: 200 moments in each part, and the visits among them."""
    moments = (np.arange(200 * n) + 0.5) / 200
    visits = np.arange(n) + 0.5
    inside = rho ** np.abs(moments[:, None] - moments[None, :])
    across = rho ** np.abs(visits[:, None] - moments[None, :])
    between = rho ** np.abs(visits[:, None] - visits[None, :])
    brute = between.mean() - 2 * across.mean() + inside.mean()
    assert period_variance_share(n, rho) == pytest.approx(float(brute), rel=1e-3, abs=1e-6)


def test_it_is_right_for_simulated_periods() -> None:
    """Series of 12 visits among 240 moments: within 4 standard errors of a variance."""
    random = np.random.default_rng(12)
    moments, visits = np.arange(240), np.arange(12) * 20 + 10
    root = np.linalg.cholesky(0.6 ** (np.abs(moments[:, None] - moments[None, :]) / 20))
    drawn = root @ random.standard_normal((240, 4000))
    off = drawn[visits].mean(axis=0) - drawn.mean(axis=0)
    four = 4 * math.sqrt(2 / 4000)
    assert off.var() == pytest.approx(period_variance_share(12, 0.6), rel=four + 0.01)


def test_unrelated_visits_are_simple_random_and_like_ones_know_nearly_all() -> None:
    """The two ends: 1/n, and nothing left."""
    assert period_variance_share(12, 1e-9) == pytest.approx(1 / 12, rel=0.1)
    assert period_variance_share(12, 0.99) < 0.001
    for rho in (0.1, 0.5, 0.9):
        assert period_variance_share(12, rho) < 1 / 12 < 1 / effective_number(12, rho)


def test_correlations_that_do_not_fade_are_refused() -> None:
    """Below 0 or none at all there is no likeness between visits to use."""
    for n, rho in ((0, 0.5), (12, 0.0), (12, -0.2), (12, 1.0)):
        with pytest.raises(DesignError, match=f"{n} visits with a correlation of {rho}"):
            period_variance_share(n, rho)

"""Kaplan and Meier's curve against lifelines, which fits left-censored results itself."""

import warnings

import numpy as np
import pytest

from fieldplan.stats.kaplan_meier import kaplan_meier
from fieldplan.stats.profile_mean import profile_of_mean

pytestmark = pytest.mark.oracle


def sample(seed: int, n: int = 40) -> tuple[list[float], list[float]]:
    """Draw detects and non-detects with three limits; ties are common."""
    rng = np.random.default_rng(seed)
    values = np.round(rng.lognormal(2.0, 0.9, n), 0) + 1
    own = rng.choice([3.0, 6.0, 9.0], n)
    below = values < own
    return [float(x) for x in values[~below]], [float(x) for x in own[below]]


@pytest.mark.parametrize("seed", range(8))
def test_shares_below_are_those_of_lifelines(seed: int) -> None:
    """Source: lifelines.KaplanMeierFitter.fit_left_censoring, its cumulative density."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from lifelines import KaplanMeierFitter

        detects, limits = sample(seed)
        seen = [1] * len(detects) + [0] * len(limits)
        fitted = KaplanMeierFitter().fit_left_censoring([*detects, *limits], seen)
    theirs = fitted.cumulative_density_.iloc[:, 0]
    for jump in kaplan_meier(detects, limits).jumps:
        before = theirs[theirs.index < jump.value]
        expected = float(before.iloc[-1]) if len(before) else 0.0
        assert jump.below == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("seed", range(4))
def test_mean_and_error_are_those_of_lifelines_turned_round(seed: int) -> None:
    """Source: lifelines.utils.restricted_mean_survival_time on times of 1000 − result."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from lifelines import KaplanMeierFitter
        from lifelines.utils import restricted_mean_survival_time

        detects, limits = sample(seed)
        times = [1000 - x for x in (*detects, *limits)]
        fitted = KaplanMeierFitter().fit(times, [1] * len(detects) + [0] * len(limits))
        curve = kaplan_meier(detects, limits)
        lowest = curve.lowest_limit if curve.left > 0 else min(detects)
        theirs = restricted_mean_survival_time(fitted, t=1000 - lowest)
    assert curve.mean(curve.lowest_limit) == pytest.approx(1000 - float(theirs), abs=1e-6)


@pytest.mark.parametrize("seed", range(4))
def test_the_lognormal_fit_is_that_of_lifelines(seed: int) -> None:
    """Source: lifelines.LogNormalFitter.fit_left_censoring, μ and σ of the logarithms."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from lifelines import LogNormalFitter

        detects, limits = sample(seed)
        seen = [1] * len(detects) + [0] * len(limits)
        fitted = LogNormalFitter().fit_left_censoring([*detects, *limits], seen)
    ours = profile_of_mean(detects, limits, "lognormal")
    assert ours.spread == pytest.approx(float(fitted.sigma_), rel=1e-3)
    mean = np.exp(float(fitted.mu_) + float(fitted.sigma_) ** 2 / 2)
    assert ours.mean == pytest.approx(float(mean), rel=1e-3)

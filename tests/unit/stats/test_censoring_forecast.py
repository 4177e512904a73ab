"""Non-detects to come: fits, shares, moments and chances against scipy and simulation."""

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import integrate, stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored_fit import MODELS, fit_censored
from fieldplan.stats.censoring_forecast import (
    bounds_width,
    chance_of_bounds_only,
    chance_of_few,
    detects_wanted,
    information_kept,
    n_against_bounds_only,
    share_below,
    share_not_ruled_out,
    substituted,
)


def population(model: str, mean: float, cv: float) -> object:
    """The same population by scipy."""
    if model == "gamma":
        return stats.gamma(1 / cv**2, scale=mean * cv**2)
    if model == "normal":
        return stats.norm(mean, mean * cv)
    sigma = math.sqrt(math.log1p(cv**2))
    return stats.lognorm(sigma, scale=mean * math.exp(-(sigma**2) / 2))


@pytest.mark.parametrize("model", MODELS)
@pytest.mark.parametrize(("limit", "cv"), [(2.0, 0.5), (5.0, 0.8), (12.0, 1.4)])
def test_shares_and_moments_are_those_of_scipy(model: str, limit: float, cv: float) -> None:
    """Cumulative distribution and numerical integration as second source."""
    peer = population(model, 10.0, cv)
    share = peer.cdf(limit)
    assert share_below(model, limit, mean=10.0, cv=cv) == pytest.approx(share, rel=1e-8)
    above = [
        integrate.quad(lambda x, k=k: x**k * peer.pdf(x), limit, np.inf, limit=200)[0]
        for k in (1, 2)
    ]
    for value in (0.0, limit / 2, limit):
        found = substituted(model, limit, mean=10.0, cv=cv, value=value)
        mean = value * share + above[0]
        square = value**2 * share + above[1]
        assert found.mean == pytest.approx(mean, rel=1e-5)
        assert found.sd == pytest.approx(math.sqrt(square - mean**2), rel=1e-4)


@pytest.mark.parametrize("model", MODELS)
def test_a_fit_without_non_detects_is_the_textbook_one(model: str) -> None:
    """Closed forms for normal and lognormal; scipy's own maximum likelihood for the gamma."""
    values = [3.1, 4.7, 6.0, 8.8, 12.5, 21.0, 5.2]
    found = fit_censored(values, [], model)
    if model == "gamma":
        k, _, scale = stats.gamma.fit(values, floc=0)
        mean, cv = k * scale, k**-0.5
    elif model == "normal":
        mean, cv = np.mean(values), np.std(values) / np.mean(values)
    else:
        logs = np.log(values)
        mean, cv = math.exp(logs.mean() + logs.var() / 2), math.sqrt(math.expm1(logs.var()))
    assert (found.mean, found.cv) == pytest.approx((mean, cv), rel=1e-4)
    likelihood = population(model, found.mean, found.cv).logpdf(values).sum()
    assert found.log_likelihood == pytest.approx(likelihood, abs=1e-6)


@pytest.mark.parametrize("model", MODELS)
def test_a_censored_fit_is_the_highest_that_scipy_finds(model: str) -> None:
    """Brute force: a grid round the fit, with scipy's censored likelihood, has nothing better."""
    detects, limits = [6.0, 7.5, 9.0, 12.0, 20.0, 31.0], [5.0, 5.0, 8.0]
    found = fit_censored(detects, limits, model)

    def likelihood(mean: float, cv: float) -> float:
        peer = population(model, mean, cv)
        return float(peer.logpdf(detects).sum() + peer.logcdf(limits).sum())

    assert likelihood(found.mean, found.cv) == pytest.approx(found.log_likelihood, abs=1e-6)
    grid = np.linspace(0.8, 1.25, 11)
    best = max(likelihood(found.mean * a, found.cv * b) for a in grid for b in grid)
    assert best <= found.log_likelihood + 1e-9
    # The profile at the limit has fallen by z²/2 (one-sided 90 %), over a fine grid of means.
    means = found.mean * np.exp(np.linspace(-3, 3, 601))
    profile = max(likelihood(mean, found.cv_high) for mean in means)
    assert found.log_likelihood - profile == pytest.approx(stats.norm.ppf(0.9) ** 2 / 2, abs=0.01)


def test_the_upper_limit_of_the_cv_is_near_the_exact_one_of_a_lognormal() -> None:
    """Without non-detects χ² of the logs is exact; the profile comes near it from below."""
    values = np.random.default_rng(2).lognormal(2.0, 0.7, 20)
    found = fit_censored(list(values), [], "lognormal")
    sigma = math.sqrt(19 * np.log(values).var(ddof=1) / stats.chi2.ppf(0.10, 19))
    assert found.cv_high == pytest.approx(math.sqrt(math.expm1(sigma**2)), rel=0.12)


def test_information_is_the_curvature_of_the_likelihood() -> None:
    """Oracle: second differences of the expected log likelihood, integrated with scipy."""
    for share, cv in ((0.1, 0.5), (0.4, 1.0), (0.8, 1.5)):
        sigma = math.sqrt(math.log1p(cv**2))
        limit = stats.norm.ppf(share)

        def expected(m: float, s: float, limit: float = limit, share: float = share) -> float:
            inside = integrate.quad(
                lambda z: stats.norm.pdf(z) * stats.norm.logpdf(z, m, s), limit, 12
            )[0]
            return share * stats.norm.logcdf((limit - m) / s) + inside

        h = 1e-3
        mm = -(expected(h, 1) - 2 * expected(0, 1) + expected(-h, 1)) / h**2
        ss = -(expected(0, 1 + h) - 2 * expected(0, 1) + expected(0, 1 - h)) / h**2
        corners = (
            expected(h, 1 + h) - expected(h, 1 - h) - expected(-h, 1 + h) + expected(-h, 1 - h)
        )
        information = np.array([[mm, -corners / 4 / h**2], [-corners / 4 / h**2, ss]])
        gradient = np.array([1.0, sigma])
        variance = gradient @ np.linalg.inv(information) @ gradient
        kept = (1 + sigma**2 / 2) / variance
        assert information_kept(share, cv) == pytest.approx(kept, rel=2e-3)


def test_wider_bounds_come_with_more_non_detects() -> None:
    """Arithmetic written out once, then an invariant."""
    low = substituted("gamma", 5.0, mean=10.0, cv=0.8, value=0.0)
    high = substituted("gamma", 5.0, mean=10.0, cv=0.8, value=5.0)
    reach = stats.t.ppf(0.975, 29)
    ends = (
        low.mean - reach * low.sd / math.sqrt(30),
        high.mean + reach * high.sd / math.sqrt(30),
    )
    expected = (ends[1] - ends[0]) / (2 * reach * 8.0 / math.sqrt(30))
    found = bounds_width("gamma", 5.0, mean=10.0, cv=0.8, n=30, reach=reach)
    assert found == pytest.approx(expected)
    widths = [
        bounds_width("lognormal", limit, mean=10.0, cv=0.8, n=30, reach=2.0)
        for limit in (0.01, 2.0, 5.0, 9.0)
    ]
    assert widths[0] == pytest.approx(1.0, abs=1e-3)
    assert widths == sorted(widths)


@given(st.integers(3, 200), st.floats(0.0, 1.0), st.integers(1, 5))
def test_few_detects_come_as_the_binomial_says(n: int, share: float, least: int) -> None:
    """Second source: scipy's binomial."""
    expected = stats.binom.cdf(least - 1, n, 1 - share)
    assert chance_of_few(n, share, least=least) == pytest.approx(expected, abs=1e-9)


def test_few_detects_equal_an_independent_study() -> None:
    """Samples with fewer than 3 detects: n = 10: 1.5 % at 40 %, 18 % at 60 %, 68 % at 80 %.

    A simulation study made before this code; the binomial gives 1.2, 16.7 and 67.8 %.
    """
    for n, share, percent in ((10, 0.4, 1.5), (10, 0.6, 18), (10, 0.8, 68), (20, 0.8, 22)):
        assert 100 * chance_of_few(n, share) == pytest.approx(percent, abs=2)


@pytest.mark.parametrize(("below", "results"), [(0, 8), (4, 12), (11, 12), (5, 5), (30, 90)])
def test_shares_not_ruled_out_are_the_exact_binomial_ones(below: int, results: int) -> None:
    """Clopper & Pearson 1934 as quantiles of the beta distribution, by scipy."""
    low, high = share_not_ruled_out(below, results)
    exact_low = stats.beta.ppf(0.05, below, results - below + 1) if below else 0.0
    exact_high = stats.beta.ppf(0.95, below + 1, results - below) if below < results else 1.0
    assert (low, high) == pytest.approx((exact_low, exact_high), abs=1e-9)


@pytest.mark.parametrize("share", [0.1, 0.4, 0.6, 0.7])
def test_the_n_against_bounds_is_the_first_from_which_all_do(share: float) -> None:
    """Brute force with scipy's binomial, counting n downward from 400."""

    def chance(n: int) -> float:
        detects = max(3, math.ceil(0.2 * n - 1e-9))
        return float(stats.binom.cdf(detects - 1, n, 1 - share))

    worst = max((n for n in range(3, 400) if chance(n) > 0.05), default=2)
    assert n_against_bounds_only(share) == worst + 1
    assert chance_of_bounds_only(worst + 1, share) == pytest.approx(chance(worst + 1))


def test_a_share_of_eighty_percent_or_more_never_gets_there() -> None:
    """More results do not help where the limit lies above most of the site."""
    assert n_against_bounds_only(0.85) is None
    assert detects_wanted(30) == 6


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: fit_censored([1.0, 2.0], [0.5], "gamma"), "2 different detects"),
        (lambda: fit_censored([0.0, 1.0, 2.0], [], "lognormal"), "no values such as 0"),
        (lambda: fit_censored([1.0, 2.0, 3.0], [0.0], "normal"), "no values such as 0"),
        (lambda: share_below("gamma", 0.0, mean=1.0, cv=1.0), "must be above 0"),
        (lambda: information_kept(1.0, 1.0), "from 0 to below 1"),
        (lambda: chance_of_few(0, 0.5), "give 1 or more"),
        (lambda: share_not_ruled_out(5, 4), "5 non-detects of 4"),
    ],
)
def test_what_has_no_answer_is_refused(call: Callable[[], object], words: str) -> None:
    """One clear line with the value in it."""
    with pytest.raises(DesignError, match=words):
        call()

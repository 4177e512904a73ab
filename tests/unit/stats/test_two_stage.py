"""Two stages: exact by closed form, held to simulation."""

import math

import numpy as np
import pytest
from scipy import integrate, stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.two_stage import (
    chance_after_interim,
    resize_outlook,
    resized_total,
    stein_outlook,
    stein_total,
)


@pytest.mark.parametrize(("deviation", "width", "first"), [(10, 2, 20), (3, 4, 6), (58, 20, 12)])
def test_steins_total_is_the_larger_of_the_first_stage_and_his_quotient(deviation, width, first):
    """Source: Stein 1945 (formula from memory), with scipy's quantile."""
    quotient = (stats.t.ppf(0.975, first - 1) * deviation / width) ** 2
    found = stein_total(deviation, width, first=first, confidence=0.95)
    assert found == max(first, math.ceil(quotient))


def test_steins_interval_holds_as_often_as_stated():
    """Source: simulation; the theorem says exactly 95 % for normal results."""
    rng = np.random.default_rng(41)
    campaigns, first, width, held = 6000, 8, 1.0, 0
    for _ in range(campaigns):
        one = rng.normal(0, 2, first)
        total = stein_total(one.std(ddof=1), width, first=first, confidence=0.95)
        mean = (one.sum() + rng.normal(0, 2, total - first).sum()) / total
        held += abs(mean) <= width
    four_errors = 4 * math.sqrt(0.95 * 0.05 / campaigns)
    # N is rounded up, so the share may lie above 95 %, never below
    assert 0.95 - four_errors <= held / campaigns <= 0.97


@pytest.mark.parametrize(("sigma", "width", "first"), [(10, 2, 20), (10, 2, 5), (1, 5, 9)])
def test_the_average_of_steins_total_is_the_integral_over_the_interim_spread(sigma, width, first):
    """Source: scipy.integrate over the χ² of s₁², rounding left aside (at most one result)."""
    known = first - 1
    scale = (stats.t.ppf(0.975, known) * sigma / width) ** 2 / known

    def total(q):
        return max(first, scale * q) * stats.chi2.pdf(q, known)

    smooth = integrate.quad(total, 0, first / scale)[0]
    smooth += integrate.quad(total, first / scale, np.inf)[0]
    found = stein_outlook(sigma, width, first=first, confidence=0.95).results
    assert smooth - 0.01 <= found <= smooth + 1


def test_the_chance_after_an_interim_is_what_simulated_campaigns_keep():
    """Source: simulation with σ drawn about s₁ as in the predictive F."""
    rng = np.random.default_rng(5)
    first, total, s1, width, campaigns = 15, 40, 2.0, 0.75, 40_000
    sigma2 = (first - 1) * s1**2 / rng.chisquare(first - 1, campaigns)
    squares = (first - 1) * s1**2 + sigma2 * rng.chisquare(total - first, campaigns)
    t = t_quantile(total - 1, confidence=0.95, kind="two-sided")
    kept = (t * np.sqrt(squares / (total - 1) / total) <= width).mean()
    chance = chance_after_interim(s1, width, total, first=first, confidence=0.95)
    assert chance == pytest.approx(kept, abs=4 * math.sqrt(kept * (1 - kept) / campaigns))


def test_one_resize_is_the_smallest_total_that_has_the_chance():
    """Source: counting upward."""
    found = resized_total(10.0, 2.0, first=60, assurance=0.8, confidence=0.95)
    chances = [
        chance_after_interim(10.0, 2.0, n, first=60, confidence=0.95) for n in range(60, found + 1)
    ]
    assert chances[-1] >= 0.8
    assert max(chances[:-1]) < 0.8


def test_the_outlook_of_a_resize_is_what_whole_campaigns_show():
    """Source: simulation of both stages with normal results."""
    rng = np.random.default_rng(11)
    sigma, width, first, campaigns = 10.0, 4.0, 15, 3000
    outlook = resize_outlook(sigma, width, first=first, assurance=0.8, confidence=0.95)
    totals, kept = [], 0
    for _ in range(campaigns):
        one = rng.normal(0, sigma, first)
        total = resized_total(one.std(ddof=1), width, first=first, assurance=0.8, confidence=0.95)
        everything = np.concatenate([one, rng.normal(0, sigma, total - first)])
        t = t_quantile(total - 1, confidence=0.95, kind="two-sided")
        kept += t * everything.std(ddof=1) / math.sqrt(total) <= width
        totals.append(total)
    share = kept / campaigns
    assert outlook.chance == pytest.approx(share, abs=4 * math.sqrt(0.8 * 0.2 / campaigns))
    error = np.std(totals, ddof=1) / math.sqrt(campaigns)
    assert outlook.results == pytest.approx(np.mean(totals), abs=4 * error)


@pytest.mark.parametrize(("width", "first"), [(0.0, 5), (-1.0, 5), (math.nan, 5), (1.0, 1)])
def test_a_stage_without_a_spread_or_a_width_that_is_none_is_refused(width, first):
    """Neither can be answered."""
    with pytest.raises(DesignError):
        stein_total(1.0, width, first=first, confidence=0.95)

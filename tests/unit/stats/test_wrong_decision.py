"""Wrong decisions: against another library, simulation and brute force."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.wrong_decision import (
    Belief,
    Wrong,
    belief_between,
    cheapest_number,
    wrong_decisions,
    wrong_without_results,
)


@settings(max_examples=60, deadline=None)
@given(st.floats(-3, 3), st.floats(0.05, 4), st.floats(0.02, 4), st.floats(-3, 3))
def test_with_sigma_known_it_is_a_bivariate_normal(
    mean: float, spread: float, error: float, multiplier: float
) -> None:
    """True mean and campaign mean are jointly normal: scipy.stats.multivariate_normal."""
    found = wrong_decisions(Belief(mean, spread), 0.0, standard_error=error, multiplier=multiplier)
    border = -multiplier * error
    square = spread**2
    both = stats.multivariate_normal(
        [mean, mean], [[square, square], [square, square + error**2]]
    ).cdf([0.0, border])
    below = stats.norm.cdf(0.0, mean, spread)
    left = stats.norm.cdf(border, mean, math.hypot(spread, error)) - both
    assert found.acted == pytest.approx(below - both, abs=1e-7)
    assert found.left == pytest.approx(left, abs=1e-7)


@pytest.mark.parametrize("known", [1, 2, 5, 11, 60, 1000])
@pytest.mark.parametrize("shift", [-2.5, -0.5, 0.4, 3.0])
@pytest.mark.parametrize("sign", [1, -1])
def test_with_a_stated_mean_it_is_the_noncentral_t(known: int, shift: float, sign: int) -> None:
    """Acting is T > −k with T noncentral: scipy.stats.nct."""
    multiplier = sign * stats.t.ppf(0.95, known)
    found = wrong_decisions(
        Belief(10 + 2 * shift), 10, standard_error=2, degrees_of_freedom=known,
        multiplier=multiplier,
    )  # fmt: skip
    acts = stats.nct.sf(-multiplier, known, shift)
    expected = Wrong(0.0, 1 - acts) if shift > 0 else Wrong(acts, 0.0)
    assert found == pytest.approx(expected, abs=2e-8)


def test_at_the_level_the_limit_keeps_its_confidence() -> None:
    """By its definition a 95 % upper limit leaves a site at the level in 5 of 100 campaigns."""
    for n in (3, 8, 30):
        multiplier = stats.t.ppf(0.95, n - 1)
        acted = wrong_decisions(
            Belief(150), 150, standard_error=10, degrees_of_freedom=n - 1, multiplier=multiplier
        ).acted
        assert acted == pytest.approx(0.95, abs=1e-9)


@pytest.mark.parametrize(("n", "sign"), [(4, 1), (10, 1), (10, -1), (25, 0)])
def test_chances_are_what_simulation_finds(n: int, sign: int) -> None:
    """Places with means from the belief, n normal results each; 4 standard errors of a share."""
    rng, repeats, belief, level = np.random.default_rng(5 + n), 60_000, Belief(135, 27), 150
    means = rng.normal(belief.mean, belief.spread, repeats)
    results = means[:, None] + 40 * rng.standard_normal((repeats, n))
    multiplier = sign * stats.t.ppf(0.95, n - 1)
    limit = results.mean(axis=1) + multiplier * results.std(axis=1, ddof=1) / math.sqrt(n)
    found = wrong_decisions(
        belief, level, standard_error=40 / math.sqrt(n), degrees_of_freedom=n - 1,
        multiplier=multiplier,
    )  # fmt: skip
    seen = ((limit > level) & (means <= level), (limit <= level) & (means > level))
    for share, chance in zip(seen, found, strict=True):
        tolerance = 4 * math.sqrt(chance * (1 - chance) / repeats)
        assert share.mean() == pytest.approx(chance, abs=tolerance)


def test_very_many_results_leave_no_wrong_decision() -> None:
    """The transition shrinks to a point, and quadrature must follow it there."""
    found = wrong_decisions(Belief(135, 27), 150, standard_error=1e-7)
    assert found.acted + found.left == pytest.approx(
        2 * stats.norm.pdf(150, 135, 27) * 1e-7 / math.sqrt(2 * math.pi), rel=1e-4
    )
    assert wrong_decisions(Belief(135, 27), 150, standard_error=0) == (0, 0)


def test_a_hopeless_campaign_decides_like_nobody() -> None:
    """An upper limit with an enormous error always acts: as acting without results does."""
    belief = Belief(135, 27)
    found = wrong_decisions(belief, 150, standard_error=1e6, multiplier=50)
    assert found == pytest.approx(wrong_without_results(belief, 150, act=True), abs=1e-9)
    found = wrong_decisions(belief, 150, standard_error=1e6, multiplier=-50)
    assert found == pytest.approx(wrong_without_results(belief, 150, act=False), abs=1e-9)


def test_belief_from_two_values() -> None:
    """A normal with 5 % on either side: scipy.stats.norm.interval."""
    found = belief_between(90, 180)
    assert stats.norm.interval(0.9, found.mean, found.spread) == pytest.approx((90, 180))


@settings(max_examples=60, deadline=None)
@given(st.floats(1, 300), st.floats(1e3, 1e6), st.floats(0, 200), st.integers(2, 5))
def test_the_cheapest_number_is_the_cheapest_of_all(
    each: float, wrong: float, day: float, least: int
) -> None:
    """Brute force; a crew-day makes steps, and the loss rises before it falls."""

    def cost(n: int) -> float:
        return 500 + each * n + day * math.ceil(n / 7)

    def loss(n: int) -> float:
        return wrong * math.sqrt(n) * math.exp(-n / 12)

    found = cheapest_number(cost, loss, least=least, most=400)
    best = min(range(least, 401), key=lambda n: (cost(n) + loss(n), n))
    assert found == best


def test_a_far_optimum_is_found_to_the_unit() -> None:
    """C n + B / n is least beside √(B / c), a number far beyond those tried one by one."""
    found = cheapest_number(lambda n: 3.0 * n, lambda n: 3e9 / n, least=2, most=10_000_000)
    assert abs(found - math.sqrt(1e9)) <= 1


def test_what_cannot_be_reckoned_with_is_refused() -> None:
    """Each message holds the offending value."""
    with pytest.raises(DesignError, match="give or take -1"):
        Belief(10, -1)
    with pytest.raises(DesignError, match="between 9 and 9"):
        belief_between(9, 9)
    with pytest.raises(DesignError, match="standard error is -2"):
        wrong_decisions(Belief(1), 1, standard_error=-2)
    with pytest.raises(DesignError, match="not 0"):
        wrong_decisions(Belief(1), 1, standard_error=2, degrees_of_freedom=0)

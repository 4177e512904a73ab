"""The largest of n results as a limit, for any population."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.tolerance import (
    allowed_by_counting,
    chance_of_exceedances,
    confidence_by_counting,
    n_and_allowed,
    n_by_counting,
    share_by_counting,
)
from tests.unit.stats.published import row


@pytest.mark.parametrize("row_id", [f"A04-0{k}" for k in range(26, 34)])
def test_printed_numbers_by_counting(row_id: str) -> None:
    """Source: Wilks 1941; Natrella 1963 (values.csv, from memory)."""
    inputs = row(row_id).inputs
    n = n_by_counting(inputs["p"], inputs["conf"], rank=inputs["drop"])
    assert n == row(row_id).exact


@pytest.mark.parametrize("rank", [1, 2, 3, 7])
@pytest.mark.parametrize("share", [0.5, 0.8, 0.95])
def test_number_by_counting_equals_a_walk_over_binomials(share: float, rank: int) -> None:
    """Brute force: P(X ≥ rank) summed with integer binomials, n upward from the rank."""

    def confidence(n: int) -> float:
        tail = range(rank, n + 1)
        return math.fsum(math.comb(n, k) * (1 - share) ** k * share ** (n - k) for k in tail)

    n = rank
    while confidence(n) < 0.9:
        n += 1
    assert n_by_counting(share, 0.9, rank=rank) == n
    assert confidence_by_counting(n, share, rank=rank) == pytest.approx(confidence(n), abs=1e-12)


@settings(deadline=None)
@given(st.integers(1, 400), st.floats(0.01, 0.99), st.integers(1, 20))
def test_confidence_by_counting_equals_scipy(n: int, share: float, rank: int) -> None:
    """Source: scipy.stats.binom."""
    rank = min(rank, n)
    expected = stats.binom.sf(rank - 1, n, 1 - share)
    assert confidence_by_counting(n, share, rank=rank) == pytest.approx(expected, abs=1e-9)


@settings(deadline=None)
@given(st.integers(1, 300), st.floats(0.01, 0.99), st.integers(1, 10))
def test_share_by_counting_gives_its_confidence_back(n: int, confidence: float, rank: int) -> None:
    """Source: the beta quantile of scipy, and the confidence counted at that share."""
    rank = min(rank, n)
    share = share_by_counting(n, confidence, rank=rank)
    assert share == pytest.approx(stats.beta.ppf(1 - confidence, n - rank + 1, rank), abs=1e-9)
    if 0 < share < 1:
        assert confidence_by_counting(n, share, rank=rank) >= confidence - 1e-9


def test_allowed_exceedances_step_up_where_the_numbers_by_counting_stand() -> None:
    """Definition: from the n of rank k + 1 up to one below the n of rank k + 2, k are allowed."""
    steps = [n_by_counting(0.9, 0.95, rank=rank) for rank in range(1, 6)]
    for n in range(1, steps[-1]):
        allowed = sum(n >= step for step in steps) - 1
        assert allowed_by_counting(n, 0.9, 0.95) == (None if allowed < 0 else allowed)
    assert allowed_by_counting(3, 0.2, 0.5) == stats.binom.ppf(0.5, 3, 0.8) - 1
    assert allowed_by_counting(0, 0.9, 0.95) is None


def test_no_exceedance_among_59_is_a_coin_toss_where_one_in_a_hundred_exceeds() -> None:
    """Closed form: 0.99⁵⁹ = 0.5527."""
    assert chance_of_exceedances(59, 0.01) == pytest.approx(0.99**59, abs=1e-12)
    assert chance_of_exceedances(5, 1.0, allowed=5) == 1.0
    assert chance_of_exceedances(5, 0.0) == 1.0
    assert chance_of_exceedances(5, 1.0, allowed=4) == 0.0


@pytest.mark.parametrize(
    ("share", "share_above", "power"),
    [(0.95, 0.01, 0.8), (0.95, 0.0, 0.9), (0.9, 0.03, 0.9), (0.8, 0.1, 0.7), (0.9, 0.05, 0.5)],
)
def test_allowed_exceedances_are_the_fewest_that_let_the_claim_out(
    share: float, share_above: float, power: float
) -> None:
    """Brute force with scipy.stats.binom: every number allowed, n upward."""
    allowed = 0
    while True:
        n = allowed + 1
        while stats.binom.cdf(allowed, n, 1 - share) > 0.05:
            n += 1
        if stats.binom.cdf(allowed, n, share_above) >= power:
            break
        allowed += 1
    assert n_and_allowed(share, 0.95, share_above=share_above, power=power) == (n, allowed)


@pytest.mark.parametrize("share_above", [0.05, 0.2, -0.01])
def test_a_site_that_does_not_have_the_share_cannot_earn_the_claim(share_above: float) -> None:
    """With 5 % above, 'at least 95 % below' comes out rarely however many results there are."""
    with pytest.raises(DesignError, match=r"cannot be told|more than 10000000"):
        n_and_allowed(0.95, 0.95, share_above=share_above, power=0.8)


def test_shares_and_ranks_out_of_bounds_are_refused() -> None:
    """One line with the value and the rule."""
    with pytest.raises(DesignError, match="share is 95; it must lie between 0 and 1"):
        n_by_counting(95, 0.95)
    with pytest.raises(DesignError, match="confidence is 1"):
        n_by_counting(0.95, 1.0)
    with pytest.raises(DesignError, match="result 0 from the top"):
        n_by_counting(0.95, 0.95, rank=0)
    with pytest.raises(DesignError, match="of 5 results none is number 6"):
        confidence_by_counting(5, 0.9, rank=6)
    with pytest.raises(DesignError, match=r"share above is 1\.5"):
        chance_of_exceedances(5, 1.5)
    with pytest.raises(DesignError, match="more than 10000000 results; claim less"):
        n_by_counting(1 - 1e-9, 0.95)

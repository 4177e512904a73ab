"""What n units of a list can find, or leave hidden."""

import itertools
import math
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.lots import (
    chance_of_at_most,
    chance_of_finding,
    chance_unseen,
    most_hidden,
    n_and_allowed_of_list,
    n_to_find,
    unrounded_to_find,
)
from fieldplan.stats.tolerance import n_by_counting
from tests.unit.stats.published import row


@pytest.mark.parametrize("row_id", ["A04-034", "A04-035"])
def test_printed_numbers_to_find_one(row_id: str) -> None:
    """Source: Cannon & Roe 1982, table 1 (values.csv, from memory); and their closed form."""
    inputs = row(row_id).inputs
    n = n_to_find(inputs["D"], inputs["conf"], units=inputs["N"])
    assert n == row(row_id).exact
    first = unrounded_to_find(inputs["D"], inputs["conf"], units=inputs["N"])
    assert math.ceil(first) == row(row_id).exact


def test_chances_of_a_small_list_by_looking_at_every_draw() -> None:
    """Brute force: all draws of n of 7 units, 3 of which exceed."""
    for n in range(8):
        draws = list(itertools.combinations(range(7), n))
        for found in range(4):
            kept = sum(sum(unit < 3 for unit in draw) <= found for draw in draws)
            chance = chance_of_at_most(found, n=n, exceeding=3, units=7)
            assert chance == pytest.approx(kept / len(draws), abs=1e-12)


@settings(deadline=None)
@given(st.integers(1, 5000), st.floats(0, 1), st.floats(0, 1), st.integers(0, 30))
def test_chances_equal_scipy(units: int, drawn: float, share: float, found: int) -> None:
    """Source: scipy.stats.hypergeom."""
    n, exceeding = round(drawn * units), round(share * units)
    expected = stats.hypergeom.cdf(found, units, exceeding, n)
    chance = chance_of_at_most(found, n=n, exceeding=exceeding, units=units)
    assert chance == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("confidence", [Fraction(1, 2), Fraction(9, 10), Fraction(95, 100)])
def test_number_to_find_equals_a_walk_in_exact_fractions(confidence: Fraction) -> None:
    """Brute force with whole-number binomials, so that equal chances count as reached."""
    for units in (1, 2, 5, 10, 12, 40):
        for exceeding, allowed in itertools.product(range(1, units + 1), (0, 1, 3)):
            if allowed >= exceeding:
                continue
            n = allowed + 1
            while 1 - _hidden(allowed, n, exceeding, units) < confidence:
                n += 1
            found = n_to_find(exceeding, float(confidence), units=units, allowed=allowed)
            assert found == n, (units, exceeding, allowed)


def _hidden(allowed: int, n: int, exceeding: int, units: int) -> Fraction:
    ways = sum(
        math.comb(exceeding, k) * math.comb(units - exceeding, n - k)
        for k in range(allowed + 1)
        if k <= n
    )
    return Fraction(ways, math.comb(units, n))


def test_hidden_units_and_number_to_find_are_each_others_inverse() -> None:
    """If n find 5 and n − 1 do not, then after n at most 4 can be hidden, and after n − 1 five."""
    for exceeding in (1, 5, 20):
        n = n_to_find(exceeding, 0.95, units=100)
        assert most_hidden(n, 0.95, units=100) == exceeding - 1
        assert most_hidden(n - 1, 0.95, units=100) >= exceeding


def test_hidden_units_equal_a_walk() -> None:
    """Brute force with scipy: the largest number not refuted at 90 %."""
    for n, found in ((3, 0), (10, 0), (10, 2), (25, 1), (30, 30)):
        kept = [
            k
            for k in range(found, 31)
            if k <= 30 - (n - found) and stats.hypergeom.cdf(found, 30, k, n) > 0.1
        ]
        assert most_hidden(n, 0.9, units=30, found=found) == max(kept)


@pytest.mark.parametrize("counts", [(3, 2), (4, 1), (0, 6), (2, 2, 1)])
def test_worst_spread_over_strata_is_the_worst_of_all(counts: tuple[int, ...]) -> None:
    """Brute force: every way to spread the exceeding units over the strata."""
    populations = (9, 6, 4)[: len(counts)]
    for exceeding in range(sum(populations) + 1):
        worst = Fraction(0)
        for spread in itertools.product(*(range(size + 1) for size in populations)):
            if sum(spread) == exceeding:
                strata = zip(counts, spread, populations, strict=True)
                unseen = math.prod(
                    (_hidden(0, n, k, size) for n, k, size in strata), start=Fraction(1)
                )
                worst = max(worst, unseen)
        assert chance_unseen(counts, populations, exceeding) == pytest.approx(float(worst))


@pytest.mark.parametrize(
    ("units", "exceeding", "expected", "power"),
    [(200, 20, 4, 0.8), (60, 6, 1, 0.9), (30, 5, 4, 0.6)],
)
def test_fewest_units_that_permit_a_claim_and_let_it_out(
    units: int, exceeding: int, expected: int, power: float
) -> None:
    """Brute force with scipy.stats.hypergeom: every n, with all the exceedances it permits."""
    for n in range(1, units + 1):
        allowed = -1
        while stats.hypergeom.cdf(allowed + 1, units, exceeding, n) <= 0.05:
            allowed += 1
        if allowed >= 0 and stats.hypergeom.cdf(allowed, units, expected, n) >= power:
            break
    found = n_and_allowed_of_list(exceeding, 0.95, units=units, expected=expected, power=power)
    assert found == (n, allowed)


def test_nothing_drawn_hides_everything_and_all_drawn_hides_nothing() -> None:
    """Edges by reason alone."""
    assert most_hidden(0, 0.95, units=8) == 8
    assert most_hidden(8, 0.95, units=8) == 0
    assert n_to_find(8, 0.95, units=8) == 1
    assert chance_of_finding(0, 3, units=8) == 0.0
    assert chance_of_finding(6, 3, units=8) == 1.0


def test_a_long_list_comes_down_to_counting_without_one() -> None:
    """Limit: 5 % of very many units ask for the 59 of an endless population, never for more."""
    assert n_to_find(500_000, 0.95, units=10_000_000) == n_by_counting(0.95, 0.95) == 59
    assert n_to_find(100, 0.95, units=2000) <= 59


def test_bounds_that_do_not_fit_are_refused() -> None:
    """One line with the value and the rule."""
    with pytest.raises(DesignError, match="120 units exceeding of a list of 100"):
        n_to_find(120, 0.95, units=100)
    with pytest.raises(DesignError, match="5 allowed of 5 exceeding"):
        n_to_find(5, 0.95, units=100, allowed=5)
    with pytest.raises(DesignError, match="a list of 0 units"):
        most_hidden(0, 0.95, units=0)
    with pytest.raises(DesignError, match="4 exceeding units among 3 drawn"):
        most_hidden(3, 0.95, units=9, found=4)
    with pytest.raises(DesignError, match="cannot be told from one with 5"):
        n_and_allowed_of_list(5, 0.95, units=40, expected=5, power=0.8)
    with pytest.raises(DesignError, match="confidence is 95"):
        unrounded_to_find(5, 95, units=100)

"""Sign and rank sum: the published tables, exact binomials and simulations."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import whole
from fieldplan.stats.rank_tests import (
    rank_sum_formula_n,
    rank_sum_planned_n,
    rank_sum_power,
    rank_sum_share,
    sign_formula_n,
    sign_planned_n,
    sign_share,
    sign_test_count,
    sign_test_n,
    sign_test_power,
    sign_test_ratio,
)
from tests.unit.stats.published import row

SIGN_TABLE = [f"A03-0{n}" for n in (45, 46, 47, 48, 50, 51, 52, 53, 54, 55)]
RANK_SUM_TABLE = [f"A03-0{n}" for n in (58, 60, 62, 63, 64)]


@pytest.mark.parametrize("row_id", [f"A03-0{n}" for n in (36, 37, 38, 39)])
def test_share_of_the_sign_test_table(row_id: str) -> None:
    """Source: NUREG-1575 rev. 1, table 5.4."""
    share = sign_share(row(row_id).inputs["delta_over_sigma"], 1.0)
    assert share == pytest.approx(row(row_id).exact, rel=1e-12)


@pytest.mark.parametrize("row_id", [f"A03-0{n}" for n in (40, 41, 43, 44)])
def test_share_of_the_rank_sum_table(row_id: str) -> None:
    """Source: NUREG-1575 rev. 1, table 5.1; the print takes 0.707 for 1/√2, good to 4 digits."""
    inputs = row(row_id).inputs
    share = rank_sum_share(inputs["delta_over_sigma"], 1.0)
    assert share == pytest.approx(row(row_id).exact, rel=1e-12)
    printed = stats.norm.cdf(inputs["root"] * inputs["delta_over_sigma"])
    assert share == pytest.approx(printed, abs=5e-5)


@pytest.mark.parametrize("row_id", SIGN_TABLE)
def test_planned_number_of_the_sign_test_table(row_id: str) -> None:
    """Source: NUREG-1575 rev. 1, table 5.5: rounded up, 20 % added, rounded up again."""
    inputs = row(row_id).inputs
    share = sign_share(inputs["delta_over_sigma"], 1.0)
    n = sign_planned_n(share, alpha=inputs["alpha"], beta=inputs["beta"])
    assert n == row(row_id).exact


@pytest.mark.parametrize("row_id", RANK_SUM_TABLE)
def test_planned_number_of_the_rank_sum_table(row_id: str) -> None:
    """Source: NUREG-1575 rev. 1, table 5.3: rounded up once, after 20 % is added."""
    inputs = row(row_id).inputs
    share = rank_sum_share(inputs["delta_over_sigma"], 1.0)
    n = rank_sum_planned_n(share, alpha=inputs["alpha"], beta=inputs["beta"])
    assert n == row(row_id).exact


def test_the_two_tables_round_by_two_rules() -> None:
    """Source: table 5.5 prints 29 at Δ/σ 1, α β 0.05; rounding once would print 28."""
    share = sign_share(1.0, 1.0)
    asked = {"alpha": 0.05, "beta": 0.05}
    assert sign_planned_n(share, **asked) == 29
    assert whole(1.2 * sign_formula_n(share, **asked)) == 28


@settings(deadline=None)
@given(st.integers(1, 400), st.floats(0.001, 0.4), st.floats(0.5, 0.999))
def test_sign_test_equals_scipys_binomial(n: int, alpha: float, share: float) -> None:
    """Source: scipy.stats.binom: smallest count with a tail within alpha, then its power."""
    count = sign_test_count(n, alpha=alpha)
    assert stats.binom.sf(count - 1, n, 0.5) <= alpha * (1 + 1e-9)
    assert count == 0 or stats.binom.sf(count - 2, n, 0.5) > alpha * (1 - 1e-9)
    expected = stats.binom.sf(count - 1, n, share)
    assert sign_test_power(share, n, alpha=alpha) == pytest.approx(expected, abs=1e-9)


@settings(deadline=None, max_examples=20)
@given(st.floats(0.58, 0.99), st.floats(0.01, 0.3), st.floats(0.02, 0.5))
def test_sign_test_number_holds_from_there_on(share: float, alpha: float, beta: float) -> None:
    """Brute force by scipy: no larger n falls below the power, the n just below does."""
    n = sign_test_n(share, alpha=alpha, beta=beta)
    for tried in [n - 1, *range(n, n + 90)]:
        if tried < 1:
            continue
        counts = np.arange(tried + 2)
        count = int(counts[stats.binom.sf(counts - 1, tried, 0.5) <= alpha][0])
        power = stats.binom.sf(count - 1, tried, share)
        if abs(power - (1 - beta)) > 1e-9:
            assert (power > 1 - beta) == (tried >= n)


def test_sign_test_formula_lies_near_the_exact_number() -> None:
    """Invariant: the formula is the normal curve of the same binomial."""
    for ratio in (0.3, 0.5, 1.0):
        share = sign_share(ratio, 1.0)
        formula = sign_formula_n(share, alpha=0.05, beta=0.1)
        assert abs(sign_test_n(share, alpha=0.05, beta=0.1) - formula) < 0.12 * formula + 3


@pytest.mark.parametrize("groups", [(20, 20), (20, 35), (40, 40)])
@pytest.mark.parametrize("ratio", [0.5, 1.0])
def test_rank_sum_power_is_near_a_simulation(groups: tuple[int, int], ratio: float) -> None:
    """Source: scipy.stats.rankdata on 5,000 draws; stated to be within 0.01 from 20 in each."""
    generator = np.random.default_rng(44)
    first = generator.normal(ratio, 1.0, (5_000, groups[0]))
    second = generator.normal(0.0, 1.0, (5_000, groups[1]))
    ranks = stats.rankdata(np.hstack([first, second]), axis=1)[:, : groups[0]].sum(axis=1)
    pairs = ranks - groups[0] * (groups[0] + 1) / 2
    spread = math.sqrt(math.prod(groups) * (sum(groups) + 1) / 12)
    count = math.ceil(math.prod(groups) / 2 + stats.norm.isf(0.05) * spread + 0.5)
    power = rank_sum_power(ratio, 1.0, first=groups[0], second=groups[1], alpha=0.05)
    bar = 4 * math.sqrt(power * (1 - power) / len(pairs))
    assert abs(float(np.mean(pairs >= count)) - power) < 0.01 + bar


def test_a_coin_decides_nothing() -> None:
    """Where half of the results lie on each side no number tells, and few results never claim."""
    with pytest.raises(DesignError, match=r"above 0\.5"):
        sign_formula_n(0.5, alpha=0.05, beta=0.2)
    with pytest.raises(DesignError, match=r"above 0\.5"):
        rank_sum_formula_n(0.4, alpha=0.05, beta=0.2)
    assert sign_test_power(0.9, 3, alpha=0.05) == 0.0


@pytest.mark.parametrize("n", [5, 21, 200])
@pytest.mark.parametrize("chance", [0.02, 0.3, 0.8, 0.99])
def test_distance_undoes_the_power_of_the_sign_test(n: int, chance: float) -> None:
    """Inverse and forward must agree."""
    ratio = sign_test_ratio(chance, n=n, alpha=0.05)
    assert ratio is not None
    share = float(stats.norm.cdf(ratio))
    assert sign_test_power(share, n, alpha=0.05) == pytest.approx(chance, abs=1e-9)
    assert sign_test_ratio(chance, n=4, alpha=0.05) is None


def test_very_large_numbers_of_the_sign_test_follow_the_foot_of_the_saw() -> None:
    """Above 5000 results the curve takes over: within 1 in 1000, by scipy's binomial around n."""
    for ratio, alpha, beta in ((0.05, 0.05, 0.1), (0.04, 0.01, 0.05)):
        share = sign_share(ratio, 1.0)
        n = sign_test_n(share, alpha=alpha, beta=beta)
        around = np.arange(round(0.999 * n) - 40, round(1.001 * n) + 40)
        counts = stats.binom.isf(alpha, around, 0.5) + 1
        power = stats.binom.sf(counts - 1, around, share)
        assert (power[around > 1.001 * n] >= 1 - beta - 1e-12).all()
        assert (power[around < 0.999 * n] < 1 - beta).any()
    assert sign_test_power(0.51, 30_000, alpha=0.05) == pytest.approx(
        float(stats.binom.sf(stats.binom.isf(0.05, 30_000, 0.5), 30_000, 0.51)), abs=2e-3
    )

"""The stratified mean against a printed example and every sample of a tiny population."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import t_interval
from fieldplan.stats.stratified import (
    pooled_variance,
    predicted_variance,
    sampled_shares,
    satterthwaite,
    stratified_mean,
)
from tests.unit.stats.published import row


def test_variance_equals_the_printed_one() -> None:
    """Source: Berthouex & Brown 2002 (values.csv A06-016): 1.91125 without fpc."""
    inputs = row("A06-016").inputs
    _, error, _ = stratified_mean(
        [0, 0, 0], inputs["s2"], inputs["n"], inputs["w"], [None, None, None]
    )
    assert error**2 == pytest.approx(row("A06-016").exact, rel=1e-12)


def test_half_width_equals_the_printed_one_with_the_normal_quantile() -> None:
    """Source: the same (A06-017), which takes 1.96 for the normal quantile 1.95996."""
    inputs = row("A06-017").inputs
    variance = predicted_variance(inputs["w"], np.sqrt(inputs["s2"]), inputs["n"])
    low, high = t_interval(0.0, math.sqrt(variance), math.inf, confidence=0.95, kind="two-sided")
    assert high == pytest.approx(row("A06-017").exact, rel=2e-5)
    assert low == pytest.approx(-row("A06-017").exact, rel=2e-5)


@pytest.mark.parametrize(
    ("row_id", "sizes", "counts"),
    [("A06-005", [64], [24]), ("A06-006", [16, 48], [6, 18])],
    ids=["simple random", "proportional"],
)
def test_variance_of_an_expanded_total_equals_the_printed_one(
    row_id: str, sizes: list[int], counts: list[int]
) -> None:
    """Source: Cochran 1977, sec. 5.3 example (values.csv): V(total) = N² V(mean)."""
    inputs = row(row_id).inputs
    variances = np.atleast_1d(inputs["S2"])
    whole = sum(sizes)
    variance = predicted_variance(
        [size / whole for size in sizes], np.sqrt(variances), counts, sizes
    )
    assert variance * whole**2 == pytest.approx(row(row_id).exact, rel=1e-10)


def test_mean_and_variance_are_right_over_every_sample() -> None:
    """Brute force over all samples: E[mean] is the population's, E[SE²] its true variance."""
    strata = ([3.0, 5.0, 11.0, 2.0], [20.0, 26.0, 41.0])
    whole = sum(map(len, strata))
    weights = [len(values) / whole for values in strata]
    means, squares = [], []
    for first in itertools.combinations(strata[0], 3):
        for second in itertools.combinations(strata[1], 2):
            drawn = [np.array(first), np.array(second)]
            mean, error, _ = stratified_mean(
                [d.mean() for d in drawn], [d.var(ddof=1) for d in drawn], [3, 2], weights, [4, 3]
            )
            means.append(mean)
            squares.append(error**2)
    everything = np.concatenate(strata)
    assert np.mean(means) == pytest.approx(everything.mean())
    assert np.mean(squares) == pytest.approx(np.var(means))


def test_single_results_borrow_the_pooled_variance() -> None:
    """By hand: s² pooled of 4 (df 4) and 10 (df 2) is 6; it stands in for the single result."""
    mean, error, known = stratified_mean(
        [1.0, 2.0, 3.0], [4.0, 10.0, math.nan], [5, 3, 1], [0.5, 0.3, 0.2], [None] * 3
    )
    assert mean == pytest.approx(1.7)
    parts = 0.25 * 4 / 5 + 0.09 * 10 / 3 + 0.04 * 6 / 1
    assert error == pytest.approx(math.sqrt(parts))
    # The same sum written by its independent variances: 6 = (4·4 + 2·10)/6.
    first, second = 4 * (0.05 + 0.04 * 4 / 6), 10 * (0.03 + 0.04 * 2 / 6)
    assert known == pytest.approx((first + second) ** 2 / (first**2 / 4 + second**2 / 2))


def test_unit_of_a_list_of_one_needs_no_variance() -> None:
    """Its stratum is known without error."""
    _, error, known = stratified_mean([1.0, 9.0], [4.0, math.nan], [5, 1], [0.8, 0.2], [None, 1])
    assert error == pytest.approx(0.8 * math.sqrt(4 / 5))
    assert known == pytest.approx(4)


def test_census_has_no_error_and_no_end_of_degrees_of_freedom() -> None:
    """Every unit was measured."""
    mean, error, known = stratified_mean([2.0, 4.0], [1.0, 3.0], [6, 2], [0.75, 0.25], [6, 2])
    assert (mean, error, known) == (2.5, 0.0, math.inf)


@settings(deadline=None)
@given(st.lists(st.tuples(st.floats(0.01, 100), st.integers(1, 60)), min_size=1, max_size=6))
def test_satterthwaite_lies_between_the_smallest_and_the_sum(
    terms: list[tuple[float, int]],
) -> None:
    """Satterthwaite 1946: never below the smallest df, never above their sum."""
    parts, known = zip(*terms, strict=True)
    found = satterthwaite(parts, known)
    assert min(known) * (1 - 1e-9) <= found <= sum(known) * (1 + 1e-9)


@settings(deadline=None)
@given(st.floats(0.1, 50), st.integers(2, 30), st.floats(-100, 100))
def test_one_stratum_is_the_plain_mean(variance: float, n: int, mean: float) -> None:
    """With one stratum the formula is s²/n on n − 1 degrees of freedom."""
    found = stratified_mean([mean], [variance], [n], [1.0], [None])
    assert found == pytest.approx((mean, math.sqrt(variance / n), n - 1))


def test_bad_counts_are_refused() -> None:
    """No result, only single results, or more than the list holds."""
    with pytest.raises(DesignError, match="stratum 2 of 2 has no result"):
        stratified_mean([1, 2], [1, 1], [3, 0], [0.5, 0.5], [None, None])
    with pytest.raises(DesignError, match="no stratum has 2 results"):
        stratified_mean([1, 2], [1, 1], [1, 1], [0.5, 0.5], [None, None])
    with pytest.raises(DesignError, match="no stratum has 2 results"):
        pooled_variance([1.0], [1])
    with pytest.raises(DesignError, match="9 results cannot come from a list of 8"):
        sampled_shares([3, 9], [None, 8])

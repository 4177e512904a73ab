"""The gain of strata, against populations counted out and the handbook's cities."""

import math
import statistics

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.strata_gain import WholeVariance, gain_of_strata, whole_variance
from tests.unit.stats.published import row

CITIES = row("A06-003").inputs["x"], row("A06-004").inputs["x"]


def cities() -> WholeVariance:
    """The handbook's 64 cities in two strata."""
    return whole_variance(
        [0.25, 0.75],
        [statistics.mean(x) for x in CITIES],
        [statistics.stdev(x) for x in CITIES],
        populations=[16, 48],
    )


def test_parts_sum_to_the_printed_variance_of_all_cities() -> None:
    """Source: Cochran 1977, ch. 5 (values.csv A06-002): S² = 52448 over 64 cities."""
    assert cities().total == pytest.approx(row("A06-002").exact, rel=1e-12)


def test_gain_of_the_cities_is_the_ratio_of_the_printed_variances() -> None:
    """Source: Cochran 1977, ch. 5 (A06-005, A06-006): 5594453 over 1882293 for n = 24.

    The printed ones start from S² rounded to whole numbers, 5581 for 5580.92: 1.4e-5 of it.
    """
    sigmas = [math.sqrt(row(i).exact) for i in ("A06-003", "A06-004")]
    found = gain_of_strata(cities(), [0.25, 0.75], sigmas, [6, 18], populations=[16, 48])
    assert found == pytest.approx(row("A06-005").exact / row("A06-006").exact, rel=3e-5)


def test_parts_sum_to_the_variance_of_a_whole_list() -> None:
    """Brute force: 4 + 6 units, S² computed over all ten at once."""
    parts = [1.0, 4.0, 4.0, 7.0], [2.0, 3.0, 9.0, 9.0, 4.0, 1.0]
    found = whole_variance(
        [0.4, 0.6],
        [statistics.mean(x) for x in parts],
        [statistics.stdev(x) for x in parts],
        populations=[4, 6],
    )
    assert found.total == pytest.approx(statistics.variance([*parts[0], *parts[1]]), rel=1e-12)


def test_means_from_pilots_do_not_overstate_what_lies_between() -> None:
    """Simulation: with equal strata the raw spread of means is all luck; less it, the mean is 0.

    4000 pilots, seed fixed; tolerance 4 standard errors of the simulated mean.
    """
    rng = np.random.default_rng(20261201)
    weights, sigmas, behind = [0.5, 0.3, 0.2], [4.0, 6.0, 9.0], [8, 5, 4]
    raw = []
    for _ in range(4000):
        means = [
            float(rng.normal(50, s / math.sqrt(n))) for s, n in zip(sigmas, behind, strict=True)
        ]
        raw.append(whole_variance(weights, means, sigmas).between)
    luck = whole_variance(weights, [50.0] * 3, sigmas, results=behind).chance_between
    assert abs(np.mean(raw) - luck) <= 4 * np.std(raw) / math.sqrt(len(raw))


def test_what_lies_between_is_never_below_zero() -> None:
    """Means closer together than luck alone would set them."""
    found = whole_variance([0.5, 0.5], [10.0, 10.1], [5.0, 5.0], results=[3, 3])
    assert found.between == 0.0
    assert found.chance_between == pytest.approx(2 * 0.25 * 25 / 3)


def test_proportional_shares_of_alike_strata_gain_exactly_one() -> None:
    """Closed form: no difference between strata and equal spread leave nothing to gain."""
    whole = whole_variance([0.5, 0.5], [10.0, 10.0], [3.0, 3.0])
    assert gain_of_strata(whole, [0.5, 0.5], [3.0, 3.0], [7, 7]) == pytest.approx(1.0)
    assert gain_of_strata(whole, [0.5, 0.5], [3.0, 3.0], [2, 12]) < 1


def test_a_list_taken_whole_gains_without_end() -> None:
    """Its mean has no error at all."""
    whole = whole_variance([0.5, 0.5], [1.0, 2.0], [1.0, 1.0], populations=[4, 4])
    sigmas = [1.0, 1.0]
    assert gain_of_strata(whole, [0.5, 0.5], sigmas, [4, 4], populations=[4, 4]) == math.inf


def test_a_stratum_without_results_is_refused() -> None:
    """There is no mean of nothing."""
    with pytest.raises(DesignError, match="0 results"):
        gain_of_strata(WholeVariance(1.0, 1.0), [0.5, 0.5], [1.0, 1.0], [0, 3])

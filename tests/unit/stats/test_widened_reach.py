"""How far the interval for skewed results will reach, against drawing and computing it outright."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.mean_shape import Shape
from fieldplan.stats.skew_interval import skew_interval
from fieldplan.stats.widened_reach import RANKED, Promise, widened_misses, widened_reach

RULE = Promise("cv-up-to-2", 0.95, "two-sided")


@pytest.mark.parametrize("kind", ["two-sided", "upper-limit", "lower-limit"])
def test_the_reach_is_that_of_intervals_computed_one_by_one(kind: str) -> None:
    """Oracle: gamma samples of numpy, each given to ``skew_interval``; four standard errors."""
    n, cv, campaigns = 12, 0.7, 3000  # not a node, so that the interpolation is tried too
    rule = Promise("cv-up-to-2", 0.95, kind)  # type: ignore[arg-type]
    rng = np.random.default_rng(5)
    reaches = []
    for values in rng.gamma(1 / cv**2, cv**2, (campaigns, n)):
        low, high = skew_interval(values, population_class="cv-up-to-2", kind=rule.kind)
        mean = float(values.mean())
        if kind == "two-sided":
            assert low is not None
            assert high is not None
            reaches.append((high - low) / 2)
        else:
            reaches.append((high or 0.0) - mean if kind == "upper-limit" else mean - (low or 0.0))
    found = widened_reach(Shape("gamma", cv), n, rule).mean * cv / math.sqrt(n)
    error = float(np.std(reaches) * math.sqrt(1 / campaigns + 1 / 10_000))
    # low ends are cut at 0 in the one and not in the other, which matters for two ends only
    assert found == pytest.approx(
        np.mean(reaches), abs=4 * error + (0.02 if low is not None else 0)
    )


def test_the_reach_falls_with_n_and_ends_near_the_normal_one() -> None:
    """Reach in standard errors falls towards z as the widening wears off."""
    reaches = [
        widened_reach(Shape("gamma", 0.5), n, RULE).mean for n in (10, 11, 20, 50, 2000, 5000)
    ]
    assert reaches == sorted(reaches, reverse=True)
    assert 1.96 < reaches[-1] < 2.1


def test_fewer_than_three_results_have_no_end() -> None:
    """No skewness, no interval."""
    found = widened_reach(Shape("gamma", 0.5), 2, RULE)
    assert math.isinf(found.mean)
    assert len(found.ranked) == RANKED


def test_ranked_reaches_average_to_the_mean() -> None:
    """Forty equally likely reaches stand for all; the tail costs them a little."""
    found = widened_reach(Shape("lognormal", 0.8), 25, RULE)
    assert list(found.ranked) == sorted(found.ranked)
    assert sum(found.ranked) / RANKED == pytest.approx(found.mean, rel=0.02)


def test_misses_are_those_of_intervals_computed_one_by_one() -> None:
    """Oracle: lognormal samples of numpy, each given to ``skew_interval``; four standard errors."""
    n, cv, campaigns = 15, 1.0, 4000
    rng, sigma = np.random.default_rng(6), math.sqrt(math.log(2))
    missed = 0
    for values in rng.lognormal(-(sigma**2) / 2, sigma, (campaigns, n)):
        low, high = skew_interval(values, population_class="cv-up-to-2")
        missed += not (low or 0.0) <= 1.0 <= (high or 0.0)
    above, below = widened_misses(Shape("lognormal", cv), n, RULE)
    share = above + below
    error = math.sqrt(share * (1 - share) * (1 / campaigns + 1 / 10_000))
    assert missed / campaigns == pytest.approx(share, abs=4 * error)


def test_a_limit_misses_on_its_own_side_only() -> None:
    """An open end cannot miss."""
    shape = Shape("gamma", 1.0)
    assert widened_misses(shape, 10, Promise("cv-up-to-2", 0.95, "upper-limit"))[1] == 0
    assert widened_misses(shape, 10, Promise("cv-up-to-2", 0.95, "lower-limit"))[0] == 0


def test_a_tail_to_the_low_side_is_refused() -> None:
    """Mirrored shapes go below 0, where a coefficient of variation says nothing."""
    with pytest.raises(DesignError, match="tail upwards"):
        widened_reach(Shape("gamma", 0.5, mirrored=True), 10, RULE)

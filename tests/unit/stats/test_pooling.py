"""Group testing: pool size and cost."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.pooling import PAYS_BELOW, best_pool, expected_tests, largest_pool
from tests.unit.stats.published import area

PUBLISHED = [r for r in area("A07") if "what" in r.inputs]


@pytest.mark.parametrize("entry", PUBLISHED, ids=lambda r: r.id)
def test_pools_have_their_published_size_and_cost(entry: object) -> None:
    """Source: Dorfman 1943, Annals of Mathematical Statistics 14:436, table I (values.csv)."""
    inputs = entry.inputs  # type: ignore[attr-defined]
    size = best_pool(inputs["p"])
    found = size if inputs["what"] == "size" else 100 * expected_tests(inputs["p"], size)
    assert found == pytest.approx(entry.exact, rel=1e-12)  # type: ignore[attr-defined]


def test_the_best_pool_is_best_of_all_sizes_and_where_theory_puts_it() -> None:
    """Brute force to 5000; Samuels 1978, Technometrics 20:497: 1 or 2 above ⌊1/√p⌋."""
    for share in (1e-4, 0.001, 0.0123, 0.03, 0.07, 0.11, 0.2, 0.29):
        size = best_pool(share)
        assert size == min(range(1, 5001), key=lambda m: expected_tests(share, m))
        assert size - math.floor(1 / math.sqrt(share)) in {1, 2}


def test_expected_tests_equal_those_of_simulated_pools() -> None:
    """Simulation, seed fixed, within 4 standard errors of a share over pools of 6."""
    rng, pools, share, size = np.random.default_rng(5), 40_000, 0.07, 6
    positive = (rng.random((pools, size)) < share).any(axis=1)
    seen = 1 / size + positive.mean()
    chance = 1 - (1 - share) ** size
    error = math.sqrt(chance * (1 - chance) / pools)
    assert seen == pytest.approx(expected_tests(share, size), abs=4 * error)


def test_above_three_in_ten_no_pool_saves_a_test() -> None:
    """A pool of 3 breaks even at p = 1 − 3^(−1/3) = 0.307."""
    assert expected_tests(PAYS_BELOW, 3) == pytest.approx(1.0)
    assert best_pool(PAYS_BELOW + 1e-6) == 1
    assert best_pool(PAYS_BELOW - 1e-6) == 3


def test_dilution_caps_the_pool() -> None:
    """By hand: one unit at 10 in 8 gives 1.25, in 9 it gives 1.11, below a limit of 1.2."""
    assert largest_pool(10.0, 1.2) == 8
    assert largest_pool(0.3, 0.1) == 3
    assert best_pool(0.001, largest=largest_pool(10.0, 1.2)) == 8


def test_bad_numbers_are_refused_with_their_value() -> None:
    """Each line names the thing, its value and the rule."""
    with pytest.raises(DesignError, match="share of positives is 0"):
        best_pool(0.0)
    with pytest.raises(DesignError, match="pool size is 0"):
        expected_tests(0.1, 0)
    with pytest.raises(DesignError, match="at most 0 units"):
        best_pool(0.1, largest=0)
    with pytest.raises(DesignError, match="reporting limit of 5 is above"):
        largest_pool(4.0, 5.0)
    with pytest.raises(DesignError, match="above 0"):
        largest_pool(-4.0, 5.0)

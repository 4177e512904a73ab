"""Variance between random starts: worked by hand, by enumeration, and in simulated rivers."""

import math
from itertools import product

import numpy as np
import pytest
from scipy import stats

from fieldplan.stats.random_starts import freedom_of_parts, variance_between_starts


def test_equal_starts_give_the_spread_of_their_means_over_k():
    """s² of 4, 6, 8 is 4; over three starts 4/3."""
    assert variance_between_starts([4.0, 6.0, 8.0], [5, 5, 5]) == pytest.approx(4 / 3)


@pytest.mark.parametrize("starts", [2, 3])
def test_mean_of_the_estimate_is_the_variance_for_any_line(starts):
    """All k-fold choices of starts on a line of 15 slots with 3 places a start."""
    line = np.array([2, 8, 1, 5, 13, 0, 7, 3, 21, 4, 4, 9, 1, 30, 6], dtype=float)
    means = [line[start::5].mean() for start in range(5)]
    answers = [np.mean(chosen) for chosen in product(means, repeat=starts)]
    estimates = [
        variance_between_starts(chosen, [3] * starts) for chosen in product(means, repeat=starts)
    ]
    assert np.mean(answers) == pytest.approx(line.mean())
    assert np.mean(estimates) == pytest.approx(np.var(answers))


def test_unequal_starts_are_unbiased_where_variance_goes_as_one_over_m():
    """Independent results are such a case: E = σ²/n, by simulation to four standard errors."""
    generator = np.random.default_rng(7)
    counts = [3, 3, 2, 2]
    draws = np.array(
        [
            variance_between_starts([generator.normal(0, 2, m).mean() for m in counts], counts)
            for _ in range(4000)
        ]
    )
    tolerance = 4 * draws.std(ddof=1) / math.sqrt(len(draws))
    assert draws.mean() == pytest.approx(4 / 10, abs=tolerance)


def rivers(generator, count):
    """Lines of 400 slots whose neighbours are alike with a correlation of 0.97."""
    lines = np.empty((count, 400))
    lines[:, 0] = generator.normal(size=count)
    for slot in range(1, 400):
        fresh = generator.normal(size=count) * math.sqrt(1 - 0.97**2)
        lines[:, slot] = 0.97 * lines[:, slot - 1] + fresh
    return lines


def test_intervals_between_starts_hold_and_random_formula_is_too_wide_on_smooth_rivers():
    """Five starts of four places on 4,000 rivers: the 95 % interval holds in 95 %.

    Tolerance: four standard errors of a share, √(0.95·0.05/4000), and a point for the shape of
    means of four places.
    """
    generator = np.random.default_rng(11)
    lines = rivers(generator, 4000)
    truth = lines.mean(axis=1)
    first = generator.integers(0, 100, size=(4000, 5))
    at = (first[:, :, None] + 100 * np.arange(4)).reshape(4000, 20)
    values = np.take_along_axis(lines, at, axis=1)
    means = values.reshape(4000, 5, 4).mean(axis=2)
    variance = np.array([variance_between_starts(row, [4] * 5) for row in means])
    reach = stats.t.ppf(0.975, 4) * np.sqrt(variance)
    held = np.mean(np.abs(values.mean(axis=1) - truth) <= reach)
    assert held == pytest.approx(0.95, abs=0.01 + 4 * math.sqrt(0.95 * 0.05 / 4000))
    by_random = stats.t.ppf(0.975, 19) * values.std(axis=1, ddof=1) / math.sqrt(20)
    assert np.mean(np.abs(values.mean(axis=1) - truth) <= by_random) > 0.97


@pytest.mark.parametrize(
    ("means", "counts", "words"),
    [
        ([1.0], [4], "1 starts were given"),
        ([1.0, 2.0], [4], "needs 2"),
        ([1.0, 2.0], [4, 0], "a start has 0 results"),
    ],
)
def test_what_yields_no_variance_is_refused(means, counts, words):
    """One start has nothing to differ from."""
    with pytest.raises(ValueError, match=words):
        variance_between_starts(means, counts)


def test_degrees_of_freedom_of_equal_parts_add_up():
    """Satterthwaite: two equal parts of 3 degrees of freedom have 6; one part alone its own."""
    assert freedom_of_parts([2.0, 2.0], [3, 3]) == pytest.approx(6.0)
    assert freedom_of_parts([5.0, 0.0], [4, 2]) == pytest.approx(4.0)

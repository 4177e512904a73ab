"""The interval for skewed results: its limits, and ten cells of the evidence table."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.skew_interval import hall_factor, skew_factors, skew_interval
from tests.evidence.interval_coverage import cell, gamma, log_uniform, lognormal, with_zeros


@pytest.mark.parametrize("skewness", [-0.8, -0.2, 0.1, 0.5, 1.2])
@pytest.mark.parametrize("t", [-2.5, -1.0, 1.7, 2.3])
def test_halls_factor_undoes_his_cubic(t, skewness):
    """Source: Hall 1992: g(k) = k + γ k²/3 + γ² k³/27 + γ/6 maps a limit's factor back to t."""
    # the limits solve for mean - W = k, so that the cubic is in −k
    k = -float(hall_factor(t, skewness))
    back = k + skewness * k**2 / 3 + skewness**2 * k**3 / 27 + skewness / 6
    assert back == pytest.approx(-t, abs=1e-9)


def test_without_skewness_the_lower_limit_is_students():
    """Symmetric results leave nothing to correct on the short side."""
    below, _ = skew_factors(12, 0.0, 0.3, population_class="cv-up-to-1")
    assert float(below) == pytest.approx(-t_quantile(11, confidence=0.95, kind="two-sided"))


@pytest.mark.parametrize("name", ["cv-up-to-1", "cv-up-to-2"])
def test_the_limits_move_with_unit_and_scale(name):
    """A change of unit must change nothing else."""
    values = np.array([1.0, 2, 2, 3, 4, 5, 9, 22, 3, 1])
    low, high = skew_interval(values, population_class=name)
    low_other, high_other = skew_interval(values * 1000, population_class=name)
    assert (low_other, high_other) == pytest.approx((low * 1000, high * 1000), rel=1e-12)


def test_an_open_end_is_none():
    """A limit leaves the other end open."""
    values = np.array([1.0, 2, 2, 3, 4, 5, 9, 22])
    assert skew_interval(values, population_class="cv-up-to-2", kind="upper-limit")[0] is None
    assert skew_interval(values, population_class="cv-up-to-2", kind="lower-limit")[1] is None


@pytest.mark.parametrize(
    "values", [[1.0, 2.0], [-1.0, 2.0, 3.0], [0.0, 0.0, 0.0]], ids=["few", "negative", "zero"]
)
def test_results_it_is_not_made_for_are_refused(values):
    """The class is of results from 0 up, with a spread and a skewness to see."""
    with pytest.raises(DesignError):
        skew_interval(np.array(values), population_class="cv-up-to-2")


CELLS = [
    (gamma(0.6), 8, "cv-up-to-1", "two-sided", 0.94),
    (lognormal(0.95), 10, "cv-up-to-1", "two-sided", 0.94),
    (log_uniform(1.6), 20, "cv-up-to-1", "two-sided", 0.94),
    (gamma(0.95), 8, "cv-up-to-1", "upper-limit", 0.935),
    (lognormal(0.7), 20, "cv-up-to-1", "upper-limit", 0.935),
    (gamma(1.7), 10, "cv-up-to-2", "two-sided", 0.94),
    (lognormal(1.8), 20, "cv-up-to-2", "two-sided", 0.94),
    (with_zeros(gamma(1.0), 0.4), 15, "cv-up-to-2", "two-sided", 0.94),
    (gamma(1.3), 10, "cv-up-to-2", "upper-limit", 0.93),
    (log_uniform(2.5), 30, "cv-up-to-2", "upper-limit", 0.93),
]


@pytest.mark.parametrize(
    ("population", "n", "name", "kind", "bar"), CELLS, ids=[f"{c[0].name} {c[1]}" for c in CELLS]
)
def test_ten_cells_of_the_evidence_keep_their_bar(population, n, name, kind, bar):
    """Source: simulation; bars of the class, less four standard errors."""
    repetitions = 6000
    held, _ = cell(population, n, name, kind, repetitions=repetitions, seed=1)
    assert held >= bar - 4 * math.sqrt(bar * (1 - bar) / repetitions)

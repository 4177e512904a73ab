"""Mean, spread and lean against certified and printed values."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.summary import (
    sample_mean,
    sample_sd,
    sample_skewness,
    sample_variance,
    skewness_ceiling,
)
from tests.unit.stats.published import row

NUMBERS = st.lists(st.floats(-1e4, 1e4), min_size=3, max_size=40)


@pytest.mark.parametrize("row_id", ["A01-039", "A06-001", "A08-001", "A13-031", "A13-034"])
def test_means_equal_the_printed_ones(row_id: str) -> None:
    """Source: EPA SW-846; Cochran 1977 (a total); OSWER 9285.6-10; MASS chem and abbey."""
    values = row(row_id).inputs["x"]
    found = sample_mean(values) * (len(values) if row_id == "A06-001" else 1)
    assert found == pytest.approx(row(row_id).exact, rel=1e-12)


@pytest.mark.parametrize("row_id", ["A06-002", "A06-003", "A06-004"])
def test_variances_equal_the_printed_ones(row_id: str) -> None:
    """Source: Cochran 1977, 64 cities and their two strata."""
    assert sample_variance(row(row_id).inputs["x"]) == pytest.approx(row(row_id).exact, rel=1e-12)


def test_standard_deviation_equals_the_printed_one() -> None:
    """Source: EPA OSWER 9285.6-10 (values.csv A08-002)."""
    found = sample_sd(row("A08-002").inputs["x"])
    assert found == pytest.approx(row("A08-002").exact, rel=1e-12)


@pytest.mark.parametrize(
    ("start", "step", "pairs", "sd"),
    [(1.2, 0.1, 500, 0.1), (1_000_000.2, 0.1, 500, 0.1), (10_000_000.2, 0.1, 500, 0.1)],
    ids=["NumAcc2", "NumAcc3", "NumAcc4"],
)
def test_certified_data_that_break_one_pass_formulas(
    start: float, step: float, pairs: int, sd: float
) -> None:
    """Source: NIST StRD NumAcc2-4, made from their definition: start, then start ∓ step in turn."""
    values = [start] + [start + s for _ in range(pairs) for s in (-step, step)]
    assert sample_mean(values) == pytest.approx(start, rel=1e-15)
    assert sample_sd(values) == pytest.approx(sd, rel=2e-8)


@settings(deadline=None)
@given(NUMBERS)
def test_spread_and_lean_equal_numpy_and_scipy(values: list[float]) -> None:
    """Source: numpy.var with ddof 1, scipy.stats.skew (biased, which is g1)."""
    assert sample_variance(values) == pytest.approx(np.var(values, ddof=1), rel=1e-7, abs=1e-12)
    if np.std(values) > 1e-6 * (1 + abs(np.mean(values))):
        assert sample_skewness(values) == pytest.approx(stats.skew(values), rel=1e-5, abs=1e-7)


@settings(deadline=None)
@given(NUMBERS)
def test_skewness_never_exceeds_its_ceiling(values: list[float]) -> None:
    """Wilkins 1944: |g1| ≤ (n − 2)/√(n − 1)."""
    assert abs(sample_skewness(values)) <= skewness_ceiling(len(values)) * (1 + 1e-6)


@pytest.mark.parametrize("n", [3, 8, 30])
def test_ceiling_is_reached_by_one_apart(n: int) -> None:
    """The extreme case of the proof: n − 1 equal values and one apart."""
    assert sample_skewness([0.0] * (n - 1) + [1.0]) == pytest.approx(skewness_ceiling(n))
    assert skewness_ceiling(8) == pytest.approx(6 / math.sqrt(7))


def test_equal_values_have_no_lean() -> None:
    """0/0 is no skewness; nothing leans."""
    assert sample_skewness([4.2] * 5) == 0.0


def test_too_few_results_are_refused() -> None:
    """A variance needs two."""
    with pytest.raises(DesignError, match="a variance needs 2 results or more, not 1"):
        sample_variance([3.0])
    with pytest.raises(DesignError, match="a mean needs 1 results or more, not 0"):
        sample_mean([])
    with pytest.raises(DesignError, match="a skewness needs 2 results or more, not 1"):
        skewness_ceiling(1)

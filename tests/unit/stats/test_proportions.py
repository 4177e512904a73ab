"""A share: numbers of results for a margin, and the intervals that come back."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.proportions import (
    exact_interval,
    expected_reach,
    listed_interval,
    n_for_expected_reach,
    n_for_margin,
    unrounded_for_listed_share,
    unrounded_for_margin,
    wilson_interval,
)
from tests.unit.stats.published import row

KREJCIE_AND_MORGAN = [f"A01-0{k}" for k in range(18, 25)]


def test_blood_groups_of_cochran() -> None:
    """Source: Cochran 1977, sec. 4.4, with z = 2 (values.csv A01-003, A01-004, from memory)."""
    confidence = math.erf(2 / math.sqrt(2))
    assert n_for_margin(0.5, 0.05, confidence=confidence) == row("A01-003").exact
    listed = row("A01-004")
    n = n_for_margin(0.5, 0.05, confidence=confidence, units=listed.inputs["N"])
    assert n == listed.exact


@pytest.mark.parametrize("row_id", KREJCIE_AND_MORGAN)
def test_list_of_units_gives_krejcie_and_morgan_before_rounding(row_id: str) -> None:
    """Source: Krejcie & Morgan 1970 (values.csv, from memory), χ²(1) = 3.841, to nearest."""
    confidence = float(stats.chi2.cdf(3.841, 1))
    endless = unrounded_for_margin(0.5, 0.05, confidence=confidence)
    n = unrounded_for_listed_share(endless, row(row_id).inputs["N"])
    assert n == pytest.approx(row(row_id).exact, rel=1e-9)


@settings(deadline=None)
@given(
    st.integers(1, 300),
    st.floats(0, 1),
    st.floats(0.5, 0.999),
    st.sampled_from(["two-sided", "upper-limit", "lower-limit"]),
)
def test_intervals_equal_scipy(n: int, share: float, confidence: float, kind: str) -> None:
    """Source: scipy.stats.binomtest, exact and Wilson."""
    count = round(share * n)
    side = {"two-sided": "two-sided", "upper-limit": "less", "lower-limit": "greater"}[kind]
    test = stats.binomtest(count, n, alternative=side)
    found = exact_interval(count, n, confidence=confidence, kind=kind)
    assert found == pytest.approx(tuple(test.proportion_ci(confidence, "exact")), abs=1e-9)
    found = wilson_interval(count, n, confidence=confidence, kind=kind)
    assert found == pytest.approx(tuple(test.proportion_ci(confidence, "wilson")), abs=1e-9)


def test_interval_for_a_list_holds_every_number_it_cannot_refute() -> None:
    """Brute force: scipy.stats.hypergeom for every possible number of units."""
    units, n, level = 40, 12, 0.05
    for count in range(n + 1):
        kept = [
            k
            for k in range(count, units - (n - count) + 1)
            if stats.hypergeom.cdf(count, units, k, n) > level
            and stats.hypergeom.sf(count - 1, units, k, n) > level
        ]
        found = listed_interval(count, n, units=units, confidence=0.90)
        assert found == (min(kept), max(kept))
    assert listed_interval(0, n, units=units, confidence=0.9, kind="lower-limit") == (0, 28)
    assert listed_interval(n, n, units=units, confidence=0.9, kind="upper-limit") == (12, 40)


def test_expected_width_is_the_mean_over_every_count() -> None:
    """Brute force over the binomial, and over the hypergeometric for a list."""
    n, share = 23, 0.2
    widths = [np.diff(exact_interval(k, n, confidence=0.95))[0] for k in range(n + 1)]
    expected = float(stats.binom.pmf(range(n + 1), n, share) @ np.array(widths)) / 2
    assert expected_reach(share, n, confidence=0.95) == pytest.approx(expected, rel=1e-10)
    units = 50
    pairs = [listed_interval(k, n, units=units, confidence=0.95) for k in range(n + 1)]
    widths = [(high - low) / units for low, high in pairs]
    expected = float(stats.hypergeom.pmf(range(n + 1), units, 10, n) @ np.array(widths)) / 2
    assert expected_reach(share, n, confidence=0.95, units=units) == pytest.approx(expected)


@pytest.mark.parametrize("kind", ["upper-limit", "lower-limit"])
def test_expected_distance_to_a_limit_is_the_mean_over_every_count(kind: str) -> None:
    """Brute force over the binomial."""
    n, share = 31, 0.3
    ends = [exact_interval(k, n, confidence=0.9, kind=kind) for k in range(n + 1)]
    reach = [high - share if kind == "upper-limit" else share - low for low, high in ends]
    expected = float(stats.binom.pmf(range(n + 1), n, share) @ np.array(reach))
    assert expected_reach(share, n, confidence=0.9, kind=kind) == pytest.approx(expected)


def test_skipping_counts_of_large_samples_changes_nothing() -> None:
    """The mean over every few of thousands of counts, against the mean over all of them."""
    n, share = 40_000, 0.3
    counts = np.arange(n + 1)
    low = stats.beta.ppf(0.025, counts[1:-1], n - counts[1:-1] + 1)
    high = stats.beta.ppf(0.975, counts[1:-1] + 1, n - counts[1:-1])
    expected = float(stats.binom.pmf(counts[1:-1], n, share) @ (high - low)) / 2
    assert expected_reach(share, n, confidence=0.95) == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize(
    ("share", "margin", "units"),
    [(0.2, 0.08, None), (0.05, 0.05, None), (0.5, 0.1, 60), (0.9, 0.1, 25), (0.02, 0.05, None)],
)
def test_number_for_an_exact_interval_is_the_first_that_keeps_it(
    share: float, margin: float, units: int | None
) -> None:
    """Brute force: n upward from 1."""
    n = 1
    while expected_reach(share, n, confidence=0.95, units=units) > margin:
        n += 1
    assert n_for_expected_reach(share, margin, confidence=0.95, units=units) == n


def test_exact_interval_holds_the_share_at_least_as_often_as_stated() -> None:
    """Closed form: coverage summed over the binomial at many shares."""
    n = 17
    ends = np.array([exact_interval(k, n, confidence=0.9) for k in range(n + 1)])
    for share in np.linspace(0.01, 0.99, 99):
        held = (ends[:, 0] <= share) & (share <= ends[:, 1])
        assert stats.binom.pmf(range(n + 1), n, share) @ held >= 0.9 - 1e-12


def test_a_whole_list_leaves_nothing_open() -> None:
    """All units looked at: the share is known."""
    assert expected_reach(0.3, 10, confidence=0.95, units=10) == 0.0
    assert n_for_expected_reach(0.3, 0.0001, confidence=0.95, units=10) == 10
    assert n_for_margin(0.5, 0.0001, confidence=0.95, units=10) == 10


def test_shares_and_counts_out_of_bounds_are_refused() -> None:
    """One line with the value and the rule."""
    with pytest.raises(DesignError, match="the expected share is 0"):
        n_for_margin(0, 0.05, confidence=0.95)
    with pytest.raises(DesignError, match="the margin is 5"):
        n_for_margin(0.5, 5, confidence=0.95)
    with pytest.raises(DesignError, match="7 of 5 results"):
        exact_interval(7, 5, confidence=0.95)
    with pytest.raises(DesignError, match="0 of 0 results"):
        wilson_interval(0, 0, confidence=0.95)
    with pytest.raises(DesignError, match="a list of 0 units"):
        unrounded_for_listed_share(40, 0)
    with pytest.raises(DesignError, match="more than 10000000"):
        n_for_expected_reach(0.5, 1e-5, confidence=0.95)

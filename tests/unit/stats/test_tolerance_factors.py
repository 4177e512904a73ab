"""Exact multiples of s that hold a share of a normal population."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import integrate, stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.precision import half_width
from fieldplan.stats.tolerance_factors import (
    chance_of_bound,
    chance_of_holding,
    howe_factor,
    n_for_bound,
    natrella_factor,
    two_sided_factor,
    upper_factor,
)
from tests.unit.stats.published import row

ONE_SIDED = ["A04-003", *(f"A04-0{k:02d}" for k in (5, 6, 8, 9, 10, 12, 13, 14))]
TWO_SIDED = [f"A04-0{k}" for k in (15, 16, 18, 19, 20, 22, 23)]


@pytest.mark.parametrize("row_id", ONE_SIDED)
def test_one_sided_factors_of_the_tables(row_id: str) -> None:
    """Source: NIST e-Handbook 7.2.6.3; Natrella 1963 table A-7; Owen 1963 (values.csv)."""
    inputs = row(row_id).inputs
    factor = upper_factor(inputs["n"], inputs["p"], confidence=inputs["conf"])
    assert factor == pytest.approx(row(row_id).exact, rel=1e-8)


@pytest.mark.parametrize("row_id", TWO_SIDED)
def test_two_sided_factors_of_the_tables(row_id: str) -> None:
    """Source: Berthouex & Brown 2002, table 21.1, after Hahn 1970 (values.csv)."""
    inputs = row(row_id).inputs
    factor = two_sided_factor(inputs["n"], inputs["p"], confidence=inputs["conf"])
    assert factor == pytest.approx(row(row_id).exact, rel=1e-8)


def test_closed_forms_of_the_handbook_print_their_own_digits() -> None:
    """Source: NIST e-Handbook 7.2.6.3: Howe 2.217, Natrella 1.8752; exact values differ."""
    two, one = row("A04-001"), row("A04-002")
    assert round(howe_factor(43, 0.9, confidence=0.99), 3) == 2.217
    assert two_sided_factor(43, 0.9, confidence=0.99) == pytest.approx(two.exact, rel=1e-8)
    assert round(natrella_factor(43, 0.9, confidence=0.99), 4) == 1.8752
    assert upper_factor(43, 0.9, confidence=0.99) == pytest.approx(one.exact, rel=1e-8)


def test_upper_bound_of_the_handbook_with_its_slip_put_right() -> None:
    """Source: NIST e-Handbook 7.2.6.3: 97.07 + 1.8752 · 0.0268 (printed there with 2.68)."""
    bound = 97.0698 + natrella_factor(43, 0.9, confidence=0.99) * 0.0268
    assert bound == pytest.approx(row("A04-004").exact, abs=5e-4)


@pytest.mark.parametrize("row_id", ["A04-024", "A04-025"])
def test_mean_column_beside_the_factors(row_id: str) -> None:
    """Source: Berthouex & Brown 2002, table 21.1: t/√n, exact values (n = 15 is misprinted)."""
    width = half_width(1.0, row(row_id).inputs["n"], confidence=0.95)
    assert width == pytest.approx(row(row_id).exact, rel=1e-9)


@pytest.mark.parametrize("n", [2, 3, 10, 200, 5000])
@pytest.mark.parametrize("share", [0.6, 0.95, 0.999])
@pytest.mark.parametrize("confidence", [0.5, 0.9, 0.99])
def test_one_sided_factor_equals_scipys_noncentral_t(
    n: int, share: float, confidence: float
) -> None:
    """Source: scipy.stats.nct."""
    shift = stats.norm.ppf(share) * math.sqrt(n)
    expected = stats.nct.ppf(confidence, n - 1, shift) / math.sqrt(n)
    assert upper_factor(n, share, confidence=confidence) == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize(("n", "factor", "share"), [(2, 18.8, 0.9), (6, 3.0, 0.9), (40, 2.4, 0.95)])
def test_two_sided_content_equals_adaptive_integration(n: int, factor: float, share: float) -> None:
    """Source: scipy.integrate and scipy.optimize on the definition, nothing shared."""
    from scipy.optimize import brentq

    def tail(error: float) -> float:
        m = error / math.sqrt(n)
        reach = brentq(lambda r: stats.norm.cdf(m + r) - stats.norm.cdf(m - r) - share, 0, 50)
        return float(stats.norm.pdf(error) * stats.chi2.sf((n - 1) * (reach / factor) ** 2, n - 1))

    expected = 2 * integrate.quad(tail, 0, 9, limit=200)[0]
    assert chance_of_holding(n, factor, share) == pytest.approx(expected, abs=1e-8)


def test_simulated_bounds_hold_their_share_as_often_as_stated() -> None:
    """Simulation of normal samples: share held below mean + k s, tolerance 4 standard errors."""
    generator = np.random.default_rng(5)
    n, share, confidence, times = 8, 0.9, 0.95, 20_000
    samples = generator.standard_normal((times, n))
    bounds = samples.mean(1) + upper_factor(n, share, confidence=confidence) * samples.std(
        1, ddof=1
    )
    kept = np.mean(bounds >= normal_quantile(share))
    assert abs(kept - confidence) <= 4 * math.sqrt(confidence * (1 - confidence) / times)


@settings(deadline=None, max_examples=40)
@given(st.integers(2, 300), st.floats(0.1, 6))
def test_chance_of_a_bound_below_the_level_equals_scipy(n: int, margin: float) -> None:
    """Source: scipy.stats.nct at the exact factor."""
    factor = upper_factor(n, 0.95, confidence=0.9)
    expected = stats.nct.sf(factor * math.sqrt(n), n - 1, margin * math.sqrt(n))
    found = chance_of_bound(n, margin, share=0.95, confidence=0.9)
    assert found == pytest.approx(expected, abs=1e-8)


@pytest.mark.parametrize(("margin", "power"), [(3.0, 0.8), (2.2, 0.9), (2.6, 0.5), (9.0, 0.95)])
def test_number_for_a_bound_equals_a_walk(margin: float, power: float) -> None:
    """Brute force: scipy.stats.nct, n upward from 2."""
    z, n = stats.norm.ppf(0.95), 2
    while True:
        root = math.sqrt(n)
        critical = stats.nct.ppf(0.95, n - 1, z * root)
        if stats.nct.sf(critical, n - 1, margin * root) >= power:
            break
        n += 1
    assert n_for_bound(margin, share=0.95, confidence=0.95, power=power) == n


def test_at_the_share_itself_the_bound_is_below_as_rarely_as_stated() -> None:
    """Definition: where just 95 % lie below the level the claim errs with chance 5 %."""
    chance = chance_of_bound(12, normal_quantile(0.95), share=0.95, confidence=0.95)
    assert chance == pytest.approx(0.05, abs=1e-9)


def test_what_no_bound_can_show_is_refused() -> None:
    """The expected population does not have the share, or there is no spread to speak of."""
    with pytest.raises(DesignError, match="no number of results can show it"):
        n_for_bound(1.6, share=0.95, confidence=0.95, power=0.8)
    with pytest.raises(DesignError, match="needs 2 results, not 1"):
        upper_factor(1, 0.95, confidence=0.95)
    with pytest.raises(DesignError, match=r"share is 0\.3; a normal bound needs at least 0.5"):
        two_sided_factor(9, 0.3, confidence=0.95)
    with pytest.raises(DesignError, match="closed form has no answer for 3 results"):
        natrella_factor(3, 0.9, confidence=0.99)
    with pytest.raises(DesignError, match="more than 10000000 results"):
        n_for_bound(1.6449, share=0.95, confidence=0.95, power=0.99)

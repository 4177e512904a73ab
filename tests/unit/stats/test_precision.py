"""Numbers of results for a standard error and for a half-width."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import special

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.precision import (
    half_width,
    n_for_half_width,
    n_for_standard_error,
    smallest,
    standard_error,
    unrounded_for_half_width,
    unrounded_for_list,
    unrounded_for_standard_error,
    whole,
)
from tests.unit.stats.published import row, rows

RELATIVE = [k for k in rows() if k in {f"A01-{n:03d}" for n in (5, 6, 7, 8, 9, 10, 13, 15)}]


def test_pilot_example_of_the_handbook_of_this_project() -> None:
    """(27.57 / 6)² = 21.11 by hand."""
    assert n_for_standard_error(27.57, 6.0) == 22


@pytest.mark.parametrize("row_id", RELATIVE)
def test_normal_formula_gives_the_printed_relative_margins(row_id: str) -> None:
    """Source: Gilbert 1987, table 4.2 (values.csv): (z CV / d)² rounded up."""
    inputs = row(row_id).inputs
    first = unrounded_for_half_width(inputs["sd"], inputs["d"], confidence=inputs["conf"])
    assert whole(first) == row(row_id).exact


@pytest.mark.parametrize("row_id", ["A01-001", "A01-003", "A01-031", "A01-037"])
def test_typed_quantile_is_a_standard_error_in_disguise(row_id: str) -> None:
    """Source: Cochran 4.4 and 4.6, Berthouex & Brown 23.2, Montgomery & Runger 8-2: SE = d / z."""
    inputs = row(row_id).inputs
    assert n_for_standard_error(inputs["sd"], inputs["d"] / inputs["zval"]) == row(row_id).exact


def test_list_correction_gives_the_printed_number() -> None:
    """Source: Cochran sec. 4.4, N = 3200; n0/(1+n0/N) gives the same integer as printed there."""
    inputs = row("A01-004").inputs
    n = n_for_standard_error(inputs["sd"], inputs["d"] / inputs["zval"], population=inputs["N"])
    assert n == row("A01-004").exact


@pytest.mark.parametrize("row_id", [f"A01-0{n}" for n in range(18, 25)])
def test_list_correction_gives_krejcie_and_morgan_unrounded(row_id: str) -> None:
    """Source: Krejcie & Morgan 1970: their n is n0/(1 + (n0 − 1)/N) with χ²(1) = 3.841."""
    size = row(row_id).inputs["N"]
    endless = 3.841 * 0.25 / 0.05**2
    # With N − 1 + n0 below, their formula is ours for a list of N − 1, times N / (N − 1).
    ours = unrounded_for_list(endless, size - 1) * size / (size - 1)
    assert ours == pytest.approx(row(row_id).exact, rel=2e-4)


def test_wells_of_a_short_list() -> None:
    """By hand: (3.1/0.9)² = 11.86, 11.86 / (1 + 11.86/14) = 6.42."""
    assert unrounded_for_list(unrounded_for_standard_error(3.1, 0.9), 14) == pytest.approx(
        6.42, abs=0.005
    )
    assert n_for_standard_error(3.1, 0.9, population=14) == 7


def test_t_iterated_to_its_end() -> None:
    """Source: values.csv A01-032, derived from Berthouex & Brown, example 23.2."""
    inputs = row("A01-032").inputs
    n = n_for_half_width(inputs["sd"], inputs["d"], confidence=inputs["conf"])
    assert n == row("A01-032").exact


def test_half_width_of_a_known_sample() -> None:
    """Source: values.csv A01-029 (the print took t(10) for t(9); exact is right)."""
    inputs = row("A01-029").inputs
    width = half_width(inputs["sd"], inputs["n"], confidence=inputs["conf"])
    assert width == pytest.approx(row("A01-029").exact, rel=1e-10)


@pytest.mark.parametrize("row_id", [f"A01-0{n}" for n in range(33, 37)])
def test_half_width_in_units_of_s(row_id: str) -> None:
    """Source: Berthouex & Brown, table 23.1, exact values."""
    width = half_width(1.0, row(row_id).inputs["n"], confidence=0.95)
    assert width == pytest.approx(row(row_id).exact, rel=1e-9)


def test_margin_of_the_barium_example() -> None:
    """Source: EPA SW-846 chapter nine: t² s² / Δ² with df 3 fixed is our width at n."""
    inputs = row("A01-038").inputs
    t = float(special.stdtrit(inputs["df"], 1 - inputs["alpha_two"] / 2))
    expected = t**2 * inputs["s2"] / inputs["delta"] ** 2
    assert expected == pytest.approx(row("A01-038").exact, rel=1e-10)
    assert half_width(math.sqrt(inputs["s2"]), 4, confidence=0.8) == pytest.approx(
        inputs["delta"] * math.sqrt(expected / 4), rel=1e-9
    )


@settings(deadline=None)
@given(
    st.floats(0.1, 100),
    st.floats(0.05, 2),
    st.sampled_from(["two-sided", "upper-limit", "lower-limit"]),
    st.floats(0.6, 0.99),
    st.none() | st.integers(2, 400),
)
def test_half_width_is_met_by_n_and_by_none_below(
    sigma: float, share: float, kind: str, confidence: float, population: int | None
) -> None:
    """Definition of the smallest n, with scipy's quantile as second source."""
    target = share * sigma
    n = n_for_half_width(sigma, target, confidence=confidence, kind=kind, population=population)
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence

    def width(count: int) -> float:
        left = 0.0 if population is None else count / population
        t = float(special.stdtrit(count - 1, level))
        return t * sigma * math.sqrt(max(1 - left, 0) / count)

    assert width(n) <= target * (1 + 1e-7)
    assert all(width(below) > target * (1 - 1e-7) for below in range(2, n))


@settings(deadline=None)
@given(st.floats(0.1, 100), st.floats(0.01, 3), st.none() | st.integers(1, 10_000))
def test_standard_error_is_met_by_n_and_not_by_one_less(
    sigma: float, share: float, population: int | None
) -> None:
    """Definition of the smallest n."""
    n = n_for_standard_error(sigma, share * sigma, population=population)
    assert standard_error(sigma, n, population=population) <= share * sigma * (1 + 1e-8)
    if n > 1:
        below = standard_error(sigma, n - 1, population=population)
        assert below > share * sigma * (1 - 1e-8)


@settings(deadline=None)
@given(st.integers(1, 3000), st.floats(0.001, 1000))
def test_exact_squares_are_not_rounded_up(root: int, target: float) -> None:
    """σ = root · SE asks for root² results; floating point must not add one."""
    assert n_for_standard_error(root * target, target) == root**2


def test_one_sided_needs_fewer_than_two_sided() -> None:
    """A limit puts all its error on one side."""
    two = n_for_half_width(10, 3, confidence=0.95)
    assert n_for_half_width(10, 3, confidence=0.95, kind="upper-limit") < two


def test_census_has_no_error() -> None:
    """All N units measured leave nothing to chance."""
    assert standard_error(5.0, 14, population=14) == 0
    assert half_width(5.0, 14, confidence=0.95, population=14) == 0
    assert n_for_half_width(5.0, 1e-9, confidence=0.95, population=1) == 1


def test_target_out_of_reach_is_said() -> None:
    """No campaign collects ten million results."""
    with pytest.raises(DesignError, match="more than 10000000"):
        n_for_standard_error(1e6, 1e-3)


@settings(deadline=None)
@given(st.integers(0, 5000), st.integers(1, 200))
def test_smallest_finds_the_step(step: int, low: int) -> None:
    """A single step from false to true is found, wherever it lies."""
    assert smallest(lambda n: n >= step, low, 10_000) == max(step, low)


def test_smallest_looks_back_over_ripples() -> None:
    """The search may land above an earlier number that fits; it looks back a few."""
    assert smallest(lambda n: n in {37, 39} or n > 40, 1, 1000, back=6) == 37


def test_first_pass_uses_the_normal_quantile() -> None:
    """By hand: (1.95996 · 58 / 20)² = 32.31 (Berthouex & Brown, example 23.2)."""
    z = normal_quantile(0.975)
    assert unrounded_for_half_width(58, 20, confidence=0.95) == pytest.approx((z * 2.9) ** 2)
    assert whole(unrounded_for_half_width(58, 20, confidence=0.95)) == row("A01-030").exact

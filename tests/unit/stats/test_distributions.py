"""Continued fractions against the general-purpose scientific library."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import special

from fieldplan.stats.distributions import (
    beta_share,
    chi_square_quantile,
    chi_square_share,
    f_share,
    normal_quantile,
    normal_share,
    student_quantile,
    t_share,
)

KNOWN = st.floats(1, 20_000)
LEVEL = st.floats(0.001, 0.999)


@settings(deadline=None)
@given(st.floats(0.5, 20_000), st.floats(0.5, 20_000), st.floats(0, 1))
def test_incomplete_beta_equals_scipy(a: float, b: float, x: float) -> None:
    """Source: scipy.special.betainc (Boost), written by others by another method."""
    assert beta_share(x, a, b) == pytest.approx(float(special.betainc(a, b, x)), abs=2e-10)


@settings(deadline=None)
@given(KNOWN, st.floats(0, 10))
def test_chi_square_share_equals_scipy(known: float, ratio: float) -> None:
    """Source: scipy.special.gammainc."""
    expected = float(special.gammainc(known / 2, ratio * known / 2))
    assert chi_square_share(ratio * known, known) == pytest.approx(expected, abs=2e-10)


@settings(deadline=None)
@given(KNOWN, LEVEL)
def test_chi_square_quantile_equals_scipy(known: float, level: float) -> None:
    """Source: scipy.special.chdtri takes the upper tail."""
    expected = float(special.chdtri(known, 1 - level))
    assert chi_square_quantile(level, known) == pytest.approx(expected, rel=1e-8)


@settings(deadline=None)
@given(KNOWN, LEVEL)
def test_student_quantile_equals_scipy(known: float, level: float) -> None:
    """Source: scipy.special.stdtrit."""
    expected = float(special.stdtrit(known, level))
    assert student_quantile(level, known) == pytest.approx(expected, rel=1e-7, abs=1e-8)


@settings(deadline=None)
@given(KNOWN, KNOWN, st.floats(0.01, 20))
def test_f_share_equals_scipy(above: float, below: float, value: float) -> None:
    """Source: scipy.special.fdtr."""
    expected = float(special.fdtr(above, below, value))
    assert f_share(value, above, below) == pytest.approx(expected, abs=5e-10)


@pytest.mark.parametrize(("known", "expected"), [(1, 12.7062), (9, 2.2622), (30, 2.0423)])
def test_student_quantile_equals_the_printed_table(known: int, expected: float) -> None:
    """Source: Fisher & Yates' table of t at 5 % two-sided, as in any textbook (from memory)."""
    assert student_quantile(0.975, known) == pytest.approx(expected, abs=5e-5)


def test_infinite_degrees_of_freedom_give_the_limits() -> None:
    """Student becomes normal and F becomes chi-square / df: closed forms."""
    assert student_quantile(0.975, math.inf) == pytest.approx(special.ndtri(0.975), abs=1e-12)
    assert t_share(1.3, math.inf) == pytest.approx(special.ndtr(1.3), abs=1e-12)
    assert f_share(1.2, 7, math.inf) == pytest.approx(special.gammainc(3.5, 4.2), abs=1e-12)
    assert f_share(1.2, math.inf, 7) == pytest.approx(special.gammaincc(3.5, 3.5 / 1.2), abs=1e-12)
    assert (f_share(0.9, math.inf, math.inf), f_share(1.1, math.inf, math.inf)) == (0.0, 1.0)


@settings(deadline=None)
@given(st.floats(-6, 6))
def test_normal_share_and_quantile_undo_each_other(value: float) -> None:
    """An inverse function gives back what went in."""
    level = normal_share(value)
    if 1e-9 < level < 1 - 1e-9:
        assert normal_quantile(level) == pytest.approx(value, abs=1e-6)


def test_nothing_lies_below_zero() -> None:
    """Chi-square and F have no negative values; the largest share is 1."""
    assert (chi_square_share(-1, 4), f_share(0, 3, 3), beta_share(0, 1, 1)) == (0, 0, 0)
    assert (chi_square_share(math.inf, 4), beta_share(1, 2, 3)) == (1, 1)


@pytest.mark.parametrize("level", [0.51, 0.6, 0.9, 0.975, 0.9995, 1 - 1e-9, 0.025])
@pytest.mark.parametrize("known", [1999, 2001, 3000.5, 40_000, 1e7])
def test_many_degrees_of_freedom_keep_ten_digits(level: float, known: float) -> None:
    """Where an expansion takes over from inversion: scipy.special.stdtrit."""
    assert student_quantile(level, known) == pytest.approx(
        special.stdtrit(known, level), rel=3e-10, abs=1e-12
    )

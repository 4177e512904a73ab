"""The signed rank test: the published factor, all signs tried, and simulations."""

import itertools
import math

import numpy as np
import pytest
from scipy import stats

from fieldplan.stats.signed_rank import (
    SIGNED_RANK_SHARE,
    signed_rank_count,
    signed_rank_planned_n,
    signed_rank_power,
    signed_rank_ratio,
)
from tests.unit.stats.published import row


def test_signed_rank_factor_is_the_least_efficiency() -> None:
    """Source: EPA QA/G-4 and G-9S print 1.16 for 1/0.864; Hodges & Lehmann 1956: 108/125.

    The efficiency is 12 σ² (∫ f²)²; its least is reached by a parabola, 0.955 by the normal.
    """
    factor = 1 / SIGNED_RANK_SHARE
    assert factor == pytest.approx(row("A03-065").exact, rel=1e-12)
    x = np.linspace(-1, 1, 200_001)
    parabola = 0.75 * (1 - x**2)
    squared = float(np.trapezoid(parabola**2, x))
    variance = float(np.trapezoid(x**2 * parabola, x))
    assert 12 * variance * squared**2 == pytest.approx(SIGNED_RANK_SHARE, rel=1e-8)
    normal = 12 * (1 / (2 * math.sqrt(math.pi))) ** 2
    assert normal == pytest.approx(row("A03-066").exact, rel=1e-12)


@pytest.mark.parametrize("n", [3, 5, 8, 11])
@pytest.mark.parametrize("alpha", [0.01, 0.05, 0.2])
def test_signed_rank_count_equals_all_signs_tried(n: int, alpha: float) -> None:
    """Brute force: all 2ⁿ signs of the ranks."""
    sums = [
        sum(rank for rank, sign in zip(range(1, n + 1), signs, strict=True) if sign)
        for signs in itertools.product([0, 1], repeat=n)
    ]
    smallest = min(
        w for w in range(n * (n + 1) // 2 + 2) if sum(s >= w for s in sums) <= alpha * 2**n
    )
    assert signed_rank_count(n, alpha=alpha) == smallest


@pytest.mark.parametrize(("n", "ratio"), [(6, 1.0), (10, 0.6), (10, -0.2), (21, 0.7), (25, 0.5)])
def test_signed_rank_power_equals_a_simulation(n: int, ratio: float) -> None:
    """Rank 20,000 drawn campaigns: within four standard errors and the error of the cells."""
    drawn = np.random.default_rng(41).normal(ratio, 1.0, (20_000, n))
    ranks = stats.rankdata(abs(drawn), axis=1)
    sums = (ranks * (drawn > 0)).sum(axis=1)
    share = float(np.mean(sums >= signed_rank_count(n, alpha=0.05)))
    power = signed_rank_power(ratio, n=n, alpha=0.05)
    assert abs(share - power) < 4 * math.sqrt(power * (1 - power) / len(drawn)) + 5e-4


@pytest.mark.parametrize(("n", "ratio"), [(31, 0.3), (31, 0.6), (64, 0.3)])
def test_signed_rank_power_of_many_results_is_near_a_simulation(n: int, ratio: float) -> None:
    """Above 30 results the normal curve is used: it is stated to be within 0.02."""
    drawn = np.random.default_rng(42).normal(ratio, 1.0, (10_000, n))
    sums = (stats.rankdata(abs(drawn), axis=1) * (drawn > 0)).sum(axis=1)
    share = float(np.mean(sums >= signed_rank_count(n, alpha=0.05)))
    power = signed_rank_power(ratio, n=n, alpha=0.05)
    assert abs(share - power) < 0.02 + 4 * math.sqrt(power * (1 - power) / len(drawn))


@pytest.mark.parametrize("shape", ["normal", "uniform", "laplace"])
def test_enlarged_number_serves_symmetric_shapes(shape: str) -> None:
    """The factor is for large n; at n = 42 for a t test's 36 the power is kept within 0.02."""
    n = signed_rank_planned_n(36)
    scale = {"normal": 1.0, "uniform": math.sqrt(12), "laplace": 1 / math.sqrt(2)}[shape]
    generator = np.random.default_rng(43)
    drawn = {
        "normal": lambda: generator.normal(size=(10_000, n)),
        "uniform": lambda: generator.uniform(-0.5, 0.5, (10_000, n)),
        "laplace": lambda: generator.laplace(size=(10_000, n)),
    }[shape]()
    results = drawn * scale + 0.5
    sums = (stats.rankdata(abs(results), axis=1) * (results > 0)).sum(axis=1)
    share = float(np.mean(sums >= signed_rank_count(n, alpha=0.05)))
    assert share > 0.9 - 0.02 - 4 * math.sqrt(0.09 / len(drawn))


def test_four_results_never_reach_a_twentieth() -> None:
    """By hand: the largest sum of ranks has chance 1/16 at the level, above 0.05."""
    assert signed_rank_power(1.0, n=4, alpha=0.05) == 0.0
    assert signed_rank_count(4, alpha=0.07) == 10


@pytest.mark.parametrize("n", [5, 9, 21, 50, 200])
@pytest.mark.parametrize("chance", [0.02, 0.3, 0.8, 0.99])
def test_distance_undoes_power(n: int, chance: float) -> None:
    """Inverse and forward must agree, to what interpolation promises."""
    ratio = signed_rank_ratio(chance, n=n, alpha=0.05)
    assert ratio is not None
    assert signed_rank_power(ratio, n=n, alpha=0.05) == pytest.approx(chance, abs=5e-4)
    assert signed_rank_ratio(chance, n=4, alpha=0.05) is None

"""Two phases: published cost ratios, brute force over whole numbers, simulation."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import optimize

from fieldplan.base.errors import DesignError
from fieldplan.stats.two_phase import (
    Screened,
    break_even_correlation,
    readings_per_result,
    relative_variance,
)


@pytest.mark.parametrize(
    ("ratio", "precision", "half_unit"),
    [(4.0, 1.0, 1e-6), (7.5, 1.25, 0.25)],
    ids=["equal", "25 %"],
)
def test_cost_ratios_at_which_a_correlation_of_08_pays(
    ratio: float, precision: float, half_unit: float
) -> None:
    """Cochran (1977), Sampling Techniques, 3rd ed., ch. 12, text beside the figure (from memory).

    At ρ = 0.8 two phases equal single results at a cost ratio of 4 and gain 25 % in precision at
    about 7½.
    """

    def surplus(log_ratio: float) -> float:
        share = relative_variance(0.8, reading_cost=1.0, result_cost=math.exp(log_ratio))
        return 1 / share - precision

    found = math.exp(optimize.brentq(surplus, math.log(2), math.log(50)))
    assert found == pytest.approx(ratio, abs=half_unit)


@settings(max_examples=60, deadline=None)
@given(st.floats(0.05, 0.99), st.floats(0.2, 200), st.floats(0.5, 200))
def test_the_ratio_is_the_one_a_numerical_search_finds(
    correlation: float, reading: float, result: float
) -> None:
    """A bounded search over n' per n of variance times cost, for large n, is the definition."""

    def bill(log_ratio: float) -> float:
        ratio = math.exp(log_ratio)
        spread = 1 - correlation**2 + correlation**2 / ratio
        return spread * (result + reading * ratio)

    least = optimize.minimize_scalar(
        bill, bounds=(0.0, 12.0), method="bounded", options={"xatol": 1e-10}
    )
    ratio = readings_per_result(correlation, reading_cost=reading, result_cost=result)
    best = min(least.fun, bill(0.0))
    assert bill(math.log(ratio)) <= best * (1 + 1e-9)
    share = relative_variance(
        correlation, reading_cost=reading, result_cost=result, single_cost=result + 0.3 * reading
    )
    assert share == pytest.approx(best / (result + 0.3 * reading), rel=1e-7)


@settings(max_examples=100, deadline=None)
@given(st.floats(0.1, 100), st.floats(0.1, 100), st.floats(0, 1.2))
def test_the_border_parts_what_pays_from_what_does_not(
    reading: float, result: float, part: float
) -> None:
    """Just above the border the variance at equal money is below that of results alone."""
    single = result + part * reading
    border = break_even_correlation(reading_cost=reading, result_cost=result, single_cost=single)

    def share(correlation: float) -> float:
        return relative_variance(
            correlation, reading_cost=reading, result_cost=result, single_cost=single
        )

    if border is None:
        assert all(share(r) >= 1 - 1e-12 for r in np.linspace(0, 1, 101))
    elif border == 0:
        assert single >= reading + result
        assert share(0.0) <= 1 + 1e-12
    else:
        assert share(border) == pytest.approx(1, abs=1e-7)  # √(1 − ρ²) is steep beside 1
        assert share(min(1.0, border + 1e-4)) < 1
        assert share(border - 1e-4) > 1


def test_the_border_of_the_book_is_a_special_case() -> None:
    """ρ² = 4 c c' / (c + c')²: Cochran (1977), ch. 12 (from memory; also by algebra)."""
    for reading, result in ((1.0, 4.0), (1.0, 10.0), (2.0, 50.0)):
        border = break_even_correlation(reading_cost=reading, result_cost=result)
        assert border == pytest.approx(2 * math.sqrt(reading * result) / (reading + result))


def regression_errors(
    rng: np.random.Generator, sizes: tuple[int, int, int | None], correlation: float, repeats: int
) -> np.ndarray:
    """Simulate the regression estimate minus the true mean; a list is drawn anew each time."""
    readings, results, listed = sizes
    places = listed or readings
    x = rng.standard_normal((repeats, places))
    y = correlation * x + math.sqrt(1 - correlation**2) * rng.standard_normal((repeats, places))
    truth = y.mean(axis=1) if listed else 0.0
    x, small_x, small_y = x[:, :readings], x[:, :results], y[:, :results]
    off = small_x - small_x.mean(axis=1, keepdims=True)
    slope = (off * small_y).sum(axis=1) / (off**2).sum(axis=1)
    estimate = small_y.mean(axis=1) + slope * (x.mean(axis=1) - small_x.mean(axis=1))
    return np.asarray(estimate - truth)


@pytest.mark.parametrize(
    ("readings", "results", "listed", "correlation"),
    [(40, 6, None, 0.8), (60, 15, None, 0.9), (30, 10, 45, 0.7), (12, 12, None, 0.5)],
)
def test_the_variance_is_what_simulation_finds(
    readings: int, results: int, listed: int | None, correlation: float
) -> None:
    """Regression estimates from normal places, the fitted line included.

    The tolerance is 4 standard errors of a mean of squares, from the squares themselves.
    """
    rng = np.random.default_rng(20261201)
    errors = regression_errors(rng, (readings, results, listed), correlation, 20_000)
    squares = errors**2
    population = Screened(1.0, correlation, finite=1 / listed if listed else 0.0)
    tolerance = 4 * squares.std() / math.sqrt(squares.size)
    assert squares.mean() == pytest.approx(population.variance(readings, results), abs=tolerance)


def test_strata_with_a_common_slope_lose_a_degree_of_freedom_each() -> None:
    """Two strata of weight ½, levels apart, one slope: simulated, 4 standard errors."""
    rng, repeats, rho = np.random.default_rng(8), 20_000, 0.85
    x = rng.standard_normal((repeats, 2, 12))
    y = rho * x + math.sqrt(1 - rho**2) * rng.standard_normal(x.shape)
    small_x, small_y = x[:, :, :4], y[:, :, :4]
    off = small_x - small_x.mean(axis=2, keepdims=True)
    slope = (off * small_y).sum(axis=(1, 2)) / (off**2).sum(axis=(1, 2))
    moved = slope[:, None] * (x.mean(axis=2) - small_x.mean(axis=2))
    squares = (small_y.mean(axis=2) + moved).mean(axis=1) ** 2
    tolerance = 4 * squares.std() / math.sqrt(repeats)
    expected = Screened(1.0, rho, strata=2).variance(24, 8)
    assert squares.mean() == pytest.approx(expected, abs=tolerance)


def test_without_more_readings_it_is_the_mean_of_the_results() -> None:
    """The line has nothing to move: σ²/n, and for a list σ²/n − σ²/N."""
    assert Screened(20.0, 0.7).variance(25, 25) == 16.0
    listed = Screened(20.0, 0.7, finite=400 / 50, most=50)
    assert listed.variance(25, 25) == pytest.approx(400 / 25 * (1 - 25 / 50))


@pytest.mark.parametrize(
    ("act", "words"),
    [
        (lambda: Screened(20.0, 1.2), "correlation is 1.2"),
        (lambda: Screened(0.0, 0.5), "sigma is 0.0"),
        (lambda: Screened(20.0, math.nan), "correlation is nan"),
        (lambda: Screened(20.0, 0.5).variance(5, 9), "9 results need a reading each"),
        (lambda: Screened(20.0, 0.5).variance(9, 3), "3 results are too few"),
        (lambda: readings_per_result(0.5, reading_cost=0, result_cost=9), "a unit cost is 0"),
        (lambda: break_even_correlation(reading_cost=1, result_cost=-9), "a unit cost is -9"),
    ],
)
def test_what_no_campaign_has_is_refused(act, words: str) -> None:  # type: ignore[no-untyped-def]
    """Each message holds the offending value."""
    with pytest.raises(DesignError, match=words):
        act()

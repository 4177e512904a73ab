"""Whole numbers of readings and results, against brute force."""

import math
from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.stats.two_phase import Screened
from fieldplan.stats.two_phase_split import ALL, Split, cheapest_split, most_precise_split


def linear(reading: float, result: float, fixed: float = 0.0) -> Callable[[int, int], float]:
    """Return a price that is linear in both numbers."""
    return lambda readings, results: fixed + reading * readings + result * results


def every_split(population: Screened, top: int) -> list[Split]:
    """List every pair of whole numbers up to a number of readings."""
    return [
        Split(readings, results)
        for results in range(population.fewest, top + 1)
        for readings in range(results, top + 1)
    ]


@st.composite
def populations(draw: st.DrawFn) -> Screened:
    """Draw a population, now and then a short list."""
    sigma, listed = draw(st.floats(1, 9)), draw(st.booleans())
    most = draw(st.integers(12, 40)) if listed else 10_000_000
    return Screened(
        sigma,
        draw(st.floats(-0.99, 0.99)),
        strata=draw(st.integers(1, 3)),
        finite=sigma**2 / most if listed else 0.0,
        most=most,
    )


@settings(max_examples=60, deadline=None)
@given(populations(), st.floats(0.3, 20), st.floats(1, 60), st.integers(5, 38))
def test_the_cheapest_split_is_the_cheapest_of_all(
    population: Screened, reading: float, result: float, alone: int
) -> None:
    """Brute force over all whole numbers that could do; the price has a step, as crew-days have."""
    alone = min(max(alone, population.fewest), population.most)
    target = population.variance(alone, alone) * 1.0001 + 1e-9
    days = 35.0

    def price(readings: int, results: int) -> float:
        return reading * readings + result * results + days * math.ceil(readings / 7)

    found = cheapest_split(population, target=lambda n: target, price=price)
    top = min(population.most, 90)
    fitting = [s for s in every_split(population, top) if population.variance(*s) <= target]
    assert found is not None
    assert population.variance(*found) <= target * (1 + 1e-8)
    assert price(*found) <= min(price(*split) for split in fitting) * (1 + 1e-9)


@settings(max_examples=60, deadline=None)
@given(populations(), st.floats(0.5, 20), st.floats(1, 60), st.floats(100, 700))
def test_the_most_precise_split_is_the_most_precise_of_all(
    population: Screened, reading: float, result: float, budget: float
) -> None:
    """Brute force over all whole numbers that the budget buys."""
    price = linear(reading, result, fixed=40.0)
    found = most_precise_split(population, budget=budget, price=price)
    top = min(population.most, int(budget / reading) + 1, 150)
    bought = [s for s in every_split(population, top) if price(*s) <= budget]
    if not bought:
        assert found is None
        return
    assert found is not None
    assert price(*found) <= budget * (1 + 1e-8)
    best = min(population.variance(*split) for split in bought)
    assert population.variance(*found) <= best * (1 + 1e-9) + 1e-12


def test_a_large_campaign_is_searched_near_its_optimum() -> None:
    """With far more numbers than are all tried the answer keeps to the closed form.

    Cochran (1977), ch. 12: smallest money σ² (√((1−ρ²)c) + ρ√c')² / V, whole numbers and the
    fitted line cost a little more.
    """
    population, target = Screened(20.0, 0.9), 0.02
    found = cheapest_split(population, target=lambda n: target, price=linear(10, 90))
    assert found is not None
    assert found.results > ALL
    ideal = 400 * (math.sqrt(0.19 * 90) + 0.9 * math.sqrt(10)) ** 2 / target
    assert ideal <= linear(10, 90)(*found) <= ideal * 1.001
    bought = most_precise_split(population, budget=ideal, price=linear(10, 90))
    assert bought is not None
    assert population.variance(*bought) == pytest.approx(target, rel=1e-3)


def test_two_phases_never_cost_more_than_a_reading_at_every_result() -> None:
    """N' = n is among the splits, so a useless reading costs its price and no more."""
    population = Screened(20.0, 0.05)
    found = cheapest_split(population, target=lambda n: 16.0, price=linear(10, 90))
    assert found == Split(25, 25)

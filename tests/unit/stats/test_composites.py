"""Composites: variance, cost, the cheapest whole numbers, and what one jar can hide."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.composite_costs import (
    CompositePrices,
    Composites,
    Limits,
    best_increments,
    cheapest_for_standard_error,
    most_precise_for_budget,
)
from fieldplan.stats.composites import (
    ErrorParts,
    composite_sigma,
    highest_increment,
    level_for_composite,
    replicates_for_half_width,
    variance_of_mean,
)
from fieldplan.stats.intervals import t_quantile
from tests.unit.stats.published import row

VARIANCES = ["A07-001", "A07-003", "A07-005", "A07-009"]
COSTS = ["A07-004", "A07-006", "A07-008", "A07-010"]


@pytest.mark.parametrize("row_id", VARIANCES)
def test_published_schemes_have_their_variance(row_id: str) -> None:
    """Source: Berthouex & Brown 2002, table 25.6; there nt tests share ns specimens."""
    inputs = row(row_id).inputs
    parts = ErrorParts(math.sqrt(inputs["ss2"]), 0.0, math.sqrt(inputs["st2"]))
    jars = inputs["nt"]
    found = variance_of_mean(parts, replicates=jars, increments=inputs["ns"] // jars)
    assert found == pytest.approx(row(row_id).exact, rel=1e-12)


@pytest.mark.parametrize("row_id", COSTS)
def test_published_schemes_have_their_cost(row_id: str) -> None:
    """Source: Berthouex & Brown 2002, table 25.6."""
    inputs = row(row_id).inputs
    prices = CompositePrices(increment=inputs["cs"], composite=inputs["ct"])
    assert prices.cost(inputs["nt"], inputs["ns"] / inputs["nt"]) == row(row_id).exact


def test_ten_single_specimens_beat_ten_tests_of_one() -> None:
    """Source: Berthouex & Brown 2002, p. 230: 0.74 against 2.24 (printed truncated)."""
    inputs = row("A07-012").inputs
    parts = ErrorParts(math.sqrt(inputs["ss2"]), 0.0, math.sqrt(inputs["st2"]))
    many = variance_of_mean(parts, replicates=10, increments=1)
    one = variance_of_mean(parts, replicates=1, increments=1, analyses=10)
    assert math.sqrt(many) == pytest.approx(row("A07-012").exact, rel=1e-12)
    assert math.sqrt(one) == pytest.approx(row("A07-013").exact, rel=1e-12)


def test_cost_optimal_increments_as_derived_from_the_published_inputs() -> None:
    """Source: values.csv A07-014, derived from table 25.6: it explains the 16 of scheme 4."""
    inputs = row("A07-014").inputs
    parts = ErrorParts(math.sqrt(inputs["ss2"]), 0.0, math.sqrt(inputs["st2"]))
    prices = CompositePrices(inputs["cs"], inputs["ct"])
    assert best_increments(parts, prices) == pytest.approx(row("A07-014").exact, rel=1e-12)


def test_increments_never_average_the_laboratory() -> None:
    """However many scoops fill a jar, its one analysis keeps its whole error."""
    parts = ErrorParts(24.0, 10.0, 5.0)
    assert composite_sigma(parts, 10**9) == pytest.approx(5.0, rel=1e-6)
    assert composite_sigma(parts, 10**9, one_place=True) == pytest.approx(
        math.hypot(24, 5), rel=1e-6
    )


def test_variance_of_composites_equals_that_of_simulated_ones() -> None:
    """Simulation, seed fixed: 4 standard errors of a variance are 4·√(2/(R−1)) of it."""
    rng, runs, jars, scoops = np.random.default_rng(7), 20_000, 3, 5
    parts = ErrorParts(2.0, 1.0, 0.7)
    for one_place in (False, True):
        places = rng.normal(0, 2.0, (runs, jars, 1 if one_place else scoops))
        ground = places + rng.normal(0, 1.0, (runs, jars, scoops))
        results = ground.mean(axis=2) + rng.normal(0, 0.7, (runs, jars))
        seen = results.mean(axis=1).var(ddof=1)
        told = variance_of_mean(parts, replicates=jars, increments=scoops, one_place=one_place)
        assert seen == pytest.approx(told, rel=4 * math.sqrt(2 / (runs - 1)))


def test_replicates_for_a_half_width_are_the_first_that_reach_it() -> None:
    """Brute force over t: degrees of freedom come from jars alone."""
    parts = ErrorParts(24.0, 10.0, 5.0)
    for increments in (1, 5, 30):
        sigma = composite_sigma(parts, increments)
        for target in (5.0, 8.0, 20.0):
            n = replicates_for_half_width(parts, target, increments=increments, confidence=0.95)
            fits = [
                r
                for r in range(2, 300)
                if t_quantile(r - 1, confidence=0.95, kind="two-sided") * sigma / math.sqrt(r)
                <= target
            ]
            assert n == fits[0]


SIGMAS = st.floats(0, 30)
PRICES = st.one_of(st.just(0.0), st.floats(0.1, 50))


def _brute(
    parts: ErrorParts, prices: CompositePrices, limits: Limits, *, one_place: bool, most: int
) -> list[Composites]:
    """Make every design of up to so many replicates."""
    designs = []
    for r in range(limits.fewest_replicates, most + 1):
        for k in range(limits.fewest_increments, limits.most_increments + 1):
            variance = variance_of_mean(parts, replicates=r, increments=k, one_place=one_place)
            designs.append(Composites(r, k, variance, prices.cost(r, k)))
    return designs


@settings(max_examples=40, deadline=None)
@given(SIGMAS, SIGMAS, SIGMAS, PRICES, PRICES, st.booleans(), st.integers(1, 4), st.integers(2, 4))
def test_no_whole_numbers_are_cheaper_or_more_precise(
    between: float,
    sampling: float,
    analysis: float,
    increment: float,
    composite: float,
    one_place: bool,
    fewest: int,
    jars: int,
) -> None:
    """Brute force over every design inside the limits."""
    if between + sampling + analysis < 0.5 or increment + composite == 0:
        return
    parts = ErrorParts(between, sampling, analysis)
    prices, limits = CompositePrices(increment, composite), Limits(jars, fewest, 8)
    target = parts.total / 2.7
    found = cheapest_for_standard_error(parts, target, prices, limits=limits, one_place=one_place)
    designs = _brute(parts, prices, limits, one_place=one_place, most=25)
    assert found.standard_error <= target * (1 + 1e-9)
    enough = [d for d in designs if d.standard_error <= target]
    assert found.cost == pytest.approx(min(d.cost for d in enough), rel=1e-8)

    budget = prices.cost(jars, fewest) * 3.7
    best = most_precise_for_budget(parts, budget, prices, limits=limits, one_place=one_place)
    assert best.cost <= budget * (1 + 1e-9)
    paid = [d for d in designs if d.cost <= budget]
    assert best.variance == pytest.approx(min(d.variance for d in paid), rel=1e-8)


def test_large_and_lopsided_designs_are_found_at_once() -> None:
    """The search goes outwards from the lowest point; it must not walk through millions."""
    parts = ErrorParts(1000.0, 10.0, 200.0)
    found = cheapest_for_standard_error(parts, 0.5, CompositePrices(0.01, 500.0))
    assert found.standard_error <= 0.5 * (1 + 1e-9)
    assert found.cost < prices_of_neighbours(parts, found)


def prices_of_neighbours(parts: ErrorParts, found: Composites) -> float:
    """Cost of the cheapest design within 200 composites that still reaches 0.5."""
    costs = []
    for r in range(max(2, found.replicates - 200), found.replicates + 200):
        room = r * 0.25 - parts.kept(one_place=False)
        if room > 0 and r != found.replicates:
            k = math.ceil(parts.averaged(one_place=False) / room)
            costs += [CompositePrices(0.01, 500.0).cost(r, k)] if k <= 1000 else []
    return min(costs)


def test_budget_with_a_floor_of_thirty_increments_is_spent_inside_it() -> None:
    """By hand: 3 jars of 30 cost 3·(90 + 30·4) = 630; 4 would cost 840."""
    limits = Limits(fewest_replicates=3, fewest_increments=30)
    found = most_precise_for_budget(
        ErrorParts(24.0, 10.0, 5.0), 700.0, CompositePrices(4.0, 90.0), limits=limits
    )
    assert (found.replicates, found.increments) == (3, 35)


def test_dilution_hides_a_high_increment() -> None:
    """Definition of a mean: 29 scoops of 80 and one of 680 give 100."""
    assert highest_increment(100.0, 30, others=80.0) == pytest.approx(680.0)
    assert highest_increment(level_for_composite(300.0, 5), 5) == pytest.approx(300.0)


def test_bad_numbers_are_refused_with_their_value() -> None:
    """Each line names the thing, its value and the rule."""
    with pytest.raises(DesignError, match="sampling is -1"):
        ErrorParts(1.0, -1.0)
    with pytest.raises(DesignError, match="between locations is nan"):
        ErrorParts(math.nan)
    with pytest.raises(DesignError, match="all parts of sigma are 0"):
        ErrorParts(0.0)
    parts = ErrorParts(1.0, 1.0, 1.0)
    with pytest.raises(DesignError, match="increments is 0"):
        composite_sigma(parts, 0)
    with pytest.raises(DesignError, match="replicates is 0"):
        variance_of_mean(parts, replicates=0, increments=1)
    with pytest.raises(DesignError, match="analyses is 0"):
        composite_sigma(parts, 1, analyses=0)
    with pytest.raises(DesignError, match="half-width is 0"):
        replicates_for_half_width(parts, 0, increments=1, confidence=0.95)
    with pytest.raises(DesignError, match="standard error is -2"):
        cheapest_for_standard_error(parts, -2, CompositePrices(1, 1))
    with pytest.raises(DesignError, match="budget of 3 is too small: 2 composites"):
        most_precise_for_budget(parts, 3.0, CompositePrices(1.0, 1.0))
    with pytest.raises(DesignError, match="price of one increment is -1"):
        CompositePrices(-1.0, 3.0)
    with pytest.raises(DesignError, match="both cost 0"):
        CompositePrices(0.0, 0.0)
    with pytest.raises(DesignError, match="at most 5 increments"):
        Limits(2, 30, 5)
    with pytest.raises(DesignError, match="action level is 0"):
        level_for_composite(0.0, 5)
    with pytest.raises(DesignError, match="cannot hold more"):
        highest_increment(10.0, 5, others=11.0)

"""Designs priced side by side, against brute force and by hand."""

import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.field_readings import Reading, screened
from fieldplan.sizing.frontier import (
    PricedDesign,
    Wanted,
    cheapest,
    efficient,
    levels,
    most_precise,
    wanted_of,
)
from fieldplan.sizing.frontier_kinds import without_strata
from fieldplan.sizing.frontier_readings import WithReadings
from fieldplan.sizing.frontier_shared import Shared
from fieldplan.sizing.money import Prices
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import ControlRate, Part
from fieldplan.stats.allocation import share_total
from tests.unit.sizing.asking import ask, three, whole

PRICES = Prices("EUR", mobilisation=300.0, per_location=12.0, per_analysis=80.0)
DAYS = Prices(
    "EUR", mobilisation=300.0, per_location=12.0, per_analysis=80.0, per_crew_day=600.0,
    locations_per_day=9,
)  # fmt: skip
DUPLICATES = (ControlRate("field duplicate", 0.1, None, "campaign choice"),)


def design(cost: float, error: float) -> PricedDesign:
    """One design of no words."""
    return PricedDesign("one", "", 9, 9, error, 2 * error, cost)


@settings(max_examples=200)
@given(st.lists(st.tuples(st.integers(1, 9), st.integers(1, 9)), min_size=1, max_size=25))
def test_no_design_beats_an_efficient_one_and_all_others_are_beaten(
    pairs: list[tuple[int, int]],
) -> None:
    """By definition, every pair compared: as cheap and as precise, and one of the two better."""
    designs = [design(float(cost), float(error)) for cost, error in pairs]
    kept = efficient(designs)

    def beats(one: PricedDesign, other: PricedDesign) -> bool:
        no_worse = one.cost <= other.cost and one.standard_error <= other.standard_error
        return no_worse and (one.cost, one.standard_error) != (other.cost, other.standard_error)

    assert {(d.cost, d.standard_error) for d in kept} == {
        (d.cost, d.standard_error) for d in designs if not any(beats(e, d) for e in designs)
    }
    assert [d.cost for d in kept] == sorted(d.cost for d in kept)


@settings(max_examples=100)
@given(
    st.lists(st.tuples(st.integers(1, 9), st.integers(1, 9)), min_size=1, max_size=25),
    st.integers(1, 9),
)
def test_the_cheapest_and_the_finest_lie_on_the_frontier(
    pairs: list[tuple[int, int]], bound: int
) -> None:
    """Whatever else it may be, an answer must not be beaten by a design that was there."""
    designs = [design(float(cost), float(error)) for cost, error in pairs]
    goal = Wanted("standard_error", float(bound), 0.95, "two-sided")
    kept = efficient(designs)
    for found, other in (
        (cheapest(designs, goal), cheapest(kept, goal)),
        (most_precise(designs, bound), most_precise(kept, bound)),
    ):
        assert (found is None) == (other is None)
        if found and other:
            assert (found.cost, found.standard_error) == (other.cost, other.standard_error)


@pytest.mark.parametrize("prices", [PRICES, DAYS], ids=["linear", "crew-days"])
@pytest.mark.parametrize("target", ["standard_error", "half_width"])
def test_each_way_of_sharing_gives_its_cheapest_and_its_finest(prices: Prices, target: str) -> None:
    """Brute force over totals: the price never falls with more results."""
    for allocation in ("proportional", "neyman"):
        question = ask(
            three(results=10, loss=0.1), 9.0, target=target, allocation=allocation, prices=prices,
            controls=DUPLICATES,
        )  # fmt: skip
        kind = Shared(question, "strata")
        goal = Wanted(target, 9.0, 0.95, "two-sided")
        every = [
            kind.priced(share_total(question.strata, total, allocation=allocation))
            for total in range(6, 160)
        ]
        assert kind.cheapest(goal).cost == cheapest(every, goal).cost
        budget = every[40].cost + 1
        found = kind.most_precise(budget)
        assert found.cost <= budget
        assert found.standard_error == most_precise(every, budget).standard_error


def reading(question, correlation: float) -> Reading:  # type: ignore[no-untyped-def]
    """A reading of 3 EUR."""
    return Reading("meter", question, screened(question, correlation), 3.0)


@pytest.mark.parametrize("prices", [PRICES, DAYS], ids=["linear", "crew-days"])
@pytest.mark.parametrize("target", ["standard_error", "half_width"])
def test_readings_beside_results_give_their_cheapest(prices: Prices, target: str) -> None:
    """Brute force over readings and results, priced by hand; Cochran (1977), ch. 12, variance."""
    question = ask(
        whole(20.0, results=8, loss=0.1), 5.0, target=target, prices=prices, controls=DUPLICATES,
        targeted=2,
    )  # fmt: skip
    found = WithReadings(question, reading(question, 0.85)).cheapest(
        Wanted(target, 5.0, 0.95, "two-sided")
    )
    best = math.inf
    for n in range(4, 80):
        for m in range(n, 160):
            luck = (1 / n - 1 / m) / (n - 3)
            variance = 400 * (1 - 0.85**2) * (1 / n + luck) + 400 * 0.85**2 / m
            reach = math.sqrt(variance)
            if target == "half_width":
                reach *= stats.t.ppf(0.975, n - 2)
            if reach > 5.0:
                continue
            visits, jars = math.ceil(m / 0.9 - 1e-9), math.ceil(n / 0.9 - 1e-9)
            controls = math.ceil(0.1 * jars - 1e-9)
            money = 300 + 12 * (visits + 2) + 80 * (jars + 2 + controls) + 3 * visits
            if prices is DAYS:
                money += 600 * math.ceil((visits + 2) / 9)
            best = min(best, money)
    assert found is not None
    assert found.cost == pytest.approx(best)


def test_shared_phases_predict_what_strata_give() -> None:
    """With a useless reading and n' = n the variance is that of the strata, whole shares apart."""
    for allocation in ("proportional", "neyman"):
        question = ask(three(results=9), 9.0, allocation=allocation)
        population = screened(question, 0.0)
        shares = {
            "proportional": (64, 22, 14),
            "neyman": tuple(100 * w * s / 34.02 for w, s in ((0.64, 18), (0.22, 45), (0.14, 90))),
        }[allocation]
        assert population.variance(100, 100) == pytest.approx(Precision(question).variance(shares))
        assert population.strata == 3


def test_the_whole_without_strata_spreads_by_the_means_as_well() -> None:
    """Simulated mixture of three normal strata; 4 standard errors of a variance.

    Cochran (1977), Sampling Techniques, 3rd ed., sec. 5.6.
    """
    rng, means = np.random.default_rng(3), (20.0, 60.0, 160.0)
    parts = tuple(
        Part(p.name, p.weight, p.sigma, mean=mean) for p, mean in zip(three(), means, strict=True)
    )
    single = without_strata(ask(parts, 9.0))
    assert single is not None
    stratum = rng.choice(3, size=400_000, p=[0.64, 0.22, 0.14])
    drawn = rng.normal(np.array(means)[stratum], np.array([18.0, 45.0, 90.0])[stratum])
    squares = (drawn - drawn.mean()) ** 2
    tolerance = 4 * squares.std() / math.sqrt(squares.size)
    assert single.parts[0].sigma ** 2 == pytest.approx(squares.mean(), abs=tolerance)
    assert without_strata(ask(three(), 9.0)) is None


def test_designs_are_compared_at_what_the_assurance_took() -> None:
    """With an assurance the counts for it; as typed without; what is had where money decides."""
    parts = whole(27.57, results=8)
    assert wanted_of(ask(parts, 6.0), (22,)).value == 6.0
    assured = wanted_of(ask(parts, 6.0, assurance=0.8), (39,))
    assert assured.value == pytest.approx(27.57 / math.sqrt(39))
    typed = wanted_of(ask(parts, 6.0, assurance=0.8, locations=12), (12,))
    assert typed.value == pytest.approx(27.57 / math.sqrt(39))  # n = 39 as in test_assurance
    paid = wanted_of(ask(parts, 2000.0, target="budget", prices=PRICES), (18,))
    assert paid.value == pytest.approx(27.57 / math.sqrt(18))
    unsure = wanted_of(ask(whole(), 6.0, assurance=0.8), (22,))
    assert unsure.value == 6.0  # nothing to hold the assurance to


def test_levels_run_from_wider_to_narrower_in_equal_ratios() -> None:
    """1.8 times wider to as much narrower, and one step beyond."""
    found = [level.value for level in levels(Wanted("standard_error", 6.0, 0.95, "two-sided"),
                                             points=12)]  # fmt: skip
    assert found[0] == pytest.approx(6 * 1.8)
    assert found[-2] == pytest.approx(6 / 1.8)
    ratios = [b / a for a, b in pairwise(found)]
    assert ratios == pytest.approx([ratios[0]] * len(ratios))
    with pytest.raises(DesignError, match="2 points"):
        levels(Wanted("standard_error", 6.0, 0.95, "two-sided"), points=2)

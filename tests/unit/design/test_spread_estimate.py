"""The estimate from balanced lists: the rule fixed before, its fallbacks, and its refusals."""

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import DesignTable
from fieldplan.design import layout_of
from fieldplan.design.balanced_list import BalancedList
from fieldplan.design.model import StratumValues
from fieldplan.design.spread_estimate import LONE, MODELLED, WIDE, estimate_spread
from fieldplan.stats.cell_variance import curve_variance
from fieldplan.stats.neighbour_variance import neighbour_variance


def results(
    n: int, *, name: str = "a", weight: float = 1.0, population: int | None = None, seed: int = 1
) -> StratumValues:
    """Results of one stratum of 100 m by 100 m, with a slope and some noise."""
    random = np.random.default_rng(seed)
    places = random.random((n, 2)) * 100
    values = places[:, 0] / 10 + random.standard_normal(n)
    return StratumValues(name, weight, values, population, coordinates=places, measure=10_000.0)


def spot_check(answer: float, expected: float) -> None:
    """Compare two standard errors."""
    assert answer == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("layout", ["simple-random", "stratified", "triangular-grid"])
@pytest.mark.parametrize("rule", ["neighbours", "covariance"])
def test_neighbours_of_places_left_to_chance_are_refused(layout: str, rule: str) -> None:
    """On a simple random draw the interval held in 75 to 90 % of fields, at worst in 47 %."""
    with pytest.raises(DesignError, match="leaves them to chance: the interval would be too"):
        estimate_spread([results(20)], layout=layout, rule=rule, single_result="refuse")  # type: ignore[arg-type]


def test_neighbours_give_the_standard_error_and_the_plain_formula_is_labelled() -> None:
    """The layout gets its credit; the other number is for comparison only."""
    one = results(30)
    answer = BalancedList().estimate([one])
    near = neighbour_variance(one.values, one.coordinates)
    spot_check(answer.standard_error, near.variance**0.5)
    assert answer.degrees_of_freedom == pytest.approx(near.degrees_of_freedom)
    assert answer.mean == one.values.mean()
    times = (one.values.var(ddof=1) / 30) ** 0.5 / answer.standard_error
    assert WIDE in answer.caution
    assert "For comparison only, no credit for the layout: the formula for simple" in answer.caution
    assert f"gives a standard error {times:.2f} times as large." in answer.caution


def test_curves_give_the_standard_error_where_they_were_chosen() -> None:
    """Each place stands for a square of its share of the area."""
    one = results(30)
    answer = BalancedList("covariance").estimate([one])
    curves = curve_variance(
        one.values, one.coordinates, np.arange(30), np.full(30, 1 / 30), area=10_000.0
    )
    spot_check(answer.standard_error, curves.variance**0.5)
    assert answer.degrees_of_freedom == curves.degrees_of_freedom
    assert MODELLED in answer.caution


def test_few_results_and_lists_fall_back_to_neighbours() -> None:
    """Curves take 20 results and an area; the sheet says what was done instead."""
    for one in (results(19), results(30, population=90)):
        answer = BalancedList("covariance").estimate([one])
        left = 1.0 if one.population is None else 1 - 30 / 90
        near = neighbour_variance(one.values, one.coordinates)
        spot_check(answer.standard_error, (near.variance * left) ** 0.5)
        assert "'a' took neighbours instead" in answer.caution


def test_strata_are_weighed_by_their_shares() -> None:
    """The variance is Σ W² v, by hand."""
    two = [results(20, weight=0.3), results(12, name="b", weight=0.7, seed=2)]
    answer = BalancedList().estimate(two)
    parts = [s.weight**2 * neighbour_variance(s.values, s.coordinates).variance for s in two]
    spot_check(answer.standard_error, sum(parts) ** 0.5)
    assert answer.mean == pytest.approx(0.3 * two[0].values.mean() + 0.7 * two[1].values.mean())
    assert 9 <= answer.degrees_of_freedom <= 30
    assert sum(s.weight**2 * s.variance_of_mean for s in answer.strata) == pytest.approx(sum(parts))


def test_a_list_visited_in_full_leaves_nothing_to_chance() -> None:
    """With n = N there is no error from choosing places."""
    answer = BalancedList().estimate([results(8, population=8)])
    assert answer.standard_error == 0.0
    assert answer.degrees_of_freedom == np.inf


def test_a_lone_result_takes_the_credit_of_all() -> None:
    """A borrowed spread knows no neighbours, so the formula for random places serves."""
    two = [results(20, weight=0.5), results(1, name="b", weight=0.5)]
    with pytest.raises(DesignError, match="'b' has 1 result"):
        BalancedList().estimate(two)
    answer = BalancedList().estimate(two, single_result="borrow-spread")
    assert LONE in answer.caution
    plain = two[0].values.var(ddof=1) * (0.25 / 20 + 0.25)
    spot_check(answer.standard_error, plain**0.5)


def test_results_without_places_are_refused() -> None:
    """Neighbours cannot be found by name."""
    bare = StratumValues("a", 1.0, np.array([1.0, 2.0, 4.0]))
    with pytest.raises(DesignError, match="'a' has no record of its places"):
        BalancedList().estimate([bare])


def test_the_campaign_file_chooses_the_rule() -> None:
    """What stands in the file is what the estimate does; unasked it is neighbours."""
    assert layout_of(DesignTable(layout="balanced-list")) == BalancedList("neighbours")
    chosen = DesignTable(layout="balanced-list", variance="covariance")
    assert layout_of(chosen) == BalancedList("covariance")

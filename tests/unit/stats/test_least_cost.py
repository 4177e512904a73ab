"""Whole counts of least cost and of smallest variance, against every other way."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.allocation import smallest_total
from fieldplan.stats.least_cost import least_cost, smallest_variance
from fieldplan.stats.several_analytes import Demand
from fieldplan.stats.strata import Strata
from fieldplan.stats.stratified import predicted_variance

CAP = 9


@st.composite
def small_sites(draw: st.DrawFn) -> Strata:
    """Draw two or three strata with at most nine results each, some of them short lists."""
    size = draw(st.integers(2, 3))
    raw = [draw(st.floats(0.1, 1)) for _ in range(size)]
    whole = draw(st.booleans())
    costs = tuple(draw(st.integers(20, 200)) * (1.0 if whole else 1.01317) for _ in range(size))
    return Strata(
        tuple(x / sum(raw) for x in raw),
        tuple(draw(st.floats(1, 20)) for _ in range(size)),
        tuple(draw(st.none() | st.integers(2, CAP)) for _ in range(size)),
        floor=draw(st.integers(1, 3)),
        ceilings=tuple(draw(st.integers(4, CAP)) for _ in range(size)),
        costs=draw(st.sampled_from([costs, ()])),
    )


def every_way(site: Strata) -> np.ndarray:
    """List all whole counts within floors and ceilings."""
    ranges = [range(f, cap + 1) for f, cap in zip(site.floors, site.caps, strict=True)]
    return np.array(list(itertools.product(*ranges)), dtype=float)


def variances(site: Strata, sigmas: tuple[float, ...], ways: np.ndarray) -> np.ndarray:
    """Give the variance of every way."""
    return np.array([predicted_variance(site.weights, sigmas, w, site.populations) for w in ways])


@settings(max_examples=60, deadline=None)
@given(small_sites(), st.data())
def test_no_other_counts_keep_all_targets_for_less(site: Strata, data: st.DataObject) -> None:
    """Brute force over every set of counts, for one to three analytes."""
    ways = every_way(site)
    kept = np.full(len(ways), True)
    demands = []
    for _ in range(data.draw(st.integers(1, 3))):
        sigmas = tuple(data.draw(st.floats(1, 20)) for _ in site.weights)
        found = variances(site, sigmas, ways)
        target = float(found.min() + data.draw(st.floats(0.02, 1.1)) * np.ptp(found)) + 1e-9
        demands.append(Demand(sigmas, target))
        kept &= found <= target * (1 + 1e-9)
    best = min(site.cost(way) for way in ways[kept])
    whole, shared = least_cost(site, demands)
    assert whole.value == pytest.approx(best, rel=1e-9)
    assert site.cost(whole.counts) == pytest.approx(whole.value, rel=1e-12)
    assert shared.lowest_cost <= best * (1 + 1e-6)
    assert whole.bound <= best * (1 + 1e-6)


@settings(max_examples=60, deadline=None)
@given(small_sites(), st.floats(0, 1.05))
def test_no_other_counts_are_more_precise_for_the_money(site: Strata, share: float) -> None:
    """Brute force over every set of counts that the money buys."""
    ways = every_way(site)
    costs = np.array([site.cost(way) for way in ways])
    money = float(costs.min() + share * np.ptp(costs))
    best = variances(site, site.sigmas, ways[costs <= money * (1 + 1e-9)]).min()
    found = smallest_variance(site, money)
    assert site.cost(found.counts) <= money * (1 + 1e-8)
    assert found.value == pytest.approx(best, rel=1e-9, abs=1e-9)
    assert found.bound <= best + 1e-9


def test_equal_costs_and_one_analyte_ask_for_neymans_total() -> None:
    """Two ways to the same number: one by one, and by bound and search."""
    site = Strata((0.64, 0.22, 0.14), (18.0, 45.0, 90.0), (None, 40, None))
    for target in (4.0, 9.0, 25.0, 81.0):
        found, _ = least_cost(site, [Demand(site.sigmas, target)])
        assert found.proven
        assert found.value == sum(smallest_total(site, target, allocation="neyman"))


def test_dear_strata_get_fewer() -> None:
    """Closed form before rounding: shares fall with √c, so four times the cost halves a share."""
    site = Strata((0.5, 0.5), (10.0, 10.0), (None, None), costs=(25.0, 100.0))
    found, shared = least_cost(site, [Demand(site.sigmas, 0.25)])
    assert shared.counts[0] == pytest.approx(2 * shared.counts[1])
    assert found.counts[0] == pytest.approx(2 * found.counts[1], abs=3)


def test_a_linear_program_in_parts_of_results_costs_hardly_less() -> None:
    """Another library: scipy's HiGHS bounds the cost from below; whole counts stay near it.

    At most one result a limit is left over, and rounding adds no more than that for each analyte.
    """
    from tests.benchmarks.strata import linear_program

    rng = np.random.default_rng(11)
    weights, sigmas = rng.dirichlet(np.full(25, 2.0)), rng.lognormal(2, 0.6, (3, 25))
    costs = tuple(float(c) for c in rng.uniform(20, 300, 25))
    site = Strata(tuple(weights), (1.0,) * 25, (None,) * 25, costs=costs)
    demands = [Demand(tuple(s), float((weights * s).sum()) ** 2 / 200) for s in sigmas]
    found, _ = least_cost(site, demands)
    least = linear_program(site, demands, most=60)
    assert max(found.counts) < 60
    assert least * (1 - 1e-9) <= found.value <= least + 3 * max(costs)
    assert found.bound <= found.value


def test_a_thousand_strata_stay_close_to_the_bound() -> None:
    """Where the search is cut off, what remains is said: here under a tenth of a percent."""
    rng = np.random.default_rng(5)
    weights = rng.dirichlet(np.full(1000, 2.0))
    sigmas = rng.lognormal(2, 0.8, (3, 1000))
    costs = tuple(float(c) for c in rng.uniform(20, 300, 1000))
    site = Strata(tuple(weights), (1.0,) * 1000, (None,) * 1000, costs=costs)
    demands = [Demand(tuple(s), float((weights * s).sum()) ** 2 / 8000) for s in sigmas]
    found, _ = least_cost(site, demands)
    assert found.bound <= found.value <= found.bound * 1.002
    for demand in demands:
        reached = predicted_variance(site.weights, demand.sigmas, found.counts)
        assert reached <= demand.target_variance * (1 + 1e-8)


def test_money_for_everything_takes_every_list_whole() -> None:
    """The variance is 0 and nothing is left to choose."""
    site = Strata((0.5, 0.5), (1.0, 2.0), (4, 6), costs=(10.0, 20.0))
    assert smallest_variance(site, 160.0).counts == (4, 6)
    assert smallest_variance(site, 160.0).value == 0.0


@pytest.mark.parametrize(
    ("costs", "money", "said"),
    [((10.0, 20.0), 50.0, "50 does not buy.*cost 60"), ((0.0, 1.0), 50.0, "costs nothing")],
)
def test_money_that_buys_nothing_is_refused(
    costs: tuple[float, float], money: float, said: str
) -> None:
    """One line each, with the amount that the fewest results cost."""
    site = Strata((0.5, 0.5), (1.0, 2.0), (None, None), costs=costs)
    with pytest.raises(DesignError, match=said):
        smallest_variance(site, money)


def test_ceilings_below_their_floors_are_refused() -> None:
    """Bounds that cross leave no counts."""
    with pytest.raises(DesignError, match="at most 2 results but must have at least 3"):
        Strata((0.5, 0.5), (1.0, 1.0), (None, None), floor=3, ceilings=(None, 2))


def test_floors_by_stratum_hold() -> None:
    """A floor of its own is kept, the common one elsewhere."""
    site = Strata((0.5, 0.5), (1.0, 1.0), (None, None), least=(2, 7))
    found, _ = least_cost(site, [Demand((1.0, 1.0), 1e3)])
    assert found.counts == (2, 7)
    assert math.isclose(site.cost((2, 7)), 9.0)

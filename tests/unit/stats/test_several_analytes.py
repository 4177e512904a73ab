"""Several analytes at once, against closed forms, a general solver and its own derivative."""

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.allocation import unrounded_shares, unrounded_total
from fieldplan.stats.several_analytes import Demand, balance
from fieldplan.stats.strata import Strata
from fieldplan.stats.stratified import predicted_variance

SITE = Strata((0.64, 0.22, 0.14), (18.0, 45.0, 90.0), (None,) * 3)
LEAD = Demand(SITE.sigmas, 9.0, "lead")


@st.composite
def demands(draw: st.DrawFn) -> tuple[Strata, list[Demand]]:
    """Draw two to five strata and one to four analytes, some strata short lists."""
    size, analytes = draw(st.integers(2, 5)), draw(st.integers(1, 4))
    raw = [draw(st.floats(0.1, 1)) for _ in range(size)]
    lists = tuple(draw(st.none() | st.integers(4, 40)) for _ in range(size))
    costs = tuple(draw(st.floats(20, 300)) for _ in range(size))
    weights = tuple(x / sum(raw) for x in raw)
    site = Strata(weights, (1.0,) * size, lists, costs=costs)
    asked = []
    for _ in range(analytes):
        sigmas = tuple(draw(st.floats(1, 30)) for _ in range(size))
        floors = predicted_variance(weights, sigmas, site.floors, lists)
        asked.append(Demand(sigmas, floors * draw(st.floats(0.05, 1.2)) + 1e-9))
    return site, asked


def test_one_analyte_is_shared_as_neyman_does() -> None:
    """Closed form: Cochran 1977, sec. 5.9, with W σ shares."""
    found = balance(SITE, [LEAD])
    total = unrounded_total(SITE, 9.0)
    assert found.counts == pytest.approx(unrounded_shares(SITE, total, allocation="neyman"))
    assert found.multipliers == pytest.approx((total,))
    assert found.controlling == (0,)


def test_one_analyte_with_costs_is_shared_for_the_least_cost() -> None:
    """Closed form: cost (Σ W σ √c)² / V (Cochran 1977, eq. 5.24)."""
    dear = replace(SITE, costs=(75.0, 75.0, 300.0))
    found = balance(dear, [LEAD])
    total = unrounded_total(dear, 9.0, allocation="cost-optimal")
    shares = unrounded_shares(dear, total, allocation="cost-optimal")
    assert found.counts == pytest.approx(shares)
    parts = zip(dear.weights, dear.sigmas, dear.costs, strict=True)
    least = math.fsum(w * s * math.sqrt(c) for w, s, c in parts) ** 2 / 9.0
    assert found.lowest_cost == pytest.approx(least)


def test_an_analyte_that_asks_little_does_not_control() -> None:
    """Zinc, spread as lead is, with twice the standard error allowed, has no multiplier."""
    easy = Demand(SITE.sigmas, 36.0, "zinc")
    found = balance(SITE, [easy, LEAD])
    assert found.controlling == (1,)
    assert found.shares == pytest.approx((0.0, 1.0), abs=1e-6)
    assert found.counts == pytest.approx(balance(SITE, [LEAD]).counts, rel=1e-6)


def test_floors_that_keep_every_target_leave_nobody_in_control() -> None:
    """Nothing is to be decided where the fewest results allowed are enough."""
    found = balance(SITE, [Demand(SITE.sigmas, 1e6), Demand((1.0, 1.0, 1.0), 1e6)])
    assert found.controlling == ()
    assert found.counts == (2.0, 2.0, 2.0)
    assert found.lowest_cost == pytest.approx(6.0)


@settings(max_examples=40, deadline=None)
@given(demands())
def test_targets_are_kept_and_the_dual_proves_the_cost(case: tuple[Strata, list[Demand]]) -> None:
    """No gap between the cost of the counts and the bound, and slack only at no price."""
    site, asked = case
    found = balance(site, asked)
    cost = site.cost(found.counts)
    assert found.lowest_cost == pytest.approx(cost, rel=1e-4)
    for demand, multiplier in zip(asked, found.multipliers, strict=True):
        reached = predicted_variance(site.weights, demand.sigmas, found.counts, site.populations)
        assert reached <= demand.target_variance * (1 + 1e-4)
        assert multiplier * (1 - reached / demand.target_variance) <= 1e-4 * cost


@settings(max_examples=15, deadline=None)
@given(demands())
def test_a_general_solver_finds_no_cheaper_counts(case: tuple[Strata, list[Demand]]) -> None:
    """Another library: scipy's SLSQP on the counts themselves, from the fullest start."""
    from scipy.optimize import NonlinearConstraint, minimize

    site, asked = case
    costs, weights = np.array(site.costs), np.array(site.weights)
    listed = np.array([0.0 if size is None else 1 / size for size in site.populations])

    def slack(x: np.ndarray) -> np.ndarray:
        rows = [(weights * np.array(d.sigmas)) ** 2 / d.target_variance for d in asked]
        return np.array([1 - r @ (1 / x - listed) for r in rows])

    found = balance(site, asked)
    bounds = [(float(f), min(cap, 3e3)) for f, cap in zip(site.floors, site.caps, strict=True)]
    start = np.minimum(np.array(found.counts) * 1.5 + 1, [b for _, b in bounds])
    peer = minimize(
        lambda x: costs @ x / 1000,
        start,
        jac=lambda x: costs / 1000,
        method="SLSQP",
        bounds=bounds,
        constraints=NonlinearConstraint(slack, 0, np.inf),
        options={"maxiter": 500, "ftol": 1e-12},
    )
    if peer.success and slack(peer.x).min() > -1e-7:
        assert site.cost(found.counts) == pytest.approx(peer.fun * 1000, rel=2e-4)


def test_a_multiplier_is_what_a_wider_target_saves() -> None:
    """The derivative by difference: 0.1 % more variance for zinc, and for lead."""
    zinc = Demand((40.0, 30.0, 40.0), 9.0, "zinc")
    found = balance(SITE, [LEAD, zinc])
    assert set(found.controlling) == {0, 1}
    for position in (0, 1):
        asked = [LEAD, zinc]
        wider = replace(asked[position], target_variance=9.0 * 1.001)
        asked[position] = wider
        saved = found.lowest_cost - balance(SITE, asked).lowest_cost
        assert saved == pytest.approx(0.001 * found.multipliers[position], rel=5e-3)


def test_the_joint_spread_shares_results_as_the_balance_does() -> None:
    """Neyman shares for it are the unrounded counts."""
    zinc = Demand((40.0, 30.0, 40.0), 9.0)
    found = balance(SITE, [LEAD, zinc])
    joint = replace(SITE, sigmas=found.sigmas)
    shares = unrounded_shares(joint, math.fsum(found.counts), allocation="neyman")
    assert found.counts == pytest.approx(shares, rel=1e-6)


def test_a_target_that_ceilings_forbid_is_named_with_what_they_give() -> None:
    """By hand: 10 results each give √(0.25·100/10·2) = 2.236."""
    site = Strata((0.5, 0.5), (1.0, 1.0), (None, None), ceilings=(10, 10))
    with pytest.raises(DesignError, match=r"lead: .* of 2 is out of reach.* 20 .* give 2\.236"):
        balance(site, [Demand((10.0, 10.0), 4.0, "lead")])


def test_a_result_that_costs_nothing_is_refused() -> None:
    """A price of 0 would ask for results without end."""
    with pytest.raises(DesignError, match="costs nothing"):
        balance(replace(SITE, costs=(0.0, 1.0, 1.0)), [LEAD])

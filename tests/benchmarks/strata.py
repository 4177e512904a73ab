"""Time the sharing of results between 1,000 strata, beside a general solver of linear programs."""

import numpy as np

from fieldplan.stats.allocation import Allocation, share_total, smallest_total
from fieldplan.stats.least_cost import least_cost, smallest_variance
from fieldplan.stats.several_analytes import Demand
from fieldplan.stats.strata import Strata
from tests.benchmarks.patches import Row
from tests.benchmarks.placement import seconds

STRATA = 1000
AIM_S = 1.0


def many_strata(analytes: int = 3) -> tuple[Strata, list[Demand]]:
    """Invent strata of uneven size, spread and cost, and analytes that ask for about 8 each."""
    rng = np.random.default_rng(20261201)
    weights = rng.dirichlet(np.full(STRATA, 2.0))
    sigmas = rng.lognormal(2.0, 0.8, (analytes, STRATA))
    costs = tuple(float(c) for c in rng.uniform(20, 300, STRATA))
    site = Strata(
        tuple(float(w) for w in weights),
        tuple(float(s) for s in sigmas[0]),
        (None,) * STRATA,
        costs=costs,
    )
    demands = [
        Demand(tuple(float(s) for s in own), float((weights * own).sum()) ** 2 / (8 * STRATA))
        for own in sigmas
    ]
    return site, demands


def linear_program(site: Strata, demands: list[Demand], *, most: int = 180) -> float:
    """Find the least cost of parts of results as a linear program with scipy's HiGHS.

    One variable for every result beyond the floor: what it costs, and by how much it lowers each
    variance. The falls of a stratum shrink, so the program takes them in order by itself.
    """
    from scipy.optimize import linprog

    floors, costs = np.array(site.floors), np.array(site.costs)
    numbers = np.arange(floors.min(), most)
    rows, needed = [], []
    for demand in demands:
        spreads = (np.array(site.weights) * np.array(demand.sigmas)) ** 2 / demand.target_variance
        rows.append(-np.outer(spreads, 1 / numbers - 1 / (numbers + 1)).ravel())
        needed.append(1 - float((spreads / floors).sum()))
    found = linprog(
        np.repeat(costs, len(numbers)),
        A_ub=np.array(rows),
        b_ub=np.array(needed),
        bounds=(0, 1),
        method="highs",
    )
    return float(found.fun or 0.0) + float(costs @ floors)


def measured() -> list[Row]:
    """Time every way of sharing; the peer finds the least cost for three analytes, unrounded."""
    site, demands = many_strata()
    target = demands[0].target_variance
    peer = seconds(lambda: linear_program(site, demands), 1)
    name = "HiGHS, three analytes, unrounded"
    ways: tuple[Allocation, ...] = (
        "proportional",
        "neyman",
        "cost-optimal",
        "equal-precision",
    )
    rows = [
        Row(
            f"smallest total, {way}",
            AIM_S,
            seconds(lambda way=way: smallest_total(site, target, allocation=way), 3),  # type: ignore[misc]
            name,
            peer,
        )
        for way in ways
    ]
    money = site.cost(share_total(site, 8 * STRATA, allocation="cost-optimal"))
    one = demands[:1]
    rows += [
        Row(
            "least cost, one analyte", AIM_S, seconds(lambda: least_cost(site, one), 3), name, peer
        ),
        Row(
            "least cost, three analytes",
            AIM_S,
            seconds(lambda: least_cost(site, demands), 3),
            name,
            peer,
        ),
        Row(
            "smallest variance for a budget",
            AIM_S,
            seconds(lambda: smallest_variance(site, money), 3),
            name,
            peer,
        ),
    ]
    return rows

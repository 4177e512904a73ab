"""Whole counts of least cost for targets, or of smallest variance for money.

Where results cost differently, giving them out one by one is best only at the money it happens to
spend; between those points a search over whole counts closes the gap.
"""

import math
from collections.abc import Sequence

import numpy as np

from fieldplan.base.errors import DesignError
from fieldplan.stats.allocation import share_total
from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.several_analytes import Balance, Bounds, Demand, balance, bounds_of
from fieldplan.stats.strata import Strata
from fieldplan.stats.whole_search import Limited, Numbers, WholeCounts, search


def least_cost(strata: Strata, demands: Sequence[Demand]) -> tuple[WholeCounts, Balance]:
    """Find the whole counts of least cost that keep the target of every analyte.

    Parameters
    ----------
    strata : Strata
        Its weights, lists, floors, ceilings and costs; its sigmas are not read. Without costs the
        least cost is the fewest results.
    demands : sequence of Demand
        One an analyte; one alone is the case of a single target.

    Returns
    -------
    counts : WholeCounts
        ``value`` is Σ c n.
    shared : Balance
        Of the unrounded problem, with the analytes that control.

    Raises
    ------
    DesignError
        A cost is 0, or a target is out of reach.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (1.0,) * 3, (None,) * 3, costs=(75, 75, 300))
    >>> found, _ = least_cost(site, [Demand((18, 45, 90), 81.0)])
    >>> found.counts, found.value, found.proven
    ((6, 6, 4), 2100.0, True)
    """
    problem = bounds_of(strata, demands)
    shared = balance(strata, demands)
    nothing = np.zeros_like(problem.spreads)
    limited = Limited(
        up=np.vstack([problem.costs, nothing]),
        down=np.vstack([np.zeros_like(problem.costs), problem.spreads]),
        limits=np.ones(len(demands)),
        floors=problem.floors,
        caps=problem.caps,
        step=_common_step(strata.unit_costs),
    )
    prices = np.array(shared.duals)
    return search(limited, prices, _trimmed(problem, prices, np.array(shared.counts))), shared


def _common_step(costs: Sequence[float]) -> float:
    """Give the largest amount that divides every cost, where all are whole; else 0."""
    if any(cost != round(cost) for cost in costs):
        return 0.0
    return float(math.gcd(*(round(cost) for cost in costs)))


def _trimmed(problem: Bounds, prices: Numbers, unrounded: Numbers) -> Numbers:
    """Round up, then take results away where that saves most, as long as all targets are kept."""
    counts = np.minimum(np.ceil(unrounded * (1 + 1e-6)), problem.caps)
    together = prices @ problem.spreads
    while True:
        fewer = np.maximum(counts - 1, problem.floors)
        rise = 1 / fewer - 1 / counts
        loads = problem.loads(counts)[:, None] + problem.spreads * rise
        free = (fewer < counts) & np.all(loads <= 1 + 1e-9, axis=0)
        if not free.any():
            return counts
        saved = np.where(free, problem.costs - together * rise, -np.inf)
        counts[int(saved.argmax())] -= 1


def smallest_variance(strata: Strata, money: float) -> WholeCounts:
    """Find the whole counts of smallest variance that an amount of money buys.

    Parameters
    ----------
    strata : Strata
        With costs; without, every result costs 1.
    money : float
        For results alone: mobilisation is taken off before.

    Returns
    -------
    WholeCounts
        ``value`` is the variance of the mean.

    Raises
    ------
    DesignError
        The money does not buy the floors, or a result costs nothing.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None,) * 3, costs=(75, 75, 300))
    >>> found = smallest_variance(site, 2100.0)
    >>> found.counts, round(found.value**0.5, 3)
    ((6, 6, 4), 8.84)
    """
    if min(strata.unit_costs) <= 0:
        message = "a result that costs nothing could be bought without end; type its cost."
        raise DesignError(message)
    if not meets(strata.cost(strata.floors), money):
        message = (
            f"{money:g} does not buy the fewest results allowed, which cost "
            f"{strata.cost(strata.floors):g}."
        )
        raise DesignError(message)
    if meets(strata.cost(strata.caps), money):
        return WholeCounts(strata.caps, *(strata.variance(strata.caps),) * 2)
    costs = np.array(strata.unit_costs, dtype=float)
    spreads = np.array([w * s for w, s in zip(strata.weights, strata.sigmas, strict=True)]) ** 2
    start, price = _spent(strata, costs, spreads, money=money)
    listed = math.fsum(
        a / size for a, size in zip(spreads, strata.populations, strict=True) if size is not None
    )
    limited = Limited(
        up=np.vstack([np.zeros_like(costs), costs / money]),
        down=np.vstack([spreads, np.zeros_like(costs)]),
        limits=np.ones(1),
        floors=np.array(strata.floors, dtype=float),
        caps=np.array(strata.caps, dtype=float),
    )
    found = search(limited, np.array([price * money]), start)
    return WholeCounts(found.counts, found.value - listed, found.bound - listed)


def _spent(
    strata: Strata, costs: Numbers, spreads: Numbers, *, money: float
) -> tuple[Numbers, float]:
    """Give out results one by one for the money, then spend what is left; with the last price."""

    def beyond(total: int) -> bool:
        return not meets(strata.cost(share_total(strata, total, allocation="cost-optimal")), money)

    total = smallest(beyond, sum(strata.floors), strata.most, back=0)
    more = np.array(share_total(strata, total, allocation="cost-optimal"), dtype=float)
    counts = np.array(share_total(strata, total - 1, allocation="cost-optimal"), dtype=float)
    given = int((more - counts).argmax())
    price = float(spreads[given] / (counts[given] * more[given]) / costs[given])
    caps = np.array(strata.caps)
    while True:
        left = money * (1 + 1e-9) - float(costs @ counts)
        worth = np.where((counts < caps) & (costs <= left), spreads / (counts * (counts + 1)), 0.0)
        if worth.max() <= 0:
            return counts, price
        counts[int(worth.argmax())] += 1

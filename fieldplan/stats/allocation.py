"""How a number of results is shared between strata, exactly and in whole numbers.

Three ways give out results one after the other, and each is the best of its kind at every total.
*Neyman*: each to the stratum where the variance of the mean falls most; the variance is a sum of
convex terms, so this ends at its minimum (Wright 2012, The American Statistician 66:217).
*Cost-optimal*: each to the stratum where it falls most for the money; no other counts of that
cost or less have a smaller variance. *Equal precision*: each to the stratum whose own mean is
least certain; no other counts of that total have a smaller largest one. *Proportional* rounds
every share of the total up or down; among the roundings that give the total it takes the one of
smallest variance.
"""

import math
from collections.abc import Callable, Sequence
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.one_by_one import (
    FallOfVariance,
    Order,
    OwnVariance,
    given_out,
    topped_up,
)
from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.strata import Strata

Allocation = Literal["proportional", "neyman", "cost-optimal", "equal-precision"]


def unrounded_total(
    strata: Strata, target_variance: float, *, allocation: Allocation = "neyman"
) -> float:
    """Give the total number of results for a target variance, before any rounding or floor.

    Parameters
    ----------
    strata : Strata
    target_variance : float
        Tolerated variance of the mean, above 0.
    allocation : str
        How results are shared.

    Notes
    -----
    With shares q that sum to 1, Σ (W² σ² / q) / (V + Σ W² σ²/N): Cochran (1977), Sampling
    Techniques, 3rd ed., sec. 5.9. It is (Σ W σ)² above the line for Neyman, Σ W σ² for
    proportional, (Σ W σ √c)(Σ W σ/√c) for the least cost. The term with N is 0 for an area.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> round(unrounded_total(site, 81.0), 2)
    14.29
    >>> round(unrounded_total(site, 81.0, allocation="proportional"), 2)
    22.06
    """
    sizes = _sizes(strata, allocation)
    spreads = _sizes(strata, "neyman")
    below = target_variance + math.fsum(
        spread**2 / size
        for spread, size in zip(spreads, strata.populations, strict=True)
        if size is not None
    )
    above = math.fsum(spread**2 / size for spread, size in zip(spreads, sizes, strict=True))
    return above * math.fsum(sizes) / below


def unrounded_shares(strata: Strata, total: float, *, allocation: Allocation) -> list[float]:
    """Share a total before any rounding, floor, list or ceiling.

    Notes
    -----
    In proportion to W (proportional), W σ (Neyman), W σ/√c (least cost) or σ² (equal precision).

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> [round(n, 2) for n in unrounded_shares(site, 15, allocation="neyman")]
    [5.08, 4.37, 5.56]
    >>> dear = Strata(site.weights, site.sigmas, site.populations, costs=(75, 75, 300))
    >>> [round(n, 2) for n in unrounded_shares(dear, 15, allocation="cost-optimal")]
    [6.23, 5.36, 3.41]
    """
    sizes = _sizes(strata, allocation)
    return [total * size / math.fsum(sizes) for size in sizes]


def _sizes(strata: Strata, allocation: Allocation) -> list[float]:
    """Give what each stratum's share is proportional to."""
    if allocation == "proportional":
        return list(strata.weights)
    if allocation == "equal-precision":
        return [spread**2 for spread in strata.levelled or strata.sigmas]
    spreads = [weight * sigma for weight, sigma in zip(strata.weights, strata.sigmas, strict=True)]
    if allocation == "neyman":
        return spreads
    return [a / math.sqrt(c) for a, c in zip(spreads, strata.unit_costs, strict=True)]


def check_total(strata: Strata, total: int) -> None:
    """Refuse a total below the floors or above the lists and ceilings."""
    least = sum(strata.floors)
    if total < least:
        each = f"at least {strata.floor} each" if not strata.least else "their floors"
        message = (
            f"{total} results cannot fill {len(strata.weights)} strata with {each}; "
            f"ask for {least} or more, or lower the floor."
        )
        raise DesignError(message)
    if total > strata.most:
        message = f"{total} results are more than the {strata.most} that can be had."
        raise DesignError(message)


def share_total(strata: Strata, total: int, *, allocation: Allocation) -> list[int]:
    """Share a total number of results between strata in whole numbers.

    Parameters
    ----------
    strata : Strata
    total : int
        From the sum of the floors up to the sum of the lists and ceilings.
    allocation : str
        How results are shared.

    Raises
    ------
    DesignError
        The total is below the floors or above the lists and ceilings.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> share_total(site, 15, allocation="neyman")
    [5, 4, 6]
    >>> share_total(site, 22, allocation="proportional")
    [14, 4, 4]
    >>> share_total(site, 50, allocation="equal-precision")
    [2, 10, 38]
    """
    check_total(strata, total)
    if allocation == "proportional":
        return _proportional(strata, total)
    return given_out(_order(strata, allocation), strata.floors, strata.caps, total=total)


def _order(strata: Strata, allocation: Allocation) -> Order:
    if allocation == "equal-precision":
        unseen = (0.0 if size is None else 1 / size for size in strata.populations)
        return OwnVariance(tuple(_sizes(strata, allocation)), tuple(unseen))
    costs = strata.unit_costs if allocation == "cost-optimal" else (1.0,) * len(strata.weights)
    spreads = _sizes(strata, "neyman")
    return FallOfVariance(tuple(a * a / c for a, c in zip(spreads, costs, strict=True)))


def _proportional(strata: Strata, total: int) -> list[int]:
    shares = _held_shares(strata, total)
    counts = [math.floor(share + 1e-9) for share in shares]
    caps = [math.ceil(share - 1e-9) for share in shares]
    return topped_up(counts, _order(strata, "neyman"), caps, total=total)


def _held_shares(strata: Strata, total: int) -> list[float]:
    """Share in proportion to W, held between floor and cap: clip(factor · W) that sums up."""
    bounds = list(zip(strata.weights, strata.floors, strata.caps, strict=True))
    factor = _common_factor(bounds, total)
    shares = [min(max(factor * weight, float(f)), float(c)) for weight, f, c in bounds]
    free = [k for k, (weight, f, c) in enumerate(bounds) if f < factor * weight < c]
    if free:
        held = math.fsum(shares) - math.fsum(shares[k] for k in free)
        weight = math.fsum(bounds[k][0] for k in free)
        for k in free:
            shares[k] = (total - held) * bounds[k][0] / weight
    return shares


def _common_factor(bounds: Sequence[tuple[float, int, int]], total: int) -> float:
    """Find the factor at which the held shares sum up to the total.

    Their sum is piecewise linear in the factor: a stratum grows from floor/W on, up to cap/W.
    """
    turns = [(f / weight, weight) for weight, f, _ in bounds]
    turns += [(c / weight, -weight) for weight, _, c in bounds]
    reached, slope, here = float(sum(f for _, f, _ in bounds)), 0.0, 0.0
    for turn, change in sorted(turns):
        if reached + slope * (turn - here) >= total and slope > 0:
            break
        reached += slope * (turn - here)
        here = turn
        slope += change
    return here + (total - reached) / slope if slope > 0 and reached < total else here


def smallest_total(strata: Strata, target_variance: float, *, allocation: Allocation) -> list[int]:
    """Share the smallest whole total that keeps a target variance.

    Parameters
    ----------
    strata : Strata
    target_variance : float
        Tolerated variance of the mean, above 0.
    allocation : str
        How results are shared.

    Returns
    -------
    list of int
        Results per stratum, as ``share_total`` shares them.

    Raises
    ------
    DesignError
        The target asks for more results than can be had.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> smallest_total(site, 81.0, allocation="neyman")
    [5, 4, 6]
    """
    return first_that(
        strata,
        lambda counts: meets(strata.variance(counts), target_variance),
        never_above=target_variance,
        allocation=allocation,
    )


def lowest_variance(strata: Strata, total: int, *, allocation: Allocation) -> float:
    """Bound the variance of this and every smaller total from below.

    Where results are given out one by one, the variance falls with every one. Of a proportional
    total no share is rounded to more than the next whole number, and the shares only grow with
    the total; the bound shares it as Neyman does under these caps.
    """
    if allocation != "proportional":
        return strata.variance(share_total(strata, total, allocation=allocation))
    caps = [math.ceil(share - 1e-9) for share in _held_shares(strata, total)]
    order = _order(strata, "neyman")
    return strata.variance(given_out(order, strata.floors, caps, total=total))


def first_that(
    strata: Strata,
    fits: Callable[[list[int]], bool],
    *,
    never_above: float,
    allocation: Allocation,
) -> list[int]:
    """Share the smallest total whose counts fit.

    Parameters
    ----------
    strata : Strata
    fits : callable
        Takes the counts of a total.
    never_above : float
        A variance; no counts of a larger variance fit, so their totals are not tried.
    allocation : str
        How results are shared.

    Returns
    -------
    list of int
        Results per stratum.

    Raises
    ------
    DesignError
        Nothing fits up to the largest total.

    Examples
    --------
    >>> site = Strata((0.5, 0.5), (2.0, 4.0), (None, None))
    >>> first_that(site, lambda counts: min(counts) >= 5, never_above=9.0, allocation="neyman")
    [5, 9]
    """
    low, high = sum(strata.floors), strata.most

    def near(total: int) -> bool:
        return meets(lowest_variance(strata, total, allocation=allocation), never_above)

    for total in range(smallest(near, low, high, back=0), high + 1):
        counts = share_total(strata, total, allocation=allocation)
        if fits(counts):
            return counts
    allowed = f"the {high} results that the ceilings allow"
    message = (
        f"the target asks for more than {allowed if any(strata.ceilings) else f'{high} results'}; "
        "allow a larger error, or look at the standard deviations again."
    )
    raise DesignError(message)

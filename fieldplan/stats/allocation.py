"""How a number of results is shared between strata, exactly and in whole numbers.

Both ways are exact. *Neyman* gives the smallest variance that whole numbers allow: the variance
of a stratified mean is a sum of convex terms, so results given one after the other to the stratum
that gains most end at the optimum (Wright 2012, The American Statistician 66:217).
*Proportional* rounds every share of the total up or down; among the roundings that give the
total it takes the one of smallest variance.
"""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from heapq import heapify, heappop, heappush
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import MOST, meets, smallest
from fieldplan.stats.stratified import predicted_variance

Allocation = Literal["proportional", "neyman"]


@dataclass(frozen=True)
class Strata:
    """What the sharing of results depends on; one entry a stratum in every tuple.

    Parameters
    ----------
    weights, sigmas : tuple of float
        Shares of the population (sum 1) and standard deviations, all above 0.
    populations : tuple of (int or None)
        N of a list; None for an area.
    floor : int
        Fewest results in any stratum; a list shorter than that is taken whole.
    """

    weights: tuple[float, ...]
    sigmas: tuple[float, ...]
    populations: tuple[int | None, ...]
    floor: int = 2

    @property
    def caps(self) -> tuple[int, ...]:
        """Most results a stratum can give."""
        return tuple(MOST if size is None else size for size in self.populations)

    @property
    def floors(self) -> tuple[int, ...]:
        """Fewest results a stratum must give."""
        return tuple(min(self.floor, cap) for cap in self.caps)

    @property
    def most(self) -> int:
        """All results that can be had."""
        return min(MOST, sum(self.caps))

    def variance(self, counts: Sequence[float]) -> float:
        """Variance of the mean from these counts."""
        return predicted_variance(self.weights, self.sigmas, counts, self.populations)


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
        ``neyman`` or ``proportional``.

    Notes
    -----
    Neyman (Σ W σ)² / (V + Σ W² σ²/N), proportional Σ W σ² / (V + Σ W² σ²/N): Cochran (1977),
    Sampling Techniques, 3rd ed., sec. 5.9. The term with N is 0 for an area.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> round(unrounded_total(site, 81.0), 2)
    14.29
    >>> round(unrounded_total(site, 81.0, allocation="proportional"), 2)
    22.06
    """
    below = target_variance
    for weight, sigma, size in zip(strata.weights, strata.sigmas, strata.populations, strict=True):
        below += 0.0 if size is None else (weight * sigma) ** 2 / size
    pairs = list(zip(strata.weights, strata.sigmas, strict=True))
    if allocation == "neyman":
        return math.fsum(weight * sigma for weight, sigma in pairs) ** 2 / below
    return math.fsum(weight * sigma**2 for weight, sigma in pairs) / below


def unrounded_shares(strata: Strata, total: float, *, allocation: Allocation) -> list[float]:
    """Share a total in proportion to W σ (Neyman) or W, before any rounding, floor or list.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> [round(n, 2) for n in unrounded_shares(site, 15, allocation="neyman")]
    [5.08, 4.37, 5.56]
    """
    sizes = _sizes(strata, allocation)
    return [total * size / math.fsum(sizes) for size in sizes]


def _sizes(strata: Strata, allocation: Allocation) -> list[float]:
    if allocation == "proportional":
        return list(strata.weights)
    return [weight * sigma for weight, sigma in zip(strata.weights, strata.sigmas, strict=True)]


def check_total(strata: Strata, total: int) -> None:
    """Refuse a total below the floors or above the lists."""
    least = sum(strata.floors)
    if total < least:
        message = (
            f"{total} results cannot fill {len(strata.weights)} strata with at least "
            f"{strata.floor} each; ask for {least} or more, or lower the floor."
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
        From the sum of the floors up to the sum of the lists.
    allocation : str
        ``neyman`` or ``proportional``.

    Raises
    ------
    DesignError
        The total is below the floors or above the lists.

    Examples
    --------
    >>> site = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))
    >>> share_total(site, 15, allocation="neyman")
    [5, 4, 6]
    >>> share_total(site, 22, allocation="proportional")
    [14, 4, 4]
    """
    check_total(strata, total)
    return _neyman(strata, total) if allocation == "neyman" else _proportional(strata, total)


def gain(spread: float, n: float) -> float:
    """Give by how much variance falls when n results become n + 1; ``spread`` is W σ."""
    return spread**2 / (n * (n + 1))


def _neyman(strata: Strata, total: int) -> list[int]:
    spreads = _sizes(strata, "neyman")
    bounds = list(zip(spreads, strata.floors, strata.caps, strict=True))

    def above(threshold: float) -> list[int]:
        """Take every result whose gain is at least the threshold."""
        counts = []
        for spread, floor, cap in bounds:
            root = (math.sqrt(1 + 4 * spread**2 / threshold) - 1) / 2
            counts.append(min(max(math.floor(root) + 1, floor), cap))
        return counts

    # Bracket the gain of the last result, then give out the few that remain one by one.
    low, high = max(spreads) ** 2 * 1e-18, max(spreads) ** 2
    for _ in range(200):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if sum(above(middle)) > total else (low, middle)
        if high / low < 1 + 1e-12:
            break
    counts = [max(n - 1, floor) for n, floor in zip(above(high), strata.floors, strict=True)]
    return _topped_up(counts, spreads, strata.caps, total=total)


def _topped_up(
    counts: Sequence[int], spreads: Sequence[float], caps: Sequence[int], *, total: int
) -> list[int]:
    """Give out what is left of a total one by one: each to the stratum that gains most.

    Strata at their cap get no more; of equals the first comes first.
    """
    filled = list(counts)
    waiting = [
        (-gain(spread, n), k)
        for k, (spread, n, cap) in enumerate(zip(spreads, filled, caps, strict=True))
        if n < cap
    ]
    heapify(waiting)
    for _ in range(total - sum(filled)):
        _, k = heappop(waiting)
        filled[k] += 1
        if filled[k] < caps[k]:
            heappush(waiting, (-gain(spreads[k], filled[k]), k))
    return filled


def _proportional(strata: Strata, total: int) -> list[int]:
    ideal = _held_shares(strata, total)
    counts = [math.floor(share + 1e-9) for share in ideal]
    caps = [math.ceil(share - 1e-9) for share in ideal]
    spreads = _sizes(strata, "neyman")
    return _topped_up(counts, spreads, caps, total=total)


def _held_shares(strata: Strata, total: int) -> list[float]:
    """Share in proportion to W, held between floor and list: clip(factor · W) that sums up."""
    bounds = list(zip(strata.weights, strata.floors, strata.caps, strict=True))

    def held(factor: float) -> list[float]:
        return [min(max(factor * weight, float(f)), float(c)) for weight, f, c in bounds]

    low, high = 0.0, (total + 1) / min(strata.weights)
    for _ in range(200):
        middle = (low + high) / 2
        if middle in (low, high):
            break
        low, high = (low, middle) if math.fsum(held(middle)) > total else (middle, high)
    shares = held(low)
    free = {k for k, (w, f, c) in enumerate(bounds) if f < low * w < c}
    fixed = math.fsum(share for k, share in enumerate(shares) if k not in free)
    weight = math.fsum(bounds[k][0] for k in free)
    for k in free:
        shares[k] = (total - fixed) * bounds[k][0] / weight
    return shares


def smallest_total(strata: Strata, target_variance: float, *, allocation: Allocation) -> list[int]:
    """Share the smallest whole total that keeps a target variance.

    Parameters
    ----------
    strata : Strata
    target_variance : float
        Tolerated variance of the mean, above 0.
    allocation : str
        ``neyman`` or ``proportional``.

    Returns
    -------
    list of int
        Results per stratum; of all that have this total, those of smallest variance.

    Raises
    ------
    DesignError
        The target asks for more results than any campaign can collect.

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

    Neyman's own variance falls with every result. Of a proportional total no share is rounded
    to more than the next whole number, and the shares only grow with the total.
    """
    if allocation == "neyman":
        return strata.variance(_neyman(strata, total))
    return strata.variance([math.ceil(share - 1e-9) for share in _held_shares(strata, total)])


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
        ``neyman`` or ``proportional``.

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
    message = (
        f"the target asks for more than {high} results; allow a larger error, "
        "or look at the standard deviations again."
    )
    raise DesignError(message)

"""What composites cost: the cheapest for a target, the most precise for a budget."""

import math
from collections.abc import Callable
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.composites import ErrorParts, check_increments, check_replicates
from fieldplan.stats.precision import MOST, whole

MOST_INCREMENTS = 1000
"""No composite of more is proposed unless the caller allows it: no crew takes so many."""


@dataclass(frozen=True)
class CompositePrices:
    """Money for one composite: ``composite`` once (visit, jar, analyses), ``increment`` each."""

    increment: float
    composite: float

    def __post_init__(self) -> None:
        """Refuse prices with which no cheapest design exists."""
        for name in ("increment", "composite"):
            value = getattr(self, name)
            if not (value >= 0 and math.isfinite(value)):
                message = f"the price of one {name} is {value!r}; it must be 0 or more."
                raise DesignError(message)
        if self.increment + self.composite == 0:
            message = (
                "an increment and a composite both cost 0, so nothing sets a cheapest design; type "
                "their prices in the [cost] table."
            )
            raise DesignError(message)

    def cost(self, replicates: float, increments: float) -> float:
        """Money for so many composites of so many increments."""
        return replicates * (self.composite + increments * self.increment)


@dataclass(frozen=True)
class Composites:
    """So many composites (``replicates``) of so many ``increments``, with what they give.

    ``variance`` is that of the mean of the replicates; ``cost`` without mobilisation.
    """

    replicates: int
    increments: int
    variance: float
    cost: float

    @property
    def standard_error(self) -> float:
        """Standard error of the mean of the replicates."""
        return math.sqrt(self.variance)


def best_increments(
    parts: ErrorParts, prices: CompositePrices, *, one_place: bool = False
) -> float:
    """Give the increments per composite that buy most precision for the money, unrounded.

    It depends on neither target nor budget. Infinite where increments cost nothing or where a
    composite keeps no error of its own.

    Notes
    -----
    √(averaged/kept · c_composite/c_increment), from the product of variance and cost: Cochran
    (1977), Sampling Techniques, 3rd ed., sec. 10.6.

    Examples
    --------
    >>> round(best_increments(ErrorParts(4.0, 0.0, 1.3**0.5), CompositePrices(1.0, 20.0)), 2)
    15.69
    """
    above = parts.averaged(one_place=one_place) * prices.composite
    below = parts.kept(one_place=one_place) * prices.increment
    if below == 0:
        return math.inf if above > 0 else 1.0
    return math.sqrt(above / below)


@dataclass(frozen=True)
class Limits:
    """Between which numbers a design is sought; the fewest composites are those of an interval."""

    fewest_replicates: int = 2
    fewest_increments: int = 1
    most_increments: int = MOST_INCREMENTS

    def __post_init__(self) -> None:
        """Refuse limits that hold nothing."""
        check_replicates(self.fewest_replicates)
        check_increments(self.fewest_increments)
        if self.most_increments < self.fewest_increments:
            message = (
                f"at most {self.most_increments} increments are allowed but at least "
                f"{self.fewest_increments} asked for; raise the one or lower the other."
            )
            raise DesignError(message)


def cheapest_for_standard_error(
    parts: ErrorParts,
    target: float,
    prices: CompositePrices,
    *,
    limits: Limits | None = None,
    one_place: bool = False,
) -> Composites:
    """Find the cheapest whole numbers of composites and increments for a standard error.

    Parameters
    ----------
    parts : ErrorParts
    target : float
        Tolerated standard error of the mean, above 0.
    prices : CompositePrices
    limits : Limits, optional
    one_place : bool
        See :func:`composite_sigma`.

    Returns
    -------
    Composites
        Of equal cost the one of smaller variance, then of fewer composites.

    Raises
    ------
    DesignError
        The target is not above 0, or asks for more than any campaign can collect.

    Notes
    -----
    For r composites the increments follow from the target. The cost without rounding is convex in
    r, so r is tried outwards from its lowest point until that cost alone exceeds the best found.

    Examples
    --------
    >>> cheapest_for_standard_error(ErrorParts(24.0, 10.0, 5.0), 3.0, CompositePrices(4.0, 90.0))
    Composites(replicates=6, increments=24, variance=8.861111111111112, cost=1116.0)
    """
    if not target > 0:
        message = f"the target standard error is {target!r}; it must be above 0."
        raise DesignError(message)
    held = limits or Limits()
    averaged, kept = parts.averaged(one_place=one_place), parts.kept(one_place=one_place)
    wanted = target**2 * (1 + 1e-9)
    least = max(whole((averaged / held.most_increments + kept) / wanted), held.fewest_replicates)

    def increments(replicates: int) -> int:
        exact = min(bare_increments(replicates), held.most_increments)
        return max(held.fewest_increments, whole(exact))

    def bare_increments(replicates: float) -> float:
        room = replicates * wanted - kept
        if averaged == 0:
            return 0.0
        return averaged / room if room > 0 else math.inf

    def bare_cost(replicates: float) -> float:
        return prices.cost(replicates, max(held.fewest_increments, bare_increments(replicates)))

    def made(replicates: int) -> Composites:
        k = increments(replicates)
        variance = (averaged / k + kept) / replicates
        return Composites(replicates, k, variance, prices.cost(replicates, k))

    return _outwards(made, bare_cost, least, rank=lambda c: (c.cost, c.variance, c.replicates))


def most_precise_for_budget(
    parts: ErrorParts,
    budget: float,
    prices: CompositePrices,
    *,
    limits: Limits | None = None,
    one_place: bool = False,
) -> Composites:
    """Find the whole numbers of composites and increments that a budget makes most precise.

    Parameters
    ----------
    parts : ErrorParts
    budget : float
        Money for composites and increments, mobilisation already taken off.
    prices : CompositePrices
    limits : Limits, optional
    one_place : bool
        See :func:`composite_sigma`.

    Returns
    -------
    Composites
        Of equal variance the cheaper one.

    Raises
    ------
    DesignError
        The budget does not buy the fewest composites of the fewest increments.

    Examples
    --------
    >>> most_precise_for_budget(ErrorParts(4.0, 0.0, 1.14), 72.0, CompositePrices(1.0, 20.0))
    Composites(replicates=2, increments=16, variance=1.1498, cost=72.0)
    """
    held = limits or Limits()
    averaged, kept = parts.averaged(one_place=one_place), parts.kept(one_place=one_place)
    fewest = prices.cost(held.fewest_replicates, held.fewest_increments)
    room = budget * (1 + 1e-12)
    if not fewest <= room:
        message = (
            f"a budget of {budget:g} is too small: {held.fewest_replicates} composites of "
            f"{held.fewest_increments} increments cost {fewest:g}."
        )
        raise DesignError(message)
    # Increments that bring nothing are not bought: where none averages anything one is enough.
    most = held.most_increments if averaged > 0 else held.fewest_increments

    def bare_increments(replicates: float) -> float:
        left = room / replicates - prices.composite
        return min(left / prices.increment if prices.increment > 0 else math.inf, most)

    def made(replicates: int) -> Composites:
        k = math.floor(bare_increments(replicates) + 1e-9)
        variance = (averaged / k + kept) / replicates
        return Composites(replicates, k, variance, prices.cost(replicates, k))

    def bare_variance(replicates: float) -> float:
        if prices.cost(replicates, held.fewest_increments) > room:
            return math.inf
        return (averaged / bare_increments(replicates) + kept) / replicates

    return _outwards(
        made, bare_variance, held.fewest_replicates, rank=lambda c: (c.variance, c.cost)
    )


def _outwards(
    made: Callable[[int], Composites],
    bare: Callable[[float], float],
    least: int,
    *,
    rank: Callable[[Composites], tuple[float, ...]],
) -> Composites:
    """Try numbers of composites outwards from the lowest point of a convex lower bound.

    ``bare`` is what the first entry of ``rank`` would be without rounding; it must be finite at
    its lowest point.
    """
    start = _lowest(bare, least)
    best = made(start)
    for numbers in (range(start - 1, least - 1, -1), range(start + 1, MOST)):
        for number in numbers:
            if bare(number) > rank(best)[0] * (1 + 1e-9):
                break
            best = min(best, made(number), key=rank)
    return best


def _lowest(bare: Callable[[float], float], least: int) -> int:
    """Find the whole number from ``least`` up where a convex function is lowest."""
    low, step = least, 1
    while low + step < MOST and bare(low + step) < bare(low + step // 2):
        step *= 2
    high = min(low + step, MOST)
    while high - low > 2:
        third = (high - low) // 3
        left, right = low + third, high - third
        if bare(left) <= bare(right):
            high = right
        else:
            low = left
    return min(range(low, high + 1), key=bare)

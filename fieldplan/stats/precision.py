"""How many results pin a mean down: to a standard error, or to a half-width."""

import math
from collections.abc import Callable

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.intervals import IntervalKind, t_quantile

MOST = 10_000_000
"""No answer above this many is given: the target is then out of reach in any field campaign."""

_SLACK = 1e-9
"""Relative room for rounding in the last digits, so that 3 / 0.1 asks for 30² and not 30² + 1."""


def whole(number: float) -> int:
    """Round up to a whole number, forgiving a stray last digit.

    Examples
    --------
    >>> whole(8.2), whole((0.3 / 0.1) ** 2)
    (9, 9)
    """
    if number > MOST:
        message = (
            f"the target asks for {number:.3g} results, more than {MOST}; "
            "allow a larger error, or look at the standard deviation again."
        )
        raise DesignError(message)
    return math.ceil(number * (1 - _SLACK))


def meets(value: float, target: float) -> bool:
    """Tell whether a value keeps within its target, forgiving a stray last digit."""
    return value <= target * (1 + _SLACK)


def smallest(fits: Callable[[int], bool], low: int, high: int, *, back: int = 3) -> int:
    """Find the smallest whole number that fits, between low and high.

    Parameters
    ----------
    fits : callable
        Takes a number; true from some number on, give or take ``back``.
    low, high : int
        Where to look; ``high`` is returned untried when nothing below it fits.
    back : int
        How many numbers below the one found are tried as well.

    Examples
    --------
    >>> smallest(lambda n: n * n > 50, 1, 100)
    8
    """
    if fits(low):
        return low
    miss, step = low, 1
    while miss + step < high and not fits(miss + step):
        miss, step = miss + step, step * 2
    hit = min(miss + step, high)
    while hit - miss > 1:
        middle = (hit + miss) // 2
        miss, hit = (miss, middle) if fits(middle) else (middle, hit)
    for number in range(max(low, hit - back), hit):
        if fits(number):
            return number
    return hit


def standard_error(sigma: float, n: float, *, population: int | None = None) -> float:
    """Give the standard error of a mean of n results.

    Parameters
    ----------
    sigma : float
        Standard deviation of single results.
    n : float
        Results, above 0.
    population : int, optional
        N of a list; the standard error shrinks to 0 as n reaches it.

    Notes
    -----
    σ √((1 − n/N) / n): Cochran (1977), Sampling Techniques, 3rd ed., theorem 2.2.

    Examples
    --------
    >>> round(standard_error(27.57, 22), 2)
    5.88
    >>> standard_error(27.57, 14, population=14)
    0.0
    """
    share = 0.0 if population is None else n / population
    return sigma * math.sqrt(max(1 - share, 0.0) / n)


def unrounded_for_standard_error(sigma: float, target: float) -> float:
    """Give (σ / SE)², the number of results for a target standard error, unrounded.

    Examples
    --------
    >>> round(unrounded_for_standard_error(27.57, 6.0), 2)
    21.11
    """
    return (sigma / target) ** 2


def unrounded_for_list(endless: float, population: int) -> float:
    """Correct a number of results for a list of N units: n0 / (1 + n0/N), unrounded.

    Notes
    -----
    Cochran (1977), Sampling Techniques, 3rd ed., sec. 4.6. Exact for a target standard error.

    Examples
    --------
    >>> round(unrounded_for_list(11.86, 14), 2)
    6.42
    """
    return endless / (1 + endless / population)


def n_for_standard_error(sigma: float, target: float, *, population: int | None = None) -> int:
    """Count the results whose mean has at most the target standard error.

    Parameters
    ----------
    sigma, target : float
        Standard deviation of single results and tolerated standard error, same unit, above 0.
    population : int, optional
        N of a list.

    Returns
    -------
    int
        The smallest n with σ √((1 − n/N) / n) ≤ target.

    Examples
    --------
    >>> n_for_standard_error(27.57, 6.0)
    22
    >>> n_for_standard_error(3.1, 0.9, population=14)
    7
    """
    endless = unrounded_for_standard_error(sigma, target)
    if population is None:
        return whole(endless)
    return min(whole(unrounded_for_list(endless, population)), population)


def half_width(
    sigma: float,
    n: int,
    *,
    confidence: float,
    kind: IntervalKind = "two-sided",
    population: int | None = None,
) -> float:
    """Give the distance from a mean of n results to the end of its t interval.

    Parameters
    ----------
    sigma : float
        Standard deviation of single results.
    n : int
        Results, at least 2.
    confidence : float
        Inside (0, 1).
    kind : str
        Two-sided interval, or a limit on one side.
    population : int, optional
        N of a list.

    Examples
    --------
    >>> round(half_width(58, 10, confidence=0.95), 2)
    41.49
    """
    if population is not None and n >= population:
        return 0.0
    multiplier = t_quantile(n - 1, confidence=confidence, kind=kind)
    return multiplier * standard_error(sigma, n, population=population)


def unrounded_for_half_width(
    sigma: float, target: float, *, confidence: float, kind: IntervalKind = "two-sided"
) -> float:
    """Give (z σ / h)², the first pass that takes the normal quantile for t, unrounded.

    Examples
    --------
    >>> round(unrounded_for_half_width(58, 20, confidence=0.95), 2)
    32.31
    """
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    return (normal_quantile(level) * sigma / target) ** 2


def n_for_half_width(
    sigma: float,
    target: float,
    *,
    confidence: float,
    kind: IntervalKind = "two-sided",
    population: int | None = None,
) -> int:
    r"""Count the results that pin a mean down to ``± target``.

    Parameters
    ----------
    sigma, target : float
        Standard deviation of single results and tolerated half-width, same unit, above 0. For a
        relative half-width give the coefficient of variation and the share.
    confidence : float
        Inside (0, 1).
    kind : str
        Two-sided interval, or a limit on one side.
    population : int, optional
        N of a list.

    Returns
    -------
    int
        The smallest n ≥ 2 with :math:`t_{n-1}\,\sigma\sqrt{(1 - n/N)/n} \le h`.

    Notes
    -----
    Cochran (1977), Sampling Techniques, 3rd ed., ch. 4, with t iterated to its end. The normal
    quantile alone falls short by about 2.

    Examples
    --------
    >>> n_for_half_width(58, 20, confidence=0.95)
    35
    >>> n_for_half_width(58, 20, confidence=0.95, kind="upper-limit")
    25
    """
    first = unrounded_for_half_width(sigma, target, confidence=confidence, kind=kind)
    n = max(2, whole(first if population is None else unrounded_for_list(first, population)))
    # The normal quantile is below every t, so the answer is never below the first pass.
    while not meets(
        half_width(sigma, n, confidence=confidence, kind=kind, population=population), target
    ):
        n += 1
    return n if population is None else min(n, population)

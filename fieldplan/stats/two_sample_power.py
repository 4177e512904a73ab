"""How many results show a difference between two means: exact t, pooled and by Welch."""

import math
from collections.abc import Callable
from functools import lru_cache

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile, student_quantile
from fieldplan.stats.noncentral_t import gauss_legendre, noncentral_t_beyond
from fieldplan.stats.precision import whole
from fieldplan.stats.risks import check_difference, check_risks, one_sided_level

_REACH = 9.0
"""Standard deviations beyond which nothing is left to the sixteenth digit."""


def two_sample_guidance_n(
    difference: float, sigma: float, *, alpha: float, beta: float, sides: int = 1
) -> float:
    """Give the guidance formula's number of results per group, unrounded.

    Parameters
    ----------
    difference, sigma : float
        Difference to be found and standard deviation of single results, same unit, above 0.
    alpha, beta : float
        Chance of claiming a difference that is not there, and of missing this one.
    sides : int
        1, or 2 where a difference either way counts.

    Notes
    -----
    2 (z_α + z_β)² σ² / Δ² + z_α² / 4: EPA QA/G-9 (2000), section 3.3.1. The last term stands in
    for Student's t.

    Examples
    --------
    >>> round(two_sample_guidance_n(2.5, (28.0 / 13) ** 0.5, alpha=0.05, beta=0.2), 2)
    4.94
    """
    check_risks(alpha, beta)
    check_difference(difference, sigma)
    z = normal_quantile(1 - one_sided_level(alpha, sides))
    return 2 * ((z + normal_quantile(1 - beta)) * sigma / difference) ** 2 + z * z / 4


def pooled_power(
    difference: float,
    sigma: float,
    *,
    first: float,
    second: float,
    alpha: float,
    sides: int = 1,
) -> float:
    """Give the chance that a pooled two-sample t test finds a difference.

    Parameters
    ----------
    difference, sigma : float
        True difference of the means and common standard deviation, same unit.
    first, second : float
        Results in each group, together at least 3.
    alpha : float
        Chance of claiming a difference that is not there.
    sides : int
        1: only this direction counts. 2: either way.

    Notes
    -----
    Noncentral t with n₁ + n₂ − 2 degrees of freedom and noncentrality Δ / (σ √(1/n₁ + 1/n₂)):
    exact for normal results of one variance.

    Examples
    --------
    >>> round(pooled_power(1.0, 1.0, first=20, second=20, alpha=0.05, sides=2), 7)
    0.868953
    """
    known = first + second - 2
    shift = difference / (sigma * math.sqrt(1 / first + 1 / second))
    limit = student_quantile(1 - one_sided_level(alpha, sides), known)
    power = noncentral_t_beyond(limit, known, shift)
    return power + noncentral_t_beyond(limit, known, -shift) if sides == 2 else power


def welch_power(
    difference: float,
    sigmas: tuple[float, float],
    *,
    first: int,
    second: int,
    alpha: float,
    sides: int = 1,
) -> float:
    """Give the chance that Welch's t test, for unequal variances, finds a difference.

    Parameters
    ----------
    difference : float
        True difference of the means.
    sigmas : tuple of float
        Standard deviation of single results in each group, above 0.
    first, second : int
        Results in each group, at least 2 each.
    alpha : float
        Level that the test is run at.
    sides : int
        1: only this direction counts. 2: either way.

    Notes
    -----
    Exact for normal results, the degrees of freedom being recomputed from every pair of sample
    variances as the test does: the share B of the first group in the sum of squares is Beta, and
    given B the statistic is a noncentral t with n₁ + n₂ − 2 degrees of freedom. B is integrated by
    Gauss-Legendre quadrature. Welch (1947), Biometrika 34:28, for the test.

    Examples
    --------
    >>> round(welch_power(1.0, (1.0, 1.0), first=20, second=20, alpha=0.05, sides=2), 3)
    0.868
    >>> round(welch_power(10.0, (12.0, 4.0), first=15, second=5, alpha=0.05), 3)
    0.849
    """
    variances = [sigma**2 / n for sigma, n in zip(sigmas, (first, second), strict=True)]
    shift = difference / math.sqrt(sum(variances))
    known = first + second - 2
    found = 0.0
    for share, weight in _shares(first - 1, second - 1):
        parts = (variances[0] * share / (first - 1), variances[1] * (1 - share) / (second - 1))
        estimated = sum(parts)
        # The tail of Satterthwaite's formula is scale-free: parts stand for s²/n of each group.
        welch = estimated**2 / (parts[0] ** 2 / (first - 1) + parts[1] ** 2 / (second - 1))
        limit = student_quantile(1 - one_sided_level(alpha, sides), welch)
        limit *= math.sqrt(known * estimated / sum(variances))
        found += weight * noncentral_t_beyond(limit, known, shift)
        if sides == 2:
            found += weight * noncentral_t_beyond(limit, known, -shift)
    return found


@lru_cache(maxsize=256)
def _shares(first: int, second: int) -> tuple[tuple[float, float], ...]:
    """Give nodes and weights for the share of the first group in the sum of squares.

    The share is Beta(first/2, second/2); as the square of a sine its density has no edge that a
    polynomial could not follow. Weights sum to 1.
    """
    middle = math.asin(math.sqrt(first / (first + second)))
    reach = _REACH / math.sqrt(2 * (first + second))
    low, high = max(0.0, middle - reach), min(math.pi / 2, middle + reach)
    angles = [(low + high) / 2 + (high - low) / 2 * node for node, _ in gauss_legendre()]
    logs = [
        (first - 1) * math.log(math.sin(angle)) + (second - 1) * math.log(math.cos(angle))
        for angle in angles
    ]
    top = max(logs)
    heights = [
        weight * math.exp(log - top)
        for (_, weight), log in zip(gauss_legendre(), logs, strict=True)
    ]
    total = sum(heights)
    return tuple(
        (math.sin(angle) ** 2, height / total)
        for angle, height in zip(angles, heights, strict=True)
    )


def n_for_pooled(
    difference: float,
    sigma: float,
    *,
    alpha: float,
    beta: float,
    sides: int = 1,
    ratio: float = 1.0,
) -> tuple[int, int]:
    """Count the results per group that show a difference by the pooled t test.

    Parameters
    ----------
    difference, sigma : float
        Difference to be found and common standard deviation, same unit, above 0.
    alpha, beta : float
        Chance of claiming a difference that is not there, and of missing this one.
    sides : int
        1: only this direction counts. 2: either way.
    ratio : float
        Results in the second group for each in the first.

    Returns
    -------
    tuple of int
        Results in the first and in the second group, at least 2 each.

    Raises
    ------
    DesignError
        The chances or the ratio cannot be had, or the number is out of reach.

    Examples
    --------
    >>> n_for_pooled(0.5, 1.0, alpha=0.05, beta=0.2, sides=2)
    (64, 64)
    """

    def power(first: int, second: int) -> float:
        return pooled_power(difference, sigma, first=first, second=second, alpha=alpha, sides=sides)

    low = _plain_first(difference, (sigma, sigma), alpha, beta, sides, ratio)
    return _climb(power, low, 1 - beta, ratio)


def n_for_welch(
    difference: float,
    sigmas: tuple[float, float],
    *,
    alpha: float,
    beta: float,
    sides: int = 1,
    ratio: float | None = None,
) -> tuple[int, int]:
    """Count the results per group that show a difference by Welch's t test.

    Parameters
    ----------
    difference : float
        Difference to be found, above 0.
    sigmas : tuple of float
        Standard deviation of single results in each group, above 0.
    alpha, beta : float
        Chance of claiming a difference that is not there, and of missing this one.
    sides : int
        1: only this direction counts. 2: either way.
    ratio : float, optional
        Results in the second group for each in the first; by default σ₂/σ₁, which needs the
        fewest results in all.

    Returns
    -------
    tuple of int
        Results in the first and in the second group, at least 2 each.

    Examples
    --------
    >>> n_for_welch(10.0, (12.0, 4.0), alpha=0.05, beta=0.1)
    (18, 6)
    """

    def power(first: int, second: int) -> float:
        return welch_power(difference, sigmas, first=first, second=second, alpha=alpha, sides=sides)

    check_difference(difference, min(sigmas))
    chosen = sigmas[1] / sigmas[0] if ratio is None else ratio
    low = _plain_first(difference, sigmas, alpha, beta, sides, chosen)
    return _climb(power, low, 1 - beta, chosen)


def _plain_first(
    difference: float,
    sigmas: tuple[float, float],
    alpha: float,
    beta: float,
    sides: int,
    ratio: float,
) -> int:
    """Give the normal formula's number for the first group: where the exact count starts."""
    check_risks(alpha, beta)
    check_difference(difference, min(sigmas))
    if not (math.isfinite(ratio) and ratio > 0):
        message = (
            f"the second group is to have {ratio!r} results for each in the first; "
            "the ratio must be a number above 0, e.g. 1."
        )
        raise DesignError(message)
    z = normal_quantile(1 - one_sided_level(alpha, sides)) + normal_quantile(1 - beta)
    return max(2, whole((z / difference) ** 2 * (sigmas[0] ** 2 + sigmas[1] ** 2 / ratio)))


def _climb(
    power: Callable[[int, int], float], start: int, wanted: float, ratio: float
) -> tuple[int, int]:
    """Walk from a start to the smallest first group that reaches the wanted power."""

    def groups(first: int) -> tuple[int, int]:
        return first, max(2, whole(ratio * first))

    first = start
    while power(*groups(first)) < wanted:
        first += 1
    while first > 2 and power(*groups(first - 1)) >= wanted:
        first -= 1
    return groups(first)

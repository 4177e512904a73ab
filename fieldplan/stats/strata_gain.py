"""What strata gain against no strata: the variance inside them, between them, and the ratio."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.stratified import predicted_variance


@dataclass(frozen=True)
class WholeVariance:
    """The variance of single results over a whole population, in its two parts.

    Parameters
    ----------
    within, between : float
        They sum to the variance that simple random locations would meet.
    chance_between : float
        What the luck of the pilots alone adds to the spread of their stratum means; it is already
        taken off ``between``, which is never below 0.
    """

    within: float
    between: float
    chance_between: float = 0.0

    @property
    def total(self) -> float:
        """S², with N − 1 below the line where the population is a list."""
        return self.within + self.between


def whole_variance(
    weights: Sequence[float],
    means: Sequence[float],
    sigmas: Sequence[float],
    *,
    populations: Sequence[int | None] | None = None,
    results: Sequence[int | None] | None = None,
) -> WholeVariance:
    """Put the variance of a whole population together from its strata.

    Parameters
    ----------
    weights, means, sigmas : sequence of float, length h
        Shares of the population (sum 1), mean and standard deviation inside each stratum.
    populations : sequence of (int or None), length h, optional
        N of a list; None for an area.
    results : sequence of (int or None), length h, optional
        Results behind each mean; None where it is taken as exact.

    Notes
    -----
    Within Σ W σ², between Σ W (μ_h − μ)² less Σ W (1 − W) σ²/n0 where the means are estimates
    (Cochran 1977, Sampling Techniques, 3rd ed., sec. 5.9 for the parts and 5A.11 for what is taken
    off). A list has Σ (N_h − 1) S² and Σ N_h (μ_h − μ)², both over N − 1 (sec. 5.6).

    Examples
    --------
    >>> found = whole_variance([0.5, 0.5], [10.0, 30.0], [4.0, 6.0])
    >>> found.within, found.between, found.total
    (26.0, 100.0, 126.0)
    """
    sizes = list(populations or [None] * len(weights))
    known = list(results or [None] * len(weights))
    listed = [size for size in sizes if size is not None]
    units = sum(listed) if len(listed) == len(sizes) else 0
    larger = units / (units - 1) if units > 1 else 1.0
    centre = math.fsum(w * mean for w, mean in zip(weights, means, strict=True))
    within = chance = spread = 0.0
    for weight, mean, sigma, size, behind in zip(weights, means, sigmas, sizes, known, strict=True):
        own = 1.0 if size is None or not units else (size - 1) / size
        within += larger * weight * own * sigma**2
        spread += larger * weight * (mean - centre) ** 2
        if behind is not None:
            unseen = 1.0 if size is None else max(1 - behind / size, 0.0)
            chance += larger * weight * (1 - weight) * sigma**2 * unseen / behind
    return WholeVariance(within, max(spread - chance, 0.0), chance)


def gain_of_strata(
    whole: WholeVariance,
    weights: Sequence[float],
    sigmas: Sequence[float],
    counts: Sequence[int],
    *,
    populations: Sequence[int | None] | None = None,
) -> float:
    """Give how many times larger the variance would be without strata, at the same n.

    Parameters
    ----------
    whole : WholeVariance
        From ``whole_variance``.
    weights, sigmas : sequence of float, length h
    counts : sequence of int, length h
        Results by stratum.
    populations : sequence of (int or None), length h, optional

    Returns
    -------
    float
        S² (1 − n/N) / n over the variance of the stratified mean; infinite where that is 0.

    Raises
    ------
    DesignError
        A stratum has no result.

    Notes
    -----
    Cochran (1977), Sampling Techniques, 3rd ed., sec. 5.6. Below 1 the shares cost more than the
    strata gain.

    Examples
    --------
    >>> whole = whole_variance([0.5, 0.5], [10.0, 30.0], [4.0, 6.0])
    >>> round(gain_of_strata(whole, [0.5, 0.5], [4.0, 6.0], [10, 10]), 3)
    4.846
    """
    if min(counts) < 1:
        message = f"a stratum has {min(counts)} results; without one its mean is unknown."
        raise DesignError(message)
    stratified = predicted_variance(weights, sigmas, counts, populations)
    sizes = [size for size in populations or [] if size is not None]
    share = sum(counts) / sum(sizes) if len(sizes) == len(weights) else 0.0
    simple = whole.total * (1 - share) / sum(counts)
    return simple / stratified if stratified > 0 else math.inf

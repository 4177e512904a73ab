"""Moments of counts of pairs in order, and the normal curve with a continuity correction."""

import math

from fieldplan.stats.distributions import normal_share
from fieldplan.stats.noncentral_t import gauss_legendre

_REACH = 9.0


def pair_in_order(shift: float) -> float:
    """Give ∫ φ(u) Φ(shift + u)² du: the chance that two results both pass a third.

    Notes
    -----
    Needed for the variance of a rank sum: Lehmann (1975), Nonparametrics, appendix 5.

    Examples
    --------
    >>> round(pair_in_order(0.0), 6)
    0.333333
    """
    total = 0.0
    for start in (-_REACH, -_REACH / 2, 0.0, _REACH / 2):
        for node, weight in gauss_legendre():
            u = start + _REACH / 4 * (1 + node)
            density = math.exp(-u * u / 2) / math.sqrt(2 * math.pi)
            total += _REACH / 4 * weight * density * normal_share(shift + u) ** 2
    return total


def chance_beyond(count: float, mean: float, variance: float) -> float:
    """Give the chance of a whole count or more, by a normal curve of this mean and variance.

    Examples
    --------
    >>> round(chance_beyond(60, 50.0, 25.0), 4)
    0.0287
    """
    if variance <= 0:
        return float(mean >= count)
    return normal_share((mean - count + 0.5) / math.sqrt(variance))

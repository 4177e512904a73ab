"""The first terms by which Student's statistic, and the mean, differ from the normal."""

import math

from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.intervals import IntervalKind


def edgeworth_misses(
    n: float, skewness: float, excess_kurtosis: float, *, confidence: float, kind: IntervalKind
) -> float:
    """Give the share of campaigns in which a t interval misses, to the second Edgeworth term.

    Parameters
    ----------
    n : float
        Results.
    skewness, excess_kurtosis : float
        Of the population.
    confidence : float
        Nominal.
    kind : str
        Two-sided, upper or lower limit.

    Returns
    -------
    float
        Nominal share of misses plus the terms; may leave [0, 1] where n is far too small.

    Notes
    -----
    P(T ≤ x) = Φ(x) + γ(2x² + 1)φ(x)/(6√n) + q(x)φ(x)/n with
    q = x[κ(x² − 3)/12 − γ²(x⁴ + 2x² − 3)/18 − (x² + 3)/4] (Hall 1992, The Bootstrap and Edgeworth
    Expansion, sec. 2.6). Student's quantile takes up the last part of q. The first term is odd:
    of two sides one gains what the other loses, which leaves 1/n; a limit alone keeps 1/√n. Set
    to a hundredth it gives n = 25·γ² (Cochran's, rounded up from experience) for two sides at
    most and 121·γ² for one.

    Examples
    --------
    >>> round(edgeworth_misses(484, 2.0, 0.0, confidence=0.95, kind="upper-limit"), 3)
    0.061
    >>> round(edgeworth_misses(100, 2.0, 6.0, confidence=0.95, kind="two-sided"), 3)
    0.059
    """
    level = (1 + confidence) / 2 if kind == "two-sided" else confidence
    z = normal_quantile(level)
    density = math.exp(-z * z / 2) / math.sqrt(2 * math.pi)
    first = skewness * (2 * z * z + 1) * density / (6 * math.sqrt(n))
    bend = excess_kurtosis * (z * z - 3) / 12 - skewness**2 * (z**4 + 2 * z * z - 3) / 18
    second = z * bend * density / n
    if kind == "two-sided":
        return 1 - confidence - 2 * second
    # q is odd in x: at −z the second term is −second, and 1 − P(T ≤ z) loses the same.
    return 1 - confidence - second + (first if kind == "upper-limit" else -first)


def expanded_misses(
    n: float, skewness: float, excess_kurtosis: float, *, confidence: float, kind: IntervalKind
) -> tuple[float, float]:
    """Give the two sides of :func:`edgeworth_misses`, each held in [0, 1]: too low, too high.

    Examples
    --------
    >>> low, high = expanded_misses(2000, 4.0, 38.0, confidence=0.95, kind="two-sided")
    >>> round(low, 4), round(high, 4)
    (0.0334, 0.0183)
    """
    one = (1 + confidence) / 2 if kind == "two-sided" else confidence
    low, high = (
        edgeworth_misses(n, skewness, excess_kurtosis, confidence=one, kind=side) for side in _SIDES
    )
    low, high = min(max(low, 0.0), 1.0), min(max(high, 0.0), 1.0)
    return (0.0 if kind == "lower-limit" else low), (0.0 if kind == "upper-limit" else high)


_SIDES: tuple[IntervalKind, IntervalKind] = ("upper-limit", "lower-limit")


def expanded_quantile(level: float, skewness_of_mean: float) -> float:
    """Give how many standard errors the mean lies from the truth at this level.

    Notes
    -----
    z + γ (z² − 1) / (6√n), first term of Cornish & Fisher (1937), Revue de l'Institut
    International de Statistique 5:307; ``skewness_of_mean`` is γ/√n.

    Examples
    --------
    >>> round(expanded_quantile(0.95, 0.1), 3)
    1.673
    """
    z = normal_quantile(level)
    return z + skewness_of_mean * (z * z - 1) / 6

"""What skewness does to Student's interval, and how many results it takes to bear it."""

import math
from bisect import bisect_right
from collections.abc import Iterable
from functools import lru_cache
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats import coverage_table
from fieldplan.stats.distributions import normal_quantile, normal_share
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.precision import whole

Family = Literal["gamma", "lognormal"]


def n_for_two_sided(skewness: float) -> int:
    """Count the results that let a two-sided 95 % t interval bear this skewness.

    Parameters
    ----------
    skewness : float
        Of the population, either sign.

    Returns
    -------
    int
        The smallest whole number not below 25 G1².

    Notes
    -----
    n > 25 G1² (Cochran 1977, Sampling Techniques, 3rd ed., sec. 2.15): the interval then misses
    in at most about 6 % of campaigns.

    Examples
    --------
    >>> n_for_two_sided(2.0)
    100
    """
    return whole(25 * skewness**2)


def n_for_one_sided(skewness: float) -> int:
    """Count the results that let a one-sided 95 % t limit bear this skewness.

    Parameters
    ----------
    skewness : float
        Of the population, either sign.

    Returns
    -------
    int
        The smallest whole number not below 121 G1², where the limit misses in about 6 %.

    Notes
    -----
    First Edgeworth term of Student's statistic, G1 (2 z² + 1) φ(z) / (6 √n) (Hall 1992, The
    Bootstrap and Edgeworth Expansion, sec. 2.6), set to 0.01 at z = 1.645, gives a factor of
    121.4, written 121. Simulated populations need between 105 and 177 G1².

    Examples
    --------
    >>> n_for_one_sided(1.0)
    121
    """
    return whole(121 * skewness**2)


def skewness_of_mean(
    weights: Iterable[float],
    sigmas: Iterable[float],
    skewnesses: Iterable[float],
    *,
    counts: Iterable[float],
) -> float:
    """Give the skewness of the weighted mean of independent strata.

    Parameters
    ----------
    weights, sigmas, skewnesses : iterable of float, length h
        Share of the population (sum 1), standard deviation and skewness of each stratum.
    counts : iterable of float, length h
        Results per stratum, each above 0.

    Returns
    -------
    float
        0 where no stratum spreads.

    Notes
    -----
    Σ W³ σ³ G1/n² over (Σ W² σ²/n)^1.5: third cumulants of independent means add. For one stratum
    this is G1/√n. No list is corrected for.

    Examples
    --------
    >>> skewness_of_mean([1.0], [3.0], [2.0], counts=[16])
    0.5
    """
    second = third = 0.0
    for weight, sigma, skewness, count in zip(weights, sigmas, skewnesses, counts, strict=True):
        second += (weight * sigma) ** 2 / count
        third += (weight * sigma) ** 3 * skewness / count**2
    return third / second**1.5 if second > 0 else 0.0


def t_coverage(
    n: int,
    skewness: float,
    *,
    confidence: float,
    kind: IntervalKind,
    family: Family | None = None,
) -> float:
    """Say how often a nominal t interval holds the true mean at this n and skewness.

    Parameters
    ----------
    n : int
        Independent results, at least 2.
    skewness : float
        Of the population; negative mirrors the two limits. That of a small sample is usually
        smaller than its population's, see ``summary.skewness_ceiling``.
    confidence : float
        Nominal, from 0.5 to 0.99.
    kind : str
        Two-sided interval, upper or lower limit.
    family : str, optional
        ``gamma`` or ``lognormal``; without it the lower of the two, as nobody knows which.

    Returns
    -------
    float
        Expected coverage, between 0 and 1.

    Raises
    ------
    DesignError
        n is below 2, or the confidence outside the table.

    Notes
    -----
    Interpolated in a table of simulated t statistics from gamma and lognormal populations
    (``tests/reference/make_t_coverage.py``). Above n = 500 the effect depends on skewness / √n
    alone, as in the first Edgeworth term. Populations of other shapes differ: a rare very high
    part does worse than either family.

    Examples
    --------
    >>> round(t_coverage(30, 2.0, confidence=0.95, kind="two-sided"), 2)
    0.93
    >>> round(t_coverage(30, 0.0, confidence=0.95, kind="upper-limit"), 2)
    0.95
    """
    families: tuple[Family, ...] = (family,) if family else ("gamma", "lognormal")
    return min(
        1 - sum(t_misses(n, skewness, confidence=confidence, kind=kind, family=name))
        for name in families
    )


def _check(n: int, confidence: float) -> None:
    if n < 2 or not 0.5 <= confidence <= 0.99:
        message = (
            f"coverage is known for 2 results or more at a confidence of 0.5 to 0.99, "
            f"not for {n} at {confidence!r}."
        )
        raise DesignError(message)


def t_misses(
    n: int, skewness: float, *, confidence: float, kind: IntervalKind, family: Family
) -> tuple[float, float]:
    """Say how often a nominal t interval comes out too low, and how often too high.

    Parameters
    ----------
    n : int
        Independent results, at least 2.
    skewness : float
        Of the population; negative mirrors the two sides.
    confidence : float
        Nominal, from 0.5 to 0.99.
    kind : str
        Two-sided interval, upper or lower limit.
    family : str
        ``gamma`` or ``lognormal``.

    Returns
    -------
    too_low, too_high : float
        Share of campaigns in which the true mean lies above all of the interval, and below it.
        The open side of a limit misses nothing.

    Raises
    ------
    DesignError
        n is below 2, or the confidence outside the table.

    Examples
    --------
    >>> low, high = t_misses(30, 2.0, confidence=0.95, kind="two-sided", family="gamma")
    >>> round(low, 3), round(high, 3)
    (0.065, 0.007)
    """
    _check(n, confidence)
    tail = (1 - confidence) / 2 if kind == "two-sided" else 1 - confidence
    lean = abs(skewness)
    # The mean came out so low that t lies below its lower quantile, or so high.
    low, high = _below(family, n, lean, tail), 1 - _below(family, n, lean, 1 - tail)
    if skewness < 0:
        low, high = high, low
    return (0.0 if kind == "lower-limit" else low), (0.0 if kind == "upper-limit" else high)


Grid = dict[tuple[int, float], tuple[float, ...]]


@lru_cache(maxsize=2)
def _grid(family: Family) -> tuple[list[int], list[float], Grid]:
    """Read one table: per cell the shift of the normal quantile that each share amounts to."""
    levels = _levels()
    text = coverage_table.GAMMA if family == "gamma" else coverage_table.LOGNORMAL
    cells: Grid = {}
    for line in text.split("\n"):
        if line:
            number, lean, *shares = line.split()
            cells[int(number), float(lean)] = tuple(
                _quantile(int(share) / 1e4) - normal_quantile(level)
                for share, level in zip(shares, levels, strict=True)
            )
    counts = sorted({n for n, _ in cells})
    leans = sorted({lean for _, lean in cells})
    for n in counts:
        cells[n, 0.0] = (0.0,) * len(levels)
    return counts, [0.0, *leans], cells


def _levels() -> list[float]:
    return [float(level) for level in coverage_table.LEVELS.split()]


def _quantile(share: float) -> float:
    return normal_quantile(min(max(share, 2.5e-6), 1 - 2.5e-6))


def _below(family: Family, n: int, lean: float, level: float) -> float:
    """Give the share of t statistics below Student's quantile of this level."""
    counts, leans, cells = _grid(family)
    if n > counts[-1]:
        lean, n = lean * math.sqrt(counts[-1] / n), counts[-1]
    row, along = _place([math.log(count) for count in counts], math.log(n))
    column, across = _place([math.log1p(value) for value in leans], math.log1p(lean))
    levels = [normal_quantile(value) for value in _levels()]
    place, between = _place(levels, normal_quantile(level))

    def shift(k: int) -> float:
        corners = [
            cells[counts[row + down], leans[column + right]][k]
            for down in (0, 1)
            for right in (0, 1)
        ]
        top = corners[0] + across * (corners[1] - corners[0])
        bottom = corners[2] + across * (corners[3] - corners[2])
        return top + along * (bottom - top)

    move = shift(place) + between * (shift(place + 1) - shift(place))
    return normal_share(normal_quantile(level) + move)


def _place(nodes: list[float], value: float) -> tuple[int, float]:
    """Find the interval of a value and how far it lies along, held inside the nodes."""
    held = min(max(value, nodes[0]), nodes[-1])
    k = min(bisect_right(nodes, held), len(nodes) - 1) - 1
    return k, (held - nodes[k]) / (nodes[k + 1] - nodes[k])

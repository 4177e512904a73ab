"""Ranked sets: look at several places, rank them by a cheap sign, analyse one of them.

From a first set of m places the one that ranks lowest is analysed, from a second set the second
lowest, and so on; m sets make one cycle and give m results.
"""

import math
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_share
from fieldplan.stats.precision import whole

Shape = Literal["normal", "uniform", "exponential"]

LARGEST_SET = 20
"""Nobody ranks more places by eye; past 5 or so ranking errors eat the gain (common practice)."""


def _check_set(size: int) -> None:
    if not 2 <= size <= LARGEST_SET:
        message = (
            f"ranking_set_size is {size!r}; a set holds from 2 to {LARGEST_SET} places, and 3 to 5 "
            "is what people rank well."
        )
        raise DesignError(message)


def standard_scores(size: int, shape: Shape = "normal") -> tuple[float, ...]:
    """Give how far the ranks of a set lie from the mean, in standard deviations, lowest first.

    Parameters
    ----------
    size : int
        Places in a set, 2 to 20.
    shape : str
        ``normal``, ``uniform`` or ``exponential``.

    Notes
    -----
    Expected order statistics. Uniform i/(m+1); exponential Σ 1/(m−j+1), j ≤ i; normal by the
    trapezoidal rule, which is exact to 12 digits on so smooth a function: David & Nagaraja (2003),
    Order Statistics, 3rd ed., ch. 3.

    Examples
    --------
    >>> [round(score, 4) for score in standard_scores(2)]
    [-0.5642, 0.5642]
    >>> [round(score, 4) for score in standard_scores(3, "exponential")]
    [-0.6667, -0.1667, 0.8333]
    """
    _check_set(size)
    ranks = range(1, size + 1)
    if shape == "uniform":
        return tuple((rank / (size + 1) - 0.5) * math.sqrt(12) for rank in ranks)
    if shape == "exponential":
        return tuple(math.fsum(1 / (size - j) for j in range(rank)) - 1 for rank in ranks)
    if shape != "normal":
        message = f"shape is {shape!r}; it must be normal, uniform or exponential."
        raise DesignError(message)
    return tuple(_normal_score(rank, size) for rank in ranks)


def _normal_score(rank: int, size: int) -> float:
    step, reach = 1 / 32, 10.0
    factor = rank * math.comb(size, rank) / math.sqrt(2 * math.pi)
    values = []
    for index in range(-round(reach / step), round(reach / step) + 1):
        x = index * step
        below, above = normal_share(x), normal_share(-x)
        values.append(x * math.exp(-x * x / 2) * below ** (rank - 1) * above ** (size - rank))
    return factor * math.fsum(values) * step


def relative_precision(size: int, *, shape: Shape = "normal", correlation: float = 1.0) -> float:
    """Give the variance of a simple random mean over that of a ranked-set mean, same results.

    Parameters
    ----------
    size : int
        Places in a set.
    shape : str
        Of the results where ``correlation`` is 1; of the ranking sign otherwise, on which results
        then depend in a straight line.
    correlation : float
        Between the ranking sign and the result, from 0 (ranking tells nothing) to 1.

    Notes
    -----
    1 / (1 − ρ² Σ δ²/m), δ the standard scores: Takahasi & Wakimoto (1968), Annals of the Institute
    of Statistical Mathematics 20:1; with ranking errors Dell & Clutter (1972), Biometrics 28:545.
    Whatever the shape it lies between 1 and (m + 1)/2.

    Examples
    --------
    >>> round(relative_precision(3), 3), round(relative_precision(3, correlation=0.7), 3)
    (1.914, 1.305)
    """
    if not 0 <= correlation <= 1:
        message = (
            f"ranking_correlation is {correlation!r}; it lies between 0 and 1 (turn the ranking "
            "round where the sign falls as the result rises)."
        )
        raise DesignError(message)
    explained = math.fsum(score**2 for score in standard_scores(size, shape)) / size
    return 1 / (1 - correlation**2 * explained)


def ranked_count(simple: float, size: int, precision: float) -> int:
    """Count the ranked-set results that are as precise as ``simple`` random ones: whole cycles.

    Parameters
    ----------
    simple : float
        Simple random results, above 0; may be unrounded.
    size : int
        Places in a set.
    precision : float
        From :func:`relative_precision`.

    Returns
    -------
    int
        A multiple of ``size``, two cycles or more: one cycle shows no spread.

    Examples
    --------
    >>> ranked_count(22, 3, relative_precision(3))
    12
    """
    _check_set(size)
    return size * max(2, whole(simple / precision / size))


def highest_ranking_price(result_price: float, size: int, *, simple: int, ranked: int) -> float:
    """Give the price of looking at one place below which ranking saves money.

    Parameters
    ----------
    result_price : float
        Of one result: visit, jar and analysis.
    size : int
        Places looked at for each result.
    simple, ranked : int
        Results of the two designs that are compared.

    Returns
    -------
    float
        0 where ranking saves no result.

    Notes
    -----
    At this price ranked · (result + m · look) = simple · result.

    Examples
    --------
    >>> highest_ranking_price(120.0, 3, simple=24, ranked=18)
    13.333333333333334
    """
    _check_set(size)
    return max(0.0, (simple - ranked) * result_price / (size * ranked))

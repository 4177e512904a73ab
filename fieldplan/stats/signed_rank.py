"""The signed rank test against a level: for symmetric shapes that need not be normal."""

import math
from collections.abc import Iterator, Sequence
from functools import lru_cache
from itertools import pairwise
from typing import TYPE_CHECKING

from fieldplan.stats.distributions import normal_quantile, normal_share
from fieldplan.stats.precision import whole
from fieldplan.stats.rank_moments import chance_beyond, pair_in_order
from fieldplan.stats.risks import one_sided_level

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

SIGNED_RANK_SHARE = 0.864
"""Least efficiency against t, 108/125: Hodges & Lehmann (1956), Ann. Math. Stat. 27:324."""

_EXACT_RANKS, _EXACT_POWER, _CELLS = 60, 30, 100


def signed_rank_planned_n(plain: float) -> int:
    """Enlarge a number for the t test to one that serves the signed rank test as well.

    Parameters
    ----------
    plain : float
        Results that the t test needs.

    Notes
    -----
    n / 0.864: whatever the symmetric shape, the signed rank test needs at most that many more;
    Hodges & Lehmann (1956), Annals of Mathematical Statistics 27:324; EPA QA/G-9S (2006).

    Examples
    --------
    >>> signed_rank_planned_n(36)
    42
    """
    return whole(plain / SIGNED_RANK_SHARE)


def signed_rank_count(n: int, *, alpha: float) -> int:
    """Give the sum of ranks on the right side from which the signed rank test decides.

    Parameters
    ----------
    n : int
        Results, none of them equal to the level.
    alpha : float
        Largest chance of the claim when the population is symmetric about the level.

    Returns
    -------
    int
        The smallest sum w with P(W ≥ w) ≤ alpha, exact up to 60 results and by the normal curve
        above; n (n + 1) / 2 + 1 where none is.

    Examples
    --------
    >>> signed_rank_count(10, alpha=0.05)
    45
    """
    level = one_sided_level(alpha, 1)
    top = n * (n + 1) // 2
    if n > _EXACT_RANKS:
        spread = math.sqrt(n * (n + 1) * (2 * n + 1) / 24)
        return math.ceil(top / 2 + normal_quantile(1 - level) * spread + 0.5)
    ways = _rank_sums(n)
    most = level * 2**n
    tail, count = 0, top + 1
    while count > 0 and tail + ways[count - 1] <= most:
        count -= 1
        tail += ways[count]
    return count


def signed_rank_power(ratio: float, *, n: int, alpha: float) -> float:
    """Give the chance that the signed rank test makes the claim, for normal results.

    Parameters
    ----------
    ratio : float
        Distance of the true mean from the level, in standard deviations of single results.
    n : int
        Results, at least 2.
    alpha : float
        Largest chance of the claim when the population is symmetric about the level.

    Notes
    -----
    Up to 30 results by going through the sizes of the results from small to large, a cell at a
    time: given its size, a result lies on the right side with a known chance. Above, exact mean
    and variance of the rank sum with the normal curve: Lehmann (1975), Nonparametrics, section
    4.2, which is then within 0.02 of simulation.

    Examples
    --------
    >>> round(signed_rank_power(0.5, n=36, alpha=0.05), 2)
    0.89
    """
    return signed_rank_powers((ratio,), n=n, alpha=alpha)[0]


@lru_cache(maxsize=64)
def signed_rank_powers(ratios: tuple[float, ...], *, n: int, alpha: float) -> tuple[float, ...]:
    """Give the same chance at several distances at once, for little more than one costs.

    Parameters
    ----------
    ratios : tuple of float
        Distances of the true mean from the level, in standard deviations of single results.
    n : int
        Results, at least 2.
    alpha : float
        Largest chance of the claim when the population is symmetric about the level.

    Examples
    --------
    >>> [round(p, 3) for p in signed_rank_powers((0.0, 0.5, 1.0), n=12, alpha=0.05)]
    [0.046, 0.462, 0.929]
    """
    count = signed_rank_count(n, alpha=alpha)
    if count > n * (n + 1) // 2:
        return (0.0,) * len(ratios)
    if n <= _EXACT_POWER:
        return _exact(ratios, n, count)
    return tuple(_by_moments(ratio, n, count) for ratio in ratios)


def signed_rank_ratio(chance: float, *, n: int, alpha: float) -> float | None:
    """Give the distance from the level at which the signed rank test makes the claim so often.

    Parameters
    ----------
    chance : float
        From 0.001 to 0.9999.
    n : int
        Results, at least 2.
    alpha : float
        Largest chance of the claim when the population is symmetric about the level.

    Returns
    -------
    float or None
        In standard deviations of single results, normal ones; None where so few results never
        make the claim.

    Notes
    -----
    Interpolated between powers on the scale of normal quantiles, on which they lie near a straight
    line; to 0.0005 of the chance.

    Examples
    --------
    >>> round(signed_rank_ratio(0.8, n=20, alpha=0.05), 2)
    0.59
    """
    if signed_rank_count(n, alpha=alpha) > n * (n + 1) // 2:
        return None
    knots, wanted = _ladder(n, alpha), normal_quantile(chance)
    above = sum(quantile < wanted for _, quantile in knots)
    first = min(max(above - 2, 0), len(knots) - 4)
    near = knots[first : first + 4]
    return math.fsum(
        ratio * math.prod((wanted - other) / (here - other) for _, other in near if other != here)
        for ratio, here in near
    )


@lru_cache(maxsize=64)
def _ladder(n: int, alpha: float) -> tuple[tuple[float, float], ...]:
    """Give distances with the normal quantile of their power, as far as it can be told from 1."""
    middle = normal_quantile(1 - alpha)
    ratios = tuple((middle + 0.5 * k - 5) / math.sqrt(n) for k in range(25))
    powers = signed_rank_powers(ratios, n=n, alpha=alpha)
    return tuple(
        (ratio, normal_quantile(power))
        for ratio, power in zip(ratios, powers, strict=True)
        if 1e-5 < power < 1 - 1e-7
    )


def _by_moments(ratio: float, n: int, count: int) -> float:
    """Give the chance of a sum of ranks of ``count`` or more by its mean and variance."""
    single, pair = normal_share(ratio), normal_share(math.sqrt(2) * ratio)
    both = pair_in_order(2 * ratio)
    mean = n * (n - 1) / 2 * pair + n * single
    variance = (
        n * (n - 1) * (n - 2) * (both - pair**2)
        + n * (n - 1) / 2 * (2 * (single - pair) ** 2 + 3 * pair * (1 - pair))
        + n * single * (1 - single)
    )
    return chance_beyond(count, mean, variance)


@lru_cache(maxsize=8)
def _rank_sums(n: int) -> tuple[int, ...]:
    """Count the subsets of the ranks 1 … n by their sum."""
    ways = [1]
    for rank in range(1, n + 1):
        longer = ways + [0] * rank
        for k, count in enumerate(ways):
            longer[k + rank] += count
        ways = longer
    return tuple(ways)


def _exact(ratios: Sequence[float], n: int, count: int) -> tuple[float, ...]:
    """Give the chance of a sum of ranks of ``count`` or more, for normal results.

    ``chances[r, j]`` is, over j!, the Fourier transform of the sum of ranks on the right side of j
    results below the cell's end. A cell adds k results, which take the next k ranks; a rank on the
    right side turns the transform by its own angle.
    """
    import numpy as np

    sums = n * (n + 1) // 2 + 1
    angles = -2j * np.pi / sums * np.arange(sums // 2 + 1)
    ranks = np.exp(np.arange(1, n + 1)[:, None] * angles)
    chances = np.zeros((len(ratios), n + 1, len(angles)), dtype=complex)
    chances[:, 0] = 1.0
    for right, wrong in _cells(ratios):
        turn = right[:, :, None] * ranks + wrong[:, :, None]
        most = n * float((right + wrong).max())
        adding = chances
        for k in range(1, n + 1):
            adding = adding[:, :-1] * turn[:, k - 1 :] / k
            chances[:, k:] += adding
            if most**k / math.factorial(k) < 1e-8:
                break
    found = np.fft.irfft(chances[:, n], n=sums)[:, count:].sum(axis=1) * math.factorial(n)
    return tuple(min(max(float(chance), 0.0), 1.0) for chance in found)


def _cells(ratios: Sequence[float]) -> Iterator[tuple["Array", "Array"]]:
    """Give, for cells of the size of a result, the chances of either side, a row for each ratio."""
    import numpy as np

    reach = max(abs(ratio) for ratio in ratios) + 6.0
    edges = [k * reach / _CELLS for k in range(_CELLS)] + [math.inf]
    for low, high in pairwise(edges):
        right = [normal_share(high - ratio) - normal_share(low - ratio) for ratio in ratios]
        wrong = [normal_share(high + ratio) - normal_share(low + ratio) for ratio in ratios]
        yield np.array(right)[:, None], np.array(wrong)[:, None]

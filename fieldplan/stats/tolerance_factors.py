"""Bounds mean + k s that hold a share of a normal population, with exact k."""

import math
from collections.abc import Callable
from functools import lru_cache
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile
from fieldplan.stats.noncentral_t import noncentral_t_beyond
from fieldplan.stats.tolerance import SLACK, check_share, first_that_fits

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

_REACH = 9.0
"""Standard errors of a mean on either side of which less than 1e-18 of a normal mean lies."""


def chance_of_holding(n: int, factor: float, share: float) -> float:
    """Give the chance that mean ± factor · s of n normal results holds a share between them.

    Parameters
    ----------
    n : int
        At least 2.
    factor : float
        Above 0.
    share : float
        Of the population, inside (0, 1).

    Notes
    -----
    Given the mean, s must be large enough: a χ² tail, averaged over the mean by Gauss–Legendre
    quadrature; Odeh (1978), Communications in Statistics B 7:183.

    Examples
    --------
    >>> round(chance_of_holding(10, 3.393, 0.95), 3)
    0.95
    """
    import numpy as np
    from scipy.special import chdtrc

    nodes, weights = _nodes()
    errors = _REACH * (nodes + 1) / 2
    needed = _half_span(errors / math.sqrt(n), share)
    tails = chdtrc(n - 1, (n - 1) * (needed / factor) ** 2)
    density = np.exp(-(errors**2) / 2) / math.sqrt(2 * math.pi)
    return min(_REACH * float(weights @ (density * tails)), 1.0)


@lru_cache(maxsize=1)
def _nodes() -> "tuple[Array, Array]":
    """Give nodes and weights of the Gauss-Legendre rule on [-1, 1]."""
    import numpy as np

    nodes, weights = np.polynomial.legendre.leggauss(128)
    return nodes, weights


def _half_span(offsets: "Array", share: float) -> "Array":
    """Find r so that a normal population holds ``share`` within offset ± r, by Newton steps."""
    import numpy as np
    from scipy.special import ndtr

    floor = normal_quantile((1 + share) / 2)
    span = np.maximum(offsets + normal_quantile(share), floor)
    for _ in range(60):
        held = ndtr(span - offsets) - ndtr(-span - offsets)
        slope = np.exp(-((span - offsets) ** 2) / 2) + np.exp(-((span + offsets) ** 2) / 2)
        step = (held - share) * math.sqrt(2 * math.pi) / slope
        span = span - step
        if np.max(np.abs(step)) < 1e-13:
            break
    return span


@lru_cache(maxsize=1024)
def upper_factor(n: int, share: float, *, confidence: float) -> float:
    """Give k of the bound mean + k s that holds a share of a normal population below it.

    Parameters
    ----------
    n : int
        Results behind mean and s, at least 2.
    share, confidence : float
        From 0.5 up to, but not, 1.

    Returns
    -------
    float
        Exact k, from the noncentral t distribution. A lower bound is mean − k s.

    Notes
    -----
    Owen (1963), Sandia Corporation monograph SCR-607.

    Examples
    --------
    >>> round(upper_factor(20, 0.95, confidence=0.95), 3)
    2.396
    """
    _check_factor(n, share, confidence)
    root, z = math.sqrt(n), normal_quantile(share)
    shift = z * root
    near = z + normal_quantile(confidence) * math.sqrt(1 / n + z**2 / (2 * (n - 1)))
    return _root(lambda k: 1 - noncentral_t_beyond(k * root, n - 1, shift), confidence, near)


@lru_cache(maxsize=1024)
def two_sided_factor(n: int, share: float, *, confidence: float) -> float:
    """Give k of the bounds mean ± k s that hold a share of a normal population between them.

    Parameters
    ----------
    n : int
        At least 2.
    share, confidence : float
        From 0.5 up to, but not, 1.

    Notes
    -----
    Exact: Odeh (1978), Communications in Statistics B 7:183.

    Examples
    --------
    >>> round(two_sided_factor(10, 0.95, confidence=0.95), 3)
    3.393
    """
    _check_factor(n, share, confidence)
    near = howe_factor(n, share, confidence=confidence)
    return _root(lambda k: chance_of_holding(n, k, share), confidence, near)


def natrella_factor(n: int, share: float, *, confidence: float) -> float:
    """Give the one-sided k by Natrella's closed form, which stands in older tables.

    Notes
    -----
    Natrella (1963), NBS Handbook 91; a little off the exact k, more so for few results.

    Examples
    --------
    >>> round(natrella_factor(43, 0.90, confidence=0.99), 4)
    1.8752
    """
    _check_factor(n, share, confidence)
    z, at_confidence = normal_quantile(share), normal_quantile(confidence)
    a = 1 - at_confidence**2 / (2 * (n - 1))
    b = z**2 - at_confidence**2 / n
    if a <= 0:
        message = (
            f"the closed form has no answer for {n} results at a confidence of {confidence:g}; "
            "take the exact factor."
        )
        raise DesignError(message)
    return (z + math.sqrt(max(z**2 - a * b, 0.0))) / a


def howe_factor(n: int, share: float, *, confidence: float) -> float:
    """Give the two-sided k by Howe's closed form, which stands in many tables.

    Notes
    -----
    Howe (1969), Journal of the American Statistical Association 64:610.

    Examples
    --------
    >>> round(howe_factor(43, 0.90, confidence=0.99), 3)
    2.217
    """
    _check_factor(n, share, confidence)
    z = normal_quantile((1 + share) / 2)
    degrees = n - 1
    return z * math.sqrt(degrees * (1 + 1 / n) / chi_square_quantile(1 - confidence, degrees))


def chance_of_bound(n: int, margin: float, *, share: float, confidence: float) -> float:
    """Give the chance that the upper bound of a normal population comes out below a level.

    Parameters
    ----------
    n : int
        At least 2.
    margin : float
        (level − mean) / sigma of the population as it is.
    share, confidence : float
        Of the bound; inside (0, 1).

    Notes
    -----
    P(mean + k s ≤ level), a noncentral t probability. It is 1 − confidence where the margin is
    just the quantile of the share.

    Examples
    --------
    >>> round(chance_of_bound(20, 1.6449, share=0.95, confidence=0.95), 3)
    0.05
    """
    factor = upper_factor(n, share, confidence=confidence)
    root = math.sqrt(n)
    return noncentral_t_beyond(factor * root, n - 1, margin * root)


def n_for_bound(margin: float, *, share: float, confidence: float, power: float) -> int:
    """Count the results whose normal upper bound comes out below a level often enough.

    Parameters
    ----------
    margin : float
        (level − mean) / sigma that is expected; above the normal quantile of the share.
    share, confidence : float
        Of the bound; from 0.5 up to, but not, 1.
    power : float
        How often the bound shall come out below the level.

    Raises
    ------
    DesignError
        The margin is so small that less than the share lies below the level.

    Examples
    --------
    >>> n_for_bound(3.0, share=0.95, confidence=0.95, power=0.8)
    15
    """
    check_share(power, "power")
    _check_factor(2, share, confidence)
    if not margin > normal_quantile(share):
        message = (
            f"with the level {margin:.3g} standard deviations above the expected mean, a normal "
            f"population has no more than {share:g} below it, which needs "
            f"{normal_quantile(share):.3g}; no number of results can show it. Claim a smaller "
            "share, or look at mean, sigma and level again."
        )
        raise DesignError(message)
    return first_that_fits(
        lambda n: chance_of_bound(n, margin, share=share, confidence=confidence) >= power - SLACK,
        2,
        f"a margin of {margin:g} standard deviations",
        near=near_bound(margin, share, confidence=confidence, power=power),
    )


def near_bound(margin: float, share: float, *, confidence: float, power: float) -> float:
    """Give about how many results a bound needs, unrounded.

    Parameters
    ----------
    margin, share, confidence, power
        As in ``n_for_bound``.

    Notes
    -----
    By the large-sample variance of mean + k s, σ² (1 + k²/2) / n: Owen (1963), Sandia Corporation
    monograph SCR-607.

    Examples
    --------
    >>> round(near_bound(3.0, 0.95, confidence=0.95, power=0.8), 1)
    11.0
    """
    z = normal_quantile(share)
    at_share = normal_quantile(confidence) * math.sqrt(1 + z**2 / 2)
    at_margin = normal_quantile(power) * math.sqrt(1 + margin**2 / 2)
    return (max(at_share + at_margin, 0.0) / (margin - z)) ** 2


def _root(reached: Callable[[float], float], confidence: float, near: float) -> float:
    """Find the factor of a confidence, which rises with it: bracket, then Illinois steps."""
    low, high = 0.95 * near, 1.05 * near + 1e-9
    below, above = reached(low) - confidence, reached(high) - confidence
    while below > 0:
        high, above, low = low, below, low / 2 if low > 1e-12 else -1.0
        below = reached(low) - confidence
    while above < 0:
        low, below, high = high, above, 2 * high
        above = reached(high) - confidence
    side = 0
    for _ in range(200):
        middle = (low * above - high * below) / (above - below)
        if not low < middle < high:
            middle = (low + high) / 2
        here = reached(middle) - confidence
        if abs(here) < 1e-13 or high - low < 1e-12 * high:
            return middle
        # The end that has stayed twice counts half, or the steps would creep towards it.
        if here < 0:
            low, below, above, side = middle, here, above / 2 if side < 0 else above, -1
        else:
            high, above, below, side = middle, here, below / 2 if side > 0 else below, 1
    return (low + high) / 2


def _check_factor(n: int, share: float, confidence: float) -> None:
    if n < 2:
        message = f"a standard deviation needs 2 results, not {n}; take more."
        raise DesignError(message)
    for value, name in ((share, "share"), (confidence, "confidence")):
        check_share(value, name)
        if value < 0.5:
            message = f"{name} is {value!r}; a normal bound needs at least 0.5, e.g. 0.95."
            raise DesignError(message)

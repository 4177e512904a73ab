"""Student, chi-square and F by continued fractions: exact to 10 digits and quick to load.

The general-purpose library has the same functions; loading it takes longer than answering "how
many" does. The tests hold these to that library over the whole range the other modules use.
"""

import math
from collections.abc import Callable
from functools import lru_cache
from statistics import NormalDist

_MANY = 2000
"""Degrees of freedom beyond which Student's quantile is a corrected normal one."""

_TINY = 1e-300
_CLOSE = 1e-16


def normal_quantile(level: float) -> float:
    """Give the standard normal value that ``level`` of the population lies below.

    Examples
    --------
    >>> round(normal_quantile(0.975), 4)
    1.96
    """
    return NormalDist().inv_cdf(level)


def normal_share(value: float) -> float:
    """Give the share of a standard normal population below ``value``.

    Examples
    --------
    >>> round(normal_share(1.96), 4)
    0.975
    """
    return 0.5 * math.erfc(-value / math.sqrt(2))


def _fraction(term: Callable[[int], tuple[float, float]], start: float) -> float:
    """Evaluate ``start + a1/(b1 + a2/(b2 + …))`` by Lentz's method; term(k) is (a, b)."""
    value = start or _TINY
    above, below = value, 0.0
    for k in range(1, 200_000):
        a, b = term(k)
        below = 1 / ((b + a * below) or _TINY)
        above = (b + a / above) or _TINY
        change = above * below
        value *= change
        if abs(change - 1) < 1e-15:
            break
    return value


def beta_share(x: float, a: float, b: float) -> float:
    """Give the regularised incomplete beta function I_x(a, b).

    Parameters
    ----------
    x : float
        Inside [0, 1].
    a, b : float
        Above 0.

    Notes
    -----
    Continued fraction 26.5.8 of Abramowitz & Stegun (1964), Handbook of Mathematical Functions.

    Examples
    --------
    >>> round(beta_share(0.5, 2.0, 3.0), 6)
    0.6875
    """
    if x <= 0 or x >= 1:
        return float(x >= 1)
    if x > (a + 1) / (a + b + 2):
        return 1 - beta_share(1 - x, b, a)
    front = math.exp(
        math.lgamma(a + b) - math.lgamma(a) - math.lgamma(b) + a * math.log(x) + b * math.log1p(-x)
    )

    def term(k: int) -> tuple[float, float]:
        m = k // 2
        if k % 2:
            return -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1)), 1.0
        return m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m)), 1.0

    return front / a / _fraction(term, 1.0)


def chi_square_share(value: float, degrees_of_freedom: float) -> float:
    """Give the share of a chi-square population below ``value``.

    Notes
    -----
    Series 6.5.29 below the middle, continued fraction 6.5.31 above: Abramowitz & Stegun (1964).

    Examples
    --------
    >>> round(chi_square_share(14.067, 7), 4)
    0.95
    """
    if value < 1e-300:
        return 0.0
    if math.isinf(value):
        return 1.0
    a, x = degrees_of_freedom / 2, value / 2
    front = math.exp(a * math.log(x) - x - math.lgamma(a))
    if x < a + 1:
        total = piece = 1 / a
        step = a
        while piece > total * _CLOSE:
            step += 1
            piece *= x / step
            total += piece
        return front * total
    fraction = _fraction(lambda k: (-k * (k - a), x + 2 * k + 1 - a), x + 1 - a)
    return 1 - front / fraction


def f_share(value: float, above: float, below: float) -> float:
    """Give the share of an F population (``above`` and ``below`` df) that lies below ``value``.

    Infinite degrees of freedom below leave chi-square / df; above as well, a step at 1.

    Examples
    --------
    >>> round(f_share(3.787, 7, 7), 3)
    0.95
    """
    if value <= 0:
        return 0.0
    if math.isinf(above):
        return 1 - chi_square_share(below / value, below) if math.isfinite(below) else value >= 1
    if math.isinf(below):
        return chi_square_share(above * value, above)
    return beta_share(above * value / (above * value + below), above / 2, below / 2)


def t_share(value: float, degrees_of_freedom: float) -> float:
    """Give the share of a Student population below ``value``.

    Examples
    --------
    >>> round(t_share(2.2622, 9), 4)
    0.975
    """
    if math.isinf(degrees_of_freedom):
        return normal_share(value)
    square = value * value
    tail = 0.5 * beta_share(
        degrees_of_freedom / (degrees_of_freedom + square), degrees_of_freedom / 2, 0.5
    )
    return tail if value < 0 else 1 - tail


def invert(share: Callable[[float], float], level: float, low: float, high: float) -> float:
    """Find where a rising ``share`` reaches ``level``: Illinois steps inside a bracket.

    Parameters
    ----------
    share : callable
        Rises with its argument.
    level : float
        To be reached.
    low, high : float
        ``share(low)`` is below the level; ``high``, above 0, is doubled until it is not.

    Examples
    --------
    >>> round(invert(lambda x: x * x, 2.0, 0.0, 1.0), 6)
    1.414214
    """
    while share(high) < level:
        low, high = high, high * 2
    below, above = share(low) - level, share(high) - level
    side = 0
    for _ in range(200):
        middle = (low * above - high * below) / (above - below)
        if not low < middle < high:
            middle = (low + high) / 2
        here = share(middle) - level
        if abs(here) <= 1e-15 * level or high - low < 1e-13 * abs(high):
            return middle
        # An end that stays twice in a row would stay for ever: its value is halved.
        if here < 0:
            low, below, above = middle, here, above / 2 if side < 0 else above
            side = -1
        else:
            high, above, below = middle, here, below / 2 if side > 0 else below
            side = 1
    return (low + high) / 2


def _near_normal(z: float, degrees_of_freedom: float) -> float:
    """Correct a normal quantile for many degrees of freedom, to 10 digits above ``_MANY``.

    Expansion 26.7.5 of Abramowitz & Stegun (1964), Handbook of Mathematical Functions.
    """
    s = z * z
    terms = (
        z * (s + 1) / 4,
        z * (5 * s**2 + 16 * s + 3) / 96,
        z * (3 * s**3 + 19 * s**2 + 17 * s - 15) / 384,
        z * (79 * s**4 + 776 * s**3 + 1482 * s**2 - 1920 * s - 945) / 92160,
    )
    return z + math.fsum(term / degrees_of_freedom**k for k, term in enumerate(terms, start=1))


@lru_cache(maxsize=4096)
def student_quantile(level: float, degrees_of_freedom: float) -> float:
    """Give the Student value that ``level`` of the population lies below.

    Examples
    --------
    >>> round(student_quantile(0.975, 9), 4)
    2.2622
    """
    if math.isinf(degrees_of_freedom):
        return normal_quantile(level)
    if level < 0.5:
        return -student_quantile(1 - level, degrees_of_freedom)
    if level == 0.5:
        return 0.0
    if degrees_of_freedom > _MANY:
        return _near_normal(normal_quantile(level), degrees_of_freedom)
    return invert(lambda value: t_share(value, degrees_of_freedom), level, 0.0, 2.0)


@lru_cache(maxsize=1024)
def chi_square_quantile(level: float, degrees_of_freedom: float) -> float:
    """Give the chi-square value that ``level`` of the population lies below.

    Examples
    --------
    >>> round(chi_square_quantile(0.20, 7), 3)
    3.822
    """
    return invert(
        lambda value: chi_square_share(value, degrees_of_freedom),
        level,
        0.0,
        degrees_of_freedom + 2.0,
    )

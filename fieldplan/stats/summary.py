"""What a handful of results says about itself: mean, spread, lean."""

import math
from collections.abc import Iterable

from fieldplan.base.errors import DesignError


def _numbers(values: Iterable[float], at_least: int, what: str) -> list[float]:
    numbers = [float(value) for value in values]
    if len(numbers) < at_least:
        message = f"{what} needs {at_least} results or more, not {len(numbers)}."
        raise DesignError(message)
    return numbers


def sample_mean(values: Iterable[float]) -> float:
    """Give the mean of results.

    Examples
    --------
    >>> sample_mean([86, 90, 98, 104])
    94.5
    """
    numbers = _numbers(values, 1, "a mean")
    return math.fsum(numbers) / len(numbers)


def sample_variance(values: Iterable[float]) -> float:
    """Give the variance s² of results, divisor n − 1.

    Notes
    -----
    Two passes with the remaining rounding error of the mean taken out: Chan, Golub & LeVeque
    (1983), The American Statistician 37:242.

    Examples
    --------
    >>> sample_variance([86, 90, 98, 104])
    65.0
    """
    numbers = _numbers(values, 2, "a variance")
    mean = sample_mean(numbers)
    off = [number - mean for number in numbers]
    squares = math.fsum(o * o for o in off) - math.fsum(off) ** 2 / len(off)
    return squares / (len(off) - 1)


def sample_sd(values: Iterable[float]) -> float:
    """Give the standard deviation s of results, divisor n − 1.

    Examples
    --------
    >>> round(sample_sd([86, 90, 98, 104]), 3)
    8.062
    """
    return math.sqrt(sample_variance(values))


def sample_skewness(values: Iterable[float]) -> float:
    """Give the skewness g1 of results; 0 when they are all the same.

    Notes
    -----
    g1 = m3 / m2^1.5 with moments about the mean, divisor n: Joanes & Gill (1998), The
    Statistician 47:183. It cannot exceed :func:`skewness_ceiling`.

    Examples
    --------
    >>> round(sample_skewness([1, 1, 1, 1, 9]), 6)
    1.5
    """
    numbers = _numbers(values, 2, "a skewness")
    mean = sample_mean(numbers)
    second = math.fsum((number - mean) ** 2 for number in numbers) / len(numbers)
    third = math.fsum((number - mean) ** 3 for number in numbers) / len(numbers)
    if second <= (1e-12 * abs(mean)) ** 2:
        return 0.0
    return third / (second * math.sqrt(second))


def skewness_ceiling(n: int) -> float:
    """Give the largest skewness g1 that n results can show, whatever the population.

    A small pilot that shows little skewness proves nothing: it could not have shown more.

    Notes
    -----
    (n − 2) / √(n − 1), reached by n − 1 equal values and one apart: Wilkins (1944), Annals of
    Mathematical Statistics 15:333.

    Examples
    --------
    >>> skewness_ceiling(5)
    1.5
    """
    if n < 2:
        message = f"a skewness needs 2 results or more, not {n}."
        raise DesignError(message)
    return (n - 2) / math.sqrt(n - 1)

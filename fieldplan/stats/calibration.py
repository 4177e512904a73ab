"""How closely a cheap reading follows the laboratory, learnt from pairs of the two."""

import math
from collections.abc import Sequence
from typing import NamedTuple

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile


class Calibration(NamedTuple):
    """How a cheap reading followed the laboratory's results in a pilot.

    ``low`` and ``high`` enclose the true correlation with the stated confidence;
    a result is predicted as ``intercept + slope · reading``.
    """

    pairs: int
    correlation: float
    low: float
    high: float
    slope: float
    intercept: float


def calibration(
    readings: Sequence[float], results: Sequence[float], *, confidence: float = 0.95
) -> Calibration:
    """Learn the correlation of reading and result from pairs, with its interval.

    Parameters
    ----------
    readings, results : sequence of float, length m
        At the same places; at least 4 pairs, neither all alike.
    confidence : float
        Inside (0, 1).

    Raises
    ------
    DesignError
        Unequal lengths, fewer than 4 pairs, or one of the two does not vary.

    Notes
    -----
    r by least squares; its interval from ``correlation_interval``.

    Examples
    --------
    >>> found = calibration([1, 2, 3, 4, 5], [12, 17, 33, 38, 52])
    >>> round(found.correlation, 3), round(found.low, 3), found.pairs
    (0.986, 0.798, 5)
    """
    if len(readings) != len(results):
        message = f"{len(readings)} readings and {len(results)} results are no pairs."
        raise DesignError(message)
    pairs = len(readings)
    if pairs < 4:
        message = f"{pairs} pairs of reading and result are too few; a correlation needs 4 or more."
        raise DesignError(message)
    mean_x, mean_y = math.fsum(readings) / pairs, math.fsum(results) / pairs
    off_x, off_y = [x - mean_x for x in readings], [y - mean_y for y in results]
    xx, yy = math.fsum(x * x for x in off_x), math.fsum(y * y for y in off_y)
    for name, values, squares in (("readings", readings, xx), ("results", results, yy)):
        if squares == 0:
            message = (
                f"all {pairs} {name} are {values[0]:g}; what does not vary has no correlation."
            )
            raise DesignError(message)
    xy = math.fsum(x * y for x, y in zip(off_x, off_y, strict=True))
    r = max(-1.0, min(1.0, xy / math.sqrt(xx * yy)))
    low, high = correlation_interval(r, pairs, confidence=confidence)
    return Calibration(pairs, r, low, high, xy / xx, mean_y - xy / xx * mean_x)


def correlation_interval(
    correlation: float, pairs: int, *, confidence: float = 0.95
) -> tuple[float, float]:
    """Give the ends between which the true correlation lies.

    Parameters
    ----------
    correlation : float
        Of so many pairs, from -1 to 1.
    pairs : int
        At least 4.
    confidence : float
        Inside (0, 1).

    Raises
    ------
    DesignError
        Fewer than 4 pairs.

    Notes
    -----
    tanh(artanh r ± z / √(m − 3)): Fisher (1921), Metron 1:3, for pairs near normal.

    Examples
    --------
    >>> low, high = correlation_interval(0.85, 12)
    >>> round(low, 2), round(high, 2)
    (0.54, 0.96)
    """
    if pairs < 4:
        message = f"{pairs} pairs of reading and result are too few; a correlation needs 4 or more."
        raise DesignError(message)
    if abs(correlation) == 1:
        return correlation, correlation
    reach = normal_quantile((1 + confidence) / 2) / math.sqrt(pairs - 3)
    middle = math.atanh(correlation)
    return math.tanh(middle - reach), math.tanh(middle + reach)

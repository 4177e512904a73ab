"""What skewness does to Student's interval, and how many results it takes to bear it."""

import math

from scipy.special import ndtri

from fieldplan.stats.intervals import IntervalKind


def t_coverage(n: int, skewness: float, *, confidence: float, kind: IntervalKind) -> float:
    """Say how often a nominal t interval holds the true mean at this n and skewness."""
    return max(0.0, 1 - _misses(n, skewness, confidence, kind))


def _misses(n: int, skewness: float, confidence: float, kind: IntervalKind) -> float:
    tail = (1 - confidence) / 2 if kind == "two-sided" else 1 - confidence
    x = float(ndtri(1 - tail))
    density = math.exp(-x * x / 2) / math.sqrt(2 * math.pi)
    first = skewness / math.sqrt(n) * (2 * x * x + 1) / 6 * density
    second = skewness**2 / n * x * (1.5 * (x * x - 3) / 12 - (x**4 + 2 * x * x - 3) / 18) * density
    above, below = tail - first - second, tail + first - second
    if kind == "two-sided":
        return above + below
    return below if kind == "upper-limit" else above

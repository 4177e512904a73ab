"""How far the skew-widened interval will reach, and how often it misses, for a shape and an n."""

import math
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.mean_shape import Shape
from fieldplan.stats.skew_interval import PopulationClass, skew_factors

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Numbers = NDArray[np.float64]

SEED = 1992
NODES = (3, 4, 5, 6, 8, 10, 13, 16, 20, 25, 32, 40, 50, 65, 80, 100, 130, 160, 200, 260, 320,
         400, 500, 650, 800, 1000, 1300, 1600, 2000)  # fmt: skip
"""Numbers of results that are simulated; between them reaches are straight in 1/√n."""

DRAWS = 400_000
"""Values drawn for a node; a mean reach is then known to about 1 %."""

FEWEST, MOST = 400, 10_000
"""Campaigns drawn for a node, at least and at most."""

RANKED = 40
"""Equally likely reaches that stand for all."""


@dataclass(frozen=True)
class Reach:
    """How far the interval reaches from the mean, in standard errors σ/√n of the true σ.

    Parameters
    ----------
    mean : float
        Over campaigns; of two ends half the distance between them.
    ranked : tuple of float
        Equally likely reaches, rising.
    """

    mean: float
    ranked: tuple[float, ...]


@dataclass(frozen=True)
class Promise:
    """The interval that the rules fix: class, confidence, kind."""

    population_class: PopulationClass
    confidence: float
    kind: IntervalKind


def widened_reach(shape: Shape, n: int, promise: Promise) -> Reach:
    """Say how far the interval will reach from n results of a shape.

    Parameters
    ----------
    shape : Shape
        Not mirrored.
    n : int
        Results; below 3 the reach has no end.
    promise : Promise

    Returns
    -------
    Reach
        Simulated with a fixed seed; above 2,000 results with the shape's own skewness and
        coefficient of variation.

    Examples
    --------
    >>> rule = Promise("cv-up-to-1", 0.95, "two-sided")
    >>> few, many = (widened_reach(Shape("gamma", 0.8), n, rule).mean for n in (10, 1000))
    >>> few > 1.5 * many > 2.9
    True
    """
    if n < NODES[0]:
        return Reach(math.inf, (math.inf,) * RANKED)
    if n > NODES[-1]:
        below, above = skew_factors(
            n,
            shape.skewness,
            shape.whole_cv,
            population_class=promise.population_class,
            confidence=promise.confidence,
            kind=promise.kind,
        )
        reach = float(_of_kind(below, above, promise.kind))
        return Reach(reach, (reach,) * RANKED)
    if n in NODES:
        return _node(shape, n, promise)
    low, high = next((a, b) for a, b in pairwise(NODES) if a < n < b)
    one, other = _node(shape, low, promise), _node(shape, high, promise)
    share = (low**-0.5 - n**-0.5) / (low**-0.5 - high**-0.5)
    ranked = zip(one.ranked, other.ranked, strict=True)
    return Reach(
        (1 - share) * one.mean + share * other.mean,
        tuple((1 - share) * a + share * b for a, b in ranked),
    )


def _of_kind(below: "Numbers", above: "Numbers", kind: IntervalKind) -> "Numbers":
    if kind == "two-sided":
        return (above - below) / 2
    return above if kind == "upper-limit" else -below


@lru_cache(maxsize=1024)
def _node(shape: Shape, n: int, promise: Promise) -> Reach:
    import numpy as np

    campaigns = max(FEWEST, min(MOST, DRAWS // n))
    _, deviation, below, above = _drawn(shape, n, promise, campaigns=campaigns)
    reaches = deviation * _of_kind(below, above, promise.kind)
    shares = (np.arange(RANKED) + 0.5) / RANKED
    ranked = tuple(float(one) for one in np.quantile(reaches, shares))
    return Reach(float(reaches.mean()), ranked)


def _drawn(
    shape: Shape, n: int, promise: Promise, *, campaigns: int
) -> "tuple[Numbers, Numbers, Numbers, Numbers]":
    """Draw campaigns: error of the mean and s, both in units of σ, and the two factors."""
    import numpy as np

    from fieldplan.stats.mean_simulation import draw_standardised

    if shape.mirrored:
        message = "the skew-widened interval is for results of 0 and above with a tail upwards."
        raise DesignError(message)
    generator = np.random.Generator(np.random.PCG64(SEED))
    values = draw_standardised(shape, (campaigns, n), generator)
    error = values.mean(axis=1)
    values -= error[:, None]
    squares = values * values
    second = squares.sum(axis=1) / n
    third = (squares * values).sum(axis=1) / n
    deviation = np.sqrt(second * n / (n - 1))
    safe = np.where(second > 0, second, 1.0)
    mean = np.maximum(error + 1 / shape.whole_cv, 1e-12)
    below, above = skew_factors(
        n,
        np.where(second > 0, third / safe**1.5, 0.0),
        deviation / mean,
        population_class=promise.population_class,
        confidence=promise.confidence,
        kind=promise.kind,
    )
    return error, deviation, below, above


@lru_cache(maxsize=256)
def widened_misses(
    shape: Shape, n: int, promise: Promise, *, campaigns: int = MOST
) -> tuple[float, float]:
    """Say in which shares of campaigns the true mean lies above the interval, and below it.

    Parameters
    ----------
    shape : Shape
    n : int
        At least 3.
    promise : Promise
    campaigns : int

    Returns
    -------
    above, below : float
        0 on the open side of a limit.

    Examples
    --------
    >>> above, below = widened_misses(
    ...     Shape("gamma", 0.8), 20, Promise("cv-up-to-1", 0.95, "two-sided"))
    >>> above + below < 0.05
    True
    """
    error, deviation, below, above = _drawn(shape, n, promise, campaigns=campaigns)
    root = math.sqrt(n)
    too_low = error + above * deviation / root < 0
    too_high = error + below * deviation / root > 0
    shares = float(too_low.mean()), float(too_high.mean())
    if promise.kind == "upper-limit":
        return shares[0], 0.0
    return shares if promise.kind == "two-sided" else (0.0, shares[1])

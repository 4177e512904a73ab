"""Coverage and width of the intervals for a mean, by simulation; outside CI.

``python -m tests.evidence.interval_table`` prints the table of docs/evidence/intervals.md.
"""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.skew_interval import hall_factor, skew_factors

Array = NDArray[np.float64]
Draw = Callable[[np.random.Generator, tuple[int, int]], Array]
SIZES = (5, 8, 10, 15, 20, 30, 50, 100, 200)
BLOCK = 200_000
"""Numbers drawn at once, so that memory stays bounded."""


@dataclass(frozen=True)
class Population:
    """A population with its true mean; ``cv``, ``zeros`` and ``hot`` place it in a class.

    ``hot`` is the share of a separate part with high values, None where there is none.
    """

    name: str
    mean: float
    cv: float
    zeros: float
    draw: Draw
    hot: float | None = None


def gamma(cv: float) -> Population:
    """Give a gamma population of mean 1."""
    shape = 1 / cv**2
    return Population(f"gamma {cv:g}", 1.0, cv, 0.0, lambda r, s: r.gamma(shape, 1 / shape, s))


def lognormal(cv: float) -> Population:
    """Give a lognormal population of mean 1."""
    sigma = math.sqrt(math.log1p(cv * cv))
    return Population(
        f"lognormal {cv:g}", 1.0, cv, 0.0, lambda r, s: r.lognormal(-sigma * sigma / 2, sigma, s)
    )


def weibull(shape: float) -> Population:
    """Give a Weibull population of mean 1."""
    mean = math.gamma(1 + 1 / shape)
    cv = math.sqrt(math.gamma(1 + 2 / shape) / mean**2 - 1)
    return Population(f"Weibull {shape:g}", 1.0, cv, 0.0, lambda r, s: r.weibull(shape, s) / mean)


def log_uniform(decades: float) -> Population:
    """Give a population even on the scale of its logarithm."""
    top = 10**decades
    width = decades * math.log(10)
    mean = (top - 1) / width
    second = (top * top - 1) / (2 * width)
    cv = math.sqrt(second / mean**2 - 1)
    return Population(
        f"log-uniform {decades:g}", mean, cv, 0.0, lambda r, s: np.exp(r.uniform(0, width, s))
    )


def with_zeros(inner: Population, zeros: float) -> Population:
    """Mix zeros into a population."""

    def draw(rng: np.random.Generator, shape: tuple[int, int]) -> Array:
        return np.where(rng.random(shape) < zeros, 0.0, inner.draw(rng, shape))

    cv = math.sqrt((1 + inner.cv**2) / (1 - zeros) - 1)
    hot = None if inner.hot is None else inner.hot * (1 - zeros)
    name = f"{zeros:.0%} zeros, {inner.name}"
    return Population(name, inner.mean * (1 - zeros), cv, zeros, draw, hot)


def two_parts(share: float, times: float, cv: float) -> Population:
    """Mix a higher part into a lognormal population."""
    inner = lognormal(cv)
    mean = 1 - share + share * times
    second = (1 + cv * cv) * (1 - share + share * times * times)

    def draw(rng: np.random.Generator, shape: tuple[int, int]) -> Array:
        return inner.draw(rng, shape) * np.where(rng.random(shape) < share, times, 1.0)

    found = math.sqrt(second / mean**2 - 1)
    return Population(f"{share:.0%} times {times:g}", mean, found, 0.0, draw, share)


def normal(cv: float) -> Population:
    """Give a normal population of mean 1; far enough from 0 that none falls below."""
    return Population(f"normal {cv:g}", 1.0, cv, 0.0, lambda r, s: np.abs(r.normal(1, cv, s)))


def populations() -> Iterator[Population]:
    """Give populations of both classes, none of them one that the constants were fitted to."""
    yield from (normal(0.15), normal(0.25))
    yield from (gamma(cv) for cv in (0.35, 0.6, 0.85, 0.95, 1.3, 1.7, 1.95))
    yield from (lognormal(cv) for cv in (0.25, 0.45, 0.7, 0.95, 1.4, 1.8, 1.95))
    yield from (weibull(shape) for shape in (2.5, 1.3, 1.05, 0.85, 0.62))
    yield from (log_uniform(decades) for decades in (0.6, 1.2, 1.6, 2.5, 3.2))
    yield from (two_parts(0.3, 4.0, 0.4), two_parts(0.4, 3.0, 0.3), two_parts(0.25, 8.0, 0.5))
    yield with_zeros(gamma(0.8), 0.15)
    yield with_zeros(lognormal(0.9), 0.3)
    yield with_zeros(gamma(1.0), 0.4)
    yield with_zeros(lognormal(0.6), 0.5)


def of_class(population: Population, name: str) -> bool:
    """Tell whether a population belongs to a class."""
    if name == "cv-up-to-1":
        return population.cv <= 1.0 and population.zeros == 0
    return population.cv <= 2.0 and population.zeros <= 0.5


def moments(values: Array) -> tuple[Array, Array, Array]:
    """Give mean, s and skewness g1 of every row."""
    mean = values.mean(axis=1)
    centred = values - mean[:, None]
    square = centred * centred
    n = values.shape[1]
    second = square.sum(axis=1) / n
    third = np.einsum("ij,ij->i", square, centred) / n
    safe = np.where(second > 0, second, 1.0)
    return mean, np.sqrt(second * n / (n - 1)), np.where(second > 0, third / safe**1.5, 0.0)


Found = tuple[Array, Array, Array]


def limits(
    rule: str, n: int, kind: IntervalKind, found: Found, *, confidence: float = 0.95
) -> tuple[Array, Array]:
    """Give how many standard errors below and above the mean the ends of a rule lie."""
    _, deviation, skewness = found
    t, root = t_quantile(n - 1, confidence=confidence, kind=kind), math.sqrt(n)
    if rule == "Student t":
        return np.full(deviation.shape, -t), np.full(deviation.shape, t)
    if rule == "Hall":
        return hall_factor(-t, skewness / root), hall_factor(t, skewness / root)
    if rule == "Chebyshev":
        share = 1 - confidence
        factor = math.sqrt(1 / share) if kind == "two-sided" else math.sqrt(1 / share - 1)
        return np.full(deviation.shape, -factor), np.full(deviation.shape, factor)
    mean = found[0]
    variation = np.where(mean > 0, deviation / np.where(mean > 0, mean, 1.0), 0.0)
    return skew_factors(
        n, skewness, variation, population_class=rule, confidence=confidence, kind=kind
    )


def drawn(population: Population, n: int, *, repetitions: int, seed: int) -> Iterator[Found]:
    """Draw samples in blocks and give their moments."""
    rng = np.random.default_rng([seed, n])
    done = 0
    while done < repetitions:
        rows = min(repetitions - done, max(1, BLOCK // n))
        yield moments(population.draw(rng, (rows, n)))
        done += rows


def held(
    population: Population,
    rule: str,
    n: int,
    kind: IntervalKind,
    *,
    found: Found,
    confidence: float,
) -> tuple[int, float]:
    """Count the samples whose interval holds the mean, and add up their widths over s/√n."""
    mean, deviation, _ = found
    below, above = limits(rule, n, kind, found, confidence=confidence)
    error = deviation / math.sqrt(n)
    low = mean + below * error <= population.mean
    high = population.mean <= mean + above * error
    if kind == "upper-limit":
        return int(high.sum()), float(above.sum())
    if kind == "lower-limit":
        return int(low.sum()), float(-below.sum())
    return int((low & high).sum()), float((above - below).sum() / 2)


def cell(
    population: Population,
    n: int,
    rule: str,
    kind: IntervalKind,
    *,
    repetitions: int,
    seed: int,
    confidence: float = 0.95,
) -> tuple[float, float]:
    """Give coverage, and the mean half-width in standard errors, of one cell."""
    counted, width = 0, 0.0
    for found in drawn(population, n, repetitions=repetitions, seed=seed):
        more, wider = held(population, rule, n, kind, found=found, confidence=confidence)
        counted, width = counted + more, width + wider
    return counted / repetitions, width / repetitions

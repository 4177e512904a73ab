"""Coverage and width of the intervals for a mean, by simulation; outside CI.

``python -m tests.evidence.interval_coverage`` prints the table of docs/evidence/intervals.md.
``--repetitions`` sets the campaigns a cell; the standard error of a cell is √(p (1 − p) / R).
"""

import argparse
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.skew_interval import hall_factor, skew_factors

Array = NDArray[np.float64]
Draw = Callable[[np.random.Generator, tuple[int, int]], Array]
SIZES = (5, 8, 10, 15, 20, 30, 50, 100, 200)
BLOCK = 2_000_000
"""Numbers drawn at once, so that memory stays bounded."""


@dataclass(frozen=True)
class Population:
    """A population with its true mean; ``cv`` and ``zeros`` place it in a class."""

    name: str
    mean: float
    cv: float
    zeros: float
    draw: Draw


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
    return Population(f"{zeros:.0%} zeros, {inner.name}", inner.mean * (1 - zeros), cv, zeros, draw)


def two_parts(share: float, times: float, cv: float) -> Population:
    """Mix a higher part into a lognormal population."""
    inner = lognormal(cv)
    mean = 1 - share + share * times
    second = (1 + cv * cv) * (1 - share + share * times * times)

    def draw(rng: np.random.Generator, shape: tuple[int, int]) -> Array:
        return inner.draw(rng, shape) * np.where(rng.random(shape) < share, times, 1.0)

    return Population(
        f"{share:.0%} times {times:g}", mean, math.sqrt(second / mean**2 - 1), 0.0, draw
    )


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
    second = (centred**2).mean(axis=1)
    third = (centred**3).mean(axis=1)
    n = values.shape[1]
    safe = np.where(second > 0, second, 1.0)
    return mean, np.sqrt(second * n / (n - 1)), np.where(second > 0, third / safe**1.5, 0.0)


def limits(rule: str, n: int, kind: str, found: tuple[Array, Array, Array]) -> tuple[Array, Array]:
    """Give low and high ends of a rule, open ones too."""
    mean, deviation, skewness = found
    t = t_quantile(n - 1, confidence=0.95, kind=kind)
    error = deviation / math.sqrt(n)
    if rule == "Student t":
        return mean - t * error, mean + t * error
    if rule == "Hall":
        root = math.sqrt(n)
        return (
            mean + hall_factor(-t, skewness / root) * error,
            mean + hall_factor(t, skewness / root) * error,
        )
    if rule == "Chebyshev":
        factor = math.sqrt(20) if kind == "two-sided" else math.sqrt(19)
        return mean - factor * error, mean + factor * error
    variation = np.where(mean > 0, deviation / np.where(mean > 0, mean, 1.0), 0.0)
    below, above = skew_factors(
        n, skewness, variation, population_class=rule, confidence=0.95, kind=kind
    )
    return mean + below * error, mean + above * error


def cell(
    population: Population, n: int, rule: str, kind: str, *, repetitions: int, seed: int
) -> tuple[float, float]:
    """Give coverage and mean width over the ideal normal width of one cell."""
    rng = np.random.default_rng([seed, n])
    held, width, done = 0, 0.0, 0
    while done < repetitions:
        rows = min(repetitions - done, max(1, BLOCK // n))
        found = moments(population.draw(rng, (rows, n)))
        low, high = limits(rule, n, kind, found)
        if kind == "two-sided":
            held += int(((low <= population.mean) & (population.mean <= high)).sum())
            width += float((high - low).sum())
        else:
            held += int((population.mean <= high).sum())
            width += float((high - found[0]).sum())
        done += rows
    return held / repetitions, width / repetitions


def worst(rule: str, members: list[Population], n: int, kind: str, repetitions: int) -> str:
    """Give the lowest coverage over a class, and the mean width over Chebyshev's."""
    cells = [cell(p, n, rule, kind, repetitions=repetitions, seed=k) for k, p in enumerate(members)]
    bound = [
        cell(p, n, "Chebyshev", kind, repetitions=repetitions // 10, seed=k)
        for k, p in enumerate(members)
    ]
    ratio = np.mean([a[1] / b[1] for a, b in zip(cells, bound, strict=True)])
    return f"{100 * min(c[0] for c in cells):.1f} ({ratio:.2f})"


def main() -> None:
    """Print the table: worst coverage and width over Chebyshev's, by rule, class and n."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--repetitions", type=int, default=60_000)
    repetitions = parser.parse_args().repetitions
    print("| class | rule | kind | " + " | ".join(f"n = {n}" for n in SIZES) + " |")
    print("| --- | --- | --- |" + " ---: |" * len(SIZES))
    for name in ("cv-up-to-1", "cv-up-to-2"):
        members = [p for p in populations() if of_class(p, name)]
        for kind in ("two-sided", "upper-limit"):
            for rule in (name, "Hall", "Student t"):
                cells = [worst(rule, members, n, kind, repetitions) for n in SIZES]
                label = "skew-widened" if rule == name else rule
                print(f"| {name} ({len(members)}) | {label} | {kind} | {' | '.join(cells)} |")


if __name__ == "__main__":
    main()

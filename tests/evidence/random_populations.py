"""Populations drawn at random from the classes that the skew-widened interval is promised for."""

import math
from collections.abc import Callable

import numpy as np
from scipy.special import ndtr, ndtri

from tests.evidence.interval_coverage import (
    Array,
    Population,
    gamma,
    log_uniform,
    lognormal,
    two_parts,
    weibull,
    with_zeros,
)

Rng = np.random.Generator
MISSED = 0.05
"""A hot part that n results miss with a chance above this is outside both classes."""


def shifted(inner: Population, share: float) -> Population:
    """Put a population upon a floor that is this share of the whole mean."""
    floor = inner.mean * share / (1 - share)
    mean = inner.mean + floor
    return Population(
        f"{inner.name} on a floor of {share:.2f}",
        mean,
        inner.cv * inner.mean / mean,
        0.0,
        lambda r, s: inner.draw(r, s) + floor,
        inner.hot,
    )


def cut_lognormal(cv: float, kept: float) -> Population:
    """Cut a lognormal population at the quantile ``kept``."""
    sigma = math.sqrt(math.log1p(cv * cv))
    edge = float(ndtri(kept))

    def moment(order: int) -> float:
        return math.exp(order**2 * sigma**2 / 2) * float(ndtr(edge - order * sigma)) / kept

    def draw(rng: Rng, shape: tuple[int, int]) -> Array:
        return np.asarray(np.exp(sigma * ndtri(kept * rng.random(shape))), dtype=np.float64)

    found = math.sqrt(moment(2) / moment(1) ** 2 - 1)
    return Population(f"lognormal {cv:.2f} cut at {kept:.2f}", moment(1), found, 0.0, draw)


def beta(a: float, b: float) -> Population:
    """Give a beta population."""
    cv = math.sqrt(b / (a * (a + b + 1)))
    return Population(f"beta {a:.2f} {b:.2f}", a / (a + b), cv, 0.0, lambda r, s: r.beta(a, b, s))


def inverse_gaussian(cv: float) -> Population:
    """Give an inverse Gaussian population of mean 1."""
    return Population(
        f"inverse Gaussian {cv:.2f}", 1.0, cv, 0.0, lambda r, s: r.wald(1.0, 1 / cv**2, s)
    )


def power_tail(shape: float) -> Population:
    """Give a population whose tail falls by a power of its values (above 0, Lomax)."""
    mean = 1 / (shape - 1)
    cv = math.sqrt(shape / (shape - 2))
    return Population(f"power tail {shape:.2f}", mean, cv, 0.0, lambda r, s: r.pareto(shape, s))


def two_humps(share: float, times: float, cv: float) -> Population:
    """Mix two gamma populations, the higher one ``times`` as high; its share is its hot part."""
    inner = gamma(cv)
    mean = 1 - share + share * times
    second = (1 + cv * cv) * (1 - share + share * times * times)

    def draw(rng: Rng, shape: tuple[int, int]) -> Array:
        return inner.draw(rng, shape) * np.where(rng.random(shape) < share, times, 1.0)

    found = math.sqrt(second / mean**2 - 1)
    name = f"{share:.2f} of gamma {cv:.2f} times {times:.1f}"
    return Population(name, mean, found, 0.0, draw, share)


def _without_zeros(rng: Rng, most: float) -> Population:
    """Draw a family, then its constants."""
    cv = rng.uniform(0.1, most)
    wide = rng.uniform(0.3, 1.0) * most
    makers: tuple[Callable[[], Population], ...] = (
        lambda: gamma(cv),
        lambda: gamma(wide),
        lambda: lognormal(cv),
        lambda: lognormal(wide),
        lambda: weibull(rng.uniform(0.5 if most > 1 else 1.0, 3.5)),
        lambda: log_uniform(rng.uniform(0.3, 4.0 if most > 1 else 1.9)),
        lambda: inverse_gaussian(wide),
        lambda: shifted(lognormal(rng.uniform(0.5, 1.0) * most), rng.uniform(0.05, 0.7)),
        lambda: shifted(gamma(rng.uniform(0.4, 0.8) * most), rng.uniform(0.05, 0.7)),
        lambda: cut_lognormal(rng.uniform(0.5, 2.5) * most, rng.uniform(0.8, 0.995)),
        lambda: beta(rng.uniform(0.2, 4.0), rng.uniform(0.3, 8.0)),
        lambda: two_humps(rng.uniform(0.03, 0.6), rng.uniform(2.0, 12.0), rng.uniform(0.1, 0.6)),
        lambda: two_parts(rng.uniform(0.03, 0.6), rng.uniform(2.0, 12.0), rng.uniform(0.1, 0.6)),
        lambda: power_tail(rng.uniform(3.2, 8.0)) if most > 1 else lognormal(wide),
    )
    return makers[int(rng.integers(len(makers)))]()


def random_population(rng: Rng, name: str) -> Population:
    """Draw a population of a class; again until it belongs there."""
    most = 1.0 if name == "cv-up-to-1" else 2.0
    while True:
        found = _without_zeros(rng, most)
        if most > 1 and rng.random() < 0.4:
            found = with_zeros(found, float(rng.choice([0.5, rng.uniform(0.02, 0.5)])))
        if 0.05 < found.cv <= most:
            return found


def shown_to(population: Population, n: int) -> bool:
    """Tell whether n results meet the hot part of a population often enough."""
    return population.hot is None or (1 - population.hot) ** n <= MISSED

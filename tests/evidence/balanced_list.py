"""What balanced lists gain, and how often their intervals hold: prints the tables of the docs.

Run with ``python -m tests.evidence.balanced_list [DRAWS [FIELDS]]``; 200 draws and 120 fields of
each kind on each site take about 40 minutes on one core. Sites and covariance models:
tests/reference/fields.toml, the sites drawn 1 km wide. Efficiency is exact for a model and a draw
(the mean square error of the site mean over all fields of the model) and averaged over draws.
Coverage is for fields drawn at random, 95 % two-sided with Student's t; draw k of the layout meets
field k of every kind.
"""

import math
import sys
from collections.abc import Iterator, Sequence
from functools import cache, lru_cache

import numpy as np
import shapely
from numpy.typing import NDArray
from scipy.spatial import KDTree
from scipy.spatial.distance import cdist
from shapely import affinity

from fieldplan.base.draws import Stream
from fieldplan.design.area import Ground, draw_places
from fieldplan.design.balanced_list import balanced_places
from fieldplan.design.model import MeanEstimate, StratumValues
from fieldplan.design.spread_estimate import SpreadRule, estimate_spread
from fieldplan.stats.intervals import t_quantile
from tests.simulated_fields import (
    KINDS,
    LOGNORMALS,
    SITES,
    SLOPES,
    Floats,
    Kind,
    cells_of,
    draw_fields,
    polygon,
)

WIDTH_M = 1000.0
COUNTS = (20, 50, 100)
CURVES = (
    *(("exponential", r) for r in (0.05, 0.1, 0.2, 0.5)),
    *(("matern32", r) for r in (0.1, 0.2, 0.5)),
)
MODELS = (
    *(Kind("exponential", r, nugget) for r in (0.05, 0.1, 0.2, 0.5) for nugget in (0, 0.25, 0.5)),
    *(Kind("matern32", r, 0.0) for r in (0.1, 0.2, 0.5)),
)
PER_SIDE = 80
RULES: tuple[SpreadRule, ...] = ("neighbours", "covariance")


@cache
def ground(name: str) -> Ground:
    """Return a site, 1 km wide."""
    return Ground(name, affinity.scale(polygon(name), WIDTH_M, WIDTH_M, origin=(0, 0)))


@lru_cache(maxsize=4000)
def drawn(name: str, count: int, seed: int) -> Floats:
    """Return the list of one seed for a planned number, in widths of the site."""
    return balanced_places(ground(name), count, (seed, "main", name)) / (100 * WIDTH_M)


@cache
def at_random(name: str, count: int, seed: int) -> Floats:
    """Return random places, in widths of the site."""
    places = draw_places(ground(name), count, Stream(seed, "main", name, "places"))
    return places / (100 * WIDTH_M)


def correlation(distance: Floats, curve: str, reach: float) -> Floats:
    """Give the correlation of two places, nugget apart."""
    h = distance / reach
    if curve == "exponential":
        return np.asarray(np.exp(-3 * h))
    return np.asarray((1 + 4.744 * h) * np.exp(-4.744 * h))


@cache
def within_site(name: str, curve: str, reach: float) -> float:
    """Give the mean correlation of two places of a site."""
    cells = cells_of(name, PER_SIDE)
    return float(correlation(cdist(cells, cells), curve, reach).mean())


def square_errors(
    name: str, draws: Sequence[Floats]
) -> dict[tuple[str, float], NDArray[np.float64]]:
    """Give, by curve, the mean square error of the site mean of each draw, sill 1, no nugget."""
    cells = cells_of(name, PER_SIDE)
    found: dict[tuple[str, float], list[float]] = {curve: [] for curve in CURVES}
    for places in draws:
        own, across = cdist(places, places), cdist(places, cells)
        for curve in CURVES:
            error = correlation(own, *curve).mean() + within_site(name, *curve)
            found[curve].append(float(error - 2 * correlation(across, *curve).mean()))
    return {curve: np.array(errors) for curve, errors in found.items()}


def efficiency(name: str, kind: Kind, errors: Floats, count: int) -> tuple[float, float]:
    """Give the variance of simple random places over the layout's, and its standard error."""
    free = 1 - kind.nugget
    random = (free * (1 - within_site(name, kind.curve, kind.reach)) + kind.nugget) / count
    layout = free * float(errors.mean()) + kind.nugget / count
    doubt = free * float(errors.std(ddof=1)) / math.sqrt(len(errors))
    return random / layout, random / layout * doubt / layout


def mean_efficiency(draws_of: dict[str, list[Floats]]) -> float:
    """Give the geometric mean of efficiencies over three sites and 15 models."""
    logs = []
    for name, draws in draws_of.items():
        errors = square_errors(name, draws)
        for kind in MODELS:
            own = errors[kind.curve, kind.reach]
            logs.append(math.log(efficiency(name, kind, own, len(draws[0]))[0]))
    return math.exp(float(np.mean(logs)))


def first_part(count: int, first: int, draws: int) -> dict[str, list[Floats]]:
    """Return the first places of lists drawn for another number, by site."""
    return {name: [drawn(name, count, seed)[:first] for seed in range(draws)] for name in SITES}


def efficiency_rows(draws: int) -> Iterator[str]:
    """Print the geometric means, for the planned number and for first parts of the list."""
    cells = [f"{mean_efficiency(first_part(count, count, draws)):.2f}" for count in COUNTS]
    yield "| planned number | " + " | ".join(cells) + " |"
    for count in (30, 100):
        found = [mean_efficiency(first_part(count, m, draws)) for m in COUNTS]
        yield f"| first n of a list for {count} | " + " | ".join(f"{f:.2f}" for f in found) + " |"


def unevenness(name: str, places: Floats) -> float:
    """Give the variance of the share of the site nearest to each place, times n² (0: all alike)."""
    near = KDTree(places).query(cells_of(name, 100))[1]
    shares = np.bincount(near, minlength=len(places)) / len(near)
    return float(shares.var() * len(places) ** 2)


def evenness_rows(draws: int) -> Iterator[str]:
    """Print how even first parts of a list for 40 are, over random places."""
    for first in (5, 10, 15, 25, 40, 50, 80):
        lists = [
            unevenness(name, drawn(name, 40, s)[:first]) for name in SITES for s in range(draws)
        ]
        chance = [
            unevenness(name, at_random(name, first, s)) for name in SITES for s in range(draws)
        ]
        yield f"| {first} | {np.mean(lists) / np.mean(chance):.2f} |"


def estimated(name: str, field: Floats, places: Floats) -> StratumValues:
    """Set the results of one draw for the estimator."""
    at = KDTree(cells_of(name, PER_SIDE)).query(places)[1]
    measure = float(shapely.area(polygon(name))) * WIDTH_M**2
    return StratumValues(name, 1.0, field[at], coordinates=places * WIDTH_M, measure=measure)


def held_and_width(found: MeanEstimate, field: Floats) -> tuple[float, float]:
    """Tell whether the interval holds the mean of the field, and its width over simple random."""
    reach = t_quantile(found.degrees_of_freedom, confidence=0.95, kind="two-sided")
    plain = t_quantile(found.n - 1, confidence=0.95, kind="two-sided")
    random = plain * float(field.std()) / math.sqrt(found.n)
    half = reach * found.standard_error
    return float(abs(found.mean - field.mean()) <= half), half / random


def coverage(at_kind: int, kind: Kind, count: int, fields: int) -> NDArray[np.float64]:
    """Give coverage and mean width of each rule, over all sites, shape (rules, 2)."""
    found: list[list[tuple[float, float]]] = []
    for at, name in enumerate(SITES):
        seed = 900 + 100 * at_kind + at
        drawn_fields = draw_fields(name, PER_SIDE, kind, fields=fields, seed=seed)
        for number, field in enumerate(drawn_fields):
            values = estimated(name, field, drawn(name, count, number)[:count])
            answers = [
                estimate_spread([values], layout="balanced-list", rule=rule, single_result="refuse")
                for rule in RULES
            ]
            found.append([held_and_width(answer, field) for answer in answers])
    return np.array(found).mean(axis=0)


def coverage_rows(count: int, fields: int) -> Iterator[str]:
    """Print coverage and width of every kind of field, then the mean and the worst."""
    rows = []
    for at, kind in enumerate((*KINDS, *SLOPES, *LOGNORMALS)):
        found = coverage(at, kind, count, fields)
        if not kind.lognormal:
            rows.append(found)
        yield _row(kind.label, found)
    yield _row("mean but for lognormal", np.mean(rows, axis=0))
    yield _row("lowest coverage, least width but for lognormal", np.array(rows).min(axis=0))


def _row(label: str, found: NDArray[np.float64]) -> str:
    cells = [f"{100 * held:.1f}, {width:.2f}" for held, width in found.tolist()]
    return f"| {label} | " + " | ".join(cells) + " |"


def main() -> None:
    """Print all tables."""
    draws = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    fields = int(sys.argv[2]) if len(sys.argv) > 2 else 120
    print("| list | " + " | ".join(f"n = {count}" for count in COUNTS) + " |", flush=True)
    for row in efficiency_rows(draws):
        print(row, flush=True)
    print("\n| first places | unevenness over random |", flush=True)
    for row in evenness_rows(draws):
        print(row, flush=True)
    for count in COUNTS:
        print(f"\nn = {count}\n\n| field | neighbours | covariance |", flush=True)
        for row in coverage_rows(count, fields):
            print(row, flush=True)


if __name__ == "__main__":
    main()

"""How well a pilot predicts the standard error of spread layouts: prints the tables of the docs.

Run with ``python -m tests.evidence.spread_layouts [FIELDS]``; 40 fields of each kind take about
20 minutes. Every pilot is random; every truth is that of the field at hand: exact for compact
strata, over 400 draws for local pivotal (Grafström, Lundström & Schelin 2012, Biometrics 68:514)
and for grids with random start and rotation, redrawn until exactly n nodes fall inside.
"""

import math
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache

import numpy as np
import shapely
from numpy.typing import NDArray
from scipy.spatial import cKDTree

from fieldplan.stats.pilot_places import slope_share
from fieldplan.stats.spatial import Field, weigh_field
from fieldplan.stats.spread_layouts import SpreadLayout, layout_variance, n_for_layout
from fieldplan.stats.summary import sample_skewness
from tests.simulated_fields import (
    KINDS,
    LOGNORMALS,
    SITES,
    SLOPES,
    Floats,
    Kind,
    cells_of,
    compact_parts,
    draw_fields,
    polygon,
    true_variance,
)

PER_SIDE = 48
DRAWS = 400
COUNTS = (15, 20, 30, 45, 60, 100)
PILOTS = (20, 30, 50)
SHOWN = (20, 45)
LAYOUTS: tuple[SpreadLayout, ...] = ("compact-strata", "local-pivotal", "square-grid")
BASE = 60
"""Simple random places whose standard error is to be kept."""


def local_pivotal(cells: Floats, count: int, random: np.random.Generator) -> NDArray[np.int64]:
    """Draw count cells: again and again a cell and its nearest neighbour fight for their chance."""
    chance = np.full(len(cells), count / len(cells))
    neighbours = cKDTree(cells).query(cells, k=30)[1]
    open_cells = list(range(len(cells)))
    while len(open_cells) > 1:
        one = open_cells[random.integers(len(open_cells))]
        near = [other for other in neighbours[one][1:] if 1e-9 < chance[other] < 1 - 1e-9]
        if not near:
            rest = [other for other in open_cells if other != one]
            apart = ((cells[rest] - cells[one]) ** 2).sum(axis=1)
            near = [rest[int(apart.argmin())]]
        two = near[0]
        both = chance[one] + chance[two]
        first = random.random() < (0.5 if both == 2 * chance[one] else _share(chance, one, two))
        low, high = (0.0, both) if both < 1 else (both - 1, 1.0)
        chance[one], chance[two] = (high, low) if first else (low, high)
        open_cells = [k for k in open_cells if k not in (one, two) or 1e-9 < chance[k] < 1 - 1e-9]
    return np.flatnonzero(chance > 0.5)


def _share(chance: Floats, one: int, two: int) -> float:
    both = chance[one] + chance[two]
    return float(chance[one] / both if both < 1 else (1 - chance[two]) / (2 - both))


def square_grid(name: str, count: int, random: np.random.Generator) -> Floats:
    """Draw a square grid with random start and rotation until exactly count nodes fall inside."""
    site = polygon(name)
    step = math.sqrt(site.area / count)
    nodes = np.arange(-40, 41) * step
    across, up = (grid.ravel() for grid in np.meshgrid(nodes, nodes))
    while True:
        turn, (right, top) = random.uniform(0, 2 * np.pi), random.uniform(0, step, 2)
        x, y = across + right, up + top
        east, north = x * np.cos(turn) - y * np.sin(turn), x * np.sin(turn) + y * np.cos(turn)
        places = np.column_stack([east, north]) + 0.5
        inside = places[shapely.contains_xy(site, places[:, 0], places[:, 1])]
        if len(inside) == count:
            return inside


@cache
def draws_of(name: str, layout: str, count: int) -> NDArray[np.int64]:
    """Draw a layout many times; return cells, shape (DRAWS, count)."""
    random = np.random.default_rng(count)
    cells = cells_of(name, PER_SIDE)
    if layout == "local-pivotal":
        return np.array([local_pivotal(cells, count, random) for _ in range(DRAWS)])
    tree = cKDTree(cells)
    return np.array([tree.query(square_grid(name, count, random))[1] for _ in range(DRAWS)])


@dataclass(frozen=True)
class Measured:
    """One pilot of one field: what was predicted over what is true, and what was sized."""

    kind: str
    pilot: int
    skewness: float
    slope: float
    ratios: dict[tuple[str, int], float]
    sized: tuple[float, ...]


def measure(kinds: Iterable[Kind], fields: int) -> list[Measured]:
    """Measure every kind of field on every site with pilots of each size."""
    rows = []
    for name in SITES:
        for at, kind in enumerate(kinds):
            random = np.random.default_rng(at)
            for field in draw_fields(name, PER_SIDE, kind, fields=fields, seed=100 + at):
                truth = _truth(name, field)
                rows += [_measured(name, kind, field, truth, n, random) for n in PILOTS]
    return rows


def _truth(name: str, field: Floats) -> dict[tuple[str, int], float]:
    truth = {
        ("compact-strata", n): true_variance(field, compact_parts(name, PER_SIDE, n))
        for n in COUNTS
    }
    for layout in ("local-pivotal", "square-grid"):
        for n in SHOWN:
            means = field[draws_of(name, layout, n)].mean(axis=1)
            truth[layout, n] = float(((means - field.mean()) ** 2).mean())
    return truth


def _measured(
    name: str,
    kind: Kind,
    field: Floats,
    truth: dict[tuple[str, int], float],
    pilot: int,
    random: np.random.Generator,
) -> Measured:
    cells = cells_of(name, PER_SIDE)
    area = len(cells) / PER_SIDE**2
    seen = random.choice(len(cells), pilot, replace=False)
    fitted = weigh_field(cells[seen], field[seen], extent=1.0)
    ratios = {
        (layout, n): math.sqrt(
            layout_variance(fitted, n, layout=layout, area=area) / truth[layout, n]
        )
        for layout in LAYOUTS
        for n in SHOWN
    }
    strata = {n: truth["compact-strata", n] for n in COUNTS}
    return Measured(
        kind=kind.label,
        pilot=pilot,
        skewness=sample_skewness(field[seen]),
        slope=slope_share(cells[seen], field[seen]),
        ratios=ratios,
        sized=_sized(fitted, strata, float(field.var(ddof=1)) / BASE, area),
    )


def _sized(fitted: Field, truth: dict[int, float], base: float, area: float) -> tuple[float, ...]:
    """Size compact strata for the standard error of BASE random places and see if it is kept.

    True n, n at face value, kept, n with 80 % assurance, kept; n as shares of BASE.
    """
    at, heights = np.log(list(truth)), np.log(list(truth.values()))

    def kept(n: int, room: float = 1.05) -> bool:
        return math.exp(float(np.interp(math.log(n), at, heights))) <= room * base

    wanted = math.sqrt(base)
    plain = n_for_layout(fitted, wanted, layout="compact-strata", area=area)
    sure = n_for_layout(fitted, wanted, layout="compact-strata", area=area, assurance=0.8)
    true = next((n for n in range(COUNTS[0], COUNTS[-1]) if kept(n, 1.0)), COUNTS[-1])
    return true / BASE, plain / BASE, float(kept(plain)), sure / BASE, float(kept(sure))


def report(rows: list[Measured]) -> None:
    """Print medians (10 % and 90 % beside them) by size of pilot, and by kind of field."""
    columns = [(layout, n) for layout in LAYOUTS for n in SHOWN]
    print("| pilot | " + " | ".join(f"{layout}, n = {n}" for layout, n in columns) + " |")
    for pilot in PILOTS:
        here = [row for row in rows if row.pilot == pilot]
        spans = [np.quantile([row.ratios[c] for row in here], [0.5, 0.1, 0.9]) for c in columns]
        cells = [f"{middle:.2f} ({low:.2f} to {high:.2f})" for middle, low, high in spans]
        print(f"| {pilot} | " + " | ".join(cells) + " |")
    print("| pilot | true n | sized n | kept | n with 80 % assurance | kept |")
    for pilot in PILOTS:
        means = np.mean([row.sized for row in rows if row.pilot == pilot], axis=0)
        print(f"| {pilot} | " + " | ".join(f"{mean:.2f}" for mean in means) + " |")
    print("| kind | pilot of 30: strata, n = 45 | skewness above 1 | slope above 0.4 |")
    for kind in dict.fromkeys(row.kind for row in rows):
        here = [row for row in rows if row.kind == kind and row.pilot == 30]
        middle = np.median([row.ratios["compact-strata", 45] for row in here])
        leaning = np.mean([row.skewness > 1 for row in here])
        sloping = np.mean([row.slope > 0.4 for row in here])
        print(f"| {kind} | {middle:.2f} | {leaning:.2f} | {sloping:.2f} |", flush=True)


if __name__ == "__main__":
    number = int(sys.argv[1]) if len(sys.argv) > 1 else 40
    for title, kinds in (("Gaussian", KINDS), ("slope", SLOPES), ("lognormal", LOGNORMALS)):
        print(f"\n## {title}, {number} fields of each kind\n")
        report(measure(kinds, number))

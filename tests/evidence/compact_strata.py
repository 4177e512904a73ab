"""What compact strata gain, and how often their intervals hold: prints the tables of the docs.

Run with ``python -m tests.evidence.compact_strata [FIELDS]``; 120 fields of each kind on each site
take about 30 minutes. Sites and covariance models: tests/reference/fields.toml. Cells are those of
the layout itself; the sites are drawn 1 km wide. Efficiency is exact for the models: the mean of
the covariance matrix over the site, and over each cell. Coverage is for fields drawn at random,
one draw of the layout each, 95 % two-sided with Student's t.
"""

import math
import sys
from collections.abc import Iterator
from functools import cache

import numpy as np
from numpy.typing import NDArray
from scipy.spatial.distance import cdist
from shapely import affinity

from fieldplan.design.area import Ground
from fieldplan.design.cell_estimate import VarianceRule, estimate_by_cells
from fieldplan.design.compact_cells import compact_cells
from fieldplan.design.model import MeanEstimate, PlannedCell, StratumValues
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
MODELS = (
    *(Kind("exponential", r, nugget) for r in (0.05, 0.1, 0.2, 0.5) for nugget in (0, 0.25, 0.5)),
    *(Kind("matern32", r, 0.0) for r in (0.1, 0.2, 0.5)),
)
PER_SIDE = {"models": 70, "realised": 80}


@cache
def layout_cells(name: str, per_side: int, count: int) -> tuple[NDArray[np.int64], Floats]:
    """Cut a site into the layout's own cells; return the cell of each raster point, and centres."""
    site = affinity.scale(polygon(name), WIDTH_M, WIDTH_M, origin=(0, 0))
    cells = compact_cells(Ground(name, site), count)
    points = np.rint(cells_of(name, per_side) * WIDTH_M * 100).astype(np.int64)
    return cells.cell_of(points), cells.centres_cm / 100.0


def covariance(points: Floats, kind: Kind) -> Floats:
    """Give the covariance matrix of a model, sill 1."""
    h = cdist(points, points) / kind.reach
    curve = np.exp(-3 * h) if kind.curve == "exponential" else (1 + 4.744 * h) * np.exp(-4.744 * h)
    return np.asarray((1 - kind.nugget) * curve + kind.nugget * np.eye(len(points)))


def efficiency(name: str, kind: Kind, count: int, per_cell: int) -> float:
    """Give the variance of simple random places over that of the layout, exact for a model."""
    per_side = PER_SIDE["models"]
    points = cells_of(name, per_side)
    part, _ = layout_cells(name, per_side, count // per_cell)
    random = (1 - float(covariance(points, kind).mean())) / count
    layout = 0.0
    for number in range(count // per_cell):
        own = points[part == number]
        inside = 1 - float(covariance(own, kind).mean())
        layout += (len(own) / len(points)) ** 2 * inside / per_cell
    return random / layout


def efficiency_rows() -> Iterator[str]:
    """Print the geometric means over three sites and 15 models."""
    for per_cell, words in ((1, "one a cell"), (2, "two a cell")):
        means = []
        for count in COUNTS:
            found = [efficiency(name, kind, count, per_cell) for name in SITES for kind in MODELS]
            means.append(math.exp(float(np.mean(np.log(found)))))
        yield f"| {words} | " + " | ".join(f"{mean:.2f}" for mean in means) + " |"


def estimated(
    name: str, field: Floats, rng: np.random.Generator, *, count: int, per_cell: int
) -> StratumValues:
    """Draw the layout once on the raster of a field, and set its results for the estimator."""
    per_side = PER_SIDE["realised"]
    part, centres = layout_cells(name, per_side, count // per_cell)
    members = [np.flatnonzero(part == number) for number in range(count // per_cell)]
    drawn = np.concatenate([rng.choice(own, per_cell, replace=False) for own in members])
    site = polygon(name).area * WIDTH_M**2
    return StratumValues(
        stratum=name,
        weight=1.0,
        values=field[drawn],
        coordinates=cells_of(name, per_side)[drawn] * WIDTH_M,
        cells=part[drawn] + 1,
        cut=tuple(
            PlannedCell(number, len(own) / len(field), *centre)
            for number, (own, centre) in enumerate(
                zip(members, centres.tolist(), strict=True), start=1
            )
        ),
        measure=site,
    )


WAYS: tuple[tuple[int, VarianceRule], ...] = ((1, "pairs"), (1, "covariance"), (2, "pairs"))


def held_and_width(found: MeanEstimate, field: Floats) -> tuple[float, float]:
    """Tell whether the interval holds the mean of the field, and its width over simple random."""
    reach = t_quantile(found.degrees_of_freedom, confidence=0.95, kind="two-sided")
    plain = t_quantile(found.n - 1, confidence=0.95, kind="two-sided")
    random = plain * float(field.std()) / math.sqrt(found.n)
    half = reach * found.standard_error
    return float(abs(found.mean - field.mean()) <= half), half / random


def coverage(at_kind: int, kind: Kind, count: int, fields: int) -> NDArray[np.float64]:
    """Give coverage and mean width of each way, over all sites, shape (ways, 2)."""
    found: list[list[tuple[float, float]]] = []
    for at, name in enumerate(SITES):
        seed = 900 + 100 * at_kind + at
        rng = np.random.default_rng([at, at_kind, count])
        for field in draw_fields(name, PER_SIDE["realised"], kind, fields=fields, seed=seed):
            row = []
            for per_cell, rule in WAYS:
                values = estimated(name, field, rng, count=count, per_cell=per_cell)
                answer = estimate_by_cells([values], rule=rule, single_result="refuse")
                row.append(held_and_width(answer, field))
            found.append(row)
    return np.array(found).mean(axis=0)


def coverage_rows(count: int, fields: int) -> Iterator[str]:
    """Print coverage and width of every kind of field, then the mean and the worst."""
    rows = []
    for at, kind in enumerate((*KINDS, *SLOPES, *LOGNORMALS)):
        found = coverage(at, kind, count, fields)
        if not kind.lognormal:
            rows.append(found)
        yield _row(f"{kind.label}", found)
    yield _row("mean but for lognormal", np.mean(rows, axis=0))
    yield _row("worst but for lognormal", np.array(rows).min(axis=0))


def _row(label: str, found: NDArray[np.float64]) -> str:
    cells = [f"{100 * held:.1f}, {width:.2f}" for held, width in found.tolist()]
    return f"| {label} | " + " | ".join(cells) + " |"


def main() -> None:
    """Print all tables."""
    fields = int(sys.argv[1]) if len(sys.argv) > 1 else 120
    wanted = [int(text) for text in sys.argv[2:]] or list(COUNTS)
    print("| layout | " + " | ".join(f"n = {count}" for count in COUNTS) + " |", flush=True)
    for row in efficiency_rows():
        print(row, flush=True)
    for count in wanted:
        print(
            f"\nn = {count}\n\n| field | one a cell, pairs | one a cell, covariance | two a cell |"
        )
        for row in coverage_rows(count, fields):
            print(row, flush=True)


if __name__ == "__main__":
    main()

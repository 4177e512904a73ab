"""Random fields on three irregular sites, and the true variance of a mean drawn from them.

Sites and covariance models: tests/reference/fields.toml and fields_sites.geojson. A field is drawn
on equal cells through the square root of its covariance matrix, so that nothing is interpolated.
The truth is exact for the field at hand: compact strata have the variance inside their parts,
which are cut by repeated equal assignment of cells to centres (Lloyd 1982 with equal sizes).
"""

import json
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
import shapely
from numpy.typing import NDArray
from scipy.optimize import linear_sum_assignment
from scipy.spatial.distance import cdist

REFERENCE = Path(__file__).parent / "reference"
SITES = ("blob2holes", "Lhole", "crescent+box")
Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Kind:
    """One kind of field: curve, practical range in sides of the site, nugget, strength of slope."""

    curve: str
    reach: float
    nugget: float
    slope: float = 0.0
    lognormal: bool = False

    @property
    def label(self) -> str:
        """What a table calls it."""
        words = f"{self.curve} {self.reach:g}, nugget {self.nugget:g}"
        return words + (", slope" if self.slope else "") + (", lognormal" if self.lognormal else "")


KINDS = (
    *(Kind("exponential", reach, nugget) for reach in (0.1, 0.2, 0.5) for nugget in (0, 0.25, 0.5)),
    Kind("matern32", 0.2, 0.0),
    Kind("matern32", 0.5, 0.0),
)
SLOPES = (Kind("exponential", 0.1, 0.25, 2.0), Kind("exponential", 0.2, 0.25, 2.0))
LOGNORMALS = (
    Kind("exponential", 0.2, 0.25, lognormal=True),
    Kind("exponential", 0.5, 0.0, lognormal=True),
)


@cache
def polygon(name: str) -> shapely.Geometry:
    """Return the outline of a site in the unit square."""
    text = json.loads((REFERENCE / "fields_sites.geojson").read_text(encoding="utf-8"))
    shapes = {f["properties"]["site"]: f["geometry"] for f in text["features"]}
    return shapely.from_geojson(json.dumps(shapes[name]))


@cache
def cells_of(name: str, per_side: int) -> Floats:
    """Return the centres of the cells inside a site, shape (m, 2)."""
    at = (np.arange(per_side) + 0.5) / per_side
    across, up = (grid.ravel() for grid in np.meshgrid(at, at))
    inside = shapely.contains_xy(polygon(name), across, up)
    return np.column_stack([across[inside], up[inside]])


@cache
def compact_parts(name: str, per_side: int, count: int) -> NDArray[np.int64]:
    """Cut a site into compact parts of equal area; return the part of each cell, shape (m,)."""
    cells = cells_of(name, per_side)
    random = np.random.default_rng(count)
    centres = cells[random.choice(len(cells), count, replace=False)]
    places = np.arange(len(cells)) % count
    parts = np.zeros(len(cells), dtype=np.int64)
    for _ in range(12):
        row, slot = linear_sum_assignment(cdist(cells, centres[places], "sqeuclidean"))
        parts[row] = places[slot]
        centres = np.array([cells[parts == part].mean(axis=0) for part in range(count)])
    return parts


def draw_fields(
    name: str, per_side: int, kind: Kind, *, fields: int, seed: int
) -> Iterator[Floats]:
    """Draw fields of one kind on the cells of a site, each of shape (m,)."""
    cells = cells_of(name, per_side)
    random = np.random.default_rng(seed)
    h = cdist(cells, cells) / kind.reach
    curve = np.exp(-3 * h) if kind.curve == "exponential" else (1 + 4.744 * h) * np.exp(-4.744 * h)
    root = np.linalg.cholesky((1 - kind.nugget) * curve + (kind.nugget + 1e-9) * np.eye(len(cells)))
    along = cells @ np.array([np.cos(1.0), np.sin(1.0)])
    slope = kind.slope * (along - along.mean()) / along.std()
    for _ in range(fields):
        field = root @ random.standard_normal(len(cells)) + slope
        yield np.exp(field) if kind.lognormal else field


def true_variance(field: Floats, parts: NDArray[np.int64]) -> float:
    """Give the variance of the mean of one random cell in each part, for this very field."""
    sizes = np.bincount(parts)
    means = np.bincount(parts, field) / sizes
    squares = np.bincount(parts, field**2) / sizes - means**2
    inside = squares * sizes / np.maximum(sizes - 1, 1)
    return float(((sizes / len(field)) ** 2 * inside).sum())

"""Time the ways of placing points in a polygon, each on a fresh copy of it."""

import math
from collections.abc import Callable
from dataclasses import dataclass
from time import perf_counter

import geopandas
import numpy as np
import shapely

from fieldplan.base.draws import Stream
from fieldplan.design.area import Ground, draw_places
from fieldplan.design.simulate import uniform_points

VERTICES = (10, 1_000, 100_000)
COUNTS = (10_000, 1_000_000)


@dataclass(frozen=True)
class Row:
    """Seconds for one polygon and one number of points, preparation included.

    ``simulated`` is ``uniform_points``, ``issued`` is ``draw_places`` with its keyed stream,
    ``peer`` is ``GeoSeries.sample_points`` of geopandas.
    """

    vertices: int
    count: int
    simulated: float
    issued: float
    peer: float


def blob(vertices: int) -> shapely.Polygon:
    """Make a lobed site of so many corners with corners on a millimetre grid, about 3 ha."""
    turns = 2 * math.pi * np.arange(vertices) / vertices
    radii = 100 * (1 + 0.25 * np.sin(3 * turns) + 0.02 * np.sin(41 * turns))
    corners = np.round(np.stack([radii * np.cos(turns), radii * np.sin(turns)], axis=1), 3)
    site = shapely.Polygon(corners)
    if not site.is_valid:
        message = f"the blob of {vertices} corners crosses itself"
        raise ValueError(message)
    return site


def seconds(work: Callable[[], object], repeats: int) -> float:
    """Return the shortest of several runs."""
    found = []
    for _ in range(repeats):
        start = perf_counter()
        work()
        found.append(perf_counter() - start)
    return min(found)


def measured(vertices: int, count: int) -> Row:
    """Time one row; a fresh copy each time, so that nothing prepared is carried over."""
    site = blob(vertices)
    rng = np.random.default_rng(20261102)

    def fresh() -> shapely.Polygon:
        return shapely.Polygon(shapely.get_coordinates(site))

    def simulated() -> object:
        return uniform_points(fresh(), count, rng)

    def issued() -> object:
        return draw_places(Ground("s", fresh()), count, Stream(1, "main", "s", "places"))

    def peer() -> object:
        return geopandas.GeoSeries([fresh()]).sample_points(count, rng=rng)

    repeats = 5 if count <= 10_000 else 2
    return Row(
        vertices, count, seconds(simulated, repeats), seconds(issued, repeats),
        seconds(peer, repeats),
    )  # fmt: skip

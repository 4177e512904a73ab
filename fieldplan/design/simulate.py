"""Points for simulation: fast, from a generator that the caller passes in; never issued.

Issued locations come from :mod:`fieldplan.design.area`, which can be drawn again for years.
Here only the distribution counts.
"""

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

Points = NDArray[np.float64]

# Seconds, measured on one core; only their ratios matter, to choose the faster way.
_TRIANGULATE_VERTEX = 7e-6
_TRIANGLE_POINT = 7e-8
_PREPARE_VERTEX = 1.5e-7
_REJECTION_LEVEL = 1.5e-8


class Triangles:
    """A polygon cut into triangles, ready for many draws.

    Parameters
    ----------
    polygon : BaseGeometry
        Polygon or MultiPolygon with an area, holes allowed.

    Notes
    -----
    Constrained Delaunay triangles use the polygon's own corners, so they tile it exactly. A
    triangle is chosen by its area; a point uniform in the parallelogram on two of its sides is
    folded back when it falls beyond the third: Turk (1990), Graphics Gems, p. 24.

    Examples
    --------
    >>> triangles = Triangles(shapely.box(0, 0, 2, 1))
    >>> triangles.points(3, np.random.default_rng(5)).shape
    (3, 2)
    """

    def __init__(self, polygon: BaseGeometry) -> None:
        parts = shapely.get_parts(shapely.constrained_delaunay_triangles(polygon))
        if len(parts) == 0:
            message = f"{polygon.geom_type} without area cannot be cut into triangles"
            raise ValueError(message)
        corners = shapely.get_coordinates(parts).reshape(-1, 4, 2)
        self._corner = corners[:, 0]
        self._first = corners[:, 1] - corners[:, 0]
        self._second = corners[:, 2] - corners[:, 0]
        areas = np.abs(
            self._first[:, 0] * self._second[:, 1] - self._first[:, 1] * self._second[:, 0]
        )
        self._share = areas / areas.sum()

    def points(self, count: int, rng: np.random.Generator) -> Points:
        """Draw independent points uniform over the polygon, shape (count, 2)."""
        chosen = np.repeat(np.arange(len(self._share)), rng.multinomial(count, self._share))
        rng.shuffle(chosen)
        first, second = rng.random(count), rng.random(count)
        folded = first + second > 1.0
        first[folded], second[folded] = 1.0 - first[folded], 1.0 - second[folded]
        return np.asarray(
            self._corner[chosen]
            + first[:, None] * self._first[chosen]
            + second[:, None] * self._second[chosen]
        )


def uniform_points(polygon: BaseGeometry, count: int, rng: np.random.Generator) -> Points:
    """Draw independent points uniform by area, by triangles or by rejection, whichever is faster.

    Parameters
    ----------
    polygon : BaseGeometry
        Polygon or MultiPolygon with an area, holes allowed.
    count : int
        How many.
    rng : numpy.random.Generator
        One spawned child a replicate keeps replicates apart.

    Returns
    -------
    ndarray of float, shape (count, 2)

    Examples
    --------
    >>> points = uniform_points(shapely.box(0, 0, 2, 1), 1000, np.random.default_rng(5))
    >>> bool(points[:, 0].max() <= 2.0), len(points)
    (True, 1000)
    """
    if triangles_are_faster(polygon, count):
        return Triangles(polygon).points(count, rng)
    return _by_rejection(polygon, count, rng)


def triangles_are_faster(polygon: BaseGeometry, count: int) -> bool:
    """Tell whether cutting the polygon up pays for this many points.

    Examples
    --------
    >>> corridor = shapely.LineString([(0, 0), (100, 100)]).buffer(0.5)
    >>> triangles_are_faster(corridor, 1000), triangles_are_faster(shapely.box(0, 0, 1, 1), 1000)
    (True, False)
    """
    vertices = shapely.get_num_coordinates(polygon)
    candidates = count * shapely.envelope(polygon).area / polygon.area
    look_up = _REJECTION_LEVEL * (np.log2(vertices) + 3.0)
    by_triangles = vertices * _TRIANGULATE_VERTEX + count * _TRIANGLE_POINT
    by_rejection = vertices * _PREPARE_VERTEX + candidates * look_up
    return bool(by_triangles < by_rejection)


def _by_rejection(polygon: BaseGeometry, count: int, rng: np.random.Generator) -> Points:
    shapely.prepare(polygon)
    west, south, east, north = polygon.bounds
    filled = polygon.area / ((east - west) * (north - south))
    found: list[Points] = []
    missing = count
    while missing > 0:
        batch = min(int(missing / filled * 1.1) + 16, 1_000_000)
        candidates = rng.random((batch, 2)) * (east - west, north - south) + (west, south)
        inside = candidates[shapely.contains_xy(polygon, candidates[:, 0], candidates[:, 1])]
        found.append(inside[:missing])
        missing -= len(found[-1])
    return np.concatenate(found) if found else np.empty((0, 2))

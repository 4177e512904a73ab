"""Points for simulation: uniform whichever way they are made."""

import math

import numpy as np
import pytest
import shapely

from fieldplan.design import simulate
from fieldplan.design.simulate import Triangles, triangles_are_faster, uniform_points
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON


@pytest.mark.parametrize("way", ["triangles", "rejection"])
@pytest.mark.parametrize("geometry", [MEADOW_POLYGON, YARD_POLYGON], ids=["meadow", "yard"])
def test_points_are_uniform_over_cells(geometry: shapely.Geometry, way: str) -> None:
    """Chi-square over a raster of cells within 4 standard deviations of its mean."""
    n, rng = 40_000, np.random.default_rng(3)
    points = (
        Triangles(geometry).points(n, rng)
        if way == "triangles"
        else simulate._by_rejection(geometry, n, rng)
    )
    assert shapely.contains_xy(geometry.buffer(1e-9), points[:, 0], points[:, 1]).all()
    west, south, east, north = geometry.bounds
    xs, ys = np.linspace(west, east, 9), np.linspace(south, north, 9)
    counts = np.histogram2d(points[:, 0], points[:, 1], [xs, ys])[0].ravel()
    cells = [shapely.box(xs[i], ys[j], xs[i + 1], ys[j + 1]) for i in range(8) for j in range(8)]
    expected = n * shapely.area(shapely.intersection(cells, geometry)) / geometry.area
    kept = expected > 20
    degrees = kept.sum() - 1
    chi_square = np.sum((counts[kept] - expected[kept]) ** 2 / expected[kept])
    assert abs(chi_square - degrees) < 4 * math.sqrt(2 * degrees)


@pytest.mark.parametrize("way", ["triangles", "rejection"])
def test_points_come_in_no_order(way: str) -> None:
    """A first half that lay west of the second would bias every replicate cut from it."""
    n, rng = 20_000, np.random.default_rng(4)
    points = (
        Triangles(MEADOW_POLYGON).points(n, rng)
        if way == "triangles"
        else simulate._by_rejection(MEADOW_POLYGON, n, rng)
    )
    # Under a random order the correlation has variance 1/(n - 1).
    assert abs(np.corrcoef(np.arange(n), points[:, 0])[0, 1]) < 4 / math.sqrt(n - 1)


def test_triangles_tile_the_polygon() -> None:
    """Areas must add up, holes left out."""
    triangles = Triangles(MEADOW_POLYGON)
    corners = np.stack([triangles._corner, triangles._corner + triangles._first,
                        triangles._corner + triangles._second], axis=1)  # fmt: skip
    pieces = [shapely.Polygon(three) for three in corners]
    assert sum(piece.area for piece in pieces) == pytest.approx(MEADOW_POLYGON.area, rel=1e-12)


def test_points_repeat_with_the_generator_and_not_otherwise() -> None:
    """One spawned child a replicate: same child same points."""
    first, second = (uniform_points(MEADOW_POLYGON, 50, np.random.default_rng(s)) for s in (1, 2))
    again = uniform_points(MEADOW_POLYGON, 50, np.random.default_rng(1))
    assert (first == again).all()
    assert not (first == second).any()


@pytest.mark.parametrize("count", [0, 1])
def test_no_point_and_one_point_have_the_right_shape(count: int) -> None:
    """Replicates of size 0 happen when a stratum gets none."""
    rng = np.random.default_rng(1)
    assert uniform_points(MEADOW_POLYGON, count, rng).shape == (count, 2)
    assert Triangles(MEADOW_POLYGON).points(count, rng).shape == (count, 2)


def test_a_thin_corridor_goes_by_triangles_and_a_detailed_blob_by_rejection() -> None:
    """The choice must follow the cost that each shape causes."""
    corridor = shapely.LineString([(0, 0), (1000, 1000)]).buffer(1)
    blob = shapely.Point(0, 0).buffer(100, quad_segs=2000)
    assert triangles_are_faster(corridor, 1000)
    assert not triangles_are_faster(blob, 1000)
    assert len(uniform_points(blob, 1000, np.random.default_rng(1))) == 1000


def test_a_line_cannot_be_filled() -> None:
    """Nothing has no triangles."""
    with pytest.raises(ValueError, match="LineString without area"):
        Triangles(shapely.LineString([(0, 0), (1, 1)]))

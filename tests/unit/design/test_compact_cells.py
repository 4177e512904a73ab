"""Compact cells: every place in one, nearly equal, the same for ever."""

import hashlib

import numpy as np
import pytest
import shapely

from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground
from fieldplan.design.compact_cells import cell_polygons, compact_cells

HOLED = shapely.Polygon(
    [(0, 0), (420, 20), (400, 260), (180, 330), (30, 210)],
    holes=[[(120, 90), (190, 90), (190, 160), (120, 160)]],
)


def ground(shape: shapely.Geometry = HOLED) -> Ground:
    """Give a polygon to cut."""
    return Ground("field", shape)


@pytest.mark.parametrize("count", [1, 2, 7, 20, 60])
def test_cells_cover_the_polygon_once(count):
    """Source: the polygon's own area; no two cells share any."""
    field = ground()
    shapes = cell_polygons(field, compact_cells(field, count))
    areas = np.array([shape.area for shape in shapes])
    assert areas.sum() == pytest.approx(HOLED.area, rel=1e-9)
    assert shapely.union_all(shapes).area == pytest.approx(HOLED.area, rel=1e-9)
    assert areas.min() > 0.9 * areas.mean()
    assert areas.max() < 1.1 * areas.mean()


def test_the_polygons_are_what_the_whole_numbers_say():
    """A place goes to a cell by whole numbers, its weight comes from the polygon."""
    field = ground()
    cells = compact_cells(field, 20)
    shapes = cell_polygons(field, cells)
    rng = np.random.default_rng(3)
    places = np.rint(rng.uniform([0, 0], [42_000, 33_000], (4000, 2))).astype(np.int64)
    places = places[field.holds(places[:, 0], places[:, 1])]
    cell = cells.cell_of(places)
    points = shapely.points(places / 100.0)
    off = shapely.distance(points, np.array(shapes, dtype=object)[cell])
    assert float(off.max()) < 0.02  # metres: pulls are rounded to whole square centimetres


def test_cells_of_a_square_are_as_compact_as_cells_can_be():
    """Source: second moment of the hexagon, 5/(18√3) of its area; no cell can be below it."""
    field = ground(shapely.box(0, 0, 500, 500))
    cells = compact_cells(field, 60)
    places = np.rint(np.random.default_rng(1).uniform(0, 50_000, (60_000, 2))).astype(np.int64)
    cell = cells.cell_of(places)
    moment = 0.0
    for k in range(60):
        inside = places[cell == k]
        moment += ((inside - inside.mean(axis=0)) ** 2).sum(axis=1).mean() / 60
    ratio = moment / (50_000.0**2 / 60)
    assert 5 / (18 * 3**0.5) < ratio < 0.18


def test_the_cut_never_changes():
    """What is issued must be drawable again; the digest was taken when the cut was first made."""
    cells = compact_cells(ground(), 20)
    text = repr((cells.centres_cm.tolist(), cells.pulls_cm2.tolist()))
    assert hashlib.sha256(text.encode()).hexdigest()[:16] == "4ff86884b9d3450b"


@pytest.mark.parametrize(
    ("shape", "count", "words"),
    [
        (shapely.box(0, 0, 0.2, 0.2), 40, "too small or too ragged"),
        (HOLED, 0, "between 1 and 2000"),
        (HOLED, 5000, "between 1 and 2000"),
    ],
)
def test_what_cannot_be_cut_is_said(shape, count, words):
    """One line with the stratum's name, its size and what to do."""
    with pytest.raises(DesignError, match=words):
        compact_cells(ground(shape), count)

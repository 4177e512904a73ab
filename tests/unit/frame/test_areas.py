"""Areas must be those of the Earth, wherever the site is and however it is drawn."""

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pyproj
import pytest
import shapely
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from shapely import affinity

from tests.unit.frame.sites import box, frame_of, polygon, write_geojson

GEOD = pyproj.Geod(ellps="WGS84")


def area_between_parallels(west: float, south: float, east: float, north: float) -> float:
    """Ellipsoid area of a box of degrees, closed form: Snyder 1987, eq. 3-12 integrated."""
    a, f = 6378137.0, 1 / 298.257223563
    e = math.sqrt(f * (2 - f))
    b = a * (1 - f)

    def up_to(latitude: float) -> float:
        s = math.sin(math.radians(latitude))
        return b * b / 2 * (s / (1 - (e * s) ** 2) + math.atanh(e * s) / e)

    return math.radians(east - west) * (up_to(north) - up_to(south))


def gross(folder: Path, ring: list[list[float]]) -> float:
    """Gross area that the tool measures for one ring."""
    write_geojson(folder / "boundary.geojson", polygon(ring))
    return frame_of(folder).population.gross


@pytest.mark.parametrize("south", [-89.8, -75.0, -45.5, -0.05, 23.4, 51.9, 66.6, 80.0, 89.8])
@pytest.mark.parametrize("west", [-0.05, 5.99, 179.95])
@pytest.mark.parametrize("width", [0.004, 0.1, 2.0])
def test_a_box_of_degrees_has_the_area_of_the_ellipsoid_between_its_parallels(
    tmp_path: Path, south: float, west: float, width: float
) -> None:
    """An edge is straight in degrees, so the area is known in closed form; 0.1 % is asked.

    The tolerance is 0.002 % and what half a millimetre along the outline can do to a sliver
    1.5 m wide beside a pole.
    """
    height = min(width, 0.1)
    ring = box(west, south, west + width, south + height)
    expected = area_between_parallels(west, south, west + width, south + height)
    outline = abs(GEOD.geometry_area_perimeter(shapely.Polygon(ring))[1])
    found = gross(tmp_path, ring)
    assert abs(found - expected) <= 2e-5 * expected + 0.0005 * outline
    assert found == pytest.approx(expected, rel=1e-3)


@pytest.mark.parametrize(("latitude", "longitude"), [(52.1, -1.9), (-77.8, 166.7), (1.3, 103.8)])
def test_a_crooked_site_has_its_geodesic_area(
    tmp_path: Path, latitude: float, longitude: float
) -> None:
    """Second opinion by pyproj.Geod (Karney 2013) on the same edges, cut into short pieces."""
    generator = np.random.default_rng(11)
    turns = np.sort(generator.uniform(0, 2 * np.pi, 40))
    radius = generator.uniform(0.005, 0.02, 40)
    ring = np.column_stack(
        [
            longitude + radius * np.cos(turns) / math.cos(math.radians(latitude)),
            latitude + radius * np.sin(turns),
        ]
    )
    ring = np.vstack([ring, ring[:1]])
    fine = shapely.segmentize(shapely.Polygon(ring), 1e-5)
    expected = abs(GEOD.geometry_area_perimeter(fine)[0])
    assert gross(tmp_path, ring.tolist()) == pytest.approx(expected, rel=1e-5)


def test_the_published_test_polygons_have_the_right_perimeter_in_our_oracle() -> None:
    """GeographicLib test set Planimeter0 (row A12-007): the oracle itself is checked."""
    _, perimeter = GEOD.polygon_area_perimeter([-1, 0, 1, 0], [0, -1, 0, 1])
    assert perimeter == pytest.approx(627598.2731, abs=1e-4)


def test_a_site_across_the_date_line_is_one_site_however_it_is_written(tmp_path: Path) -> None:
    """RFC 7946 (3.1.9) cuts it at 180°; others write 180.05 or let an edge jump."""
    whole = box(179.95, -16.85, 180.05, -16.80)
    jumping = [[x if x <= 180 else x - 360, y] for x, y in whole]
    cut = [box(179.95, -16.85, 180.0, -16.80), box(-180.0, -16.85, -179.95, -16.80)]
    expected = area_between_parallels(179.95, -16.85, 180.05, -16.80)
    in_one = polygon(whole)
    in_one["geometry"] = {"type": "MultiPolygon", "coordinates": [[ring] for ring in cut]}
    for features in (
        [polygon(whole)],
        [polygon(jumping)],
        [polygon(ring) for ring in cut],
        [in_one],
    ):
        write_geojson(tmp_path / "boundary.geojson", *features)
        frame = frame_of(tmp_path)
        assert frame.population.gross == pytest.approx(expected, rel=1e-6)
        assert frame.projection.longitude in (180.0, -180.0)
        assert frame.boundary.geom_type == "Polygon"
        assert frame.notes == ()


def test_a_site_round_the_pole_has_the_area_of_its_cap(tmp_path: Path) -> None:
    """The ring 89.9° N closes over all longitudes; its area is that of the cap."""
    ring = [[float(x), 89.9] for x in range(-180, 181, 10)]
    expected = area_between_parallels(-180, 89.9, 180, 89.9999999999)
    assert gross(tmp_path, ring) == pytest.approx(expected, rel=1e-5)


def test_an_edge_in_a_grid_is_straight_in_that_grid(tmp_path: Path) -> None:
    """A 40 km box in UTM: its true area is the grid area divided by the scale squared."""
    import geopandas

    site = shapely.box(480_000, 5_700_000, 520_000, 5_740_000)
    geopandas.GeoSeries([site], crs="EPSG:32633").to_file(tmp_path / "boundary.gpkg")
    to_degrees = pyproj.Transformer.from_crs("EPSG:32633", "EPSG:4326", always_xy=True)
    fine = shapely.transform(
        shapely.segmentize(site, 50.0), lambda c: np.column_stack(to_degrees.transform(*c.T))
    )
    expected = abs(GEOD.geometry_area_perimeter(fine)[0])
    frame = frame_of(tmp_path, boundary="boundary.gpkg")
    assert frame.population.gross == pytest.approx(expected, rel=1e-7)
    # The grid's own area is 0.08 % off, which is why it is not used.
    assert abs(site.area / expected - 1) > 5e-4


@settings(
    max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    turn=st.floats(0, 360),
    east=st.floats(-20_000, 20_000),
    north=st.floats(-20_000, 20_000),
    corners=st.lists(st.floats(40.0, 400.0), min_size=3, max_size=12),
)
def test_a_site_keeps_its_area_when_it_is_moved_and_turned(
    tmp_path: Path, turn: float, east: float, north: float, corners: list[float]
) -> None:
    """Where a field lies and which way it faces does not change how large it is."""
    angles = np.linspace(0, 2 * np.pi, len(corners), endpoint=False)
    shape = shapely.Polygon(np.column_stack([corners * np.cos(angles), corners * np.sin(angles)]))
    to_degrees = pyproj.Transformer.from_crs(
        "+proj=laea +lat_0=48.3 +lon_0=11.2 +datum=WGS84", "EPSG:4326", always_xy=True
    )
    moved = affinity.translate(affinity.rotate(shape, turn), east, north)
    ring = np.column_stack(to_degrees.transform(*np.asarray(moved.exterior.coords).T))
    assert gross(tmp_path, ring.tolist()) == pytest.approx(shape.area, rel=1e-4)


def shoreline(folder: Path) -> Path:
    """Write a boundary of 100,000 vertices."""
    angles = np.linspace(0, 2 * np.pi, 100_000, endpoint=False)
    radius = 0.02 + 0.0005 * np.sin(400 * angles)
    ring = np.column_stack([11 + radius * np.cos(angles), 48 + radius * np.sin(angles)]).tolist()
    return write_geojson(folder / "boundary.geojson", polygon([*ring, ring[0]]))


def test_a_shoreline_of_a_hundred_thousand_vertices_is_read_whole(tmp_path: Path) -> None:
    """Nothing may be simplified away in silence."""
    shoreline(tmp_path)
    assert shapely.get_num_coordinates(frame_of(tmp_path).boundary) > 99_000


@pytest.mark.benchmark
def test_a_long_shoreline_takes_at_most_ten_times_a_plain_read_and_reprojection(
    tmp_path: Path,
) -> None:
    """All checks together may cost some plain reads (geopandas: read, project, measure)."""
    import time

    import geopandas

    path = shoreline(tmp_path)

    def seconds(work: Callable[[], object]) -> float:
        start = time.perf_counter()
        work()
        return time.perf_counter() - start

    plane = "+proj=laea +lat_0=48 +lon_0=11 +datum=WGS84"
    plain = min(seconds(lambda: geopandas.read_file(path).to_crs(plane).area) for _ in range(3))
    ours = min(seconds(lambda: frame_of(tmp_path)) for _ in range(3))
    assert ours < 10 * plain


def test_coordinates_are_whole_millimetres_and_polygons_valid(tmp_path: Path) -> None:
    """Draws test containment after rounding; a net polygon must not depend on the last bits."""
    ring = box(-1.9020001234, 52.0990001234, -1.8980004321, 52.1010009876)
    write_geojson(tmp_path / "boundary.geojson", polygon(ring))
    frame = frame_of(tmp_path, inset_m=3.0)
    for geometry in (frame.boundary, frame.strata[0].geometry):
        coordinates = shapely.get_coordinates(geometry)
        assert shapely.is_valid(geometry)
        assert coordinates == pytest.approx(np.round(coordinates, 3), abs=1e-9)

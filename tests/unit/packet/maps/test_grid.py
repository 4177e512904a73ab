"""Coordinates round the frame, against pyproj asked the other way."""

import numpy as np
import pytest
from pyproj import CRS, Geod, Proj, Transformer

from fieldplan.frame.model import SiteProjection
from fieldplan.packet.maps.grid import grid_lines, grid_step
from fieldplan.packet.maps.paper import Extent

SITES = [
    (SiteProjection(52.10, -1.90), 32630),
    (SiteProjection(-33.90, 18.40), 32734),
    (SiteProjection(78.20, 15.60), 32633),
    (SiteProjection(86.00, 20.00), 5041),
    (SiteProjection(-17.00, 180.00), 32701),
]
EXTENT = Extent(-420.0, -300.0, 380.0, 500.0)


@pytest.mark.parametrize(("projection", "epsg"), SITES)
def test_every_tick_stands_where_a_receiver_shows_its_number(projection, epsg: int) -> None:
    """A crew compares the screen of the receiver with the edge of the paper, to 0.1 m here."""
    grid = grid_lines(projection, EXTENT, step=200)
    to_grid = Transformer.from_crs(
        CRS.from_proj4(projection.definition), CRS.from_epsg(epsg), always_xy=True
    )
    assert grid.reference.epsg == epsg
    assert {tick.edge for tick in grid.ticks} == {"bottom", "top", "left", "right"}
    for tick in grid.ticks:
        easting, northing = to_grid.transform(tick.easting, tick.northing)
        value = easting if tick.axis == "E" else northing
        assert value == pytest.approx(tick.value, abs=0.1)
        assert tick.value % 200 == 0


@pytest.mark.parametrize(("projection", "epsg"), SITES)
def test_crosses_stand_on_round_coordinates_inside_the_frame(projection, epsg: int) -> None:
    """The crosses carry the grid across the map."""
    grid = grid_lines(projection, EXTENT, step=200)
    to_grid = Transformer.from_crs(projection.definition, f"EPSG:{epsg}", always_xy=True)
    easting, northing = to_grid.transform(grid.crosses[:, 0], grid.crosses[:, 1])
    assert len(grid.crosses) in range(12, 21)
    assert np.allclose(
        np.round(np.array([easting, northing]) / 200) * 200, [easting, northing], atol=1e-3
    )
    assert all(EXTENT.holds(x, y) for x, y in grid.crosses)


@pytest.mark.parametrize(
    ("latitude", "longitude", "meridian"), [(52.10, -1.90, -3.0), (-33.90, 18.40, 21.0)]
)
def test_grid_north_turns_by_the_convergence_of_the_meridians(
    latitude, longitude, meridian
) -> None:
    """East positive, tan γ = tan(λ − λ₀) sin φ on the sphere: Snyder 1987, USGS PP 1395, ch. 8."""
    extent = Extent(-100, -100, 100, 100)
    grid = grid_lines(SiteProjection(latitude, longitude), extent, step=50)
    away = np.radians(longitude - meridian)
    convergence = np.degrees(np.arctan(np.tan(away) * np.sin(np.radians(latitude))))
    assert grid.turn == pytest.approx(convergence, abs=0.005)
    factors = Proj(grid.reference.epsg).get_factors(longitude, latitude)
    assert grid.turn == pytest.approx(factors.meridian_convergence, abs=0.002)


@pytest.mark.parametrize("latitude", [52.10, -33.90, 78.20])
def test_true_north_agrees_with_the_geodesic_azimuth(latitude: float) -> None:
    """The azimuth of 'up the page', 20 km east of the centre, from the geodesic inverse."""
    projection = SiteProjection(latitude, -1.90)
    grid = grid_lines(projection, Extent(19900, -100, 20100, 100), step=50)
    to_degrees = Transformer.from_crs(projection.definition, "EPSG:4326", always_xy=True)
    longitude, latitudes = to_degrees.transform([20000.0, 20000.0], [0.0, 10.0])
    azimuth, _, _ = Geod(ellps="WGS84").inv(longitude[0], latitudes[0], longitude[1], latitudes[1])
    assert grid.true_turn == pytest.approx(-azimuth, abs=0.002)


@pytest.mark.parametrize("denominator", [50, 1000, 7500, 250_000])
def test_grid_lines_are_a_thumb_apart_on_paper(denominator: int) -> None:
    """Too few ticks cannot be read off, too many hide the map."""
    side = 0.17 * denominator
    step = grid_step(Extent(0, 0, side, side), denominator)
    assert step == 1 or 20 <= step / denominator * 1000 <= 70

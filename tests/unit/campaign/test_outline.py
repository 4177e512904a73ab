"""Outlines without a file: corners as typed, circles round a point."""

import json
import math

import pytest
from pyproj import Geod

from fieldplan.base.errors import CampaignError
from fieldplan.campaign.outline import (
    circle_geojson,
    corners_geojson,
    read_corners,
    read_position,
)

GLOBE = Geod(ellps="WGS84")


def ring(text: str) -> list[list[float]]:
    """Return the one ring of a GeoJSON text."""
    return json.loads(text)["features"][0]["geometry"]["coordinates"][0]


@pytest.mark.parametrize(
    ("latitude", "longitude"), [(0, 0), (52.1, -1.9), (-78.5, 166.7), (70, 25)]
)
@pytest.mark.parametrize("radius", [5.0, 350.0, 20_000.0])
def test_circle_has_its_radius_and_area_everywhere(latitude, longitude, radius):
    """Oracle: geodesic distance and area on the ellipsoid; π r² within 0.1 %."""
    points = ring(circle_geojson(latitude, longitude, radius_m=radius))
    assert points[0] == points[-1]
    for x, y in points:
        distance = GLOBE.inv(longitude, latitude, x, y)[2]
        assert distance == pytest.approx(radius, abs=0.02)
    area, _ = GLOBE.polygon_area_perimeter(*zip(*points, strict=True))
    # Positive: counter-clockwise, as RFC 7946 section 3.1.6 asks. 5 m feel the rounding to 1 cm.
    assert area == pytest.approx(math.pi * radius**2, rel=0.001 + 0.02 / radius)


@pytest.mark.parametrize(
    ("place", "radius", "words"),
    [
        ((89.9, 0), 5000.0, "reaches a pole or crosses the 180th meridian"),
        ((10, 179.99), 5000.0, "reaches a pole or crosses the 180th meridian"),
        ((10, 10), 1e-9, r"a radius of at least 1 m and up to 200,000 m is accepted \(got 1e-09\)"),
        ((10, 10), 0.0, r"a radius of at least 1 m and up to 200,000 m is accepted \(got 0\)"),
        ((10, 10), 1e7, r"a radius of at least 1 m and up to 200,000 m is accepted \(got 1e\+07\)"),
        (
            (10, 10),
            math.nan,
            r"a radius of at least 1 m and up to 200,000 m is accepted \(got nan\)",
        ),
    ],
)
def test_circle_that_cannot_be_written_is_refused(place, radius, words):
    """Its outline would run round the wrong side of the globe."""
    with pytest.raises(CampaignError, match=words):
        circle_geojson(*place, radius_m=radius)


def test_corners_become_a_counter_clockwise_ring_whichever_way_they_ran():
    """RFC 7946 section 3.1.6; longitude first, section 3.1.1."""
    corners = read_corners("52.1, -1.9\n52.2, -1.9\n52.2, -1.8\n52.1, -1.8\n52.1, -1.9\n")
    expected = [[-1.8, 52.1], [-1.8, 52.2], [-1.9, 52.2], [-1.9, 52.1], [-1.8, 52.1]]
    assert len(corners) == 4
    assert ring(corners_geojson(corners)) == expected
    backwards = ring(corners_geojson(corners[::-1]))
    assert GLOBE.polygon_area_perimeter(*zip(*backwards, strict=True))[0] > 0


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("52.1", "'52.1' is no position; latitude and longitude in decimal degrees are accepted"),
        ("52.1 N, 1.9 W", "'52.1 N, 1.9 W' is no position"),
        ("52,1; 1,9", "'52,1; 1,9' is no position"),
        ("-120.5, 38.2", "'-120.5, 38.2' lies off the globe; latitude -90 to 90 and longitude -180 "
         "to 180 are accepted. Write latitude first."),
        ("5772000, 410000", "'5772000, 410000' lies off the globe; latitude -90 to 90 and "
         "longitude -180 to 180 are accepted. Write decimal degrees, not metres."),
        ("nan, 3", "'nan, 3' lies off the globe"),
    ],
)  # fmt: skip
def test_position_that_is_none_is_refused_with_a_remedy(text, message):
    """Swapped axes and metres are what people paste."""
    with pytest.raises(CampaignError) as raised:
        read_position(text)
    assert str(raised.value).startswith(message)


def test_every_bad_corner_is_told_by_its_number():
    """A pasted list is mended in one go."""
    with pytest.raises(CampaignError) as raised:
        read_corners("52.1, -1.9\nhere\n\n52.2, -1.8\n95, 3")
    assert [line.split(":")[0] for line in raised.value.problems] == ["corner 2", "corner 4"]


def test_two_corners_are_no_outline():
    """A repeated corner adds nothing."""
    with pytest.raises(CampaignError, match=r"at least 3 different corners \(got 2\)"):
        read_corners("52.1, -1.9; 52.2, -1.9; 52.1, -1.9")


@pytest.mark.parametrize(
    "corners", [[(52, 1), (53, 2), (54, 3)], [(52, 1), (53, 2), (53, 1), (52, 2)]]
)
def test_corners_that_enclose_nothing_are_refused(corners):
    """Three on a line; and a bow tie whose two halves cancel out."""
    with pytest.raises(CampaignError, match=r"enclose no ground: they lie on one line, or the"):
        corners_geojson(corners)

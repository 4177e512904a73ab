"""Degrees, site metres, UTM and DMS against published coordinates."""

import csv
import json
import math
from pathlib import Path

import numpy as np
import pyproj
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.frame.model import SiteProjection
from fieldplan.frame.projection import (
    centre_of,
    dms,
    projection_in_words,
    site_zone,
    to_degrees,
    to_site,
    utm,
    utm_in_words,
    utm_zone,
)

REFERENCE = Path(__file__).parents[2] / "reference" / "values.csv"
LATITUDES = st.floats(-89.9, 89.9)
LONGITUDES = st.floats(-180, 180)


def published(identifier: str) -> tuple[dict[str, float], float, float]:
    """Inputs, value and tolerance of a row of the reference table."""
    with REFERENCE.open(encoding="utf-8", newline="") as stream:
        for row in csv.DictReader(stream):
            if row["id"] == identifier:
                return json.loads(row["inputs"]), float(row["published_num"]), float(row["tol"])
    raise KeyError(identifier)


def laea_by_hand(
    projection: SiteProjection, latitude: float, longitude: float
) -> tuple[float, float]:
    """Lambert azimuthal equal-area on the ellipsoid: Snyder 1987, USGS Prof. Paper 1395, 24-3ff."""
    a, f = 6378137.0, 1 / 298.257223563
    e2 = f * (2 - f)
    e = math.sqrt(e2)

    def q(phi: float) -> float:
        s = math.sin(phi)
        return (1 - e2) * (s / (1 - e2 * s * s) + math.atanh(e * s) / e)

    phi1, phi = math.radians(projection.latitude), math.radians(latitude)
    dlam = math.radians(longitude - projection.longitude)
    qp = q(math.pi / 2)
    beta1, beta = math.asin(q(phi1) / qp), math.asin(q(phi) / qp)
    rq = a * math.sqrt(qp / 2)
    m1 = math.cos(phi1) / math.sqrt(1 - e2 * math.sin(phi1) ** 2)
    d = a * m1 / (rq * math.cos(beta1))
    b = rq * math.sqrt(
        2
        / (1 + math.sin(beta1) * math.sin(beta) + math.cos(beta1) * math.cos(beta) * math.cos(dlam))
    )
    x = b * d * math.cos(beta) * math.sin(dlam)
    y = (b / d) * (
        math.cos(beta1) * math.sin(beta) - math.sin(beta1) * math.cos(beta) * math.cos(dlam)
    )
    return x, y


@pytest.mark.parametrize(
    ("centre", "place"),
    [((52.1, -1.9), (52.15, -1.8)), ((-33.5, 151.0), (-33.4, 151.2)), ((70.0, 20.0), (71.0, 24.0))],
)
def test_site_metres_are_those_of_the_published_equal_area_formulas(
    centre: tuple[float, float], place: tuple[float, float]
) -> None:
    """The plane must be the one that Snyder 1987 (ch. 24) defines, or areas are not true."""
    projection = SiteProjection(*centre)
    assert to_site(projection, *place) == pytest.approx(laea_by_hand(projection, *place), abs=1e-5)


def test_pyproj_gives_the_worked_example_of_the_equal_area_method() -> None:
    """EPSG Guidance Note 7-2, method 9820: the library under the plane meets the example."""
    to_grid = pyproj.Transformer.from_crs("EPSG:4258", "EPSG:3035", always_xy=True)
    inputs, easting, tolerance = published("A12-018")
    _, northing, _ = published("A12-019")
    found = to_grid.transform(inputs["lon"], inputs["lat"])
    assert found == pytest.approx((easting, northing), abs=tolerance)


@given(
    latitude=LATITUDES, longitude=LONGITUDES, east=st.floats(-5e4, 5e4), north=st.floats(-5e4, 5e4)
)
def test_degrees_come_back_from_site_metres_to_a_tenth_of_a_millimetre(
    latitude: float, longitude: float, east: float, north: float
) -> None:
    """There and back must not move a location, not even within sight of a pole."""
    projection = SiteProjection(round(latitude, 2), round(longitude, 2))
    back = to_site(projection, *to_degrees(projection, east, north))
    assert back == pytest.approx((east, north), abs=1e-4)


def test_arrays_and_floats_give_the_same_metres() -> None:
    """A caller may ask for one place or for many; the input must not be changed."""
    projection = SiteProjection(52.1, -1.9)
    latitude, longitude = np.array([52.1, 52.2]), np.array([-1.9, -1.7])
    easting, northing = to_site(projection, latitude, longitude)
    assert (easting[1], northing[1]) == to_site(projection, 52.2, -1.7)
    assert latitude.tolist() == [52.1, 52.2]


def test_a_grid_is_transverse_mercator_as_in_the_published_example() -> None:
    """Snyder 1987, appendix A (Clarke 1866): rows A12-015 and A12-016 hold for our zone 18."""
    inputs, easting, tolerance = published("A12-015")
    _, northing, _ = published("A12-016")
    clarke = pyproj.Proj("+proj=utm +zone=18 +ellps=clrk66")
    x, y = clarke(inputs["lon"], inputs["lat"])
    assert (x - 500000, y) == pytest.approx((easting, northing), abs=tolerance)
    # The same place on WGS 84 lies within the difference of the two ellipsoids, below 250 m.
    ours = utm(inputs["lat"], inputs["lon"])
    assert ours.zone == published("A12-024")[1]
    assert abs(ours.easting - x) < 250
    assert abs(ours.northing - y) < 250


def utm_by_series(latitude: float, longitude: float, zone: int) -> tuple[float, float]:
    """UTM on WGS 84 by the sixth-order series of Karney 2011 (J. Geodesy 85), written out."""
    a, f, k0 = 6378137.0, 1 / 298.257223563, 0.9996
    n = f / (2 - f)
    e = math.sqrt(f * (2 - f))
    radius = a / (1 + n) * (1 + n**2 / 4 + n**4 / 64)
    alpha = (
        n / 2 - 2 * n**2 / 3 + 5 * n**3 / 16 + 41 * n**4 / 180,
        13 * n**2 / 48 - 3 * n**3 / 5 + 557 * n**4 / 1440,
        61 * n**3 / 240 - 103 * n**4 / 140,
        49561 * n**4 / 161280,
    )
    phi, lam = math.radians(latitude), math.radians(longitude - (6 * zone - 183))
    tau = math.tan(phi)
    sigma = math.sinh(e * math.atanh(e * tau / math.hypot(1, tau)))
    tau1 = tau * math.hypot(1, sigma) - sigma * math.hypot(1, tau)
    xi = math.atan2(tau1, math.cos(lam))
    eta = math.asinh(math.sin(lam) / math.hypot(tau1, math.cos(lam)))
    north = xi + sum(
        c * math.sin(2 * j * xi) * math.cosh(2 * j * eta) for j, c in enumerate(alpha, start=1)
    )
    east = eta + sum(
        c * math.cos(2 * j * xi) * math.sinh(2 * j * eta) for j, c in enumerate(alpha, start=1)
    )
    return 500000 + k0 * radius * east, (0 if latitude >= 0 else 1e7) + k0 * radius * north


@pytest.mark.parametrize(
    "place", [(52.1, -1.9), (-41.3, 174.8), (0.0, 3.0), (83.9, -40.0), (60.4, 5.3)]
)
def test_utm_is_what_the_published_series_gives(place: tuple[float, float]) -> None:
    """A crew types these numbers into a receiver; they must be right to the centimetre."""
    ours = utm(*place)
    expected = utm_by_series(*place, ours.zone)
    assert (ours.easting, ours.northing) == pytest.approx(expected, abs=0.005)


@pytest.mark.parametrize(
    ("place", "zone"),
    [
        ((40.5, -73.5), 18),  # EPSG Guidance Note 7-2, method 9824
        ((0.0, -180.0), 1),
        ((0.0, 180.0), 1),
        ((0.0, 179.999), 60),
        ((60.39, 5.32), 32),  # south-west Norway
        ((55.99, 5.32), 31),
        ((64.0, 5.32), 31),
        ((78.22, 15.65), 33),  # Svalbard
        ((78.22, 8.99), 31),
        ((78.22, 21.0), 35),
        ((78.22, 41.99), 37),
        ((71.99, 15.65), 33),
        ((84.0, 0.0), 31),
        ((84.01, 0.0), 0),
        ((-80.0, 0.0), 31),
        ((-80.01, 0.0), 0),
    ],
)
def test_zones_follow_the_rule_with_the_exceptions_of_norway_and_svalbard(
    place: tuple[float, float], zone: int
) -> None:
    """NGA.SIG.0012 (from memory) widens zones there; a plain formula names a zone nobody uses."""
    assert utm_zone(*place) == zone


def test_beyond_utm_the_polar_grid_is_given_and_named() -> None:
    """The pole of UPS has easting and northing 2,000,000 m (EPSG:5041), and a name of its own."""
    pole = utm(90.0, 0.0)
    assert (pole.zone_name, pole.epsg) == ("UPS N", 5041)
    assert (pole.easting, pole.northing) == pytest.approx((2e6, 2e6), abs=0.001)
    assert utm(-85.0, 30.0).zone_name == "UPS S"
    assert utm_in_words(pole) == "Polar grid UPS N, datum WGS 84 (EPSG:5041), metres"


def test_a_site_across_a_zone_edge_can_be_printed_in_one_zone() -> None:
    """Two zones on one sheet put neighbours 300 km apart on paper."""
    west, east = utm(52.1, -0.01, zone=30), utm(52.1, 0.01, zone=30)
    assert site_zone(SiteProjection(52.1, -0.02)) == 30
    assert 0 < east.easting - west.easting < 2000
    assert utm(52.1, 0.01).zone == 31


@pytest.mark.parametrize(
    ("place", "text"),
    [
        ((52.1, -1.9), "52°06′00.000″ N, 001°54′00.000″ W"),
        ((0.0, 0.0), "00°00′00.000″ N, 000°00′00.000″ E"),
        ((-0.0000001, 12.9999999), "00°00′00.000″ S, 013°00′00.000″ E"),
        ((9.9999999999, -179.99999999999), "10°00′00.000″ N, 180°00′00.000″ W"),
        ((45 + 59 / 60 + 59.9996 / 3600, 0.5), "46°00′00.000″ N, 000°30′00.000″ E"),
        ((45 + 59 / 60 + 59.9994 / 3600, 0.5), "45°59′59.999″ N, 000°30′00.000″ E"),
    ],
)
def test_seconds_and_minutes_never_read_sixty(place: tuple[float, float], text: str) -> None:
    """60.000″ is refused by receivers; it has to roll over into the next minute."""
    assert dms(*place) == text


@given(latitude=LATITUDES, longitude=LONGITUDES)
def test_degrees_minutes_seconds_say_the_place_within_two_centimetres(
    latitude: float, longitude: float
) -> None:
    """Half of 0.001″ is 1.5 cm on a meridian (E3: 1″ = 31 m)."""
    values = []
    for part, plus in zip(dms(latitude, longitude).split(", "), "NE", strict=True):
        number, letter = part.split(" ")
        whole, minutes, seconds = number.replace("″", "").replace("′", "°").split("°")
        assert float(minutes) < 60
        assert float(seconds) < 60
        sign = 1 if letter == plus else -1
        values.append(sign * (int(whole) + int(minutes) / 60 + float(seconds) / 3600))
    assert values == pytest.approx([latitude, longitude], abs=0.00051 / 3600)


@pytest.mark.parametrize(
    ("latitudes", "longitudes", "centre"),
    [
        ([10.0, 10.0], [179.9, -179.8], (10.0, -179.95)),
        ([89.0, 89.0, 89.0, 89.0], [0.0, 90.0, 180.0, -90.0], (90.0, 0.0)),
        ([-0.001, 0.001], [-0.001, 0.001], (0.0, 0.0)),
    ],
)
def test_sites_across_the_date_line_and_round_a_pole_have_a_centre_in_their_middle(
    latitudes: list[float], longitudes: list[float], centre: tuple[float, float]
) -> None:
    """An average of degrees would put the first on the other side of the Earth."""
    found = centre_of(np.array(latitudes), np.array(longitudes))
    assert (found.latitude, abs(found.longitude)) == pytest.approx((centre[0], abs(centre[1])))


def test_the_plane_is_named_in_words_with_its_hemispheres() -> None:
    """A surveyor must be able to set up the same plane from the sheet."""
    assert projection_in_words(SiteProjection(-33.5, 151.05)) == (
        "Lambert azimuthal equal-area, centre 33.50° S 151.05° E, datum WGS 84, metres"
    )

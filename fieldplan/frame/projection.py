"""Metres for the site, degrees and grid coordinates for people: one projection, three ways to say.

Inside the tool a place is easting and northing in the site's own equal-area plane. Degrees, UTM
and degrees-minutes-seconds are made at the edge, from WGS 84.
"""

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
import pyproj
import pyproj.network
from numpy.typing import ArrayLike, NDArray
from pyproj.enums import TransformDirection

from fieldplan.frame.model import SiteProjection

Coordinates = Any
"""A float where a float was given, a numpy array of floats where an array was given."""


@dataclass(frozen=True)
class Utm:
    """A grid coordinate on WGS 84 as receivers and paper maps print it.

    Parameters
    ----------
    zone : int
        1 to 60; 0 near the poles, where UTM ends and the polar stereographic grid (UPS) is used.
    hemisphere : str
        ``N`` or ``S``.
    easting, northing : float
        Metres, unrounded.
    """

    zone: int
    hemisphere: str
    easting: float
    northing: float

    @property
    def zone_name(self) -> str:
        """The zone as printed: ``33N``, or ``UPS S`` near a pole."""
        return f"{self.zone}{self.hemisphere}" if self.zone else f"UPS {self.hemisphere}"

    @property
    def epsg(self) -> int:
        """The EPSG code of the grid, easting before northing."""
        if self.zone:
            return (32600 if self.hemisphere == "N" else 32700) + self.zone
        return 5041 if self.hemisphere == "N" else 5042


def to_site(
    projection: SiteProjection, latitude: ArrayLike, longitude: ArrayLike
) -> tuple[Coordinates, Coordinates]:
    """Turn degrees into metres of the site's plane.

    Parameters
    ----------
    projection : SiteProjection
        The plane.
    latitude, longitude : float or array of float
        Degrees on WGS 84; longitudes may run past ±180.

    Returns
    -------
    easting, northing : float or array of float
        Metres from the centre of the plane, unrounded.

    Examples
    --------
    >>> easting, northing = to_site(SiteProjection(52.10, -1.90), 52.10, -1.90)
    >>> abs(round(easting, 3)), abs(round(northing, 3))
    (0.0, 0.0)
    """
    easting, northing = transformed(_site_transformer(projection.definition), longitude, latitude)
    return easting, northing


def to_degrees(
    projection: SiteProjection, easting: ArrayLike, northing: ArrayLike
) -> tuple[Coordinates, Coordinates]:
    """Turn metres of the site's plane into degrees on WGS 84.

    Parameters
    ----------
    projection : SiteProjection
        The plane.
    easting, northing : float or array of float
        Metres from the centre of the plane.

    Returns
    -------
    latitude, longitude : float or array of float
        Degrees, unrounded; longitudes between -180 and 180.

    Examples
    --------
    >>> latitude, longitude = to_degrees(SiteProjection(52.10, -1.90), 0.0, 1000.0)
    >>> round(latitude, 5), round(longitude, 5)
    (52.10899, -1.9)
    """
    transformer = _site_transformer(projection.definition)
    longitude, latitude = transformed(transformer, easting, northing, inverse=True)
    # PROJ's inverse ends a series early (up to 1.6 mm in 9.5); its forward is closed, so one
    # correction brings both together and makes the answer the same in every version.
    x, y = transformed(transformer, longitude, latitude)
    longitude, latitude = transformed(
        transformer, 2 * np.asarray(easting) - x, 2 * np.asarray(northing) - y, inverse=True
    )
    return latitude, longitude


def utm_zone(latitude: float, longitude: float) -> int:
    """Name the UTM zone of a place; 0 above 84° N and below 80° S, where UTM ends.

    Parameters
    ----------
    latitude, longitude : float
        Degrees on WGS 84.

    Returns
    -------
    int
        1 to 60, or 0.

    Notes
    -----
    ``Z = floor((longitude + 180) / 6) mod 60 + 1`` (EPSG Guidance Note 7-2, method 9824), with
    the wider zones of south-west Norway (32) and Svalbard (31, 33, 35, 37) as in NGA.SIG.0012.

    Examples
    --------
    >>> utm_zone(40.5, -73.5), utm_zone(60.4, 5.3), utm_zone(78.2, 15.6), utm_zone(-85.0, 0.0)
    (18, 32, 33, 0)
    """
    if latitude > 84 or latitude < -80:
        return 0
    longitude = (longitude + 180) % 360 - 180
    if 56 <= latitude < 64 and 3 <= longitude < 12:
        return 32
    if latitude >= 72 and 0 <= longitude < 42:
        return next(
            zone for limit, zone in ((9, 31), (21, 33), (33, 35), (42, 37)) if longitude < limit
        )
    return int((longitude + 180) // 6) % 60 + 1


def utm(latitude: float, longitude: float, *, zone: int | None = None) -> Utm:
    """Give the UTM coordinate of a place, or its polar one where UTM ends.

    Parameters
    ----------
    latitude, longitude : float
        Degrees on WGS 84.
    zone : int, optional
        Use this zone though the place lies in another, so that a site across the edge of a zone
        has one grid; 0 asks for the polar grid.

    Returns
    -------
    Utm
        Zone, hemisphere, easting and northing in metres, unrounded.

    Examples
    --------
    >>> place = utm(40.5, -73.5)
    >>> place.zone_name, round(place.easting, 1), round(place.northing, 1)
    ('18N', 627103.1, 4484335.4)
    """
    number = utm_zone(latitude, longitude) if zone is None else zone
    bare = Utm(number, "N" if latitude >= 0 else "S", 0.0, 0.0)
    easting, northing = _grid_transformer(bare.epsg).transform(longitude, latitude)
    return Utm(number, bare.hemisphere, float(easting), float(northing))


def site_zone(projection: SiteProjection) -> int:
    """Choose the one UTM zone that all places of a site are printed in: that of its centre.

    Examples
    --------
    >>> site_zone(SiteProjection(52.10, -1.90))
    30
    """
    return utm_zone(projection.latitude, projection.longitude)


def dms(latitude: float, longitude: float) -> str:
    """Write a place in degrees, minutes and seconds to 0.001″ (about 3 cm).

    Parameters
    ----------
    latitude, longitude : float
        Degrees on WGS 84.

    Returns
    -------
    str
        Hemispheres as letters, never a sign; 59.9996″ rolls over into the next minute.

    Examples
    --------
    >>> dms(52.1, -1.9)
    '52°06′00.000″ N, 001°54′00.000″ W'
    >>> dms(-33.99999999, 179.99999999)
    '34°00′00.000″ S, 180°00′00.000″ E'
    """
    north = _angle(latitude, "NS", width=2)
    east = _angle(longitude, "EW", width=3)
    return f"{north}, {east}"


def projection_in_words(projection: SiteProjection) -> str:
    """Say in a sentence what the site's easting and northing are.

    Examples
    --------
    >>> projection_in_words(SiteProjection(52.10, -1.90))
    'Lambert azimuthal equal-area, centre 52.10° N 1.90° W, datum WGS 84, metres'
    """
    north = "N" if projection.latitude >= 0 else "S"
    east = "E" if projection.longitude >= 0 else "W"
    return (
        f"Lambert azimuthal equal-area, centre {abs(projection.latitude):.2f}° {north} "
        f"{abs(projection.longitude):.2f}° {east}, datum WGS 84, metres"
    )


def utm_in_words(place: Utm) -> str:
    """Say in a sentence what grid a coordinate is in.

    Examples
    --------
    >>> utm_in_words(utm(40.5, -73.5))
    'UTM zone 18N, datum WGS 84 (EPSG:32618), metres'
    """
    grid = f"UTM zone {place.zone_name}" if place.zone else f"Polar grid {place.zone_name}"
    return f"{grid}, datum WGS 84 (EPSG:{place.epsg}), metres"


def centre_of(latitude: NDArray[np.float64], longitude: NDArray[np.float64]) -> SiteProjection:
    """Centre a plane on places: the direction of their mean vector, rounded to 0.01°.

    Vectors rather than averaged degrees, so that sites across 180° or round a pole have a centre.

    Parameters
    ----------
    latitude, longitude : array of float
        Degrees on WGS 84; not empty.

    Returns
    -------
    SiteProjection

    Examples
    --------
    >>> centre_of(np.array([10.0, 10.0]), np.array([179.9, -179.8]))
    SiteProjection(latitude=10.0, longitude=-179.95)
    """
    phi, lam = np.radians(latitude), np.radians(longitude)
    corners = np.stack([np.cos(phi) * np.cos(lam), np.cos(phi) * np.sin(lam), np.sin(phi)])
    x, y, z = (corners.min(axis=1) + corners.max(axis=1)) / 2
    centre_latitude = round(math.degrees(math.atan2(z, math.hypot(x, y))), 2)
    centre_longitude = round(math.degrees(math.atan2(y, x)), 2)
    return SiteProjection(centre_latitude + 0.0, centre_longitude + 0.0)


def transformed(
    transformer: pyproj.Transformer, x: ArrayLike, y: ArrayLike, *, inverse: bool = False
) -> tuple[Coordinates, Coordinates]:
    """Apply a transformer to floats or arrays, leaving what was given as it was.

    Parameters
    ----------
    transformer : pyproj.Transformer
        Made with ``always_xy=True``.
    x, y : float or array of float
        Easting or longitude, northing or latitude.
    inverse : bool
        Go the other way.

    Returns
    -------
    x, y : float or array of float
        As many as were given; an array of one stays an array.
    """
    direction = TransformDirection.INVERSE if inverse else TransformDirection.FORWARD
    given = np.array(x, dtype=float), np.array(y, dtype=float)
    if given[0].size != 1:
        return transformer.transform(*given, direction=direction)
    # pyproj 3.7 takes an array of one for a number, and numpy warns about that.
    single = transformer.transform(given[0].item(), given[1].item(), direction=direction)
    if given[0].ndim == 0:
        return single
    return np.full(given[0].shape, single[0]), np.full(given[0].shape, single[1])


def _angle(degrees: float, letters: str, *, width: int) -> str:
    """Write one angle; counted in whole thousandths of a second so that nothing reads 60."""
    thousandths = round(abs(degrees) * 3_600_000)
    minutes_total, thousandths = divmod(thousandths, 60_000)
    whole, minutes = divmod(minutes_total, 60)
    letter = letters[0] if degrees >= 0 else letters[1]
    return f"{whole:0{width}d}°{minutes:02d}′{thousandths / 1000:06.3f}″ {letter}"


@lru_cache(maxsize=32)
def _site_transformer(definition: str) -> pyproj.Transformer:
    pyproj.network.set_network_enabled(active=False)  # type: ignore[attr-defined]
    return pyproj.Transformer.from_crs("EPSG:4326", definition, always_xy=True)


@lru_cache(maxsize=128)
def _grid_transformer(epsg: int) -> pyproj.Transformer:
    pyproj.network.set_network_enabled(active=False)  # type: ignore[attr-defined]
    return pyproj.Transformer.from_crs("EPSG:4326", f"EPSG:{epsg}", always_xy=True)

"""Outlines that need no file: corners as typed, or a circle round a point."""

import json
from collections.abc import Sequence

from fieldplan.base.errors import CampaignError

CIRCLE_CORNERS = 180
"""A polygon of so many corners covers 99.98 % of its circle."""

_HIGHEST_LATITUDE = 89.0
_SMALLEST_RADIUS_M = 1.0
_LARGEST_RADIUS_M = 200_000.0


def read_corners(text: str) -> tuple[tuple[float, float], ...]:
    """Read corners from pasted lines of ``latitude, longitude``.

    Parameters
    ----------
    text : str
        Decimal degrees, one corner a line or separated by semicolons; the last corner may
        repeat the first.

    Returns
    -------
    tuple of (float, float)
        Latitude and longitude of at least 3 corners, the first not repeated.

    Raises
    ------
    CampaignError
        Every line that is no corner, or too few corners.

    Examples
    --------
    >>> read_corners("52.1, -1.9; 52.1, -1.8; 52.2, -1.8")
    ((52.1, -1.9), (52.1, -1.8), (52.2, -1.8))
    """
    corners: list[tuple[float, float]] = []
    problems: list[str] = []
    lines = [line for line in text.replace(";", "\n").splitlines() if line.strip()]
    for number, line in enumerate(lines, start=1):
        try:
            corners.append(read_position(line))
        except CampaignError as fault:
            problems += [f"corner {number}: {problem}" for problem in fault.problems]
    if problems:
        raise CampaignError(*problems)
    if len(corners) > 1 and corners[0] == corners[-1]:
        corners.pop()
    if len(set(corners)) < 3:
        message = (
            f"an outline needs at least 3 different corners (got {len(set(corners))}). "
            "Give one 'latitude, longitude' a line, in order round the site."
        )
        raise CampaignError(message)
    return tuple(corners)


def read_position(text: str) -> tuple[float, float]:
    """Read ``latitude, longitude`` in decimal degrees.

    Raises
    ------
    CampaignError
        Not two numbers, or outside the globe.

    Examples
    --------
    >>> read_position("52.1023, -1.9011")
    (52.1023, -1.9011)
    """
    parts = text.replace(",", " ").split()
    try:
        latitude, longitude = (float(part) for part in parts)
    except ValueError as fault:
        message = (
            f"'{text.strip()}' is no position; latitude and longitude in decimal degrees are "
            "accepted, with decimal points. Write it like 52.1023, -1.9011."
        )
        raise CampaignError(message) from fault
    if not (abs(latitude) <= 90 and abs(longitude) <= 180):
        swapped = abs(longitude) <= 90 and abs(latitude) <= 180
        remedy = "Write latitude first." if swapped else "Write decimal degrees, not metres."
        message = (
            f"'{text.strip()}' lies off the globe; latitude -90 to 90 and longitude -180 to 180 "
            f"are accepted. {remedy}"
        )
        raise CampaignError(message)
    return latitude, longitude


def corners_geojson(corners: Sequence[tuple[float, float]]) -> str:
    """Write corners as a GeoJSON polygon (RFC 7946: longitude first, counter-clockwise).

    Raises
    ------
    CampaignError
        They enclose no ground.

    Examples
    --------
    >>> collection = json.loads(corners_geojson([(52.1, -1.9), (52.1, -1.8), (52.2, -1.8)]))
    >>> collection["features"][0]["geometry"]["coordinates"]
    [[[-1.9, 52.1], [-1.8, 52.1], [-1.8, 52.2], [-1.9, 52.1]]]
    """
    ring = [(longitude, latitude) for latitude, longitude in corners]
    west, south = (min(values) for values in zip(*ring, strict=True))
    shifted = [(x - west, y - south) for x, y in ring]
    doubled_area = sum(
        x0 * y1 - x1 * y0
        for (x0, y0), (x1, y1) in zip(shifted, shifted[1:] + shifted[:1], strict=True)
    )
    width, height = (max(values) for values in zip(*shifted, strict=True))
    if abs(doubled_area) <= 1e-9 * width * height:
        message = (
            f"the {len(corners)} corners enclose no ground: they lie on one line, or the outline "
            "crosses itself. Give them in the order of a walk round the site."
        )
        raise CampaignError(message)
    if doubled_area < 0:
        ring.reverse()
    return _polygon([*ring, ring[0]], {"source": "corners as typed"})


def circle_geojson(latitude: float, longitude: float, *, radius_m: float) -> str:
    """Write a circle on the WGS 84 ellipsoid as a GeoJSON polygon.

    Parameters
    ----------
    latitude, longitude : float
        Centre, decimal degrees.
    radius_m : float
        Metres, from 1 to 200 000: a site needs at least 1 m², and corners are kept to 1 cm.

    Raises
    ------
    CampaignError
        A radius out of range, or a circle that reaches a pole or crosses the 180th meridian.
    """
    if not _SMALLEST_RADIUS_M <= radius_m <= _LARGEST_RADIUS_M:
        message = (
            f"a radius of at least {_SMALLEST_RADIUS_M:g} m and up to {_LARGEST_RADIUS_M:,.0f} m "
            f"is accepted (got {radius_m:g}). Give metres."
        )
        raise CampaignError(message)
    from pyproj import Geod

    count = CIRCLE_CORNERS
    azimuths = [-360.0 * k / count for k in range(count)]
    longitudes, latitudes, _ = Geod(ellps="WGS84").fwd(
        [longitude] * count, [latitude] * count, azimuths, [radius_m] * count
    )
    ring = [(round(x, 7), round(y, 7)) for x, y in zip(longitudes, latitudes, strict=True)]
    wraps = max(x for x, _ in ring) - min(x for x, _ in ring) > 180
    if wraps or max(abs(y) for _, y in ring) > _HIGHEST_LATITUDE:
        message = (
            f"the circle round {latitude:g}, {longitude:g} reaches a pole or crosses the 180th "
            "meridian. Give a boundary file instead."
        )
        raise CampaignError(message)
    source = f"circle of {radius_m:g} m round {latitude:g}, {longitude:g}, ASSUMED"
    return _polygon([*ring, ring[0]], {"source": source})


def _polygon(ring: list[tuple[float, float]], properties: dict[str, str]) -> str:
    """Write one closed ring as a feature collection."""
    feature = {
        "type": "Feature",
        "properties": properties,
        "geometry": {"type": "Polygon", "coordinates": [ring]},
    }
    collection = {"type": "FeatureCollection", "features": [feature]}
    return json.dumps(collection, ensure_ascii=False) + "\n"

"""From a file's coordinates to the site's plane: long edges bent, crossings found, millimetres."""

import math

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.errors import GEOSException
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.base.units import significant
from fieldplan.frame.datum import Shift
from fieldplan.frame.model import SiteProjection
from fieldplan.frame.projection import to_degrees, to_site

GRID_M = 0.001
"""Coordinates of net geometries are whole millimetres."""

REPAIR_LIMIT = 1e-4
"""A crossing is repaired when the area changes by less than this share, else refused."""

_ARC_SEGMENTS = 32
_BEND_M = 0.001
_MOST_PIECES = 1000
_FARTHEST_M = 3_000_000.0
_FLAT_M = 300_000.0
_EARTH_RADIUS_M = 6_371_000.0


class SitePlane:
    """The site's plane with the way into it from one file.

    Parameters
    ----------
    projection : SiteProjection
        The plane.
    shift : Shift
        The way from the file's coordinates to degrees.
    """

    def __init__(self, projection: SiteProjection, shift: Shift) -> None:
        self.projection = projection
        self.shift = shift

    def place(self, geometry: BaseGeometry) -> BaseGeometry:
        """Bring a geometry into the plane; its edges stay where the file has them.

        An edge is a straight line in the file's own coordinates (for GeoJSON in degrees). Where
        it would be a curve in the plane it gets more vertices, until it is off by 1 mm at most.
        """
        if isinstance(geometry, shapely.Polygon):
            rings = [self._line(np.asarray(ring.coords)) for ring in _rings(geometry)]
            return shapely.Polygon(rings[0], rings[1:])
        if isinstance(geometry, shapely.LineString):
            return shapely.LineString(self._line(np.asarray(geometry.coords)))
        if isinstance(geometry, shapely.Point):
            return shapely.Point(self._flat(np.asarray(geometry.coords))[0])
        parts = [self.place(part) for part in shapely.get_parts(geometry) if not part.is_empty]
        return shapely.GeometryCollection(parts)

    def _line(self, coordinates: NDArray[np.float64]) -> NDArray[np.float64]:
        """Place a run of vertices, with more of them where an edge bends."""
        source = coordinates[:, :2].astype(float)
        if self.shift.crs.is_geographic:
            # A step of more than 180° is one across the date line, not round the world.
            source[:, 0] = np.unwrap(source[:, 0], period=360.0)
        flat = self._flat(source)
        middle = self._flat((source[:-1] + source[1:]) / 2)
        bend = np.hypot(*(middle - (flat[:-1] + flat[1:]) / 2).T)
        pieces = np.clip(np.ceil(np.sqrt(bend / _BEND_M)), 1, _MOST_PIECES).astype(int)
        if int(pieces.sum()) == len(pieces):
            return flat
        edge = np.repeat(np.arange(len(pieces)), pieces)
        first = np.concatenate([[0], np.cumsum(pieces)[:-1]])
        along = (np.arange(len(edge)) - first[edge]) / pieces[edge]
        denser = source[edge] + along[:, None] * (source[edge + 1] - source[edge])
        return self._flat(np.vstack([denser, source[-1]]))

    def _flat(self, source: NDArray[np.float64]) -> NDArray[np.float64]:
        """Turn x, y of the file into metres of the plane."""
        latitude, longitude = self.shift.degrees(source)
        return np.column_stack(to_site(self.projection, latitude, longitude))


def widened(geometry: BaseGeometry, distance_m: float) -> BaseGeometry:
    """Widen a geometry by a distance, or narrow it by a negative one; below 1 mm leave it alone.

    Arcs are polygons of 128 sides, short of the distance by 0.03 % at most.

    Examples
    --------
    >>> widened(shapely.box(0, 0, 10, 10), -2.0).area
    36.0
    """
    if abs(distance_m) < GRID_M:
        return geometry
    return shapely.buffer(geometry, distance_m, quad_segs=_ARC_SEGMENTS)


def polygons_of(geometry: BaseGeometry) -> list[shapely.Polygon]:
    """List the polygons in a geometry, however nested; lines and points are left out."""
    if isinstance(geometry, shapely.Polygon):
        return [] if geometry.is_empty else [geometry]
    if not hasattr(geometry, "geoms"):
        return []
    return [polygon for part in geometry.geoms for polygon in polygons_of(part)]


def merged(geometry: BaseGeometry) -> shapely.Polygon | shapely.MultiPolygon:
    """Keep the polygons of a geometry as one Polygon or MultiPolygon on the millimetre grid."""
    parts = polygons_of(geometry)
    whole = parts[0] if len(parts) == 1 else shapely.MultiPolygon(parts)
    snapped = polygons_of(shapely.set_precision(whole, GRID_M))
    return snapped[0] if len(snapped) == 1 else shapely.MultiPolygon(snapped)


def repaired(
    geometry: BaseGeometry, projection: SiteProjection, label: str
) -> tuple[BaseGeometry, tuple[str, ...]]:
    """Give a valid polygon, repaired where next to no area changes.

    Parameters
    ----------
    geometry : BaseGeometry
        Polygon or collection of polygons in site metres.
    projection : SiteProjection
        To say in degrees where a crossing is.
    label : str
        File and feature, for messages.

    Returns
    -------
    geometry : BaseGeometry
        Valid.
    notes : tuple of str
        What was repaired.

    Raises
    ------
    FrameError
        It has no area, or a repair would change the area by 0.01 % or more.
    """
    parts = polygons_of(geometry)
    whole = parts[0] if len(parts) == 1 else shapely.MultiPolygon(parts)
    area = float(sum(part.area for part in parts))
    if shapely.is_valid(whole):
        if area <= 0:
            message = f"{label} has no area; draw it again."
            raise FrameError(message)
        return whole, ()
    if all(map(shapely.is_valid, parts)):
        one = shapely.union_all(parts, grid_size=GRID_M)
        if abs(float(one.area) - area) <= GRID_M * float(shapely.length(parts).sum()):
            # Parts that only touch, such as a site cut at the date line, are nobody's mistake.
            return one, ()
    try:
        mended = shapely.make_valid(whole, method="structure", keep_collapsed=False)
    except (GEOSException, ValueError) as fault:
        message = f"{label} cannot be made a polygon ({fault}); draw it again."
        raise FrameError(message) from fault
    change = abs(float(mended.area) - area)
    reason = _crossing(whole, projection)
    if mended.area <= 0 or (change >= REPAIR_LIMIT * area and change > 0):
        known = area > 0 and change <= area
        share = f"{significant(100 * change / area)} %" if known else "more than all of it"
        message = (
            f"{label} {reason}; to repair it would change its area by {share} (limit 0.01 %), "
            "so what is meant is not certain. Correct it in the file."
        )
        raise FrameError(message)
    share = significant(100 * change / area, 2)
    return mended, (f"{label} {reason}; it was repaired, its area changed by {share} %.",)


def check_extent(points: NDArray[np.float64], name: str) -> tuple[str, ...]:
    """Refuse a site too large for one plane; note where distances begin to suffer.

    Areas stay right at any size. Distances are off by ``(r / R)² / 8`` at a radius r, the second
    term of the azimuthal equal-area series (Snyder 1987, USGS Prof. Paper 1395, ch. 24).
    """
    radius = (
        float(np.hypot(points[:, 0], points[:, 1]).max()) if np.isfinite(points).all() else math.inf
    )
    if radius > _FARTHEST_M:
        message = (
            f"{name} reaches {significant(radius / 1000)} km from its centre, more than "
            f"{_FARTHEST_M / 1000:,.0f} km; take out stray coordinates or correct the CRS."
        )
        raise FrameError(message)
    if radius > _FLAT_M:
        share = 100 * (radius / _EARTH_RADIUS_M) ** 2 / 8
        return (
            f"{name} reaches {significant(radius / 1000)} km from its centre: areas hold, but "
            f"distances (buffers, inset, spacing) are off by up to {significant(share, 2)} %.",
        )
    return ()


def _rings(polygon: shapely.Polygon) -> list[shapely.LinearRing]:
    return [polygon.exterior, *polygon.interiors]


def _crossing(geometry: BaseGeometry, projection: SiteProjection) -> str:
    """Say what is wrong with a polygon and where, in words and degrees."""
    text = str(shapely.is_valid_reason(geometry))
    kind, _, place = text.partition("[")
    words = {
        "Self-intersection": "crosses or touches itself",
        "Ring Self-intersection": "crosses or touches itself",
        "Interior is disconnected": "is cut in two by a hole",
        "Hole lies outside shell": "has a hole outside its outline",
        "Holes are nested": "has a hole inside a hole",
        "Nested shells": "has a part inside another part",
        "Duplicate Rings": "has the same ring twice",
    }.get(kind.strip(), f"is not a polygon ({kind.strip().lower()})")
    try:
        x, y = (float(number) for number in place.rstrip("]").split()[:2])
    except ValueError:
        return words
    latitude, longitude = to_degrees(projection, x, y)
    return f"{words} near latitude, longitude {latitude:.6f}, {longitude:.6f}"

"""Polygons or lines of the site in degrees, as files and maps show them."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from fieldplan.frame.model import SiteProjection
from fieldplan.frame.projection import to_degrees
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.plan.model import Plan

OutlineKind = Literal["boundary", "stratum", "excluded"]
# Straight in the site's plane is not straight in degrees: over 1 km the two part by 0.03 m.
LONGEST_EDGE_M = 1000.0


@dataclass(frozen=True)
class Outline:
    """One polygon of the site, or the lines of one of its parts.

    Parameters
    ----------
    kind : str
        ``boundary``, ``stratum`` or ``excluded``.
    name : str
        The stratum, or the reason of an exclusion; on one line.
    geometry : BaseGeometry
        Polygon or MultiPolygon, longitude before latitude, 7 decimals, outer rings
        counter-clockwise; longitudes run on past ±180 where the site does. Of a frame along lines
        a LineString or MultiLineString.
    area_m2 : float
        Measured in the site's equal-area plane; 0 for lines.
    length_m : float
        Of lines; 0 for polygons.
    """

    kind: OutlineKind
    name: str
    geometry: BaseGeometry
    area_m2: float
    length_m: float = 0.0

    @property
    def title(self) -> str:
        """The kind and the name in words."""
        whole = "All lines" if self.length_m else "Boundary"
        opening = {"boundary": whole, "stratum": "Stratum: ", "excluded": "Excluded: "}
        return opening[self.kind] + ("" if self.kind == "boundary" else self.name)


def outlines(plan: Plan) -> tuple[Outline, ...]:
    """List boundary or whole lines, strata and exclusions of a plan, in this order.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    tuple of Outline
        Strata of a list have no polygon and do not appear.
    """
    frame = plan.frame
    found: list[tuple[OutlineKind, str, BaseGeometry]] = [("boundary", "site", frame.boundary)]
    found += [("stratum", s.name, s.geometry) for s in frame.strata if s.geometry is not None]
    found += [("excluded", e.reason, e.geometry) for e in frame.excluded]
    return tuple(
        Outline(
            kind,
            plain(name),
            in_degrees(frame.projection, geometry),
            float(geometry.area),
            float(geometry.length) if frame.kind == "line" else 0.0,
        )
        for kind, name, geometry in found
        if not geometry.is_empty
    )


def in_degrees(projection: SiteProjection, geometry: BaseGeometry) -> BaseGeometry:
    """Turn polygons from site metres into degrees, running on across 180°.

    Parameters
    ----------
    projection : SiteProjection
    geometry : BaseGeometry
        Polygons in site metres.

    Returns
    -------
    BaseGeometry
        Longitude before latitude, within 180° of the site's centre.
    """

    def turn(metres: np.ndarray) -> np.ndarray:
        latitude, longitude = to_degrees(projection, metres[:, 0], metres[:, 1])
        near = projection.longitude + (longitude - projection.longitude + 180) % 360 - 180
        return np.column_stack([near, latitude]).round(7)

    dense = shapely.segmentize(shapely.force_2d(geometry), LONGEST_EDGE_M)
    return shapely.orient_polygons(shapely.transform(dense, turn))


def within_180(geometry: BaseGeometry) -> BaseGeometry:
    """Cut polygons or lines that cross 180° in two, as RFC 7946 section 3.1.9 asks.

    Examples
    --------
    >>> within_180(shapely.box(179, 0, 181, 1)).bounds
    (-180.0, 0.0, 180.0, 1.0)
    """
    west, _, east, _ = geometry.bounds
    if west >= -180 and east <= 180:
        return geometry
    parts: list[BaseGeometry] = []
    for shift in (-360.0, 0.0, 360.0):
        window = shapely.box(-180 - shift, -90, 180 - shift, 90)
        part = affinity.translate(shapely.intersection(geometry, window), shift)
        kinds = (shapely.Polygon, shapely.LineString)
        pieces = [piece for piece in shapely.get_parts(part) if not piece.is_empty]
        parts += [piece for piece in pieces if isinstance(piece, kinds)]
    if all(isinstance(piece, shapely.LineString) for piece in parts):
        return shapely.MultiLineString([shapely.get_coordinates(piece) for piece in parts])
    solid = [piece for piece in parts if isinstance(piece, shapely.Polygon)]
    return shapely.orient_polygons(shapely.MultiPolygon(solid))


def rings(geometry: BaseGeometry) -> list[np.ndarray]:
    """List all rings of polygons as arrays of shape (n, 2): shells first, holes after each.

    A line is listed as it is.
    """
    found = []
    for polygon in shapely.get_parts(geometry):
        if isinstance(polygon, shapely.LineString):
            found.append(shapely.get_coordinates(polygon))
            continue
        found += [shapely.get_coordinates(ring) for ring in shapely.get_rings(polygon)]
    return found

"""GeoJSON read by our own few lines, so that what is named .geojson is GeoJSON and nothing else.

RFC 7946: positions are longitude, latitude on WGS 84, and an edge is a straight line in degrees.
A ``crs`` member of the older 2008 draft is understood when it is a name, never as a link.
"""

import json
import math
from collections.abc import Iterator
from typing import Any

import pyproj
import shapely
from pyproj.exceptions import CRSError
from shapely.errors import GEOSException
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.frame.layer import Feature, Layer, as_text, raise_all

_DEEPEST_COLLECTION = 20
_PARTS = {
    "MultiPoint": "Point",
    "MultiLineString": "LineString",
    "MultiPolygon": "Polygon",
}


class _Misshapen(ValueError):
    """A member of a geometry is not what RFC 7946 asks for."""


def read_geojson(content: bytes, name: str) -> Layer:
    """Read a GeoJSON text: a FeatureCollection, a Feature, or a bare geometry.

    Parameters
    ----------
    content : bytes
        The file as it stands.
    name : str
        What messages call it.

    Returns
    -------
    Layer

    Raises
    ------
    FrameError
        Not JSON, not GeoJSON, a misshapen geometry, or a ``crs`` given as a link.
    """
    document = _parse(content, name)
    features: list[Feature] = []
    faults: list[str] = []
    columns: dict[str, None] = {}
    empty = 0
    for number, (geometry, values) in enumerate(_entries(document, name), start=1):
        label = f"feature {number}"
        columns.update(dict.fromkeys(values))
        if geometry is None:
            empty += 1
            continue
        try:
            shape = _shape(geometry, 0)
        except (_Misshapen, GEOSException, ValueError, TypeError, OverflowError) as fault:
            faults.append(f"{name} {label}: {_reason(fault)}; export the file again.")
            continue
        if shape.is_empty:
            empty += 1
            continue
        features.append(Feature(label, shape, values))
    raise_all(faults)
    notes = (f"{name}: {empty} feature(s) without a geometry were skipped.",) if empty else ()
    crs, crs_from = _crs(document, name)
    return Layer(name, "GeoJSON", tuple(features), crs, crs_from, tuple(columns), notes)


def _parse(content: bytes, name: str) -> dict[str, Any]:
    """Turn bytes into a JSON object."""
    try:
        document = json.loads(content.decode("utf-8-sig" if content[:1] == b"\xef" else "utf-8"))
    except UnicodeDecodeError as fault:
        message = f"{name} is not UTF-8 text as GeoJSON must be; export it again."
        raise FrameError(message) from fault
    except RecursionError as fault:
        message = f"{name} is nested too deeply to be a map layer; export it again."
        raise FrameError(message) from fault
    except ValueError as fault:
        message = f"{name} is not JSON ({fault}); export it again as GeoJSON."
        raise FrameError(message) from fault
    if not isinstance(document, dict) or not isinstance(document.get("type"), str):
        message = f"{name} is JSON but not GeoJSON: it has no 'type'; export it again as GeoJSON."
        raise FrameError(message)
    return document


def _entries(document: dict[str, Any], name: str) -> Iterator[tuple[Any, dict[str, str]]]:
    """Yield geometry and values of each feature."""
    kind = document["type"]
    if kind == "FeatureCollection":
        listed = document.get("features")
        if not isinstance(listed, list):
            message = f"{name}: 'features' is not a list; export it again as GeoJSON."
            raise FrameError(message)
    elif kind == "Feature":
        listed = [document]
    else:
        listed = [{"type": "Feature", "geometry": document, "properties": None}]
    for entry in listed:
        if not isinstance(entry, dict):
            message = f"{name}: one of its features is {str(entry)[:40]!r}, not an object."
            raise FrameError(message)
        properties = entry.get("properties")
        values = properties if isinstance(properties, dict) else {}
        yield entry.get("geometry"), {str(key): as_text(value) for key, value in values.items()}


def _shape(geometry: Any, depth: int) -> BaseGeometry:
    """Build a geometry from its JSON object."""
    if not isinstance(geometry, dict):
        message = f"its geometry is {str(geometry)[:40]!r}, not an object"
        raise _Misshapen(message)
    kind = geometry.get("type")
    if kind == "GeometryCollection":
        return _collection(geometry.get("geometries"), depth)
    if kind in _PARTS:
        parts = [
            _simple(_PARTS[kind], part) for part in _sequence(geometry.get("coordinates"), kind)
        ]
        joined: dict[str, type[BaseGeometry]] = {
            "MultiPoint": shapely.MultiPoint,
            "MultiLineString": shapely.MultiLineString,
            "MultiPolygon": shapely.MultiPolygon,
        }
        return joined[str(kind)](parts)  # type: ignore[call-arg]
    return _simple(kind, geometry.get("coordinates"))


def _collection(members: Any, depth: int) -> BaseGeometry:
    """Build a collection, itself allowed to hold collections down to a limit."""
    if depth >= _DEEPEST_COLLECTION:
        message = f"its collections are nested more than {_DEEPEST_COLLECTION} deep"
        raise _Misshapen(message)
    listed = _sequence(members, "GeometryCollection")
    return shapely.GeometryCollection([_shape(member, depth + 1) for member in listed])


def _simple(kind: Any, coordinates: Any) -> BaseGeometry:
    """Build a point, a line or a polygon."""
    if kind == "Point":
        return shapely.Point(_position(coordinates)) if coordinates else shapely.Point()
    if kind == "LineString":
        return shapely.LineString(_positions(coordinates, kind, fewest=2))
    if kind == "Polygon":
        rings = [
            _closed(_positions(ring, "ring", fewest=3)) for ring in _sequence(coordinates, kind)
        ]
        return shapely.Polygon(rings[0], rings[1:]) if rings else shapely.Polygon()
    message = f"its geometry type is {kind!r}, which GeoJSON does not have"
    raise _Misshapen(message)


def _closed(ring: list[tuple[float, float]]) -> list[tuple[float, float]]:
    """Close a ring that its writer left open, and refuse one that is too short."""
    closed = ring if ring[0] == ring[-1] else [*ring, ring[0]]
    if len(closed) < 4:
        message = f"a ring has {len(closed) - 1} corners and needs 3"
        raise _Misshapen(message)
    return closed


def _positions(values: Any, kind: str, *, fewest: int) -> list[tuple[float, float]]:
    """Read a run of positions."""
    listed = _sequence(values, kind)
    if len(listed) < fewest:
        message = f"a {kind} has {len(listed)} positions and needs {fewest}"
        raise _Misshapen(message)
    return [_position(value) for value in listed]


def _position(value: Any) -> tuple[float, float]:
    """Read one position; heights are left out."""
    try:
        x, y = value[0], value[1]
        if isinstance(x, bool | str) or isinstance(y, bool | str):
            raise TypeError
        place = float(x), float(y)
    except (TypeError, IndexError, KeyError, OverflowError, ValueError) as fault:
        message = f"{str(value)[:40]!r} is not a position of two numbers"
        raise _Misshapen(message) from fault
    if not (math.isfinite(place[0]) and math.isfinite(place[1])):
        message = f"the position {str(value)[:40]} is not finite"
        raise _Misshapen(message)
    return place


def _sequence(value: Any, kind: Any) -> list[Any]:
    """Give a list, or say that there is none."""
    if not isinstance(value, list):
        message = f"its {kind} has {str(value)[:40]!r} where a list belongs"
        raise _Misshapen(message)
    return value


def _reason(fault: Exception) -> str:
    """Say a fault in one line."""
    return " ".join(str(fault).split()) or "its geometry is misshapen"


def _crs(document: dict[str, Any], name: str) -> tuple[pyproj.CRS | None, str]:
    """Find the CRS: that of RFC 7946 unless the older member names another."""
    member = document.get("crs")
    if member is None:
        return None, ""
    properties = member.get("properties") if isinstance(member, dict) else None
    text = properties.get("name") if isinstance(properties, dict) else None
    if not isinstance(text, str) or member.get("type") != "name":
        message = (
            f"{name}: its 'crs' is a link or has no name, and links are not followed; "
            "export it again as GeoJSON in WGS 84 (RFC 7946)."
        )
        raise FrameError(message)
    try:
        return pyproj.CRS.from_user_input(text), f"its crs member {text[:60]}"
    except (CRSError, ValueError, RecursionError) as fault:
        message = (
            f"{name}: its 'crs' {text[:60]!r} is not known; "
            "export it again as GeoJSON in WGS 84 (RFC 7946)."
        )
        raise FrameError(message) from fault

"""KML, KMZ and GPX read by our own few lines: no entity, link or side file is ever followed."""

import io
import lzma
import re
import struct
import zipfile
import zlib
from collections.abc import Iterator
from xml.etree.ElementTree import Element, TreeBuilder
from xml.parsers import expat

import shapely
from shapely.errors import GEOSException
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.frame.layer import Feature, Layer, raise_all

_LARGEST_KML = 300_000_000
_DEEPEST = 50
_GEOMETRIES = ("Point", "LineString", "LinearRing", "Polygon", "MultiGeometry")

_UNZIP_FAULTS = (
    zipfile.BadZipFile,
    zlib.error,
    lzma.LZMAError,
    struct.error,
    ArithmeticError,
    EOFError,
    LookupError,
    OSError,
    RuntimeError,
    ValueError,
)


class _DocumentType(Exception):
    """The text declares a document type."""


class _Misshapen(ValueError):
    """An element does not hold what its standard asks for."""


def read_kml(content: bytes, name: str) -> Layer:
    """Read a KML text: each Placemark with a geometry, its name and extended data.

    Parameters
    ----------
    content : bytes
        The file as it stands.
    name : str
        What messages call it.

    Returns
    -------
    Layer
        On WGS 84, as OGC 07-147r2 (KML 2.2) rules.

    Raises
    ------
    FrameError
        Not XML, not KML, or a misshapen geometry.
    """
    root = _root(content, name, "kml")
    features, faults, empty = [], [], 0
    columns: dict[str, None] = {}
    for number, placemark in enumerate(_all(root, "Placemark"), start=1):
        values = _placemark_values(placemark)
        columns.update(dict.fromkeys(values))
        told = f" ({values['name']})" if values.get("name") else ""
        label = f"placemark {number}{told}"
        try:
            shapes = [_kml_shape(e, 0) for e in placemark if _local(e) in _GEOMETRIES]
        except (_Misshapen, GEOSException, ValueError) as fault:
            faults.append(f"{name} {label}: {fault}; draw it again.")
            continue
        shapes = [shape for shape in shapes if not shape.is_empty]
        if not shapes:
            empty += 1
            continue
        whole = shapes[0] if len(shapes) == 1 else shapely.GeometryCollection(shapes)
        features.append(Feature(label, whole, values))
    raise_all(faults)
    notes = (f"{name}: {empty} placemark(s) without a geometry were skipped.",) if empty else ()
    return Layer(name, "KML", tuple(features), None, "", tuple(columns), notes)


def read_kmz(content: bytes, name: str) -> Layer:
    """Read the KML inside a KMZ.

    Raises
    ------
    FrameError
        A damaged archive, one without KML, or one that unpacks to more than 300 MB.
    """
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            inside = [
                entry for entry in archive.infolist() if entry.filename.lower().endswith(".kml")
            ]
            if not inside:
                message = f"{name} is a zip archive without KML; unpack it and name the map file."
                raise FrameError(message)
            entry = next((e for e in inside if e.filename.lower() == "doc.kml"), inside[0])
            with archive.open(entry) as stream:
                text = stream.read(_LARGEST_KML + 1)
    except _UNZIP_FAULTS as fault:
        message = f"{name} cannot be unpacked ({fault}); export it again as KML."
        raise FrameError(message) from fault
    if len(text) > _LARGEST_KML:
        message = f"{name} unpacks to more than {_LARGEST_KML / 1e6:.0f} MB; simplify it."
        raise FrameError(message)
    return read_kml(text, name)


def read_gpx(content: bytes, name: str) -> Layer:
    """Read a GPX text: waypoints as points, tracks and routes as lines.

    The segments of a track are joined in order, as a receiver that lost its fix writes them.

    Parameters
    ----------
    content : bytes
        The file as it stands.
    name : str
        What messages call it.

    Returns
    -------
    Layer
        On WGS 84, as GPX 1.1 rules.

    Raises
    ------
    FrameError
        Not XML, not GPX, or a point without a latitude and longitude.
    """
    root = _root(content, name, "gpx")
    features: list[Feature] = []
    faults: list[str] = []
    for tag, member, word in (
        ("wpt", "", "waypoint"),
        ("trk", "trkpt", "track"),
        ("rte", "rtept", "route"),
    ):
        for number, element in enumerate(_all(root, tag), start=1):
            values = _gpx_values(element)
            told = f" ({values['name']})" if values.get("name") else ""
            label = f"{word} {number}{told}"
            try:
                points = [_gpx_point(p) for p in (_all(element, member) if member else [element])]
            except _Misshapen as fault:
                faults.append(f"{name} {label}: {fault}; export it again.")
                continue
            if not member:
                features.append(Feature(label, shapely.Point(points[0]), values))
            elif len(points) >= 2:
                features.append(Feature(label, shapely.LineString(points), values))
    raise_all(faults)
    return Layer(name, "GPX", tuple(features), None, "", ("name", "type", "desc"))


def root_name(content: bytes) -> str:
    """Name the outermost element of an XML text, without its namespace; empty when it is none.

    Examples
    --------
    >>> root_name(b'<?xml version="1.0"?><!-- c --><kml:kml xmlns:kml="x">')
    'kml'
    """
    encoding = "utf-16" if content[:2] in (b"\xff\xfe", b"\xfe\xff") else "utf-8"
    head = content[:20_000].decode(encoding, errors="ignore").lstrip("\ufeff \r\n\t")
    if not head.startswith("<"):
        return ""
    bare = re.sub(r"<!--.*?-->|<\?.*?\?>|<!DOCTYPE[^>\[]*(\[.*?\])?\s*>", "", head, flags=re.DOTALL)
    found = re.match(r"\s*<(?:[\w.-]+:)?([\w.-]+)", bare)
    return found.group(1).lower() if found else ""


def _root(content: bytes, name: str, wanted: str) -> Element:
    """Parse XML without a document type, which neither format has and entities need."""
    try:
        root = _tree(content)
    except _DocumentType as fault:
        message = f"{name} has a document type, which is not followed; export it again."
        raise FrameError(message) from fault
    except (expat.ExpatError, ValueError, LookupError) as fault:
        message = f"{name} is damaged XML ({fault}); export it again."
        raise FrameError(message) from fault
    if _local(root) != wanted:
        message = (
            f"{name} is XML of another kind (<{_local(root)}>); export it as {wanted.upper()}."
        )
        raise FrameError(message)
    return root


def _tree(content: bytes) -> Element:
    """Build the tree; the parser stops at a document type before any entity is expanded."""

    def refuse(*_: object) -> None:
        raise _DocumentType

    builder = TreeBuilder()
    parser = expat.ParserCreate(namespace_separator="}")
    parser.buffer_text = True
    parser.StartDoctypeDeclHandler = refuse
    parser.StartElementHandler = builder.start
    parser.EndElementHandler = builder.end
    parser.CharacterDataHandler = builder.data
    parser.Parse(content, True)
    return builder.close()


def _local(element: Element) -> str:
    """Give the name of an element without its namespace."""
    return element.tag.rpartition("}")[2] if isinstance(element.tag, str) else ""


def _all(element: Element, wanted: str) -> Iterator[Element]:
    return (e for e in element.iter() if _local(e) == wanted)


def _child(element: Element, wanted: str) -> Element | None:
    return next((e for e in element if _local(e) == wanted), None)


def _text(element: Element | None) -> str:
    return " ".join((element.text or "").split()) if element is not None else ""


def _placemark_values(placemark: Element) -> dict[str, str]:
    """Collect name, description and extended data of a placemark."""
    values = {key: _text(_child(placemark, key)) for key in ("name", "description")}
    for data in _all(placemark, "Data"):
        values[data.get("name", "")] = _text(_child(data, "value"))
    for data in _all(placemark, "SimpleData"):
        values[data.get("name", "")] = _text(data)
    return {key: value for key, value in values.items() if key}


def _kml_shape(element: Element, depth: int) -> BaseGeometry:
    """Build a geometry from its element."""
    kind = _local(element)
    if kind == "MultiGeometry":
        if depth > _DEEPEST:
            message = f"its geometries are nested more than {_DEEPEST} deep"
            raise _Misshapen(message)
        parts = [_kml_shape(e, depth + 1) for e in element if _local(e) in _GEOMETRIES]
        return shapely.GeometryCollection([part for part in parts if not part.is_empty])
    if kind == "Polygon":
        outer = [_ring(e) for e in _boundaries(element, "outerBoundaryIs")]
        inner = [_ring(e) for e in _boundaries(element, "innerBoundaryIs")]
        if len(outer) != 1:
            message = f"a polygon has {len(outer)} outer rings and needs 1"
            raise _Misshapen(message)
        return shapely.Polygon(outer[0], inner)
    places = _places(element)
    if kind == "Point":
        return shapely.Point(places[0]) if places else shapely.Point()
    if len(places) < 2:
        message = f"a line has {len(places)} positions and needs 2"
        raise _Misshapen(message)
    return shapely.LineString(places)


def _boundaries(polygon: Element, wanted: str) -> Iterator[Element]:
    for boundary in polygon:
        if _local(boundary) == wanted:
            yield from _all(boundary, "LinearRing")


def _ring(element: Element) -> list[tuple[float, float]]:
    places = _places(element)
    closed = places if places[:1] == places[-1:] else [*places, places[0]]
    if len(closed) < 4:
        message = f"a ring has {max(len(closed) - 1, 0)} corners and needs 3"
        raise _Misshapen(message)
    return closed


def _places(element: Element) -> list[tuple[float, float]]:
    """Read ``longitude,latitude[,altitude]`` tuples."""
    found = _child(element, "coordinates")
    text = (found.text or "") if found is not None else ""
    places = []
    for item in re.sub(r"\s*,\s*", ",", text).split():
        try:
            x, y = (float(number) for number in item.split(",")[:2])
        except ValueError as fault:
            message = f"{item[:40]!r} is not longitude,latitude"
            raise _Misshapen(message) from fault
        places.append((x, y))
    return places


def _gpx_values(element: Element) -> dict[str, str]:
    return {key: _text(_child(element, key)) for key in ("name", "type", "desc")}


def _gpx_point(element: Element) -> tuple[float, float]:
    try:
        return float(element.get("lon", "")), float(element.get("lat", ""))
    except ValueError as fault:
        message = f"a point has lat={element.get('lat')!r} lon={element.get('lon')!r}"
        raise _Misshapen(message) from fault
